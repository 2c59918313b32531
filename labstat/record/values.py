"""Values as results.json holds them."""

from __future__ import annotations

import math
from typing import Any

from labstat.resample.estimate import Estimate

Json = dict[str, Any]


def floating(value: float | None) -> float | None:
    """A plain finite float, or ``None``: results.json has no NaN and no infinity."""
    if value is None or not math.isfinite(value):
        return None
    return float(value)


def estimate_record(estimate: Estimate) -> Json:
    """EST of the interface; the rank keys only where a rank interval belongs to the quantity."""
    record: Json = {
        "estimate": floating(estimate.estimate),
        "low": floating(estimate.low),
        "high": floating(estimate.high),
        "level": float(estimate.level),
        "interval": estimate.interval,
        "resamples": estimate.resamples,
        "monte_carlo_error": floating(estimate.monte_carlo_error),
        "failed_resamples": estimate.failed_resamples,
        "attained": floating(estimate.attained),
    }
    if estimate.has_rank:
        record["rank_low"] = floating(estimate.rank_low)
        record["rank_high"] = floating(estimate.rank_high)
        record["rank_attained"] = floating(estimate.rank_attained)
    if estimate.replaced is not None:
        record["replaced"] = estimate.replaced
    if estimate.reason is not None:
        record["reason"] = estimate.reason
    return record


def plain_text(text: str) -> str:
    """Text that UTF-8 can hold: a lone surrogate (from a file name, say) becomes U+FFFD."""
    return text.encode("utf-16", "surrogatepass").decode("utf-16", "replace")
