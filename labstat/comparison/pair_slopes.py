"""All pair slopes of a Passing-Bablok line, sorted once, in an order that starts just above -1."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from labstat.comparison.results import Array

MINUS_ONE = 1e-9
"""dx + dy below this share of the data's scale counts as a slope of exactly -1: a fact of the decimal data."""

ZERO = 1e-12
"""A difference below this share of the data's scale counts as zero."""


@dataclass(frozen=True, slots=True, eq=False)
class PairSlopes:
    """Sorted slopes with the two points of each.

    ``slopes`` (pairs,) ascend from just above -1 to +inf and go on with those below -1: so the shifted median
    S[(N + 1)/2 + K] is the plain median of this sequence, and it depends neither on the sign given to a
    vertical pair nor on the order of the points. ``wrapped`` is the index of the first vertical or smaller slope: a
    rank from there on has no slope. ``below`` is K.
    """

    n: int
    slopes: Array
    first: npt.NDArray[np.intp]
    second: npt.NDArray[np.intp]
    wrapped: int
    below: int


def pair_slopes(x: Array, y: Array, *, places: npt.NDArray[np.intp] | None = None) -> PairSlopes:
    """Slopes of all pairs i < j (Passing & Bablok 1983): identical points and slopes of exactly -1 are dropped.

    K (``below``) counts the slopes below -1, a vertical pair among them when y falls from the earlier to the
    later point; ``places`` tells each point's place in the user's order (the order given otherwise).
    """
    n = x.size
    first, second = np.triu_indices(n, 1)
    dx, dy = x[second] - x[first], y[second] - y[first]
    scale = max(float(np.max(np.abs(x))), float(np.max(np.abs(y))))
    dx[np.abs(dx) <= ZERO * scale] = 0.0
    dy[np.abs(dy) <= ZERO * scale] = 0.0
    keep = ((dx != 0.0) | (dy != 0.0)) & (np.abs(dx + dy) > MINUS_ONE * scale)
    dx, dy, first, second = dx[keep], dy[keep], first[keep], second[keep]
    vertical = dx == 0.0
    slopes = np.full(dx.shape, np.inf)
    np.divide(dy, dx, out=slopes, where=~vertical)
    steep = slopes < -1.0
    order = np.lexsort((slopes, steep))
    falls = dy < 0.0 if places is None else (dy < 0.0) != (places[first] > places[second])
    below = int(np.count_nonzero(steep) + np.count_nonzero(vertical & falls))
    wrapped = int(np.count_nonzero(~steep & ~vertical))
    return PairSlopes(n, slopes[order], first[order], second[order], wrapped, below)
