"""The rows of a reference study and of a precision study."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass

import numpy as np

from labstat.round.cells import natural
from labstat.round.collecting import Problems
from labstat.round.mapped import Table
from labstat.round.model import AnalytePlan, LeftOut, ReferenceData, ReferencePlan, RowCount
from labstat.round.naming import clean_name, did_you_mean
from labstat.round.rows import Row, Unique, check_unit, required_text
from labstat.round.sorting import Entry, entry_of, first_reason, left_out, row_count


@dataclass(frozen=True, slots=True, eq=False)
class ReferenceRows:
    """Reference individuals of one analyte with the account of its rows."""

    data: ReferenceData
    count: RowCount
    left_out: tuple[LeftOut, ...]


def partition_columns(asked: ReferencePlan, tables: Iterable[Table], analyte: str, problems: Problems) -> None:
    """A partition's columns must be in every reference table."""
    for table in tables:
        for column in asked.partition:
            if column not in table.named and column not in table.index and column not in table.constants:
                problems.add(
                    table.file, table.grid.header_line, column, None,
                    f"{analyte} is partitioned by this column, which is missing{did_you_mean(column, table.named)}",
                    f"columns found: {', '.join(table.grid.header)}",
                )


def unmet_groups(analyte: str, asked: ReferencePlan, data: ReferenceData) -> tuple[str, ...]:
    """Notes on adopted intervals for a label that no individual has: often another spelling of one that some have."""
    notes: list[str] = []
    for adopted in asked.adopted:
        for column, label in adopted.where.items():
            labels = sorted(set(data.columns.get(column, ())))
            if labels and label not in labels:
                hint = did_you_mean(label, labels)
                notes.append(f'{analyte}: an interval in use is for {column} "{label}", which no individual has{hint}')
    return tuple(notes)


def _cell(row: Row, column: str) -> str:
    at = row.table.named.get(column)
    return clean_name(row.cells[at] if at is not None else row.text(column))


def read_reference(
    rows: Iterable[Row], plan: AnalytePlan, asked: ReferencePlan, problems: Problems
) -> ReferenceRows:
    """Sort one analyte's rows. A censored value takes part by its rank where the method is by rank, and counts as used.

    Whether it is, is known only once the group's size is: the study says so for the other methods.
    """
    name = plan.name
    used: list[tuple[str, Entry, tuple[str, ...]]] = []
    out: list[LeftOut] = []
    read = 0

    def twice(file: str, line: int, first: str, key: str) -> None:
        problems.add(
            file, line, None, key, f"this subject has a result already at {first}",
            "give each subject one row, or exclude one with its reason", analyte=name,
        )

    unique = Unique(twice)
    for row in rows:
        read += 1
        subject = required_text(row, "subject", problems, analyte=name)
        check_unit(row, plan, problems)
        entry = entry_of(
            row.table, row.line, row.cells, identity=subject, procedure=None, replicate="", text=row.text("result"),
            column=row.table.header("result"),
        )
        if entry.result.kind == "bad":
            problems.add(
                entry.file, entry.line, entry.column, entry.text, entry.result.what, entry.result.remedy, analyte=name
            )
            continue
        if entry.reason is None:
            unique.check((subject,), entry.file, entry.line)
        reason = first_reason(entry)
        if reason is not None and reason[0] != "censored":
            out.append(left_out("reference", entry, *reason))
            continue
        labels = tuple(_cell(row, column) for column in asked.partition)
        for column, label in zip(asked.partition, labels, strict=True):
            if not label:
                problems.add(
                    entry.file, entry.line, column, "", f"{name} is partitioned by this column, and it is empty",
                    "fill it in, or exclude the row with its reason", analyte=name,
                )
        used.append((subject, entry, labels))
    used.sort(key=lambda item: natural(item[0]))
    data = ReferenceData(
        tuple(subject for subject, _, _ in used),
        np.array([_value(entry) for _, entry, _ in used], dtype=np.float64),
        {column: tuple(labels[i] for _, _, labels in used) for i, column in enumerate(asked.partition)},
        tuple((subject, entry.text) for subject, entry, _ in used if entry.result.kind == "censored"),
    )
    return ReferenceRows(data, row_count(read, out), tuple(out))


def _value(entry: Entry) -> float:
    """The number, or -inf and +inf for a result below and above the measuring interval: its rank, no number."""
    if entry.result.kind != "censored":
        return entry.result.value
    return -np.inf if entry.result.side == "below" else np.inf


def read_precision(rows: Iterable[Row], plan: AnalytePlan, problems: Problems) -> tuple[RowCount, tuple[LeftOut, ...]]:
    """Check and account for the rows of a precision study."""
    name = plan.name
    out: list[LeftOut] = []
    read = 0

    def twice(file: str, line: int, first: str, key: str) -> None:
        problems.add(
            file, line, None, key, f"says again what {first} says (same procedure, material, day, run and replicate)",
            "number the replicates, or exclude one with its reason", analyte=name,
        )

    unique = Unique(twice)
    for row in rows:
        read += 1
        key = tuple(
            required_text(row, column, problems, analyte=name)
            for column in ("procedure", "material", "day", "run", "replicate")
        )
        check_unit(row, plan, problems)
        entry = entry_of(
            row.table, row.line, row.cells, identity=key[1], procedure=key[0], replicate=key[4],
            text=row.text("result"), column=row.table.header("result"),
        )
        if entry.result.kind == "bad":
            problems.add(
                entry.file, entry.line, entry.column, entry.text, entry.result.what, entry.result.remedy, analyte=name
            )
            continue
        if entry.reason is None:
            unique.check(key, entry.file, entry.line)
        reason = first_reason(entry)
        if reason is not None:
            out.append(left_out("precision", entry, *reason))
    return row_count(read, out), tuple(out)
