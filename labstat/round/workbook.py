"""An XLSX sheet as a table of text, behind a guard against hostile archives."""

from __future__ import annotations

import io
import zipfile
from datetime import date, datetime, time

import openpyxl
from openpyxl.utils.exceptions import InvalidFileException

from labstat.round.grid import Grid, UnreadableError

LARGEST = 200_000_000
"""Unpacked bytes above which a workbook is refused."""

RATIO = 300
"""An archive packed tighter than this is refused: no sheet of results is."""

COLUMNS, ROWS = 500, 1_100_000


def read_workbook(file: str, data: bytes, *, sheet: str | None, decimal: str) -> Grid:
    """The rows of one sheet (the first, unless named), numbers with the decimal mark that its texts have.

    Raises :class:`UnreadableError`.
    """
    _guard(data)
    try:
        values = openpyxl.load_workbook(io.BytesIO(data), read_only=True, data_only=True)
        formulas = openpyxl.load_workbook(io.BytesIO(data), read_only=True, data_only=False)
    except (InvalidFileException, KeyError, ValueError, OSError, zipfile.BadZipFile) as error:
        raise UnreadableError(None, f"is no readable workbook ({error})", "save it again as XLSX or CSV") from None
    name = sheet if sheet is not None else values.sheetnames[0]
    if name not in values.sheetnames:
        raise UnreadableError(None, f'has no sheet "{name}"', f"name one of: {', '.join(values.sheetnames)}")
    rows: list[tuple[int, list[str]]] = []
    width = 0
    pairs = zip(
        values[name].iter_rows(max_col=COLUMNS, max_row=ROWS, values_only=True),
        formulas[name].iter_rows(max_col=COLUMNS, max_row=ROWS, values_only=True),
        strict=False,
    )
    for line, (shown, written) in enumerate(pairs, 1):
        cells = [_text(value) for value in shown]
        for index, (value, formula) in enumerate(zip(shown, written, strict=False)):
            if value is None and isinstance(formula, str) and formula.startswith("="):
                raise UnreadableError(
                    line, f"column {index + 1} holds a formula without a stored value",
                    "open the workbook, let it calculate and save it again",
                )
        if any(cell.strip() for cell in cells):
            rows.append((line, cells))
            width = max(width, max(i for i, cell in enumerate(cells) if cell.strip()) + 1)
    values.close()
    formulas.close()
    if not rows:
        raise UnreadableError(None, f'sheet "{name}" is empty', "name the sheet that holds the table")
    padded = [(line, (cells + [""] * width)[:width]) for line, cells in rows]
    first, header = padded[0]
    return Grid(file, tuple(cell.strip() for cell in header), first, padded[1:], "", typed=True)


def _guard(data: bytes) -> None:
    try:
        with zipfile.ZipFile(io.BytesIO(data)) as archive:
            unpacked = sum(entry.file_size for entry in archive.infolist())
            packed = max(1, sum(entry.compress_size for entry in archive.infolist()))
    except (zipfile.BadZipFile, OSError, ValueError) as error:
        raise UnreadableError(
            None, f"is no readable workbook ({error})", "save it again as XLSX or CSV"
        ) from None
    if unpacked > LARGEST or unpacked / packed > RATIO:
        raise UnreadableError(
            None, f"unpacks to {unpacked} bytes, more than a sheet of results would", "export the table as CSV"
        )


def _text(value: object) -> str:
    if value is None:
        return ""
    if isinstance(value, bool):
        return "TRUE" if value else "FALSE"
    if isinstance(value, float) and value.is_integer() and abs(value) < 1e15:
        return str(int(value))
    if isinstance(value, datetime):
        return value.date().isoformat() if value.time() == time() else value.isoformat()
    if isinstance(value, date):
        return value.isoformat()
    return str(value)
