"""Robust limits by plain loops over really repeated values: another way to the same numbers."""

from __future__ import annotations

import math
import statistics
from collections.abc import Sequence

from scipy import stats


def location(values: Sequence[float], tuning: float, scale: float) -> float:
    """Biweight location, iterated from the median."""
    t = statistics.median(values)
    for _ in range(2000):
        above = below = 0.0
        for value in values:
            u = (value - t) / (tuning * scale)
            if abs(u) < 1:
                above += (1 - u * u) ** 2 * value
                below += (1 - u * u) ** 2
        new = above / below
        if abs(new - t) <= 1e-13 * scale:
            return new
        t = new
    raise AssertionError("the location does not settle")


def spread(values: Sequence[float], tuning: float, centre: float, scale: float, *, factor: float, plain: bool) -> float:
    """(c s)² · factor · A / D', with D' = D² for ``plain`` (the textbook midvariance) and D·max(1, D − 1) otherwise."""
    a = d = 0.0
    for value in values:
        u = (value - centre) / (tuning * scale)
        if abs(u) < 1:
            a += u * u * (1 - u * u) ** 4
            d += (1 - u * u) * (1 - 5 * u * u)
    return (tuning * scale) ** 2 * factor * a / (d * d if plain else d * max(1.0, d - 1.0))


def limits(values: Sequence[float], *, probability: float = 0.975) -> tuple[float, float]:
    """T ± t(n − 1, p)·√(S² + S_T²)."""
    n = len(values)
    median = statistics.median(values)
    s0 = statistics.median([abs(value - median) for value in values]) / 0.6745
    t = location(values, 3.7, s0)
    wide = spread(values, 205.6, median, s0, factor=n, plain=False)
    q = math.sqrt(spread(values, 3.7, median, s0, factor=n, plain=False))
    of_location = spread(values, 3.7, t, q, factor=1.0, plain=False)
    reach = float(stats.t.ppf(probability, n - 1)) * math.sqrt(wide + of_location)
    return t - reach, t + reach
