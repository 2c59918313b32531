"""Robust reference limits (Horn, Pesce & Copeland 1998), for many resamples at once."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt
from scipy import stats

from labstat.errors import NotComputableError
from labstat.resample.counts import Counts
from labstat.resample.engine import Statistic, bootstrap
from labstat.resample.estimate import Estimate
from labstat.resample.intervals import estimate_from

Array = npt.NDArray[np.float64]

TUNING_WIDE = 205.6
TUNING = 3.7
_MAD_TO_SD = 0.6745
_TOLERANCE = 1e-10
_ITERATIONS = 500


def robust(values: Array, probabilities: tuple[float, ...]) -> Statistic:
    """Robust limits by counts: (rows, limits) for values (n,); NaN where MAD is 0 or the location does not settle.

    T: biweight location from the median, u = (x − T)/(3.7·s0), weights (1 − u²)², s0 = MAD/0.6745. For tuning c,
    centre m, scale s: A = Σu²(1 − u²)⁴, D = Σ(1 − u²)(1 − 5u²), D' = D·max(1, D − 1), sums over |u| < 1. S² =
    (c·s)²·n·A/D' with c = 205.6, m = median, s = s0; q² the same with c = 3.7; S_T² = (3.7·q)²·A/D' with m = T, s = q.
    Limits T ± t(n − 1)·√(S² + S_T²), two-sided t for two limits, t(n − 1, p) for one.
    """
    order = np.argsort(values, kind="stable")
    x = values[order]
    centre = float(np.median(x))
    scale = float(np.max(np.abs(x - centre))) or 1.0
    z = (x - centre) / scale

    def by_counts(counts: Counts) -> Array:
        c = counts[:, order].astype(np.float64)
        total = c.sum(axis=1)
        median = _weighted_median(np.broadcast_to(z, c.shape), c, total, presorted=True)
        mad = _weighted_median(np.abs(z - median[:, None]), c, total, presorted=False)
        s0 = np.where(mad > 0.0, mad / _MAD_TO_SD, np.nan)
        location = _location(z, c, median, s0)
        wide = _spread(z, c, total, TUNING_WIDE, median, s0)
        q = np.sqrt(_spread(z, c, total, TUNING, median, s0))
        of_location = _spread(z, c, np.ones_like(total), TUNING, location, q)
        reach = np.sqrt(wide + of_location)
        columns = []
        for index, probability in enumerate(probabilities):
            factor = stats.t.ppf(_area(probabilities, index), total - 1.0)
            columns.append(centre + scale * (location + (factor if probability >= 0.5 else -factor) * reach))
        return np.column_stack(columns)

    return by_counts


def _area(probabilities: tuple[float, ...], index: int) -> float:
    """Area below the t value: each limit has its own tail, so two limits at 2.5 % take t(n − 1, 0.975)."""
    p = probabilities[index]
    return p if p >= 0.5 else 1.0 - p


def robust_limits(
    values: Array, probabilities: tuple[float, ...], *, interval: str, level: float, resamples: int, seed: int
) -> tuple[Estimate, ...]:
    """Robust limits of ``values`` with bootstrap intervals; raises :class:`NotComputableError` where MAD is 0.

    Its target is a prediction limit. With c = 205.6 the spread is nearly the ordinary standard deviation: "robust" does
    not resist outliers in the spread, so that one gross value moves the limits. When not to use it: skewed values.
    """
    statistic = robust(values, probabilities)
    first = statistic(np.ones((1, values.size), dtype=np.uint16))[0]
    if not np.all(np.isfinite(first)):
        if np.median(np.abs(values - np.median(values))) == 0.0:
            raise NotComputableError("no robust limits exist: more than half of the values are equal (MAD is 0)")
        raise NotComputableError("no robust limits exist: the location does not settle")
    draws = bootstrap(statistic, values.size, resamples=resamples, seed=seed)
    return tuple(
        estimate_from(draws.parameter(i), interval=interval, level=level) for i in range(len(probabilities))
    )


def _weighted_median(values: Array, counts: Array, total: Array, *, presorted: bool) -> Array:
    """The ordinary median of each row's drawn values (rows, n)."""
    if not presorted:
        order = np.argsort(values, axis=1, kind="stable")
        values = np.take_along_axis(values, order, axis=1)
        counts = np.take_along_axis(counts, order, axis=1)
    cumulated = np.cumsum(counts, axis=1)
    rows = np.arange(values.shape[0])
    low = np.argmax(cumulated >= np.floor((total + 1) / 2)[:, None], axis=1)
    high = np.argmax(cumulated >= (np.floor(total / 2) + 1)[:, None], axis=1)
    middle: Array = (values[rows, low] + values[rows, high]) / 2.0
    return middle


def _location(z: Array, c: Array, median: Array, s0: Array) -> Array:
    location = median.copy()
    open_rows = np.flatnonzero(np.isfinite(s0))
    location[~np.isfinite(s0)] = np.nan
    for _ in range(_ITERATIONS):
        if open_rows.size == 0:
            return location
        u = (z - location[open_rows, None]) / (TUNING * s0[open_rows, None])
        weights = c[open_rows] * np.where(np.abs(u) < 1.0, (1.0 - u * u) ** 2, 0.0)
        new = (weights * z).sum(axis=1) / weights.sum(axis=1)
        moved = np.abs(new - location[open_rows]) > _TOLERANCE * s0[open_rows]
        location[open_rows] = new
        open_rows = open_rows[moved]
    location[open_rows] = np.nan
    return location


def _spread(z: Array, c: Array, factor: Array, tuning: float, centre: Array, scale: Array) -> Array:
    """(tuning·scale)²·factor·A/D' of each row."""
    with np.errstate(divide="ignore", invalid="ignore"):
        u2 = ((z - centre[:, None]) / (tuning * scale[:, None])) ** 2
        inside = c * (u2 < 1.0)
        a = (inside * u2 * (1.0 - u2) ** 4).sum(axis=1)
        d = (inside * (1.0 - u2) * (1.0 - 5.0 * u2)).sum(axis=1)
        spread: Array = (tuning * scale) ** 2 * factor * a / (d * np.maximum(1.0, d - 1.0))
    return np.where(np.isfinite(spread) & (spread > 0.0), spread, np.nan)
