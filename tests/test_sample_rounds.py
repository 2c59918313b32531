"""The committed sample rounds are what the committed program makes of the committed scripts."""

from __future__ import annotations

import json
import math
import subprocess
import sys
from pathlib import Path
from typing import Any

import pytest

import labstat

SAMPLES = Path(__file__).resolve().parents[1] / "sample_runs"
ROUNDS = ("chemistry_q4", "open_data")

# On one machine the bytes repeat (a test of its own). Another processor or another numpy may sum in another order, so
# the last bits of a double can differ; the draws themselves cannot. 1e-6 leaves room for that, and is far below the
# Monte-Carlo error of any bound, which another seed would show.
TOLERANCE = 1e-6


@pytest.mark.parametrize("name", ROUNDS)
def test_the_script_writes_the_committed_tables_byte_by_byte(name: str, tmp_path: Path) -> None:
    subprocess.run([sys.executable, SAMPLES / f"make_{name}.py", tmp_path], check=True, timeout=60)
    written = sorted(path.name for path in tmp_path.iterdir())
    assert written
    for file in written:
        assert (tmp_path / file).read_bytes() == (SAMPLES / name / file).read_bytes(), file


def differences(fresh: Any, kept: Any, place: str = "") -> list[str]:
    """Every place at which two results differ by more than the tolerance."""
    if isinstance(fresh, dict) and isinstance(kept, dict):
        if list(fresh) != list(kept):
            return [f"{place}: keys {list(fresh)} for {list(kept)}"]
        return [d for key in fresh for d in differences(fresh[key], kept[key], f"{place}.{key}")]
    if isinstance(fresh, list) and isinstance(kept, list):
        if len(fresh) != len(kept):
            return [f"{place}: {len(fresh)} entries for {len(kept)}"]
        return [d for i, pair in enumerate(zip(fresh, kept, strict=True)) for d in differences(*pair, f"{place}[{i}]")]
    numbers = [type(value) in (int, float) for value in (fresh, kept)]
    if all(numbers):
        same = math.isclose(fresh, kept, rel_tol=TOLERANCE, abs_tol=TOLERANCE * 1e-3)
    else:
        same = type(fresh) is type(kept) and fresh == kept
    return [] if same else [f"{place}: {fresh!r} for {kept!r}"]


@pytest.mark.parametrize("name", ROUNDS)
def test_a_fresh_run_reproduces_the_committed_results(name: str, tmp_path: Path) -> None:
    labstat.run_round(SAMPLES / name, out=tmp_path / "out", workers=2)
    fresh = json.loads((tmp_path / "out" / "results.json").read_text(encoding="utf-8"))
    kept = json.loads((SAMPLES / name / "out" / "results.json").read_text(encoding="utf-8"))
    del fresh["program"], kept["program"]
    assert differences(fresh, kept) == []
