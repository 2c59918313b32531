"""Outlying differences by the generalized extreme studentized deviate procedure: flagged, never removed."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt
from scipy import stats

from labstat.checking import checked_number, checked_values
from labstat.comparison.results import Array
from labstat.errors import ArgumentError

FEWEST = 10  # the SD of fewer values is itself uncertain by a quarter and more
MOST_FLAGGED = 10  # the longest search that Rosner tabulates


@dataclass(frozen=True, slots=True)
class Flagged:
    """One step of the search: the most deviating of the values still in, its deviate and its critical value."""

    index: int
    value: float
    statistic: float
    critical: float


def flagged(
    differences: npt.ArrayLike, *, largest_share: float = 0.1, alpha: float = 0.05, scale: float = 0.0
) -> tuple[Flagged, ...]:
    """The outliers among ``differences``, the most deviating first; ``()`` for none and below 10 values.

    Up to r = max(1, ⌊largest_share · n⌋) outliers, never more than 10, are looked for at once, so that two that hide
    each other are both found. ``alpha`` is the chance of flagging anything in a normal sample; Rosner found it held
    for n from 25, nearly so from 15, and for r = 1 the procedure is the two-sided test for a single outlier, which
    holds for any n. See ``search`` for ``scale``, for ties and for errors.

    When not to use: for differences whose spread grows with the level (flag percent differences then), and to
    remove results. A flagged specimen is a question to the laboratory, not an error.

    Source: Rosner (1983), Technometrics 25:165-172.
    """
    share = checked_number("largest_share", largest_share)
    if not 0.0 < share < 0.5:
        raise ArgumentError("largest_share", "must lie above 0 and below 0.5", largest_share)
    values = checked_values("differences", differences)
    if values.size < FEWEST:
        return ()
    most = min(max(1, math.floor(share * values.size)), MOST_FLAGGED)
    steps = search(values, most=most, alpha=alpha, scale=scale)
    found = max((count for count, step in enumerate(steps, 1) if step.statistic > step.critical), default=0)
    return steps[:found]


def search(
    differences: npt.ArrayLike, *, most: int, alpha: float = 0.05, scale: float = 0.0
) -> tuple[Flagged, ...]:
    """All ``most`` steps of the search, significant or not: R₁ … Rᵣ beside λ₁ … λᵣ.

    Rᵢ = max |d − d̄| / s of the values still in; λᵢ = (n − i) t / √((n − i − 1 + t²)(n − i + 1)) with t the
    1 − α / (2(n − i + 1)) quantile of Student's t with n − i − 1 degrees of freedom. The
    outliers are the first i for the *largest* i with Rᵢ > λᵢ.

    The search ends early where the values still in no longer spread: an SD below 1e-9 of the largest of them, or
    below 1e-12 of ``scale`` (the size of the results that were subtracted), is rounding, not spread. Of values that
    deviate equally the larger goes first, of equal values the one that stands first.

    Raises ``ArgumentError`` for values that are not one-dimensional and finite, ``most`` outside 1 … n − 2 and
    ``alpha`` outside 0 … 1.

    Source: Rosner (1983), Technometrics 25:165-172.
    """
    values = checked_values("differences", differences)
    n = values.size
    if not 1 <= most <= n - 2:
        raise ArgumentError("most", f"must lie between 1 and n - 2 = {n - 2}", most)
    if not 0.0 < checked_number("alpha", alpha) < 1.0:
        raise ArgumentError("alpha", "must lie between 0 and 1", alpha)
    rounding = 1e-12 * abs(checked_number("scale", scale))
    still_in = np.arange(n)
    steps: list[Flagged] = []
    for i in range(1, most + 1):
        kept = values[still_in]
        deviation, spread = _deviations(kept)
        if spread <= max(rounding, 1e-9 * float(np.max(np.abs(kept)))):
            break
        largest = float(np.max(deviation))
        # Deviations equal but for rounding are a tie, so that the order of the rows does not choose.
        tied = np.flatnonzero(deviation >= largest * (1.0 - 1e-12))
        place = int(tied[np.argmax(kept[tied])])
        t = float(stats.t.ppf(1.0 - alpha / (2.0 * (n - i + 1)), n - i - 1))
        critical = (n - i) * t / math.sqrt((n - i - 1 + t * t) * (n - i + 1))
        steps.append(Flagged(int(still_in[place]), float(kept[place]), largest / spread, critical))
        still_in = np.delete(still_in, place)
    return tuple(steps)


def _deviations(values: Array) -> tuple[Array, float]:
    """Distances from the mean, and the SD, from exact sums: the order of the rows must not reach the last digit."""
    mean = math.fsum(values) / values.size
    distance = np.abs(values - mean)
    return distance, math.sqrt(math.fsum(distance * distance) / (values.size - 1))


__all__ = ["Flagged", "flagged", "search"]
