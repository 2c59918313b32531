"""How many specimens would settle what is not settled yet."""

from __future__ import annotations

import math

from labstat.checking import checked_number
from labstat.errors import ArgumentError

MOST = 500  # beyond this a number would be read as a plan that no laboratory follows

# (1.96 + 0.84) / 1.96: the half-width must shrink to m / 1.43 for the interval to stay inside the edge in about
# 80 % of repetitions, and a half-width shrinks with the root of n.
FACTOR = 1.43


def settling_n(n: int, half_width: float, margin: float) -> int | None:
    """About how many specimens *in all* would settle a finding, ``None`` where no useful number exists.

    n · (1.43 · h / m)², rounded up, never below ``n + 1``: ``n`` specimens so far, ``half_width`` h of the interval
    they gave, ``margin`` m the distance of the estimate from the nearer edge of the allowance (in the same units as
    h; zero or negative when the estimate lies on or outside the edge). ``None`` when m <= 0, because more specimens
    are then as likely to settle it the other way, and above 500.

    A rough guide for a chance of about 80 %, and no more: it takes the estimate as it stands for the truth, the
    interval for a normal one, and new specimens for like the old ones. When not to use: to plan a study from the
    start, or when the interval comes from few days (more days are then needed, not more specimens).

    Raises ``ArgumentError`` for ``n`` below 1, a negative ``half_width``, and numbers that are not finite.
    """
    if n < 1:
        raise ArgumentError("n", "must be at least 1", n)
    h, m = checked_number("half_width", half_width), checked_number("margin", margin)
    if h < 0.0:
        raise ArgumentError("half_width", "must not be negative", half_width)
    if m <= 0.0:
        return None
    root = FACTOR * h / m if h < m * MOST else math.inf  # beyond that far above 500, and the square could overflow
    if not math.isfinite(root):
        return None
    # Rounded first, so that a product that is whole but for its last bit does not cost a specimen.
    needed = max(math.ceil(round(n * root * root, 9)), n + 1)
    return needed if needed <= MOST else None


__all__ = ["settling_n"]
