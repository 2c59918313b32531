"""Reference limits by rank (nonparametric; Solberg 1987) with their exact bootstrap (Hutson & Ernst 2000)."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import numpy.typing as npt

from labstat.reference.ranks import attained_coverage, rank_pair
from labstat.resample.estimate import Estimate
from labstat.resample.exact import bca_tails, exact_distribution, place_of, quantile_at

Array = npt.NDArray[np.float64]

EXTREME = "p(n + 1) lies off the ranks: the limit is the extreme value itself"


def rank_limit(ordered: Array, probability: float, *, interval: str, level: float) -> Estimate:
    """One limit: r = p(n + 1), linear between neighbours, from ascending values (n,).

    ``interval``: ``"percentile"`` or ``"bca"`` from the exact bootstrap distribution (no Monte Carlo), or ``"rank"``.
    The rank interval stands beside it always (``None`` where it does not exist), each with the coverage it attains in
    any continuous population; for bounds between ranks that of the inner ranks, for tied values that of the outermost
    of them. Values of -inf or +inf stand for results below or above the measuring interval: they take part by
    their rank. When not to use it: fewer than 40 values for outer percentiles.
    """
    n = ordered.size
    place = place_of(probability, n)
    estimate = quantile_at(ordered, place)
    ranks = rank_pair(probability, n, level=level)
    made = Estimate(estimate, None, None, level, interval, "exact", has_rank=True)
    if ranks is not None:
        a, b = ranks
        made = replace(
            made, rank_low=float(ordered[a - 1]), rank_high=float(ordered[b - 1]),
            rank_attained=attained_coverage(probability, n, a, b),
        )
    if interval == "rank":
        if ranks is not None:
            return replace(
                made, low=made.rank_low, high=made.rank_high, resamples=None, attained=made.rank_attained
            )
        made = replace(made, replaced="rank", reason=f"no {100 * level:g} % rank interval exists for {n} values")
    distribution = exact_distribution(ordered, place)
    low_area, high_area, kind = (1.0 - level) / 2.0, (1.0 + level) / 2.0, "percentile"
    if interval == "bca":
        try:
            low_area, high_area = bca_tails(distribution, ordered, probability, level=level)
            kind = "bca"
        except ValueError as error:
            made = replace(made, replaced="bca", reason=str(error))
    low, high = distribution.at_tail(low_area), distribution.at_tail(high_area)
    inner_low = int(np.searchsorted(ordered, low, side="left")) + 1
    inner_high = int(np.searchsorted(ordered, high, side="right"))
    return replace(
        made, low=low, high=high, interval=kind, attained=attained_coverage(probability, n, inner_low, inner_high)
    )
