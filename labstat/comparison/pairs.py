"""Checks that every two-sample statistic shares."""

from __future__ import annotations

from collections.abc import Hashable, Sequence

import numpy as np
import numpy.typing as npt

from labstat.checking import checked_values
from labstat.comparison.results import Array
from labstat.errors import ArgumentError


def checked_pairs(x: npt.ArrayLike, y: npt.ArrayLike, *, fewest: int = 3) -> tuple[Array, Array]:
    """Two arrays of one length, at least ``fewest`` pairs; raises :class:`ArgumentError` otherwise."""
    first, second = checked_values("x", x), checked_values("y", y)
    if first.size != second.size:
        raise ArgumentError("y", f"must be as long as x, which has {first.size} values, but has", second.size)
    if first.size < fewest:
        raise ArgumentError("x", f"must hold at least {fewest} pairs, but holds", first.size)
    return first, second


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
