"""A round folder to a :class:`Round`: everything is read before anything is judged, and every problem is named."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path
from typing import Any

from labstat.errors import RoundError
from labstat.round import schema
from labstat.round.collecting import Problems, no_garbage_collection
from labstat.round.comparison_rows import ComparisonRows, read_comparison
from labstat.round.files import Folder, listed
from labstat.round.model import AnalyteData, AnalytePlan, LeftOut, Round, RowCount
from labstat.round.naming import clean_name, did_you_mean
from labstat.round.other_rows import ReferenceRows, partition_columns, read_precision, read_reference, unmet_groups
from labstat.round.plan_tables import read_allowances, read_analytes
from labstat.round.planning import PLAN, Origin, ReadPlan, built, checked_defaults, completed, parse_toml, validated
from labstat.round.rows import COMPARISON, PRECISION, REFERENCE, Sheets

NO_ROWS = RowCount(0, 0, 0, 0, 0, 0)


def read_round(folder: str | Path, *, only: Sequence[str] = ()) -> Round:
    """Read a round folder: the plan and all its tables.

    ``only`` keeps the named analytes. Raises :class:`RoundError` with every problem when the round is unusable: a plan
    that breaks its rules, a file that cannot be read, a column that is missing. Problems of rows stay with their
    analyte (or, for an analyte the plan does not know, in ``stray``), so that the others can be computed.
    """
    problems = Problems()
    path = Path(folder)
    if not path.is_dir():
        remedy = "name the folder that holds round.toml"
        problems.add(str(folder), None, None, None, "this folder does not exist", remedy)
        raise RoundError(problems.all())
    files = Folder(path, problems)
    made = _plan(files, problems)
    if made is None:
        raise RoundError(problems.all())
    plan, changed = made
    chosen = _chosen(plan, only, problems)
    broken = bool(problems.unusable())
    with no_garbage_collection():
        data = _Tables(files, plan, problems).read(chosen)
    if problems.unusable():
        # where the plan is broken, a row that does not fit it may be right: only rows of sound analytes are told
        sound = {analyte.name for analyte in plan.plan.analytes} - changed - plan.unsound
        raise RoundError([p for p in problems.all() if not broken or p.analyte is None or p.analyte in sound])
    by_analyte = problems.of_analytes()
    names = {analyte.name for analyte in plan.plan.analytes}
    return Round(
        str(folder), plan.plan, files.inputs,
        tuple(_with_problems(analyte, by_analyte) for analyte in data),
        {} if only else {name: found for name, found in by_analyte.items() if name not in names},
        tuple(files.notes),
    )


def _with_problems(data: AnalyteData, by_analyte: dict[str, Any]) -> AnalyteData:
    return AnalyteData(
        data.plan, data.comparisons, data.reference, data.rows, data.left_out, by_analyte.get(data.plan.name, ())
    )


def _plan(files: Folder, problems: Problems) -> tuple[ReadPlan, frozenset[str]] | None:
    text = files.text_of(PLAN, "the plan")
    raw = None if text is None else parse_toml(text, problems)
    if text is None or raw is None:
        return None
    checked = validated(completed(checked_defaults(raw, text, problems)), text, problems)
    if checked is None:
        return None
    keys, changed = checked

    def tables(said: schema.Files | None, default: str) -> tuple[schema.FileKeys, ...]:
        return listed(said, default=default, folder=files.folder, needed=False)

    defaults = {"comparison": keys.defaults.comparison, "reference": keys.defaults.reference}
    tabled = read_analytes(files, tables(keys.files.analytes, "analytes.csv"), defaults, problems)
    keys = keys.model_copy(update={"analyte": [*keys.analyte, *(analyte for _, analyte in tabled)]})
    origins: dict[str, Origin] = {clean_name(analyte.name): origin for origin, analyte in tabled}
    names = tuple(clean_name(analyte.name) for analyte in keys.analyte)
    levels = read_allowances(files, tables(keys.files.allowances, "allowances.csv"), names, problems,
                             ignore_others=keys.files.other_analytes == "ignore")
    return built(keys, text, problems, levels, origins), changed


def _chosen(plan: ReadPlan, only: Sequence[str], problems: Problems) -> tuple[AnalytePlan, ...]:
    analytes = plan.plan.analytes
    names = [analyte.name for analyte in analytes]
    wanted = [clean_name(name) for name in only]
    for name in wanted:
        if name not in names:
            problems.add(
                PLAN, None, "analyte", name, f"the plan does not know this analyte{did_you_mean(name, names)}",
                f"name one of: {', '.join(names)}",
            )
    return tuple(analyte for analyte in analytes if not wanted or analyte.name in wanted)


class _Tables:
    """The three tables, and what they hold for each analyte."""

    def __init__(self, files: Folder, plan: ReadPlan, problems: Problems) -> None:
        self.files, self.plan, self.problems = files, plan, problems
        analytes = plan.plan.analytes
        keys = plan.files
        self.comparison = self._sheets(
            keys.comparison, "comparison", COMPARISON, any(a.comparison is not None for a in analytes)
        )
        self.reference = self._sheets(
            keys.reference, "reference", REFERENCE, any(a.reference is not None for a in analytes)
        )
        self.precision = self._sheets(keys.precision, "precision", PRECISION, False)
        if self.precision.tables:
            files.notes.append(
                f"{self.precision.names()}: the precision rows are read, checked and accounted for; "
                "this version computes nothing from them"
            )

    def _sheets(self, files: schema.Files | None, name: str, columns: Any, needed: bool) -> Sheets:
        chosen = listed(files, default=f"{name}.csv", folder=self.files.folder, needed=needed)
        return Sheets(
            self.files, chosen, columns, self.problems, asked_by=f"files.{name}",
            analytes={a.name: a for a in self.plan.plan.analytes},
            ignore_others=self.plan.files.other_analytes == "ignore",
        )

    def read(self, chosen: tuple[AnalytePlan, ...]) -> list[AnalyteData]:
        return [self._analyte(plan) for plan in chosen]

    def _analyte(self, plan: AnalytePlan) -> AnalyteData:
        comparison = self._comparison(plan)
        reference = self._reference(plan)
        rows = {"comparison": NO_ROWS, "reference": NO_ROWS, "precision": NO_ROWS}
        out: list[LeftOut] = []
        for name, made in (("comparison", comparison), ("reference", reference)):
            if made is not None:
                rows[name] = made.count
                out += made.left_out
        rows["precision"], left = read_precision(self.precision.of(plan.name), plan, self.problems)
        return AnalyteData(
            plan, () if comparison is None else comparison.comparisons, None if reference is None else reference.data,
            rows, (*out, *left), (),
        )

    def _comparison(self, plan: AnalytePlan) -> ComparisonRows | None:
        rows = self.comparison.of(plan.name)
        if plan.comparison is None:
            self._unasked(plan, len(rows), self.comparison, "comparison")
            return None
        ignored = self.plan.ignored_procedures.get(plan.name, ())
        made = read_comparison(rows, plan, plan.comparison, ignored, self.problems)
        self.files.notes += made.notes
        self._needed(plan, len(rows), self.comparison, "comparison")
        return made

    def _reference(self, plan: AnalytePlan) -> ReferenceRows | None:
        rows = self.reference.of(plan.name)
        if plan.reference is None:
            self._unasked(plan, len(rows), self.reference, "reference")
            return None
        partition_columns(plan.reference, self.reference.tables, plan.name, self.problems)
        if self.problems.unusable():
            return None  # the partition's labels cannot be read
        made = read_reference(rows, plan, plan.reference, self.problems)
        self.files.notes += unmet_groups(plan.name, plan.reference, made.data)
        self._needed(plan, len(rows), self.reference, "reference")
        return made

    def _needed(self, plan: AnalytePlan, number: int, sheets: Sheets, study: str) -> None:
        if number == 0 and sheets.tables:
            self.problems.add(
                sheets.names(), None, None, None, f"there is no row of {plan.name}",
                f"add its rows, or take [analyte.{study}] out of the plan", analyte=plan.name,
            )

    def _unasked(self, plan: AnalytePlan, number: int, sheets: Sheets, study: str) -> None:
        if number:
            self.files.notes.append(
                f"{sheets.names()}: {number} rows of {plan.name} are not used: the plan asks for no {study} of it"
            )
