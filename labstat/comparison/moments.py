"""Ordinary and Deming lines in closed form, from the moments of many resamples at once."""

from __future__ import annotations

from typing import Any

import numpy as np
import numpy.typing as npt

from labstat.comparison.results import Array
from labstat.resample.counts import Counts
from labstat.resample.engine import Statistic

_ROWS = 64
"""Rows are padded to a multiple of this: a matrix product may round differently in an incomplete group of rows."""


class Moments:
    """Weighted means, sums of squares and products of (x, y) for rows of counts.

    Data are centred and scaled first, so that large means with a small spread lose nothing.
    """

    __slots__ = ("centre_x", "centre_y", "columns", "scale_x", "scale_y")

    def __init__(self, x: Array, y: Array) -> None:
        self.centre_x, self.centre_y = float(np.mean(x)), float(np.mean(y))
        dx, dy = x - self.centre_x, y - self.centre_y
        self.scale_x = float(np.max(np.abs(dx))) or 1.0
        self.scale_y = float(np.max(np.abs(dy))) or 1.0
        dx, dy = dx / self.scale_x, dy / self.scale_y
        self.columns = np.column_stack([np.ones_like(dx), dx, dy, dx * dx, dy * dy, dx * dy])

    def __call__(self, weights: npt.NDArray[Any]) -> tuple[Array, Array, Array, Array, Array]:
        """Mean of x, mean of y, u, q, p for each row of counts or weights (rows, n), in the scale of the data."""
        rows = weights.shape[0]
        padded = np.zeros((-(-rows // _ROWS) * _ROWS, weights.shape[1]))
        padded[:rows] = weights
        total, sx, sy, sxx, syy, sxy = (padded @ self.columns)[:rows].T
        with np.errstate(divide="ignore", invalid="ignore"):
            mx, my = sx / total, sy / total
            u = np.maximum(sxx - sx * mx, 0.0)
            q = np.maximum(syy - sy * my, 0.0)
            p = sxy - sx * my
        # below rounding there is no spread: such a resample holds one point only
        tiny = 1e-14 * total
        u, q = np.where(u <= tiny, 0.0, u), np.where(q <= tiny, 0.0, q)
        p = np.where((u == 0.0) | (q == 0.0) | (np.abs(p) <= tiny), 0.0, p)
        return (
            self.centre_x + self.scale_x * mx,
            self.centre_y + self.scale_y * my,
            u * self.scale_x**2,
            q * self.scale_y**2,
            p * self.scale_x * self.scale_y,
        )


def deming_slope(u: Array, q: Array, p: Array, variance_ratio: float | Array) -> Array:
    """Slope ((λq − u) + √((u − λq)² + 4λp²)) / (2λp) (Linnet 1990); NaN where p is 0.

    Written without cancellation: where λq < u the same root is 2p / ((u − λq) + √…).
    """
    excess = variance_ratio * q - u
    with np.errstate(divide="ignore", invalid="ignore"):
        root = np.hypot(excess, 2.0 * np.sqrt(variance_ratio) * p)
        slope = np.where(excess > 0.0, (excess + root) / (2.0 * variance_ratio * p), 2.0 * p / (root - excess))
    return np.where(p == 0.0, np.nan, slope)


def ordinary(x: Array, y: Array) -> Statistic:
    """Least squares of y on x by counts: (rows, 2) slope and intercept. Biased low when x has error of its own."""
    moments = Moments(x, y)

    def by_counts(counts: Counts) -> Array:
        mx, my, u, _, p = moments(counts)
        with np.errstate(divide="ignore", invalid="ignore"):
            slope = np.where(u == 0.0, np.nan, p / u)
        return np.column_stack([slope, my - slope * mx])

    return by_counts


def deming(x: Array, y: Array, variance_ratio: float) -> Statistic:
    """Deming line (Linnet 1990) by counts: (rows, 2) slope and intercept.

    ``variance_ratio`` is var(error of x) / var(error of y). When not to use it: the spread of the differences
    grows with the level (weighted Deming), gross outliers (Passing-Bablok).
    """
    moments = Moments(x, y)

    def by_counts(counts: Counts) -> Array:
        mx, my, u, q, p = moments(counts)
        slope = deming_slope(u, q, p, variance_ratio)
        return np.column_stack([slope, my - slope * mx])

    return by_counts
