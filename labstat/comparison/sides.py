"""Specimens that two procedures put on different sides of a decision level."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt
from scipy import stats

from labstat.checking import checked_number
from labstat.comparison.pairs import checked_pairs
from labstat.comparison.results import SideChange

LEVEL = 0.95


def side_change(x: npt.ArrayLike, y: npt.ArrayLike, at: float) -> SideChange:
    """How many specimens change side of the level ``at``, as counts with exact intervals for their shares.

    ``x`` and ``y``: results of the comparative and the candidate procedure, n of each, in the units of ``at``. Up:
    below the level by the comparative, at or above it by the candidate (x < at <= y); down: the other way
    (y < at <= x). Each share of the n specimens has its two-sided 95 % interval of Clopper & Pearson (1934). A result
    within 1e-12 of the level's size counts as at the level, so that the mean of replicates is not put below it by
    rounding.

    When not to use: as a rate among patients. The shares belong to specimens chosen for the comparison, often spread
    over the range on purpose; and near a level some change side by imprecision alone.

    Raises ``ArgumentError`` for arrays that are not finite, one-dimensional, equally long and at least one long, and
    for a level that is not finite.

    Source: Clopper & Pearson (1934), Biometrika 26:404-413.
    """
    x_values, y_values = checked_pairs(x, y, fewest=1)
    level = checked_number("at", at)
    below = level - 1e-12 * abs(level)
    x_below, y_below = x_values < below, y_values < below
    n = int(x_values.size)
    up, down = int(np.sum(x_below & ~y_below)), int(np.sum(y_below & ~x_below))
    up_low, up_high = _clopper_pearson(up, n)
    down_low, down_high = _clopper_pearson(down, n)
    return SideChange(
        at=level, n=n, up=up, up_low=up_low, up_high=up_high, down=down, down_low=down_low, down_high=down_high
    )


def _clopper_pearson(count: int, n: int) -> tuple[float, float]:
    interval = stats.binomtest(count, n).proportion_ci(confidence_level=LEVEL, method="exact")
    return float(interval.low), float(interval.high)


__all__ = ["side_change"]
