"""Weighted Deming line (Linnet 1993) for constant coefficients of variation, all resamples iterated together."""

from __future__ import annotations

import numpy as np

from labstat.comparison.moments import Moments, deming_slope
from labstat.comparison.results import Array
from labstat.resample.counts import Counts
from labstat.resample.engine import Statistic

_TOLERANCE = 1e-11
_ITERATIONS = 200


def weighted_deming(x: Array, y: Array, variance_ratio: float, *, lowest: float = 0.0) -> Statistic:
    """Weighted Deming by counts: (rows, 2) slope and intercept; NaN where it does not exist or does not converge.

    Weights 1 / ((X + λY) / (1 + λ))² with the estimated true values X = x + λ·b·d / (1 + λb²),
    Y = y − d / (1 + λb²), d = y − (a + b·x) (Linnet 1993; the weight formula in the form printed there was not seen),
    iterated until the slope stands still. Levels below ``lowest`` weigh as ``lowest`` (the lower end of the measuring
    interval), so that the smallest results do not take over the line. A non-positive weighted level is refused (NaN).
    When not to use it: constant error over the range, results near zero.
    """
    moments = Moments(x, y)

    def by_counts(counts: Counts) -> Array:
        c = counts.astype(np.float64)
        result = np.full((c.shape[0], 2), np.nan)
        mx, my, u, q, p = moments(c)
        slope = deming_slope(u, q, p, variance_ratio)
        intercept = my - slope * mx
        open_rows = np.flatnonzero(np.isfinite(slope))
        slope, intercept = slope[open_rows], intercept[open_rows]
        for _ in range(_ITERATIONS):
            if open_rows.size == 0:
                break
            rows = c[open_rows]
            b = slope[:, None]
            d = y - (intercept[:, None] + b * x)
            share = d / (1.0 + variance_ratio * b * b)
            level = ((x + variance_ratio * b * share) + variance_ratio * (y - share)) / (1.0 + variance_ratio)
            level = np.maximum(level, lowest)
            # a level counts only where the resample holds the unit
            good = np.min(np.where(rows > 0.0, level, np.inf), axis=1) > 0.0
            open_rows, rows, level, slope = open_rows[good], rows[good], level[good], slope[good]
            if open_rows.size == 0:
                break
            weights = np.where(rows > 0.0, rows / level**2, 0.0)
            # only ratios of weights matter: keep the sums near 1
            weights = weights / np.max(weights, axis=1, keepdims=True)
            mx, my, u, q, p = moments(weights)
            new = deming_slope(u, q, p, variance_ratio)
            intercept = my - new * mx
            done = np.abs(new - slope) <= _TOLERANCE * np.abs(new)
            result[open_rows[done]] = np.column_stack([new, intercept])[done]
            on = ~done & np.isfinite(new)
            open_rows, slope, intercept = open_rows[on], new[on], intercept[on]
        return result

    return by_counts
