"""All rows of one kind of table, by analyte: read, checked and told apart from those of unknown analytes."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Iterator, Mapping
from dataclasses import dataclass

from labstat.round.collecting import Problems
from labstat.round.files import Folder
from labstat.round.mapped import Table, mapped
from labstat.round.model import AnalytePlan
from labstat.round.naming import clean_name, did_you_mean
from labstat.round.schema import FileKeys
from labstat.round.shape import WRONG_WIDTH, fitted, wrong_width

NO_ANALYTE = "(no analyte)"
MORE_ANALYTES = "(more unknown analytes)"
MOST_STRAY = 20
"""More unknown names than this are told together: a column mapped wrongly must not make an analyte of every row."""


@dataclass(frozen=True, slots=True)
class Columns:
    """The columns that a kind of table must and may have; ``open_ended`` where any other column may be asked for."""

    required: tuple[str, ...]
    optional: tuple[str, ...]
    open_ended: bool = False


COMPARISON = Columns(
    ("analyte", "specimen", "procedure", "result"),
    (
        "replicate", "subject", "date", "exclude", "excluded_by", "excluded_on", "measured_at", "day", "run",
        "instrument", "reagent_lot", "calibrator_lot", "operator", "unit", "flag", "specimen_type", "rerun",
    ),
)
REFERENCE = Columns(
    ("analyte", "subject", "result"), ("exclude", "excluded_by", "excluded_on", "unit"), open_ended=True
)
PRECISION = Columns(
    ("analyte", "procedure", "material", "day", "run", "replicate", "result"),
    ("exclude", "excluded_by", "excluded_on", "unit"),
)


@dataclass(frozen=True, slots=True, eq=False)
class Row:
    """A row with the table it stands in."""

    table: Table
    line: int
    cells: list[str]

    def text(self, name: str) -> str:
        return self.table.text(self.cells, name)


class Sheets:
    """The tables of one kind, their rows handed out by analyte."""

    __slots__ = ("_by_analyte", "tables")

    def __init__(
        self, folder: Folder, files: Iterable[FileKeys], columns: Columns, problems: Problems, *,
        asked_by: str, analytes: Mapping[str, AnalytePlan], ignore_others: bool,
    ) -> None:
        self.tables: list[Table] = []
        self._by_analyte: dict[str, list[Row]] = {}
        ignored: dict[str, int] = {}
        strays: set[str] = set()
        for keys in files:
            grid = folder.grid_of(keys, asked_by)
            if grid is None:
                continue
            table = mapped(
                grid, keys, problems, required=columns.required, optional=columns.optional,
                open_ended=columns.open_ended,
            )
            if table is None:
                continue
            self.tables.append(table)
            if not grid.rows:
                problems.add(table.file, None, None, None, "holds a header and no rows", "export it again")
            if not columns.open_ended and table.named:
                folder.notes.append(f"{table.file}: columns not read: {', '.join(table.named)}")
            for row in _rows(table, problems):
                name = clean_name(row.text("analyte")) or NO_ANALYTE
                if name in analytes:
                    self._by_analyte.setdefault(name, []).append(row)
                elif ignore_others and name != NO_ANALYTE:
                    ignored[name] = ignored.get(name, 0) + 1
                else:
                    if len(strays) < MOST_STRAY:
                        strays.add(name)
                    _stray(row, name, analytes, problems, told_as=name if name in strays else MORE_ANALYTES)
        for name, number in ignored.items():
            folder.notes.append(f'{asked_by}: {number} rows of "{name}" ignored: the plan does not name it')

    def of(self, analyte: str) -> list[Row]:
        """The rows of one analyte, in the order of the files."""
        return self._by_analyte.get(analyte, [])

    def names(self) -> str:
        """The files in words."""
        return ", ".join(table.file for table in self.tables)


def _rows(table: Table, problems: Problems) -> Iterator[Row]:
    for line, cells in table.grid.rows:
        row = fitted(table, cells)
        if row is None:
            at = table.index.get("analyte")
            name = table.constants.get("analyte", "") if at is None else cells[at] if at < len(cells) else ""
            problems.add(
                table.file, line, None, None, wrong_width(table, cells), WRONG_WIDTH,
                analyte=clean_name(name) or NO_ANALYTE,
            )
        else:
            yield Row(table, line, row)


def _stray(row: Row, name: str, analytes: Mapping[str, AnalytePlan], problems: Problems, *, told_as: str) -> None:
    if name == NO_ANALYTE:
        what, remedy, value = "the row names no analyte", "name it, or remove the row", ""
    else:
        what = f"the plan does not know this analyte{did_you_mean(name, analytes)}"
        remedy = 'correct the name, add [[analyte]], or set other_analytes = "ignore" in [files]'
        value = name
    problems.add(row.table.file, row.line, row.table.header("analyte"), value, what, remedy, analyte=told_as)


def required_text(row: Row, name: str, problems: Problems, *, analyte: str) -> str:
    """The cell of a column that may not be blank; a problem when it is."""
    text = clean_name(row.text(name))
    if not text:
        problems.add(
            row.table.file, row.line, row.table.header(name), "", f"the row names no {name}", "fill it in",
            analyte=analyte,
        )
    return text


def check_unit(row: Row, plan: AnalytePlan, problems: Problems) -> None:
    """A row's own unit must be the plan's: results are never converted by guess."""
    unit = clean_name(row.text("unit"))
    if unit and unit != plan.unit:
        problems.add(
            row.table.file, row.line, row.table.header("unit"), unit, f"the plan has {plan.unit} for {plan.name}",
            "convert the results, or correct the plan", analyte=plan.name,
        )


class Unique:
    """Notes rows that say again what another row has said."""

    __slots__ = ("_note", "_seen")

    def __init__(self, note: Callable[[str, int, str, str], None]) -> None:
        self._seen: dict[tuple[str, ...], tuple[str, int]] = {}
        self._note = note

    def check(self, key: tuple[str, ...], file: str, line: int) -> None:
        first = self._seen.setdefault(key, (file, line))
        if first != (file, line):
            self._note(file, line, f"{first[0]}:{first[1]}", ", ".join(part for part in key if part))
