"""Exact bootstrap of a quantile read from order statistics: no resample is drawn, nothing is left to chance.

With x sorted, r = p(n + 1), k = floor(r), g = r - k, the estimate is (1 - g) x(k) + g x(k + 1). The joint distribution
of the two order statistics of a resample is known in closed form (Hutson & Ernst 2000). Only ranks that a resample can
reach with a probability that matters are looked at, so that the cost hardly grows with n.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt
from scipy import special, stats

Array = npt.NDArray[np.float64]

NEGLIGIBLE = 1e-16
"""Ranks beyond which a resample's order statistic lies with less than this probability are left out."""

ROUNDING = 1e-12
"""Cumulated probabilities closer to a tail area than this have reached it: sums of many small numbers are no closer."""


@dataclass(frozen=True, slots=True)
class Place:
    """Where a quantile is read: (1 - part) x(rank) + part x(rank + 1); ``extreme`` when p(n + 1) lies off the ends."""

    rank: int
    part: float
    extreme: bool


def place_of(probability: float, n: int) -> Place:
    """r = p(n + 1), held at 1 and n."""
    r = probability * (n + 1)
    nearest = round(r)
    if abs(r - nearest) < 1e-9:  # 0.975 * 120 is a whole number that floating point misses
        r = float(nearest)
    if r < 1.0:
        return Place(1, 0.0, extreme=True)
    if r > n:
        return Place(n, 0.0, extreme=True)
    k = math.floor(r)
    return Place(k, r - k if k < n else 0.0, extreme=False)


def quantile_at(ordered: Array, place: Place) -> float:
    """The quantile of sorted values at a place."""
    low = float(ordered[place.rank - 1])
    if place.part == 0.0:
        return low
    high = float(ordered[place.rank])
    return low if low == high else (1.0 - place.part) * low + place.part * high


@dataclass(frozen=True, slots=True, eq=False)
class ExactDistribution:
    """The bootstrap distribution: distinct values ascending, with their probabilities."""

    values: Array
    probabilities: Array

    @property
    def mean(self) -> float:
        return float(np.sum(self.values * self.probabilities))

    @property
    def variance(self) -> float:
        return float(np.sum((self.values - self.mean) ** 2 * self.probabilities))

    def at_tail(self, area: float) -> float:
        """The smallest value whose cumulated probability reaches ``area``."""
        reached = np.flatnonzero(np.cumsum(self.probabilities) >= area - ROUNDING)
        return float(self.values[reached[0] if reached.size else -1])


def rank_weights(rank: int, n: int) -> tuple[int, Array]:
    """P(X*(rank) = x(i)) for i from the returned first rank on: from P(X*(k) <= x(i)) = P(Bin(n, i/n) >= k)."""
    first, last = _window(rank, n)
    upper = special.betainc(rank, n - rank + 1, np.arange(first - 1, last + 1) / n)
    return first, np.diff(upper)


def exact_distribution(ordered: Array, place: Place) -> ExactDistribution:
    """The bootstrap distribution of the quantile at ``place`` of ascending values; ties are merged."""
    n, k, g = ordered.size, place.rank, place.part
    if g == 0.0:
        first, weights = rank_weights(k, n)
        ranks = np.arange(first, first + weights.size)
        return _merged(ordered[ranks - 1], weights)
    first, last = _window(k, n)
    _, beyond = _window(k + 1, n)
    last = max(last, beyond)
    i = np.arange(first, last + 1)
    # P(X*(k) <= x(i), X*(k+1) >= x(j)) = C(n, k) (i/n)^k ((n - j + 1)/n)^(n - k) for i < j
    log_c = special.gammaln(n + 1) - special.gammaln(k + 1) - special.gammaln(n - k + 1)
    with np.errstate(divide="ignore"):
        left = k * np.log(np.arange(first - 1, last + 1) / n)
        right = (n - k) * np.log((n - np.arange(first, last + 2) + 1) / n)
    # the formula holds above the diagonal, where it is a probability; what lies below it is not used
    corner = np.exp(np.minimum(log_c + left[:, None] + right[None, :], 0.0))
    joint = np.diff(corner, axis=0)[:, :-1] - np.diff(corner, axis=0)[:, 1:]
    joint = np.triu(np.maximum(joint, 0.0), 1)
    marginal = np.diff(special.betainc(k, n - k + 1, np.arange(first - 1, last + 1) / n))
    np.fill_diagonal(joint, np.maximum(marginal - joint.sum(axis=1), 0.0))
    a, b = np.nonzero(joint > 1e-18)
    low, high = ordered[i[a] - 1], ordered[i[b] - 1]
    with np.errstate(invalid="ignore"):
        values = np.where(low == high, low, (1.0 - g) * low + g * high)
    return _merged(values, joint[a, b])


def bca_tails(
    distribution: ExactDistribution, ordered: Array, probability: float, *, level: float
) -> tuple[float, float]:
    """Tail areas of the BCa interval (Efron 1987) with z0 from exact probabilities.

    Raises ``ValueError`` with the reason where it does not exist.
    """
    estimate = quantile_at(ordered, place_of(probability, ordered.size))
    at = distribution.values == estimate
    share = float(np.sum(distribution.probabilities[distribution.values < estimate]))
    share += 0.5 * float(np.sum(distribution.probabilities[at]))
    if not 0.0 < share < 1.0:
        raise ValueError("all resamples lie on one side of the estimate")
    jackknife = jackknife_values(ordered, probability)
    influence = jackknife.mean() - jackknife
    squares = float(np.sum(influence**2))
    if squares <= (1e-14 * float(np.max(np.abs(jackknife)))) ** 2 * jackknife.size:
        raise ValueError("all jackknife values are equal, so the acceleration does not exist")
    acceleration = float(np.sum(influence**3)) / (6.0 * squares**1.5)
    z0 = float(stats.norm.ppf(share))

    def adjusted(area: float) -> float:
        z = z0 + float(stats.norm.ppf(area))
        return float(stats.norm.cdf(z0 + z / (1.0 - acceleration * z)))

    return adjusted((1.0 - level) / 2), adjusted((1.0 + level) / 2)


def jackknife_values(ordered: Array, probability: float) -> Array:
    """The quantile without each value in turn: only three different values exist, but for their number."""
    n = ordered.size
    other = place_of(probability, n - 1)
    k = other.rank
    without_low = quantile_at(ordered[1:], other)
    without_high = quantile_at(ordered[:-1], other)
    result = np.full(n, without_high)
    result[:k] = without_low
    if other.part > 0.0:
        result[k] = (1.0 - other.part) * ordered[k - 1] + other.part * ordered[k + 1]
    return result


def _window(rank: int, n: int) -> tuple[int, int]:
    """First and last rank that the order statistic of a resample reaches with a probability that matters."""
    low = float(stats.beta.ppf(NEGLIGIBLE, rank, n - rank + 1))
    high = float(stats.beta.isf(NEGLIGIBLE, rank, n - rank + 1))
    return max(1, math.floor(low * n)), min(n, math.ceil(high * n) + 1)


def _merged(values: Array, probabilities: Array) -> ExactDistribution:
    order = np.argsort(values, kind="stable")
    values, probabilities = values[order], probabilities[order]
    starts = np.flatnonzero(np.concatenate([[True], values[1:] != values[:-1]]))
    return ExactDistribution(values[starts], np.add.reduceat(probabilities, starts))
