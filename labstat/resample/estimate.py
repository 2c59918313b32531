"""What every estimate carries."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal


@dataclass(frozen=True, slots=True)
class Estimate:
    """A number with its interval and how the interval was obtained.

    ``low`` and ``high`` are ``None`` where no interval exists; ``reason`` then says why. ``interval`` names the
    interval that was used; ``replaced`` names the one that was asked for when that one could not be had, and
    ``reason`` says why. ``resamples`` is the number of first-level resamples, ``"exact"`` where the bootstrap
    distribution is known in closed form, ``None`` where nothing was resampled. ``monte_carlo_error`` is the larger
    standard error of the two bounds that comes from drawing a finite number of resamples. ``attained`` is the
    estimated coverage: for calibrated and percentile intervals of a line that of the plain percentile interval on
    these data, for rank statistics that of this interval in any continuous population. ``rank_low`` and
    ``rank_high`` hold the classical rank interval where there is one, ``rank_attained`` its coverage.
    """

    estimate: float
    low: float | None
    high: float | None
    level: float
    interval: str
    resamples: int | Literal["exact"] | None = None
    monte_carlo_error: float | None = None
    failed_resamples: int = 0
    attained: float | None = None
    rank_low: float | None = None
    rank_high: float | None = None
    rank_attained: float | None = None
    has_rank: bool = False
    replaced: str | None = None
    reason: str | None = None
