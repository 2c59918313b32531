"""What every kind of row goes through: its analyte, its exclusion, its result, its account."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterable
from dataclasses import dataclass
from typing import Literal

from labstat.round.cells import Result, read_result
from labstat.round.mapped import Table
from labstat.round.model import LeftOut, RowCount, Why

Study = Literal["comparison", "reference", "precision"]
WHYS: tuple[Why, ...] = ("excluded", "censored", "missing", "unpaired")


@dataclass(frozen=True, slots=True)
class Entry:
    """One measurement as it stands in the file. ``reason`` is the exclusion's, with who and when."""

    file: str
    line: int
    column: str
    identity: str
    procedure: str | None
    replicate: str
    text: str
    reason: str | None
    result: Result
    day: str | None = None


def entry_of(
    table: Table, line: int, row: list[str], *, identity: str, procedure: str | None, replicate: str, text: str,
    column: str, day: str | None = None,
) -> Entry:
    """A measurement of a row. The result of an excluded row is not looked at: that is often why it was excluded."""
    reason = _reason(table, row)
    result = Result("missing") if reason is not None else read_result(text, decimal=table.decimal)
    return Entry(table.file, line, column, identity, procedure, replicate, text, reason, result, day)


def _reason(table: Table, row: list[str]) -> str | None:
    reason = table.text(row, "exclude")
    if not reason:
        return None
    who, when = table.text(row, "excluded_by"), table.text(row, "excluded_on")
    signed = ", ".join(part for part in (who, when) if part)
    return f"{reason} ({signed})" if signed else reason


def left_out(study: Study, entry: Entry, why: Why, reason: str) -> LeftOut:
    """The account of a row that was not used."""
    return LeftOut(
        study, entry.file, entry.line, entry.identity, entry.procedure, entry.replicate or None, entry.text, why, reason
    )


def first_reason(entry: Entry) -> tuple[Why, str] | None:
    """Why a row cannot be used by itself: excluded, missing, censored, in this order."""
    if entry.reason is not None:
        return "excluded", entry.reason
    if entry.result.kind == "missing":
        return "missing", "no result"
    if entry.result.kind == "censored":
        where = "below" if entry.result.side == "below" else "above"
        return "censored", f"{where} the measuring interval"
    return None


def row_count(read: int, out: Iterable[LeftOut]) -> RowCount:
    """The account of one study: what was read is used or left out for one reason."""
    number = Counter(row.why for row in out)
    used = read - sum(number.values())
    return RowCount(read, used, number["excluded"], number["censored"], number["missing"], number["unpaired"])
