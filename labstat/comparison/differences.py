"""Mean difference and limits of agreement (Bland & Altman 1986, 1999)."""

from __future__ import annotations

import math
from collections.abc import Hashable, Sequence
from typing import Literal

import numpy as np
import numpy.typing as npt
from scipy import stats

from labstat.checking import checked_resamples, checked_seed, checked_share
from labstat.comparison.moments import Moments
from labstat.comparison.pairs import checked_pairs, cluster_members
from labstat.comparison.results import Array, Difference
from labstat.errors import ArgumentError, NotComputableError
from labstat.resample.counts import Counts
from labstat.resample.engine import Statistic, bootstrap, by_cluster
from labstat.resample.estimate import Estimate
from labstat.resample.intervals import KINDS, estimate_from

INNER = 499
SHARE = 0.95
"""The limits of agreement hold this share of differences."""

Z = float(stats.norm.ppf(0.5 + SHARE / 2))


def differences(x: Array, y: Array, *, scale: Literal["absolute", "percent"]) -> Array:
    """y - x, or that in percent of the mean of the two; raises :class:`NotComputableError` for a mean not above 0."""
    if scale == "absolute":
        return y - x
    mean = (x + y) / 2.0
    if np.any(mean <= 0.0):
        at = int(np.flatnonzero(mean <= 0.0)[0])
        raise NotComputableError(
            f"percent differences need positive results, but a pair has {x[at]:g} and {y[at]:g}"
        )
    return 100.0 * (y - x) / mean


def difference(
    x: npt.ArrayLike,
    y: npt.ArrayLike,
    *,
    scale: Literal["absolute", "percent"] = "absolute",
    interval: str = "calibrated",
    level: float = 0.95,
    resamples: int = 9999,
    seed: int | None = None,
    clusters: Sequence[Hashable] | None = None,
) -> Difference:
    """Mean difference y - x and limits of agreement, each with an interval.

    ``x``, ``y``: n finite numbers each, n >= 3. Limits are mean - 1.96 s and mean + 1.96 s with s of n - 1 degrees of
    freedom. ``interval``: ``"calibrated"``, ``"percentile"``, ``"bca"``, ``"jackknife"`` or ``"normal"``: t intervals
    with the limits' standard error s √(1/n + z²/(2(n − 1))) (Bland & Altman 1999), which are given beside the others
    always. ``clusters``: a label a pair; pairs with one label are resampled together. The order of the pairs does not
    matter. When not to use it: differences that grow with the level (use percent), means of replicates where single
    results are reported.
    """
    first, second = checked_pairs(x, y)
    if scale not in ("absolute", "percent"):
        raise ArgumentError("scale", "must be absolute or percent", scale)
    if interval not in (*KINDS, "normal"):
        raise ArgumentError("interval", f"must be one of {', '.join((*KINDS, 'normal'))}", interval)
    checked_share("level", level)
    checked_resamples(resamples)
    used_seed = checked_seed(seed)
    order = np.lexsort((second, first))
    first, second = first[order], second[order]
    d = differences(first, second, scale=scale)
    normal = normal_intervals(d, level=level)
    sd = float(np.std(d, ddof=1))
    if interval == "normal":
        return Difference(scale, d.size, normal[0], sd, normal[1], normal[2], normal)
    statistic = agreement(d)
    units = d.size
    if clusters is not None:
        members = cluster_members(clusters, order)
        statistic, units = by_cluster(statistic, members), int(members.max()) + 1
    inner = INNER if interval in ("calibrated", "percentile") else 0
    size = float(max(np.max(np.abs(first)), np.max(np.abs(second)))) if scale == "absolute" else 100.0
    draws = bootstrap(
        statistic, units, resamples=int(resamples), seed=used_seed, inner=inner, resolution=1e-12 * size
    )
    mean, lower, upper = (estimate_from(draws.parameter(i), interval=interval, level=level) for i in range(3))
    return Difference(scale, d.size, mean, sd, lower, upper, normal)


def agreement(d: Array) -> Statistic:
    """Mean, lower and upper limit of agreement by counts, (rows, 3); NaN for a resample of one unit only."""
    moments = Moments(d, d)

    def by_counts(counts: Counts) -> Array:
        mean, _, squares, _, _ = moments(counts)
        total = counts.sum(axis=1, dtype=np.int64)
        with np.errstate(invalid="ignore", divide="ignore"):
            sd = np.where(total > 1, np.sqrt(squares / (total - 1)), np.nan)
        return np.column_stack([mean, mean - Z * sd, mean + Z * sd])

    return by_counts


def normal_intervals(d: Array, *, level: float) -> tuple[Estimate, Estimate, Estimate]:
    """Mean, lower and upper limit with t intervals (Bland & Altman 1999, section 2.1)."""
    n = d.size
    return normal_intervals_from(float(np.mean(d)), float(np.std(d, ddof=1)), n, level=level)


def normal_intervals_from(mean: float, sd: float, n: int, *, level: float) -> tuple[Estimate, Estimate, Estimate]:
    """The same from the mean, the standard deviation and the number of differences."""
    t = float(stats.t.ppf(0.5 + level / 2, n - 1))
    half_mean = t * sd / math.sqrt(n)
    half_limit = t * sd * math.sqrt(1.0 / n + Z**2 / (2.0 * (n - 1)))

    def made(value: float, half: float) -> Estimate:
        return Estimate(value, value - half, value + half, level, "normal")

    return made(mean, half_mean), made(mean - Z * sd, half_limit), made(mean + Z * sd, half_limit)
