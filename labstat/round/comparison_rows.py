"""The rows of a comparison: measurements to specimens measured by both procedures, every row accounted for."""

from __future__ import annotations

import math
from collections.abc import Iterable, Iterator
from dataclasses import dataclass, field
from typing import Literal

import numpy as np

from labstat.round.cells import natural
from labstat.round.collecting import Problems
from labstat.round.model import AnalytePlan, CensoredPair, ComparisonData, ComparisonPlan, LeftOut, RowCount, Why
from labstat.round.naming import clean_name, did_you_mean
from labstat.round.rows import Row, Unique, check_unit, required_text
from labstat.round.sorting import Entry, entry_of, first_reason, left_out, row_count


@dataclass(slots=True)
class Measured:
    """What one procedure said of one specimen."""

    numbers: list[Entry] = field(default_factory=list)
    censored: list[Entry] = field(default_factory=list)
    out: list[tuple[Entry, Why, str]] = field(default_factory=list)
    day: str | None = None

    def settle(self) -> None:
        """Put replicates in the order of their numbers: the order of the rows must not change even the last bit."""
        if len(self.numbers) > 1 or len(self.censored) > 1:
            self.numbers.sort(key=_order)
            self.censored.sort(key=_order)
        self.day = next((entry.day for entry in self.numbers if entry.day is not None), None)

    @property
    def usable(self) -> bool:
        """A number, and no censored replicate beside it: the mean of the others alone would be biased."""
        return bool(self.numbers) and not self.censored

    @property
    def values(self) -> tuple[float, ...]:
        return tuple(entry.result.value for entry in self.numbers)

    @property
    def mean(self) -> float:
        # exact before it is rounded, so that the order of the replicates cannot matter
        return math.fsum(self.values) / len(self.numbers)


@dataclass(frozen=True, slots=True, eq=False)
class ComparisonRows:
    """The comparisons of one analyte with the account of its rows."""

    comparisons: tuple[ComparisonData, ...]
    count: RowCount
    left_out: tuple[LeftOut, ...]
    notes: tuple[str, ...]


Specimens = dict[str, dict[str, Measured]]


def read_comparison(
    rows: Iterable[Row], plan: AnalytePlan, asked: ComparisonPlan, ignored: tuple[str, ...], problems: Problems
) -> ComparisonRows:
    """Sort one analyte's rows; bad rows become problems of the analyte."""
    reader = _Reader(plan, asked, ignored, problems)
    for row in rows:
        reader.take(row)
    return reader.result()


class _Reader:
    def __init__(
        self, plan: AnalytePlan, asked: ComparisonPlan, ignored: tuple[str, ...], problems: Problems
    ) -> None:
        self.plan, self.asked, self.ignored, self.problems = plan, asked, ignored, problems
        self.procedures = (asked.comparative, *asked.candidates)
        self.specimens: Specimens = {}
        self.subjects: dict[str, tuple[str, str, int]] = {}
        self.read = 0
        self.other = 0
        self.outside = 0
        self.unique = Unique(self._twice)

    def _twice(self, file: str, line: int, first: str, key: str) -> None:
        self.problems.add(
            file, line, None, key, f"says again what {first} says (same specimen, procedure and replicate)",
            "number the replicates in a column replicate, or exclude one with its reason", analyte=self.plan.name,
        )

    def take(self, row: Row) -> None:
        name = self.plan.name
        specimen = required_text(row, "specimen", self.problems, analyte=name)
        check_unit(row, self.plan, self.problems)
        self._subject(row, specimen)
        for procedure, replicate, text, column in _cells(row):
            if procedure in self.ignored:
                self.other += 1
                continue
            self.read += 1
            if procedure not in self.procedures:
                self._unknown(row, procedure)
                continue
            entry = entry_of(
                row.table, row.line, row.cells, identity=specimen, procedure=procedure, replicate=replicate,
                text=text, column=column, day=_day(row),
            )
            self._sort(row, entry, specimen, procedure)

    def _unknown(self, row: Row, procedure: str) -> None:
        known = ", ".join(self.procedures)
        what = "the row names no procedure"
        if procedure:
            what = f"the plan does not name this procedure for {self.plan.name}"
        self.problems.add(
            row.table.file, row.line, row.table.header("procedure"), procedure,
            what + did_you_mean(procedure, self.procedures),
            f"use {known}, or name it in ignore_procedures", analyte=self.plan.name,
        )

    def _sort(self, row: Row, entry: Entry, specimen: str, procedure: str) -> None:
        measured = self.specimens.setdefault(specimen, {}).setdefault(procedure, Measured())
        if entry.result.kind == "bad":
            self.problems.add(
                entry.file, entry.line, entry.column, entry.text, entry.result.what, entry.result.remedy,
                analyte=self.plan.name,
            )
            return
        if entry.reason is None:
            self.unique.check((specimen, procedure, entry.replicate), entry.file, entry.line)
        reason = first_reason(entry)
        if reason is None:
            measured.numbers.append(entry)
            interval = self.plan.measuring_interval
            if interval is not None and not interval[0] <= entry.result.value <= interval[1]:
                self.outside += 1
            return
        if reason[0] == "censored":
            measured.censored.append(entry)
        measured.out.append((entry, *reason))

    def _subject(self, row: Row, specimen: str) -> None:
        subject = clean_name(row.text("subject"))
        if not subject or not specimen:
            return
        known = self.subjects.setdefault(specimen, (subject, row.table.file, row.line))
        if known[0] != subject:
            self.problems.add(
                row.table.file, row.line, row.table.header("subject"), subject,
                f'specimen "{specimen}" has subject "{known[0]}" at {known[1]}:{known[2]}', "correct one of them",
                analyte=self.plan.name,
            )

    def result(self) -> ComparisonRows:
        order = sorted(self.specimens, key=natural)
        for by_procedure in self.specimens.values():
            for measured in by_procedure.values():
                measured.settle()
        comparisons = tuple(self._compared(candidate, order) for candidate in self.asked.candidates)
        out = tuple(self._accounted(order))
        notes = []
        if self.other:
            notes.append(f"{self.plan.name}: {self.other} rows of ignored procedures are not part of the study")
        if self.outside:
            notes.append(
                f"{self.plan.name}: {self.outside} results lie outside the measuring interval and are used as numbers"
            )
        return ComparisonRows(comparisons, row_count(self.read, out), out, tuple(notes))

    def _compared(self, candidate: str, order: list[str]) -> ComparisonData:
        both: list[tuple[str, Measured, Measured]] = []
        censored: list[CensoredPair] = []
        for specimen in order:
            x = self.specimens[specimen].get(self.asked.comparative, Measured())
            y = self.specimens[specimen].get(candidate, Measured())
            if x.usable and y.usable:
                both.append((specimen, x, y))
            elif (x.censored or y.censored) and (x.censored or x.numbers) and (y.censored or y.numbers):
                censored.append(_pair(specimen, x, y, self.plan.decimals))
        return ComparisonData(
            self.asked.comparative, candidate,
            tuple(specimen for specimen, _, _ in both),
            np.array([x.mean for _, x, _ in both], dtype=np.float64),
            np.array([y.mean for _, _, y in both], dtype=np.float64),
            tuple(x.values for _, x, _ in both),
            tuple(y.values for _, _, y in both),
            tuple(self.subjects[s][0] if s in self.subjects else None for s, _, _ in both),
            tuple(y.day or x.day for _, x, y in both),
            tuple(censored),
        )

    def _accounted(self, order: list[str]) -> Iterator[LeftOut]:
        for specimen in order:
            by_procedure = self.specimens[specimen]
            for procedure, measured in by_procedure.items():
                for entry, why, reason in measured.out:
                    yield left_out("comparison", entry, why, reason)
                lacking = self._unpaired(procedure, by_procedure)
                if lacking is not None:
                    for entry in measured.numbers:
                        yield left_out("comparison", entry, "unpaired", lacking)

    def _unpaired(self, procedure: str, by_procedure: dict[str, Measured]) -> str | None:
        """Why a procedure's numbers for a specimen cannot be used; ``None`` when they are."""
        if by_procedure[procedure].censored:
            return "another replicate of this specimen is censored: the mean of the rest would be biased"
        partners = (
            self.asked.candidates if procedure == self.asked.comparative else (self.asked.comparative,)
        )
        states = [by_procedure.get(partner, Measured()) for partner in partners]
        if any(state.usable for state in states):
            return None
        return "; ".join(_lacking(name, state) for name, state in zip(partners, states, strict=True))


def _order(entry: Entry) -> tuple[object, float, str]:
    return natural(entry.replicate), entry.result.value, entry.text


def _cells(row: Row) -> Iterator[tuple[str, str, str, str]]:
    """Procedure, replicate, text and column of each measurement in a row: one, or one a wide column."""
    table = row.table
    if not table.wide:
        yield clean_name(row.text("procedure")), clean_name(row.text("replicate")), row.text("result"), table.header(
            "result"
        )
        return
    for column in table.wide:
        yield column.procedure, column.replicate, row.cells[column.index].strip(), column.header


def _lacking(name: str, state: Measured) -> str:
    if state.censored:
        return f"{name} is censored"
    whys = {why for _, why, _ in state.out}
    if "excluded" in whys:
        return f"{name} is excluded"
    if "missing" in whys:
        return f"{name} is missing"
    return f"no result by {name}"


def _day(row: Row) -> str | None:
    day = row.text("day")
    if day:
        return day
    moment = row.text("measured_at") or row.text("date")
    return moment.replace("T", " ").split(" ")[0] or None


def _pair(specimen: str, x: Measured, y: Measured, decimals: int) -> CensoredPair:
    x_text, x_value, x_side = _side(x, decimals)
    y_text, y_value, y_side = _side(y, decimals)
    return CensoredPair(specimen, x_text, y_text, x_value, y_value, x_side, y_side)


def _side(measured: Measured, decimals: int) -> tuple[str, float, Literal["below", "above", "inside"]]:
    if measured.censored:
        entry = measured.censored[0]
        return entry.text, entry.result.value, entry.result.side
    return f"{measured.mean:.{decimals}f}", measured.mean, "inside"
