"""Lines through a comparison of two measurement procedures."""

from __future__ import annotations

from dataclasses import dataclass

from labstat.resample.estimate import Estimate


@dataclass(frozen=True, slots=True, eq=False)
class LineFit:
    """(contract only: the real one is being written) method, n, slope, intercept and how they were obtained."""

    method: str  # "ordinary" | "deming" | "weighted-deming" | "passing-bablok"
    n: int
    slope: Estimate
    intercept: Estimate
    variance_ratio: float | None  # None where the method has none
    pairs_below_minus_one: int | None  # K of Passing-Bablok
    slopes_used: int | None  # N of Passing-Bablok
    seed: int
