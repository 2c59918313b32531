"""A table as it stands in a file: a header and rows of text with their line numbers. CSV and TSV."""

from __future__ import annotations

import csv
import io
from dataclasses import dataclass

DELIMITERS = (";", "\t", ",", "|")
_NO_DELIMITERS = '"\n\r\x00.-+<>'


@dataclass(frozen=True, slots=True, eq=False)
class Grid:
    """Header and rows of text; ``typed`` when numbers came as numbers (a workbook), so that no decimal mark matters."""

    file: str
    header: tuple[str, ...]
    header_line: int
    rows: list[tuple[int, list[str]]]
    delimiter: str
    typed: bool = False


class UnreadableError(ValueError):
    """The file is no table; ``line`` tells where."""

    def __init__(self, line: int | None, what: str, remedy: str) -> None:
        self.line, self.what, self.remedy = line, what, remedy
        super().__init__(what)


def read_text_table(file: str, text: str, *, delimiter: str | None) -> Grid:
    """Rows of a delimited text; raises :class:`UnreadableError`.

    Quoted line breaks are understood; blank rows are dropped.
    """
    if "\x00" in text:
        line = text[: text.index("\x00")].count("\n") + 1
        raise UnreadableError(line, "holds a NUL character, so it is no text table", "export it again as CSV or XLSX")
    used = delimiter or detect_delimiter(text)
    if used.isalnum() or used in _NO_DELIMITERS:
        raise UnreadableError(None, f"cannot be split at {used!r}", 'set delimiter to ",", ";", "|" or a tab')
    reader = csv.reader(io.StringIO(text, newline=""), delimiter=used, strict=True)
    rows: list[tuple[int, list[str]]] = []
    try:
        start = 1
        for row in reader:
            if any(cell.strip() for cell in row):
                rows.append((start, row))
            start = reader.line_num + 1
    except csv.Error as error:
        raise UnreadableError(
            reader.line_num, f"is not well-formed CSV ({error})", "close the quotation mark or export the file again"
        ) from None
    if not rows:
        raise UnreadableError(None, "is empty", "export it again with a header row")
    line, header = rows[0]
    return Grid(file, tuple(cell.strip() for cell in header), line, rows[1:], used)


def detect_delimiter(text: str) -> str:
    """The delimiter that splits the header into most columns; quoted parts do not count."""
    first = next((line for line in text.splitlines() if line.strip()), "")
    bare = "".join(first.split('"')[::2])
    counts = {mark: bare.count(mark) for mark in DELIMITERS}
    best = max(DELIMITERS, key=lambda mark: counts[mark])
    return best if counts[best] else ","
