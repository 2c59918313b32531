"""Checks that every two-sample statistic shares."""

from __future__ import annotations

from collections.abc import Hashable, Sequence

import numpy as np
import numpy.typing as npt

from labstat.comparison.results import Array
from labstat.errors import ArgumentError


def checked_values(name: str, values: npt.ArrayLike) -> Array:
    """A one-dimensional array of finite numbers, copied; raises :class:`ArgumentError` otherwise."""
    try:
        array = np.array(values, dtype=np.float64)
    except (TypeError, ValueError):
        raise ArgumentError(name, "must hold numbers only", values) from None
    if array.ndim != 1:
        raise ArgumentError(name, "must be one-dimensional, but its shape is", array.shape)
    if not np.all(np.isfinite(array)):
        first = int(np.flatnonzero(~np.isfinite(array))[0])
        raise ArgumentError(name, f"must hold finite numbers only, but at position {first} holds", float(array[first]))
    return array


def checked_pairs(x: npt.ArrayLike, y: npt.ArrayLike, *, fewest: int = 3) -> tuple[Array, Array]:
    """Two arrays of one length, at least ``fewest`` pairs; raises :class:`ArgumentError` otherwise."""
    first, second = checked_values("x", x), checked_values("y", y)
    if first.size != second.size:
        raise ArgumentError("y", f"must be as long as x, which has {first.size} values, but has", second.size)
    if first.size < fewest:
        raise ArgumentError("x", f"must hold at least {fewest} pairs, but holds", first.size)
    return first, second


def checked_share(name: str, value: float) -> float:
    """A number strictly between 0 and 1; raises :class:`ArgumentError` otherwise."""
    if isinstance(value, bool) or not isinstance(value, (int, float, np.floating)) or not 0.0 < value < 1.0:
        raise ArgumentError(name, "must lie between 0 and 1", value)
    return float(value)


def cluster_members(clusters: Sequence[Hashable], order: npt.NDArray[np.intp]) -> npt.NDArray[np.intp]:
    """The cluster number of each pair, taken in ``order``; raises :class:`ArgumentError` for bad labels."""
    if len(clusters) != order.size:
        raise ArgumentError("clusters", f"must hold one label a pair, {order.size} in all, but holds", len(clusters))
    # numbered by their first pair in sorted order: independent of the labels' own order
    numbers: dict[Hashable, int] = {}
    members = np.array([numbers.setdefault(clusters[i], len(numbers)) for i in order], dtype=np.intp)
    if len(numbers) < 2:
        raise ArgumentError("clusters", "must hold at least two different labels, but holds", len(numbers))
    return members
