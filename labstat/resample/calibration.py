"""Level calibration by a second bootstrap (Loh 1987; Beran 1987; Hall & Martin 1988)."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from labstat.resample.engine import Sample
from labstat.resample.ranks import at_rank

DISTINCT = 20
"""Fewer distinct shares than this say nothing about a tail of a few percent."""


@dataclass(frozen=True, slots=True)
class Calibration:
    """The tail area that covers at the level asked for.

    ``reason`` is set when it is not to be trusted. ``at_bound``: the tail asked for is smaller than the second level
    can tell, and ``tail`` is the smallest that it can: wider than the percentile interval, perhaps not wide enough.
    """

    tail: float
    spread: float
    attained: float | None
    at_bound: bool = False
    reason: str | None = None


def calibrate(sample: Sample, *, level: float) -> Calibration:
    """Find the tail area at which the percentile interval covers, from second-level resamples.

    u(b) is the share of second-level values of resample b at or below the estimate; the tail is the value that
    min(u, 1 - u) exceeds in a share ``level`` of the b. ``attained`` is the share of b in which the plain percentile
    interval of the second level covers the estimate. When not to use it: with so few or so coarse data that
    the shares take few distinct values (``reason`` says so), or when most resamples repeat one value.
    """
    if sample.inner is None:
        raise ValueError("calibration needs second-level resamples")
    valid = np.isfinite(sample.inner)
    enough = np.count_nonzero(valid, axis=1)
    inner = sample.inner.shape[1]
    usable = enough >= 0.99 * inner
    at_or_below = np.count_nonzero((sample.inner <= sample.estimate) & valid, axis=1)
    u = at_or_below[usable] / enough[usable]
    alpha = 1.0 - level
    if u.size < 0.99 * usable.size or u.size == 0:
        return Calibration(
            alpha / 2, 0.0, None,
            reason="the statistic does not exist in too many second-level resamples",
        )
    attained = float(np.mean((u > alpha / 2) & (u < 1.0 - alpha / 2)))
    margin = np.sort(np.minimum(u, 1.0 - u))
    rank = alpha * (margin.size + 1)
    tail = at_rank(margin, rank)
    step = float(np.sqrt(margin.size * alpha * (1.0 - alpha)))
    spread = (at_rank(margin, rank + step) - at_rank(margin, rank - step)) / 2.0
    distinct = int(np.unique(u).size)
    if distinct < DISTINCT:
        return Calibration(
            alpha / 2, 0.0, attained,
            reason=f"second-level resamples give only {distinct} distinct shares",
        )
    bound = 1.0 / (inner + 1)
    if tail < bound:
        return Calibration(
            bound, spread, attained, at_bound=True,
            reason=f"the calibrated tail is smaller than {inner} second-level resamples can tell",
        )
    return Calibration(tail, spread, attained)
