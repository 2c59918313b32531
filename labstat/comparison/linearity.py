"""The cusum test of linearity that belongs to a Passing-Bablok line."""

from __future__ import annotations

import math

import numpy as np
import numpy.typing as npt
from scipy import special

from labstat.checking import checked_number
from labstat.comparison.pairs import checked_pairs
from labstat.comparison.results import Linearity

ROUNDING = 1e-9  # of the scale of the data: closer than this is the same


def cusum(x: npt.ArrayLike, y: npt.ArrayLike, slope: float, intercept: float) -> Linearity:
    """Do the points above and below the line follow each other at random along it?

    ``x`` and ``y``: results of the comparative and the candidate procedure, n of each, in units; ``slope`` and
    ``intercept`` of the line through them. With l points above the line and L below, a point scores √(L/l) above,
    −√(l/L) below and 0 on the line; the scores are summed in the order of the points' projections along the line;
    the statistic is max |cusum| / √(L + 1), its p-value from Kolmogorov's limiting distribution.

    Three rules that the source leaves open. A point counts as on the line within 1e-9 of the scale of the data: the
    line passes through points by construction, and rounding must not choose their side. Points whose projections
    agree to 1e-9 of their scale enter together and the sum is read after the last of them, so that the order of the
    rows cannot matter. With no point above or none below, every score is 0, and so is the statistic (p = 1).

    When not to use: as proof of linearity. The p-value is approximate (in simulation its size at a nominal 5 % was 2
    to 8 %), and its power is modest (39 % against a clear curve at n = 40): a large p does not show linearity.

    Raises ``ArgumentError`` for arrays that are not finite, one-dimensional and equally long, for fewer than two
    points and for a slope or intercept that is not finite.

    Source: Passing & Bablok (1983), J Clin Chem Clin Biochem 21:709-720, section on the test of linearity.
    """
    x_values, y_values = checked_pairs(x, y, fewest=2)
    b, a = checked_number("slope", slope), checked_number("intercept", intercept)
    residual = y_values - (a + b * x_values)
    size = max(float(np.max(np.abs(y_values))), abs(b) * float(np.max(np.abs(x_values))), abs(a))
    side = np.where(np.abs(residual) <= ROUNDING * size, 0.0, np.sign(residual))
    above, below = int(np.sum(side > 0)), int(np.sum(side < 0))
    if above == 0 or below == 0:
        return Linearity(statistic=0.0, p_value=1.0)

    projection = x_values + b * y_values  # in the direction (1, slope); its length does not change the order
    order = np.argsort(projection, kind="stable")
    along = projection[order]
    # Counts, not summed square roots: the running sum is then exact whatever the order within a tie.
    up, down = np.cumsum(side[order] > 0), np.cumsum(side[order] < 0)
    running = up * math.sqrt(below / above) - down * math.sqrt(above / below)
    reach = float(np.max(np.abs(x_values))) + abs(b) * float(np.max(np.abs(y_values)))
    last_of_tie = np.append(np.diff(along) > ROUNDING * reach, True)
    statistic = float(np.max(np.abs(running[last_of_tie]))) / math.sqrt(below + 1)
    return Linearity(statistic=statistic, p_value=float(special.kolmogorov(statistic)))


__all__ = ["cusum"]
