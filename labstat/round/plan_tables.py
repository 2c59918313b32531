"""Analytes and allowances given as tables, so that forty analytes need no forty blocks in the plan."""

from __future__ import annotations

from typing import Any

from pydantic import ValidationError

from labstat.round import schema
from labstat.round.cells import read_number, why_not
from labstat.round.collecting import Problems
from labstat.round.files import Folder
from labstat.round.mapped import Table, mapped
from labstat.round.naming import clean_name, did_you_mean
from labstat.round.planning import Origin
from labstat.round.rows import Columns
from labstat.round.schema import FileKeys
from labstat.round.shape import WRONG_WIDTH, fitted, wrong_width

ALLOWANCES = Columns(("analyte", "at", "source"), ("allowable", "total_error"))
ANALYTES = Columns(
    ("name", "unit"), ("decimals", "low", "high", "specimen_type", "comparative", "candidate"),
)
Levels = dict[str, list[tuple[Origin, schema.LevelKeys]]]


def _rows(
    folder: Folder, files: tuple[FileKeys, ...], columns: Columns, asked_by: str, problems: Problems
) -> list[tuple[Table, int, list[str]]]:
    found: list[tuple[Table, int, list[str]]] = []
    for keys in files:
        grid = folder.grid_of(keys, asked_by)
        if grid is None:
            continue
        table = mapped(
            grid, keys, problems, required=columns.required, optional=columns.optional, open_ended=False
        )
        if table is None:
            continue
        if table.named:
            folder.notes.append(f"{table.file}: columns not read: {', '.join(table.named)}")
        for line, cells in grid.rows:
            row = fitted(table, cells)
            if row is None:
                problems.add(table.file, line, None, None, wrong_width(table, cells), WRONG_WIDTH)
            else:
                found.append((table, line, row))
    return found


def read_allowances(
    folder: Folder, files: tuple[FileKeys, ...], known: tuple[str, ...], problems: Problems,
    *, ignore_others: bool,
) -> Levels:
    """Levels by analyte, one row an analyte and level. A table of the whole laboratory may name other analytes too."""
    others = 0
    levels: Levels = {}
    for table, line, row in _rows(folder, files, ALLOWANCES, "files.allowances", problems):
        name = clean_name(table.text(row, "analyte"))
        if name not in known and name and ignore_others:
            others += 1
            continue
        if name not in known:
            problems.add(
                table.file, line, table.header("analyte"), name,
                f"the plan does not know this analyte{did_you_mean(name, known)}",
                'correct the name, add [[analyte]], or set other_analytes = "ignore" in [files]',
            )
            continue
        at = _number(table, line, row, "at", problems)
        if at is None:
            continue
        made = schema.LevelKeys.model_construct(
            at=at, allowable=table.text(row, "allowable") or None, total_error=table.text(row, "total_error") or None,
            source=table.text(row, "source") or None,
        )
        levels.setdefault(name, []).append((Origin(table.file, line), made))
    if others:
        folder.notes.append(f"files.allowances: {others} rows of analytes that the plan does not name ignored")
    return levels


def read_analytes(
    folder: Folder, files: tuple[FileKeys, ...], defaults: dict[str, Any], problems: Problems
) -> list[tuple[Origin, schema.AnalyteKeys]]:
    """Analytes, one row each; their sections are those of ``[defaults]`` with the row's procedures."""
    made: list[tuple[Origin, schema.AnalyteKeys]] = []
    for table, line, row in _rows(folder, files, ANALYTES, "files.analytes", problems):
        raw: dict[str, Any] = {
            name: text for name in ("name", "unit", "specimen_type") if (text := table.text(row, name))
        }
        bad = False
        limits = []
        for name in ("low", "high"):
            if table.text(row, name):
                value = _number(table, line, row, name, problems)
                bad = bad or value is None
                limits.append(value)
        if len(limits) == 1:
            problems.add(table.file, line, "low, high", None, "one end of the interval is missing", "give both")
            bad = True
        if len(limits) == 2:
            raw["measuring_interval"] = limits
        if table.text(row, "decimals"):
            value = _number(table, line, row, "decimals", problems)
            bad = bad or value is None
            raw["decimals"] = int(value) if value is not None and value.is_integer() else value
        comparison = dict(defaults.get("comparison") or {})
        comparison.update(
            {name: text for name in ("comparative", "candidate") if (text := table.text(row, name))}
        )
        if comparison:
            raw["comparison"] = comparison
        if defaults.get("reference"):
            raw["reference"] = dict(defaults["reference"])
        if bad:
            continue
        try:
            made.append((Origin(table.file, line), schema.AnalyteKeys.model_validate(raw)))
        except ValidationError as error:
            for item in error.errors():
                where = ".".join(str(part) for part in item["loc"])
                value = item.get("input")
                shown = None if isinstance(value, (dict, list)) else str(value)
                problems.add(table.file, line, where, shown, item["msg"].replace("Input", "it"), "correct it")
    return made


def _number(table: Table, line: int, row: list[str], name: str, problems: Problems) -> float | None:
    text = table.text(row, name)
    value = read_number(text, decimal=table.decimal)
    if value is None:
        problems.add(table.file, line, table.header(name), text, why_not(text, table.decimal), "correct it")
    return value
