"""Where an axis is marked: nice steps on a linear scale, decades and their parts on a logarithmic one."""

from __future__ import annotations

import itertools
import math

from labstat.report.numbers import number, plain


def linear_ticks(low: float, high: float, *, most: int = 6) -> list[float]:
    """At most ``most`` marks at multiples of 1, 2 or 5 times a power of ten, inside [low, high]."""
    if not high > low or most < 2:
        return [low]
    raw = (high - low) / (most - 1)
    power = 10.0 ** math.floor(math.log10(raw))
    for factor in (1.0, 2.0, 5.0, 10.0, 20.0):
        step = factor * power
        first, last = math.ceil(low / step - 1e-9), math.floor(high / step + 1e-9)
        if last - first + 1 <= most:
            return [index * step for index in range(first, last + 1)]
    return [low]


def log_ticks(low: float, high: float) -> list[float]:
    """Powers of ten inside [low, high], with 2 and 5 times them where the span is short."""
    first, last = math.floor(math.log10(low)), math.ceil(math.log10(high))
    parts = (1.0,) if last - first > 4 else (1.0, 3.0) if last - first > 3 else (1.0, 2.0, 5.0)
    marks = [part * 10.0**power for power in range(first, last + 1) for part in parts]
    return [mark for mark in marks if low * (1 - 1e-9) <= mark <= high * (1 + 1e-9)]


def tick_labels(ticks: list[float]) -> list[str]:
    """Labels with the decimals that the step needs, and no more."""
    if len(ticks) < 2:
        return [plain(tick) for tick in ticks]
    step = min(b - a for a, b in itertools.pairwise(ticks))
    decimals = max(0, -math.floor(math.log10(step) + 1e-9))
    ratios = [b / a for a, b in itertools.pairwise(ticks) if a > 0]
    rising = len(ratios) == len(ticks) - 1  # marks at or below zero are on no logarithmic scale
    if rising and max(ratios) / min(ratios) < 3 and min(ratios) > 1.5 and ticks[-1] / ticks[0] >= 10:
        return [plain(float(f"{tick:.6g}")) for tick in ticks]
    return [number(tick, decimals) for tick in ticks]
