"""Second implementations of the cusum test and of the extreme studentized deviates."""

from __future__ import annotations

import math
import statistics
from collections.abc import Sequence
from fractions import Fraction

from scipy import stats


def slow_cusum(xs: Sequence[int], ys: Sequence[int], slope: Fraction, intercept: Fraction) -> float:
    """max |cusum| / √(L + 1) for whole numbers, exact sides and projections, ties entering together."""
    sides = []
    for x, y in zip(xs, ys, strict=True):
        residual = y - intercept - slope * x
        sides.append((residual > 0) - (residual < 0))
    above, below = sides.count(1), sides.count(-1)
    score = {
        1: math.sqrt(below / above) if above else 0.0,
        -1: -math.sqrt(above / below) if below else 0.0,
        0: 0.0,
    }
    groups: dict[Fraction, list[int]] = {}
    for x, y, side in zip(xs, ys, sides, strict=True):
        groups.setdefault(Fraction(x) + slope * y, []).append(side)
    running, largest = 0.0, 0.0
    for place in sorted(groups):
        for side in groups[place]:
            running += score[side]
        largest = max(largest, abs(running))
    return largest / math.sqrt(below + 1)


def slow_esd(values: Sequence[float], most: int, alpha: float) -> list[tuple[float, float, float]]:
    """(value, R, λ) of each step of Rosner's search, removing one value after the other from a list."""
    left, steps = list(values), []
    for _ in range(most):
        mean, sd, m = statistics.fmean(left), statistics.stdev(left), len(left)
        worst = max(left, key=lambda value: abs(value - mean))
        t = stats.t.ppf(1 - alpha / (2 * m), m - 2)
        steps.append((worst, abs(worst - mean) / sd, (m - 1) * t / math.sqrt((m - 2 + t * t) * m)))
        left.remove(worst)
    return steps
