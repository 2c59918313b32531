"""Random small comparisons full of trouble: ties, vertical pairs, duplicates, slopes of exactly -1, and K above 0."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt


@dataclass(frozen=True)
class SmallData:
    """Points as decimal strings, the same as floats, and rows of counts to draw them with."""

    xs: list[str]
    ys: list[str]
    x: npt.NDArray[np.float64]
    y: npt.NDArray[np.float64]
    counts: npt.NDArray[np.uint16]


def small_data(number: int, *, seed: int, rows: int = 3, lowest: int = 0) -> Iterator[SmallData]:
    """``number`` data sets of 4 to 10 points on coarse decimal grids; the first row of counts is all ones."""
    rng = np.random.default_rng(seed)
    for _ in range(number):
        n = int(rng.integers(4, 11))
        x = lowest + rng.integers(0, 13, n)
        y = x + rng.integers(-4, 5, n) * rng.integers(0, 2, n)
        y = np.maximum(y, lowest)
        if rng.random() < 0.3:  # a duplicate
            x[1], y[1] = x[0], y[0]
        if rng.random() < 0.3:  # a pair with a slope of exactly -1
            x[2], y[2] = x[3] + 2, max(int(y[3]) - 2, lowest)
        offset = int(rng.choice([0, 0, 1400]))
        divisor = int(rng.choice([1, 10, 100]))
        digits = len(str(divisor)) - 1
        xs = [f"{(v + offset) / divisor:.{digits}f}" for v in x]
        ys = [f"{(v + offset) / divisor:.{digits}f}" for v in y]
        counts = np.vstack([np.ones((1, n), dtype=np.int64), rng.multinomial(n, np.full(n, 1 / n), size=rows - 1)])
        yield SmallData(xs, ys, np.array(xs, float), np.array(ys, float), counts.astype(np.uint16))
