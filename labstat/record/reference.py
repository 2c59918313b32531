"""The reference study as results.json holds it."""

from __future__ import annotations

from labstat.record.values import Json, estimate_record, floating
from labstat.reference.results import OutsideCount
from labstat.round.model import Adopted
from labstat.study.results import GroupResult


def group_record(group: GroupResult) -> Json:
    """One partition with its limits, the adopted interval and what lies outside it."""
    limits = group.limits
    return {
        "partition": dict(group.partition),
        "n": limits.n,
        "method": limits.method,
        "lower": None if limits.lower is None else estimate_record(limits.lower),
        "upper": None if limits.upper is None else estimate_record(limits.upper),
        "asked": limits.asked,
        "probabilities": [floating(p) for p in limits.probabilities],
        "notes": list(limits.notes),
        "failure": limits.failure,
        "seed": limits.seed,
        "adopted": _adopted(group.adopted),
        "outside_adopted": _outside(group.outside_adopted),
    }


def _adopted(adopted: Adopted | None) -> Json | None:
    if adopted is None:
        return None
    return {"where": dict(adopted.where), "low": floating(adopted.low), "high": floating(adopted.high)}


def _outside(outside: OutsideCount | None) -> Json | None:
    if outside is None:
        return None
    return {
        "n": outside.n,
        "below": outside.below, "below_low": floating(outside.below_low), "below_high": floating(outside.below_high),
        "above": outside.above, "above_low": floating(outside.above_low), "above_high": floating(outside.above_high),
    }
