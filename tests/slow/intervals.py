"""Second implementations of the intervals: loops over sorted lists, standard library only."""

from __future__ import annotations

import math
from collections.abc import Sequence
from statistics import NormalDist


def slow_bound(values: Sequence[float], area: float) -> float:
    """Value at rank area · (B + 1) of the sorted values, linear between ranks, held at both ends."""
    ordered = sorted(values)
    rank = area * (len(ordered) + 1)
    if rank <= 1:
        return ordered[0]
    if rank >= len(ordered):
        return ordered[-1]
    lower = math.floor(rank)
    return ordered[lower - 1] + (rank - lower) * (ordered[lower] - ordered[lower - 1])


def slow_percentile(values: Sequence[float], level: float) -> tuple[float, float]:
    """Both bounds of the percentile interval."""
    return slow_bound(values, (1 - level) / 2), slow_bound(values, (1 + level) / 2)


def slow_bca_areas(
    estimate: float, values: Sequence[float], jackknife: Sequence[float], level: float
) -> tuple[float, float]:
    """Tail areas of the BCa interval (Efron 1987): ties count half in z0, influence values centred."""
    normal = NormalDist()
    below = equal = 0
    for value in values:
        below += value < estimate
        equal += value == estimate
    z0 = normal.inv_cdf((below + equal / 2) / len(values))
    mean = math.fsum(jackknife) / len(jackknife)
    cubes = squares = 0.0
    for value in jackknife:
        influence = mean - value
        cubes += influence**3
        squares += influence**2
    acceleration = cubes / (6 * squares**1.5)

    def area(z: float) -> float:
        return normal.cdf(z0 + (z0 + z) / (1 - acceleration * (z0 + z)))

    return area(normal.inv_cdf((1 - level) / 2)), area(normal.inv_cdf((1 + level) / 2))


def slow_bca(
    estimate: float, values: Sequence[float], jackknife: Sequence[float], level: float
) -> tuple[float, float]:
    """Both bounds of the BCa interval."""
    low, high = slow_bca_areas(estimate, values, jackknife, level)
    return slow_bound(values, low), slow_bound(values, high)


def slow_calibrated_area(estimate: float, inner: Sequence[Sequence[float]], level: float) -> float:
    """Tail area β that min(u, 1 − u) exceeds in a share ``level`` of the first-level resamples (Loh 1987)."""
    shares = []
    for values in inner:
        at_or_below = sum(1 for value in values if value <= estimate)
        u = at_or_below / len(values)
        shares.append(min(u, 1 - u))
    return slow_bound(shares, 1 - level)


def slow_attained(estimate: float, inner: Sequence[Sequence[float]], level: float) -> float:
    """Share of the first-level resamples with u between the two plain tail areas."""
    inside = 0
    for values in inner:
        u = sum(1 for value in values if value <= estimate) / len(values)
        inside += (1 - level) / 2 < u < (1 + level) / 2
    return inside / len(inner)
