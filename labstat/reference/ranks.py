"""Which ranks bound a quantile, how surely, and how many values that takes: exact binomials."""

from __future__ import annotations

import numpy as np
from scipy import stats

LARGEST = 1_000_000


def rank_pair(probability: float, n: int, *, level: float) -> tuple[int, int] | None:
    """Ranks (a, b), counted from 1, of the equal-tailed rank interval of a quantile; ``None`` where none exists.

    The largest a with P(Bin(n, p) <= a - 1) <= alpha/2 and the smallest b with P(Bin(n, p) >= b) <= alpha/2
    (Reed, Henry & Mason 1971; the printed table of CLSI EP28 for p = 0.025 at 90 %). When not to use it: many tied
    values, where it covers more than it says.
    """
    tail = (1.0 - level) / 2.0
    # P(Bin <= a - 1) <= tail, and P(Bin >= b) = 1 - P(Bin <= b - 1) <= tail
    a = int(stats.binom.ppf(tail, n, probability))
    while a >= 1 and stats.binom.cdf(a - 1, n, probability) > tail:
        a -= 1
    while stats.binom.cdf(a, n, probability) <= tail:
        a += 1
    b = int(stats.binom.ppf(1.0 - tail, n, probability)) + 1
    while b > 1 and stats.binom.sf(b - 2, n, probability) <= tail:
        b -= 1
    while stats.binom.sf(b - 1, n, probability) > tail:
        b += 1
    return (a, b) if a >= 1 and b <= n else None


def smallest_n(probability: float, *, level: float) -> int:
    """The smallest number of values for which :func:`rank_pair` exists."""
    tail = (1.0 - level) / 2.0
    p = min(probability, 1.0 - probability)
    # the extreme value must lie beyond the quantile with probability 1 - tail: (1 - p)^n <= tail
    n = max(1, int(np.floor(np.log(tail) / np.log1p(-p))) - 1)
    while rank_pair(probability, n, level=level) is None:
        n += 1
    return n


def attained_coverage(probability: float, n: int, low_rank: int, high_rank: int) -> float:
    """Coverage of the interval from x(a) to x(b): sum of Bin(n, p) from a to b - 1, in any continuous population."""
    if high_rank <= low_rank:
        return 0.0
    return float(stats.binom.cdf(high_rank - 1, n, probability) - stats.binom.cdf(low_rank - 1, n, probability))
