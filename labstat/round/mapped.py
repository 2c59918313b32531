"""A table's columns under the project's names: as they are, mapped in the plan, constant, or one a procedure."""

from __future__ import annotations

import re
from collections.abc import Iterable, Sequence
from dataclasses import dataclass

from labstat.round.collecting import Problems
from labstat.round.grid import Grid
from labstat.round.naming import clean_name, did_you_mean
from labstat.round.schema import FileKeys

NUMBERS = ("result", "at", "low", "high")
"""Our columns whose cells tell the decimal mark."""

_COMMA = re.compile(r"[<>≤≥=\s]*[+\u2212-]?\d*,\d+\s*")
_DOT = re.compile(r"[<>≤≥=\s]*[+\u2212-]?\d*\.\d+\s*")
_WHOLE = re.compile(r"[<>≤≥=\s]*[+\u2212-]?\d+\s*")
_THOUSANDS = re.compile(r"[<>≤≥=\s]*[+\u2212-]?[1-9]\d{0,2}[.,]\d{3}\s*")


@dataclass(frozen=True, slots=True)
class WideColumn:
    """One measurement a row in a table with one column a procedure."""

    procedure: str
    replicate: str
    index: int
    header: str


@dataclass(frozen=True, slots=True, eq=False)
class Table:
    """A table ready to be read by names. ``named`` lists the columns of the file that have no meaning of ours."""

    grid: Grid
    index: dict[str, int]
    constants: dict[str, str]
    wide: tuple[WideColumn, ...]
    decimal: str
    named: dict[str, int]

    @property
    def file(self) -> str:
        return self.grid.file

    def text(self, row: Sequence[str], name: str) -> str:
        """The cell of a row under one of our names; empty when the table has no such column."""
        at = self.index.get(name)
        if at is not None:
            return row[at].strip()
        return self.constants.get(name, "") if self.constants else ""

    def header(self, name: str) -> str:
        """The header that the file itself has for one of our names."""
        at = self.index.get(name)
        return self.grid.header[at] if at is not None else name


def mapped(
    grid: Grid, keys: FileKeys, problems: Problems, *, required: Sequence[str], optional: Sequence[str],
    open_ended: bool,
) -> Table | None:
    """The table by our names; ``None`` with problems when a required column is missing or the mapping is wrong."""
    before = len(problems.unusable())
    folded = _headers(grid, problems)
    known = (*required, *optional)
    index: dict[str, int] = {}
    for name, header in keys.columns.items():
        if name not in known and not open_ended:
            problems.add("round.toml", None, "files.columns", name, f"is no column of ours{did_you_mean(name, known)}",
                         f"columns here: {', '.join(known)}")
            continue
        at = folded.get(header.strip().casefold())
        if at is None:
            nearest = did_you_mean(header, grid.header)
            problems.add(grid.file, grid.header_line, name, header, f"no such column{nearest}",
                         f"columns found: {', '.join(grid.header)}")
            continue
        index[name] = at
    for name in known:
        if name not in index and name not in keys.constants and name in folded:
            index[name] = folded[name]
    wide = _wide(grid, keys, folded, problems)
    by_procedure = {"procedure", "result", "replicate"} if wide else set()
    for name in required:
        if name in index or name in keys.constants or name in by_procedure:
            continue
        problems.add(
            grid.file, grid.header_line, name, None, f"this column is missing{did_you_mean(name, grid.header)}",
            f"add it, or map it in [files]; columns found: {', '.join(grid.header)}",
        )
    for name in keys.constants:
        if name not in known and not open_ended:
            problems.add("round.toml", None, "files.constants", name, "is no column of ours", f"use {', '.join(known)}")
    decimal = _decimal(
        grid, keys, [index[name] for name in NUMBERS if name in index] or [w.index for w in wide], problems
    )
    if len(problems.unusable()) > before or decimal is None:
        return None
    used = {*index.values(), *(w.index for w in wide)}
    named = {clean_name(header): at for at, header in enumerate(grid.header) if at not in used and header}
    constants = {name: clean_name(value) for name, value in keys.constants.items()}
    return Table(grid, index, constants, wide, decimal, named)


def _headers(grid: Grid, problems: Problems) -> dict[str, int]:
    folded: dict[str, int] = {}
    for at, header in enumerate(grid.header):
        name = header.casefold()
        if name and name in folded:
            problems.add(grid.file, grid.header_line, header, None, "this column stands twice in the header",
                         "rename or remove one of them")
        folded.setdefault(name, at)
    return folded


def _wide(grid: Grid, keys: FileKeys, folded: dict[str, int], problems: Problems) -> tuple[WideColumn, ...]:
    made: list[WideColumn] = []
    for procedure, headers in keys.wide.items():
        listed = [headers] if isinstance(headers, str) else headers
        for number, header in enumerate(listed, 1):
            at = folded.get(header.strip().casefold())
            if at is None:
                problems.add(
                    grid.file, grid.header_line, procedure, header,
                    f"no such column{did_you_mean(header, grid.header)}", f"columns found: {', '.join(grid.header)}",
                )
            else:
                made.append(WideColumn(clean_name(procedure), str(number), at, grid.header[at]))
    return tuple(made)


def _decimal(grid: Grid, keys: FileKeys, columns: Iterable[int], problems: Problems) -> str | None:
    """The decimal mark: as said, or as the results show beyond doubt."""
    if keys.decimal is not None:
        return keys.decimal
    if grid.typed:
        return "."
    cells = [row[at] for at in columns for _, row in grid.rows if at < len(row)]
    commas = [cell for cell in cells if _COMMA.fullmatch(cell)]
    dots = [cell for cell in cells if _DOT.fullmatch(cell)]
    marked, mark = (commas, ",") if len(commas) > len(dots) else (dots, ".")
    if marked and all(_THOUSANDS.fullmatch(cell) for cell in marked):
        whole = any(_WHOLE.fullmatch(cell) for cell in cells)
        # a dot is a decimal mark where nothing speaks against it; whole numbers, or a delimiter of the lands that write
        # the comma, do
        if mark == "," or whole or grid.delimiter == ";":
            problems.add(
                grid.file, None, None, marked[0].strip(),
                f'it is not clear whether "{mark}" is a decimal mark or separates thousands',
                'say decimal = "." or "," for this file in [files]',
            )
            return None
    return mark
