"""The same results for a spreadsheet: tables/*.csv, made from the records of results.json."""

from __future__ import annotations

import csv
import io
from collections.abc import Iterable, Iterator, Sequence
from typing import Any

from labstat.record.values import Json, plain_text

Cell = str | int | float | None

ESTIMATE = (
    "estimate", "low", "high", "level", "interval", "resamples", "monte_carlo_error", "failed_resamples", "attained",
    "rank_low", "rank_high", "rank_attained", "replaced", "reason",
)

README = """\
These tables hold what results.json holds, for a spreadsheet: UTF-8 with a byte order mark, commas, decimal points.

A text that begins with = + - @ (or with a tab or a carriage return) would be taken for a formula by a spreadsheet, so
it is preceded by an apostrophe here. Numbers are never changed, and results.json holds every text as it is.
"""


def tables(analytes: Sequence[Json]) -> dict[str, bytes]:
    """File names and contents of all tables; a table without rows still has its header."""
    files = {
        name: _csv(header, (row for analyte in analytes for row in rows(analyte)))
        for name, header, rows in _TABLES
    }
    files["README.txt"] = README.encode()
    return files


def _estimate(record: Json | None) -> list[Cell]:
    return [None if record is None else record.get(key) for key in ESTIMATE]


def _analytes(analyte: Json) -> Iterator[list[Cell]]:
    rows = [count for study in analyte["rows"].values() for count in study.values()]
    yield [
        analyte["name"], analyte["unit"], analyte["outcome"], analyte["reason"], *rows, analyte["situation"],
        analyte["proposal"],
    ]


def _comparisons(analyte: Json) -> Iterator[tuple[list[Cell], Json]]:
    for comparison in analyte["comparison"]:
        yield [analyte["name"], comparison["comparative"], comparison["candidate"], comparison["n"]], comparison


def _lines(analyte: Json) -> Iterator[list[Cell]]:
    for start, comparison in _comparisons(analyte):
        for fit in comparison["fits"]:
            for quantity in ("slope", "intercept"):
                yield [*start, fit["method"], quantity, *_estimate(fit[quantity])]


def _bias(analyte: Json) -> Iterator[list[Cell]]:
    for start, comparison in _comparisons(analyte):
        for bias in comparison["bias"]:
            for unit, values in ((comparison["unit_of_resampling"], bias), ("days", bias["by_day"])):
                if values is None:
                    continue
                for scale, key in ((analyte["unit"], "bias"), ("%", "percent")):
                    yield [
                        *start, bias["at"], scale, unit, *_estimate(values[key]), bias["allowable"], bias["source"],
                        bias["finding"], bias["counts"], bias["settles_at_n"], bias["near"],
                    ]


def _differences(analyte: Json) -> Iterator[list[Cell]]:
    for start, comparison in _comparisons(analyte):
        difference = comparison["difference"]
        if difference is not None:
            for quantity in ("mean", "lower", "upper"):
                yield [*start, difference["scale"], difference["sd"], quantity, *_estimate(difference[quantity])]


def _limits(analyte: Json) -> Iterator[list[Cell]]:
    for group in analyte["reference"]:
        who = ", ".join(f"{column} {value}" for column, value in group["partition"].items())
        for side in ("lower", "upper"):
            if group[side] is not None:
                start = [analyte["name"], analyte["unit"], who, group["n"], group["method"], side]
                yield [*start, *_estimate(group[side])]


def _records(key: str, fields: Sequence[str]) -> Any:
    def rows(analyte: Json) -> Iterator[list[Cell]]:
        for record in analyte[key]:
            yield [analyte["name"], *(record[field] for field in fields)]

    return rows


FINDING = (
    "study", "question", "where", "estimate", "low", "high", "allowance", "source", "finding", "counts", "rests_on",
    "settles_at_n",
)
CAUTION = ("code", "weight", "text", "question")
LEFT_OUT = ("study", "file", "line", "identity", "procedure", "replicate", "result", "why", "reason")

_START = ("analyte", "comparative", "candidate", "n")
_COUNTS = tuple(
    f"{study} {kind}"
    for study in ("comparison", "reference", "precision")
    for kind in ("read", "used", "excluded", "censored", "missing", "unpaired")
)
_TABLES: tuple[tuple[str, Sequence[str], Any], ...] = (
    ("analytes.csv", ("analyte", "unit", "outcome", "reason", *_COUNTS, "situation", "proposal"), _analytes),
    ("lines.csv", (*_START, "method", "quantity", *ESTIMATE), _lines),
    (
        "bias.csv",
        (
            *_START, "at", "unit", "resampled", *ESTIMATE, "allowable", "source", "finding", "counts", "settles_at_n",
            "near",
        ),
        _bias,
    ),
    ("differences.csv", (*_START, "scale", "sd", "quantity", *ESTIMATE), _differences),
    ("reference.csv", ("analyte", "unit", "partition", "n", "method", "limit", *ESTIMATE), _limits),
    ("findings.csv", ("analyte", *FINDING), _records("findings", FINDING)),
    ("cautions.csv", ("analyte", *CAUTION), _records("cautions", CAUTION)),
    ("left_out.csv", ("analyte", *LEFT_OUT), _records("left_out", LEFT_OUT)),
)


def _csv(header: Sequence[str], rows: Iterable[Sequence[Cell]]) -> bytes:
    text = io.StringIO(newline="")
    writer = csv.writer(text, lineterminator="\r\n")
    writer.writerow(header)
    for row in rows:
        writer.writerow([_safe(cell) for cell in row])
    return text.getvalue().encode("utf-8-sig")


def _safe(cell: Cell) -> Cell:
    """A text that a spreadsheet would run as a formula, made harmless; a written number stays a number."""
    if not isinstance(cell, str):
        return cell
    text = plain_text(cell).replace("\x00", "\ufffd")
    if not text.startswith(("=", "+", "-", "@", "\t", "\r")):
        return text
    try:
        float(text)
    except ValueError:
        return f"'{text}"
    return text
