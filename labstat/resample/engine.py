"""One engine for every statistic of counts: estimate, bootstrap, jackknife, second level, clusters."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from labstat.resample.counts import Counts, counts_dtype, first_level, leave_one_out, second_level

Array = npt.NDArray[np.float64]
Statistic = Callable[[Counts], Array]
"""Counts (rows, units) to values (rows, parameters); NaN where the statistic does not exist."""

OUTER = 999
"""First-level resamples that get a second level; the bounds are read from all first-level ones."""

_CELLS = 4_000_000
"""Counts held at once: bounds the memory of any block whatever the number of units."""


@dataclass(frozen=True, slots=True, eq=False)
class Sample:
    """One parameter: its estimate, bootstrap values, jackknife values and second-level values.

    ``values`` (resamples,), ``jackknife`` (units,), ``inner`` (outer, inner) or ``None``; NaN marks a resample in
    which the statistic does not exist.
    """

    estimate: float
    values: Array
    jackknife: Array
    inner: Array | None


@dataclass(frozen=True, slots=True, eq=False)
class Draws:
    """All parameters of one statistic from the same resamples; shapes as in :class:`Sample` with one more axis."""

    estimate: Array
    values: Array
    jackknife: Array
    inner: Array | None
    units: int
    seed: int

    def combined(self, weights: npt.ArrayLike, constant: float = 0.0) -> Sample:
        """The linear combination ``constant + sum of weights * parameters``, resample by resample."""
        w = np.asarray(weights, dtype=np.float64)

        def combine(values: Array) -> Array:
            total = np.full(values.shape[:-1], constant)
            for index, weight in enumerate(w):  # in fixed order: the same bits whatever the shape
                if weight != 0.0:
                    total = total + weight * values[..., index]
            return total

        return Sample(
            float(combine(self.estimate)),
            combine(self.values),
            combine(self.jackknife),
            None if self.inner is None else combine(self.inner),
        )

    def parameter(self, index: int) -> Sample:
        """One parameter by itself."""
        return Sample(
            float(self.estimate[index]),
            self.values[:, index],
            self.jackknife[:, index],
            None if self.inner is None else self.inner[:, :, index],
        )


def bootstrap(
    statistic: Statistic,
    units: int,
    *,
    resamples: int,
    seed: int,
    inner: int = 0,
    resolution: npt.ArrayLike = 0.0,
    block: int | None = None,
) -> Draws:
    """Estimate, bootstrap and jackknife values of a statistic of counts.

    ``inner`` second-level resamples are drawn for each of the first :data:`OUTER` first-level ones (0: none).
    Values within ``resolution`` of the estimate (one number a parameter) are set equal to it: a tie is a fact of the
    decimal data, which rounding must neither make nor break. ``block`` bounds the rows handed to the statistic at
    once; it changes nothing but memory and speed.
    When it is wrong: dependent units (resample clusters instead, see :func:`by_cluster`), extreme quantiles of few
    units, units that are not exchangeable.
    """
    rows = max(1, _CELLS // units) if block is None else block
    estimate = statistic(np.ones((1, units), dtype=counts_dtype(units)))[0]
    near = np.broadcast_to(np.asarray(resolution, dtype=np.float64), estimate.shape)

    def tied(counts: Counts) -> Array:
        found = statistic(counts)
        return np.where(np.abs(found - estimate) <= near, estimate, found)

    values = np.concatenate([tied(c) for c in first_level(units, resamples, seed=seed, block=rows)])
    left_out = leave_one_out(units)
    jackknife = np.concatenate([tied(left_out[i : i + rows]) for i in range(0, units, rows)])
    second = None
    if inner:
        second = _second(tied, units, min(OUTER, resamples), inner, seed, rows)
    return Draws(estimate, values, jackknife, second, units, seed)


def _second(statistic: Statistic, units: int, outer: int, inner: int, seed: int, rows: int) -> Array:
    step = max(1, rows // inner)
    parts: list[Array] = []
    start = 0
    for counts in first_level(units, outer, seed=seed, block=step):
        for i in range(0, counts.shape[0], step):
            some = counts[i : i + step]
            values = statistic(second_level(some, start, inner, seed=seed))
            parts.append(values.reshape(some.shape[0], inner, -1))
            start += some.shape[0]
    return np.concatenate(parts)


def by_cluster(statistic: Statistic, members: npt.NDArray[np.intp]) -> Statistic:
    """The same statistic as a function of counts of clusters; ``members`` holds the cluster of each unit."""

    def of_clusters(counts: Counts) -> Array:
        return statistic(counts[:, members])

    return of_clusters


def absent(units: int, resamples: int, *, seed: int) -> npt.NDArray[np.bool_]:
    """Which units are missing from which resample, (resamples, units): the same draws as :func:`bootstrap`."""
    return np.concatenate([counts == 0 for counts in first_level(units, resamples, seed=seed)])
