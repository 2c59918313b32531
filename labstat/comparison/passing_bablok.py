"""Passing-Bablok line (Passing & Bablok 1983) with its rank interval, and by counts."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt
from scipy import special

from labstat.comparison.pair_slopes import PairSlopes, pair_slopes
from labstat.comparison.results import Array
from labstat.comparison.shifted_median import ShiftedMedian
from labstat.resample.counts import Counts
from labstat.resample.engine import Statistic


@dataclass(frozen=True, slots=True)
class RankInterval:
    """The 1983 rank interval; a bound that runs off the sorted slopes is ``None``."""

    slope_low: float | None
    slope_high: float | None
    intercept_low: float | None
    intercept_high: float | None


def passing_bablok(x: Array, y: Array, pairs: PairSlopes) -> Statistic:
    """Passing-Bablok by counts: (rows, 2) slope and intercept; NaN where there is no positive relation.

    Assumes a linear relation, a positive slope near 1 and the same kind of error distribution on both axes (slopes far
    from 1: the rescaled method). When not to use it: narrow rounded data (many ties), slopes that may be negative.
    """
    median = ShiftedMedian(pairs)

    def by_counts(counts: Counts) -> Array:
        slope = median(counts)
        return np.column_stack([slope, intercepts(x, y, counts, slope)])

    return by_counts


def intercepts(x: Array, y: Array, counts: Counts, slope: Array) -> Array:
    """median(y - slope x) of each resample; NaN where the slope is."""
    result = np.full(slope.shape, np.nan)
    sizes = counts.sum(axis=1, dtype=np.int64)
    finite = np.isfinite(slope)
    for size in np.unique(sizes[finite]):
        rows = np.flatnonzero(finite & (sizes == size))
        step = max(1, 2_000_000 // int(size))
        for start in range(0, rows.size, step):
            some = rows[start : start + step]
            members = _members(counts[some], int(size))
            residuals = y[members] - slope[some, None] * x[members]
            result[some] = _row_medians(residuals)
    return result


def _members(counts: Counts, size: int) -> npt.NDArray[np.intp]:
    """The drawn units of each row written out, (rows, size)."""
    rows, n = counts.shape
    units = np.broadcast_to(np.arange(n, dtype=np.intp), (rows, n))
    return np.repeat(units.ravel(), counts.ravel()).reshape(rows, size)


def _row_medians(values: Array) -> Array:
    half = values.shape[1] // 2
    if values.shape[1] % 2:
        return np.partition(values, half, axis=1)[:, half]
    split = np.partition(values, (half - 1, half), axis=1)
    return (split[:, half - 1] + split[:, half]) / 2.0


def rank_interval(x: Array, y: Array, pairs: PairSlopes, *, level: float) -> RankInterval:
    """Rank interval for slope and intercept (Passing & Bablok 1983).

    C = z √(n(n − 1)(2n + 5)/18), M1 = (N − C)/2 rounded, M2 = N − M1 + 1; slopes S[M1 + K] and S[M2 + K]; intercept
    median(y − high x) and median(y − low x). When not to use it: proportional error, where it covers 89 to 90 %
    instead of 95 % even at n = 100.
    """
    n, size = pairs.n, pairs.slopes.size
    spread = float(special.ndtri(0.5 + level / 2)) * math.sqrt(n * (n - 1) * (2 * n + 5) / 18.0)
    m1 = math.floor((size - spread) / 2.0 + 0.5)
    m2 = size - m1 + 1
    low = float(pairs.slopes[m1 - 1]) if 1 <= m1 <= pairs.wrapped else None
    high = float(pairs.slopes[m2 - 1]) if 1 <= m2 <= pairs.wrapped else None
    return RankInterval(
        low, high,
        None if high is None else float(np.median(y - high * x)),
        None if low is None else float(np.median(y - low * x)),
    )


__all__ = ["PairSlopes", "RankInterval", "intercepts", "pair_slopes", "passing_bablok", "rank_interval"]
