"""Jackknife-after-bootstrap (Efron 1992): what a bound becomes without one unit, at no further cost."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from labstat.resample.engine import Array, Sample
from labstat.resample.intervals import Tails
from labstat.resample.ranks import at_tail

FEWEST = 100
"""Resamples without a unit below which nothing is said about it."""


def bounds_without_each(sample: Sample, missing: npt.NDArray[np.bool_], at: Tails) -> Array:
    """Bounds without each unit, shape (units, 2); NaN where too few resamples lack the unit.

    ``missing`` (resamples, units) tells which unit each resample lacks. The resamples that lack unit i are a
    bootstrap of the data without it. The tail areas are those of the whole data: they are not calibrated again.
    """
    finite = np.isfinite(sample.values)
    order = np.argsort(sample.values, kind="stable")
    order = order[finite[order]]
    ordered = sample.values[order]
    lacking = missing[order]
    bounds = np.full((missing.shape[1], 2), np.nan)
    for unit in range(missing.shape[1]):
        some = ordered[lacking[:, unit]]
        if some.size >= FEWEST:
            bounds[unit] = at_tail(some, at.low), at_tail(some, at.high)
    return bounds
