"""Whether a row has as many fields as the header: a row that has not may have shifted values."""

from __future__ import annotations

from labstat.round.mapped import Table

WRONG_WIDTH = "quote fields that hold the delimiter, or export the file again"


def fitted(table: Table, row: list[str]) -> list[str] | None:
    """The row cut or not at all to the header's width; ``None`` when fields are missing or too many hold something."""
    width = len(table.grid.header)
    if len(row) == width:
        return row
    if len(row) > width and not any(cell.strip() for cell in row[width:]):
        return row[:width]
    return None


def wrong_width(table: Table, row: list[str]) -> str:
    """What is wrong with the row, in words."""
    fields = "1 field" if len(row) == 1 else f"{len(row)} fields"
    return f"the row has {fields} and the header {len(table.grid.header)}"
