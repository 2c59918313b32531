"""Second implementations of the lines: slow, exact where possible, points really repeated, no counts anywhere."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from fractions import Fraction
from statistics import NormalDist

import numpy as np


@dataclass(frozen=True)
class SlowPassingBablok:
    """Passing & Bablok (1983), in rational arithmetic; the last four are ``None`` where the index runs off."""

    slope: float
    intercept: float
    n_slopes: int
    below: int
    m1: int
    m2: int
    slope_low: float | None
    slope_high: float | None
    intercept_low: float | None
    intercept_high: float | None


def repeated(values: Sequence[str], counts: Sequence[int]) -> list[str]:
    """Each value as often as its count says."""
    return [value for value, count in zip(values, counts, strict=True) for _ in range(count)]


def _median(values: list[float]) -> float:
    ordered = sorted(values)
    half = len(ordered) // 2
    return ordered[half] if len(ordered) % 2 else (ordered[half - 1] + ordered[half]) / 2


def slow_passing_bablok(xs: Sequence[str], ys: Sequence[str], level: float = 0.95) -> SlowPassingBablok | None:
    """The line through points given as decimal strings; ``None`` when it has no positive finite middle slope."""
    x, y = [Fraction(v) for v in xs], [Fraction(v) for v in ys]
    n = len(x)
    plus, minus = object(), object()
    finite: list[Fraction] = []
    ups, downs = 0, 0
    for i in range(n):
        for j in range(i + 1, n):
            dx, dy = x[j] - x[i], y[j] - y[i]
            if dx == 0 and dy == 0:
                continue
            if dx == 0:
                ups, downs = (ups + 1, downs) if dy > 0 else (ups, downs + 1)
            elif dy / dx != -1:
                finite.append(dy / dx)
    slopes: list[object] = [minus] * downs + sorted(finite) + [plus] * ups
    size = len(slopes)
    below = downs + sum(1 for s in finite if s < -1)

    def at(rank: int) -> Fraction | None:
        if not 1 <= rank <= size:
            return None
        found = slopes[rank - 1]
        return found if isinstance(found, Fraction) else None

    if size == 0:
        return None
    if size % 2:
        first = second = at((size + 1) // 2 + below)
    else:
        first, second = at(size // 2 + below), at(size // 2 + 1 + below)
    if first is None or second is None or first <= 0 or second <= 0:
        return None
    slope = float(first) if first == second else math.sqrt(first * second)

    def intercept(b: Fraction | float) -> float:
        if isinstance(b, Fraction):
            return _median([float(v - b * u) for u, v in zip(x, y, strict=True)])
        return _median([float(v) - b * float(u) for u, v in zip(x, y, strict=True)])

    c = NormalDist().inv_cdf(0.5 + level / 2) * math.sqrt(n * (n - 1) * (2 * n + 5) / 18)
    m1 = math.floor((size - c) / 2 + 0.5)
    m2 = size - m1 + 1
    low, high = (at(m1 + below) if m1 >= 1 else None), at(m2 + below)
    return SlowPassingBablok(
        slope=slope,
        intercept=intercept(first if first == second else slope),
        n_slopes=size,
        below=below,
        m1=m1,
        m2=m2,
        slope_low=None if low is None else float(low),
        slope_high=None if high is None else float(high),
        intercept_low=None if high is None else intercept(high),
        intercept_high=None if low is None else intercept(low),
    )


def slow_deming(xs: Sequence[float], ys: Sequence[float], variance_ratio: float = 1.0) -> tuple[float, float]:
    """Slope and intercept by total least squares: the direction of largest spread once both errors are alike.

    ``variance_ratio`` is var(error of x) / var(error of y), so y stretched by its root has x's error.
    """
    stretch = math.sqrt(variance_ratio)
    points = np.column_stack([np.asarray(xs, float), stretch * np.asarray(ys, float)])
    centre = points.mean(axis=0)
    along = np.linalg.svd(points - centre, full_matrices=False)[2][0]
    slope = float(along[1] / along[0]) / stretch
    return slope, float(centre[1]) / stretch - slope * float(centre[0])


def slow_weighted_deming(
    xs: Sequence[float], ys: Sequence[float], variance_ratio: float = 1.0, rounds: int = 2000
) -> tuple[float, float]:
    """Weighted Deming with 1/((X + λY)/(1 + λ))² and one point after the other, until it rests."""
    slope, intercept = slow_deming(xs, ys, variance_ratio)
    stretch = math.sqrt(variance_ratio)
    for _ in range(rounds):
        weights = []
        for x, y in zip(xs, ys, strict=True):
            d = y - (intercept + slope * x)
            true_x = x + variance_ratio * slope * d / (1 + variance_ratio * slope**2)
            true_y = y - d / (1 + variance_ratio * slope**2)
            weights.append(((true_x + variance_ratio * true_y) / (1 + variance_ratio)) ** -2)
        total = math.fsum(weights)
        mx = math.fsum(w * x for w, x in zip(weights, xs, strict=True)) / total
        my = math.fsum(w * y for w, y in zip(weights, ys, strict=True)) / total
        scatter = np.zeros((2, 2))
        for w, x, y in zip(weights, xs, ys, strict=True):
            point = np.array([x - mx, stretch * (y - my)])
            scatter += w / total * np.outer(point, point)
        along = np.linalg.eigh(scatter)[1][:, 1]
        slope, before = float(along[1] / along[0]) / stretch, slope
        intercept = my - slope * mx
        if abs(slope - before) <= 1e-14 * abs(slope):
            break
    return slope, intercept
