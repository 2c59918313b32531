"""How many reference individuals lie outside an interval in use, each side apart."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt
from scipy import stats

from labstat.errors import ArgumentError
from labstat.reference.results import OutsideCount

LEVEL = 0.95


def outside_interval(values: npt.NDArray[np.float64], *, low: float | None, high: float | None) -> OutsideCount:
    """Counts strictly below ``low`` and strictly above ``high`` among ``values`` (n,), n >= 1.

    Each share of the n has its two-sided 95 % interval of Clopper & Pearson (1934). A side without a limit has
    ``None``. When not to use it: as a verification by itself; what counts as acceptable is the laboratory's rule.
    """
    n = int(values.size)
    if n == 0:
        raise ArgumentError("values", "must hold at least one value, but holds", 0)
    below = None if low is None else int(np.count_nonzero(values < low))
    above = None if high is None else int(np.count_nonzero(values > high))
    below_low, below_high = _clopper_pearson(below, n)
    above_low, above_high = _clopper_pearson(above, n)
    return OutsideCount(n, below, below_low, below_high, above, above_low, above_high)


def _clopper_pearson(count: int | None, n: int) -> tuple[float | None, float | None]:
    if count is None:
        return None, None
    interval = stats.binomtest(count, n).proportion_ci(confidence_level=LEVEL, method="exact")
    return float(interval.low), float(interval.high)
