"""Round folders written by the tests that use them, and what reading them says."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from pathlib import Path

from labstat.errors import RoundError
from labstat.round.model import AnalyteData, Round
from labstat.round.reading import read_round

HEAD = """\
[round]
title = "Example"
laboratory = "Example laboratory"
prepared_by = "Validation lead"
reviewer = "Laboratory director"
seed = 1
"""

POTASSIUM = """\
[[analyte]]
name = "K"
unit = "mmol/L"
[analyte.comparison]
comparative = "A"
candidate = "B"
"""

CHLORIDE = """\
[[analyte]]
name = "Cl"
unit = "mmol/L"
[analyte.reference]
"""

COLUMNS = "analyte,specimen,procedure,result\n"
ROWS = "K,1,A,1.5\nK,1,B,1.75\nK,2,A,2\nK,2,B,2.5\n"

Content = str | bytes


def write(folder: Path, *, plan: Content | None = None, tables: Mapping[str, Content] | None = None) -> Path:
    """A round folder; without a plan one analyte ``K``, without tables its comparison."""
    folder.mkdir(exist_ok=True)
    files: dict[str, Content] = {"round.toml": HEAD + POTASSIUM if plan is None else plan}
    files |= {"comparison.csv": COLUMNS + ROWS} if tables is None else dict(tables)
    for name, content in files.items():
        (folder / name).write_bytes(content if isinstance(content, bytes) else content.encode())
    return folder


def read(folder: Path, *, plan: Content | None = None, tables: Mapping[str, Content] | None = None,
         only: Sequence[str] = ()) -> Round:
    return read_round(write(folder, plan=plan, tables=tables), only=only)


def unusable(folder: Path, *, plan: Content | None = None, tables: Mapping[str, Content] | None = None,
             only: Sequence[str] = ()) -> list[str]:
    """The messages of a round that cannot be used."""
    try:
        read(folder, plan=plan, tables=tables, only=only)
    except RoundError as error:
        return [str(problem) for problem in error.problems]
    raise AssertionError("the round was read")


def rows_of(folder: Path, rows: str, *, columns: str = COLUMNS, plan: Content | None = None) -> AnalyteData:
    """The first analyte of a round with these comparison rows."""
    return read(folder, plan=plan, tables={"comparison.csv": columns + rows}).analytes[0]


def messages(data: AnalyteData) -> list[str]:
    return [str(problem) for problem in data.problems]
