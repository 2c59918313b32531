"""An XLSX sheet as a table of text, behind a guard against hostile archives."""

from __future__ import annotations

import io
import re
import zipfile
import zlib
from datetime import date, datetime, time

import openpyxl

from labstat.round.grid import Grid, UnreadableError

LARGEST = 200_000_000
"""Unpacked bytes above which a workbook is refused."""

RATIO = 300
"""An archive packed tighter than this is refused: no sheet of results is."""

COLUMNS, ROWS = 500, 1_048_576
"""Columns that a table may have, and rows that a sheet can have."""

_ROW_NUMBER = re.compile(rb'<(?:\w+:)?row\b[^>]*?\sr="(\d+)"')
SAVE_AGAIN = "save it again as XLSX or CSV"
Shown = list[tuple[int, tuple[object, ...]]]


def read_workbook(file: str, data: bytes, *, sheet: str | None, decimal: str) -> Grid:
    """The rows of one sheet (the only one, unless named), numbers with the decimal mark that its texts have.

    Raises :class:`UnreadableError`.
    """
    _guard(data)
    try:
        name, shown, formula = _rows(data, sheet)
    except UnreadableError:
        raise
    except Exception as error:  # what a broken or hostile archive raises is not documented, and must end in a message
        raise UnreadableError(None, f"is no readable workbook ({error})", SAVE_AGAIN) from None
    if formula is not None:
        raise UnreadableError(
            formula[0], f"column {formula[1]} holds a formula without a stored value",
            "open the workbook, let it calculate and save it again",
        )
    rows: list[tuple[int, list[str]]] = []
    for line, row in shown:
        cells = [_text(value, decimal) for value in row]
        while cells and not cells[-1].strip():
            cells.pop()
        if len(cells) > COLUMNS:
            raise UnreadableError(line, f"has {len(cells)} columns, more than {COLUMNS}", "export the table as CSV")
        if cells:
            rows.append((line, cells))
    if not rows:
        raise UnreadableError(None, f'sheet "{name}" is empty', "name the sheet that holds the table")
    first, header = rows[0]
    width = len(header)
    # a sheet has no ragged rows: blank cells at the end of a row are not stored; cells beyond the header stay
    padded = [(line, cells + [""] * (width - len(cells))) for line, cells in rows[1:]]
    return Grid(file, tuple(cell.strip() for cell in header), first, padded, "", typed=True)


def _rows(data: bytes, sheet: str | None) -> tuple[str, Shown, tuple[int, int] | None]:
    """The sheet's name, its rows as shown, and line and column of the first formula without a stored value."""
    values = openpyxl.load_workbook(io.BytesIO(data), read_only=True, data_only=True)
    formulas = openpyxl.load_workbook(io.BytesIO(data), read_only=True, data_only=False)
    names = [each.title for each in values.worksheets]
    if sheet is None and len(names) > 1:
        raise UnreadableError(None, f"has {len(names)} sheets", f"set sheet to one of: {', '.join(names)}")
    name = names[0] if sheet is None else sheet
    if name not in names:
        raise UnreadableError(None, f'has no sheet "{name}"', f"set sheet to one of: {', '.join(names)}")
    for book in (values, formulas):
        book[name].reset_dimensions()  # what the file says of its size need not be true
    shown: Shown = []
    pairs = zip(
        values[name].iter_rows(max_row=ROWS, values_only=True),
        formulas[name].iter_rows(max_row=ROWS, values_only=True),
        strict=True,
    )
    for line, (row, written) in enumerate(pairs, 1):
        shown.append((line, row))
        if None in row:
            for column, (value, formula) in enumerate(zip(row, written, strict=True), 1):
                if value is None and isinstance(formula, str) and formula.startswith("="):
                    return name, shown, (line, column)
    values.close()
    formulas.close()
    return name, shown, None


def _guard(data: bytes) -> None:
    try:
        with zipfile.ZipFile(io.BytesIO(data)) as archive:
            unpacked = sum(entry.file_size for entry in archive.infolist())
            packed = max(1, sum(entry.compress_size for entry in archive.infolist()))
            if unpacked <= LARGEST and unpacked / packed <= RATIO:
                _guard_rows(archive)
    except UnreadableError:
        raise
    except (zipfile.BadZipFile, OSError, ValueError, RuntimeError, zlib.error) as error:
        raise UnreadableError(None, f"is no readable workbook ({error})", SAVE_AGAIN) from None
    if unpacked > LARGEST or unpacked / packed > RATIO:
        raise UnreadableError(
            None, f"unpacks to {unpacked} bytes, more than a sheet of results would", "export the table as CSV"
        )


def _guard_rows(archive: zipfile.ZipFile) -> None:
    """A row with a number that no sheet has would end the reading early, without a word."""
    for entry in archive.infolist():
        if entry.filename.startswith("xl/worksheets/") and entry.filename.endswith(".xml"):
            for match in _ROW_NUMBER.finditer(archive.read(entry)):
                if int(match.group(1)[:9]) > ROWS:
                    raise UnreadableError(None, "numbers a row that no sheet can have", SAVE_AGAIN)


def _text(value: object, decimal: str) -> str:
    if value is None:
        return ""
    if isinstance(value, bool):
        return "TRUE" if value else "FALSE"
    if isinstance(value, float):
        whole = value.is_integer() and abs(value) < 1e15
        return str(int(value)) if whole else repr(value).replace(".", decimal)
    if isinstance(value, datetime):
        return value.date().isoformat() if value.time() == time() else value.isoformat()
    if isinstance(value, date):
        return value.isoformat()
    return str(value)
