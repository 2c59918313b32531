"""A round small enough to be computed in a second, written by the tests that use it."""

from __future__ import annotations

import os
import subprocess
import sys
from pathlib import Path
from typing import Any

PLAN = """\
[round]
title = "Tiny"
laboratory = "Quillfen District Laboratory"
prepared_by = "Validation lead"
reviewer = "Laboratory director"
seed = 1
resamples = 399

{analytes}
"""

ANALYTE = """\
[[analyte]]
name = {name}
unit = "mmol/L"
decimals = 1

[analyte.comparison]
comparative = "Procedure A"
candidate = "Procedure B"
methods = ["deming"]
report = "deming"
interval = "percentile"
levels = [ {{ at = 50, allowable = "10 %", source = "Quality plan, table 3" }} ]
"""


def rows_of(name: str, n: int = 24, *, shift: float = 0.5) -> list[str]:
    """Comparison rows of one analyte: a shift and a small wobble that needs no random numbers."""
    rows = []
    for i in range(n):
        x = 20 + 3 * i
        y = x + shift + (0.4, -0.3, 0.1, -0.2, 0.3)[i % 5]
        rows += [f'"{name}",S{i:03d},Procedure A,{x}', f'"{name}",S{i:03d},Procedure B,{y:.1f}']
    return rows


def write_round(
    folder: Path, tables: dict[str, list[str]], *, planned: list[str] | None = None, extra: str = ""
) -> Path:
    """A round folder with a comparison for each analyte of ``tables`` (name, rows)."""
    folder.mkdir(parents=True, exist_ok=True)
    names = list(tables) if planned is None else planned
    quoted = ['"' + name.replace("\\", "\\\\").replace('"', '\\"') + '"' for name in names]
    analytes = "\n".join(ANALYTE.format(name=name) for name in quoted)
    (folder / "round.toml").write_text(PLAN.format(analytes=analytes) + extra, encoding="utf-8")
    lines = ["analyte,specimen,procedure,result", *(row for rows in tables.values() for row in rows)]
    (folder / "comparison.csv").write_text("\n".join(lines) + "\n", encoding="utf-8")
    return folder


def labstat(*arguments: str | Path, **environment: str) -> subprocess.CompletedProcess[str]:
    """The program in a process of its own."""
    return subprocess.run(
        command(*arguments),
        capture_output=True,
        text=True,
        timeout=120,
        check=False,
        env={**os.environ, **environment},
        encoding="utf-8",
    )


def command(*arguments: str | Path) -> list[str]:
    return [sys.executable, "-m", "labstat", *map(str, arguments)]


def content(folder: Path) -> dict[str, bytes]:
    """Every file of a folder by its path in it."""
    return {p.relative_to(folder).as_posix(): p.read_bytes() for p in sorted(folder.rglob("*")) if p.is_file()}


def only_analyte(results: dict[str, Any], name: str) -> dict[str, Any]:
    """One analyte's record."""
    found = [analyte for analyte in results["analytes"] if analyte["name"] == name]
    assert len(found) == 1
    return found[0]
