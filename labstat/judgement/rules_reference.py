"""Cautions about the reference limits of one group."""

from __future__ import annotations

from collections.abc import Iterator

from labstat.judgement.rules_comparison import failed_resamples, no_interval, replaced
from labstat.judgement.scene import GroupScene, Rule
from labstat.judgement.wording import counted, listing, number, percent, plain, with_unit
from labstat.reference.ranks import smallest_n
from labstat.resample.estimate import Estimate
from labstat.resample.exact import place_of

STRONG_BELOW = 40  # common practice and CLSI EP28
LEAST_ATTAINED = 0.02
"""How much less than its level an interval may attain before the rank interval is the one to quote."""
WIDEST = 0.2
"""Share of the reference interval that the interval of a limit should not exceed (Harris & Boyd 1995)."""


def limits_of(scene: GroupScene) -> tuple[tuple[str, float, Estimate], ...]:
    """The limits that were computed: side, probability, estimate."""
    limits = scene.group.limits
    low, high = min(limits.probabilities), max(limits.probabilities)
    found = []
    if limits.lower is not None:
        found.append(("lower", low, limits.lower))
    if limits.upper is not None:
        found.append(("upper", high, limits.upper))
    return tuple(found)


def undercovers(estimate: Estimate) -> bool:
    """The interval attains over two points less than its level, and a rank interval exists."""
    return (
        estimate.attained is not None
        and estimate.attained < estimate.level - LEAST_ATTAINED
        and estimate.rank_low is not None
        and estimate.rank_high is not None
    )


def _not_computed(scene: GroupScene) -> str | None:
    n, least = scene.group.limits.n, scene.asked.minimum_n
    if scene.group.limits.failure is not None:
        return f"no reference limits for {scene.name}: {scene.group.limits.failure}"
    if n >= least:
        return None
    return (
        f"no reference limits for {scene.name}: {counted(n, 'reference value')}, {least} are needed and "
        f"{scene.asked.recommended_n} recommended"
    )


def _some_missing(scene: GroupScene) -> str | None:
    limits = scene.group.limits
    if limits.n < scene.asked.minimum_n or limits.failure or len(limits_of(scene)) == len(limits.probabilities):
        return None
    why = "; ".join(limits.notes) or "the method gives none for these values"
    return f"not every limit that was asked for could be computed for {scene.name}: {why}"


def _very_few(scene: GroupScene) -> str | None:
    n = scene.group.limits.n
    if not scene.asked.minimum_n <= n < STRONG_BELOW:
        return None
    return (
        f"{n} reference values for {scene.name} are very few: the limits may be far off, and "
        f"{scene.asked.recommended_n} are "
        "recommended; do not put them into use without further evidence"
    )


def _few(scene: GroupScene) -> str | None:
    n = scene.group.limits.n
    if not max(STRONG_BELOW, scene.asked.minimum_n) <= n < scene.asked.recommended_n:
        return None
    return (
        f"{n} reference values for {scene.name}, {scene.asked.recommended_n} are recommended for limits read from ranks"
    )


def _no_rank_interval(scene: GroupScene) -> str | None:
    n = scene.group.limits.n
    without = [
        (side, e, smallest_n(p, level=e.level))
        for side, p, e in limits_of(scene)
        if e.has_rank and e.rank_low is None and n < smallest_n(p, level=e.level)
    ]
    if not without:
        return None
    needed = listing(f"{least} for the {side} limit" for side, _, least in without)
    attained = [percent(e.attained) for _, e, _ in without if e.attained is not None]
    covers = f"; the interval shown holds the true limit with probability {listing(attained)}" if attained else ""
    level = percent(without[0][1].level)
    return f"{n} values for {scene.name} are too few for a {level} rank interval ({needed}){covers}"


def _skewed(scene: GroupScene) -> str | None:
    limits = scene.group.limits
    if limits.method == "rank" or not limits.notes or not limits_of(scene):
        return None
    return f"{scene.name}: {'; '.join(limits.notes)}"


def _undercovers(scene: GroupScene) -> str | None:
    low = [(side, e) for side, _, e in limits_of(scene) if undercovers(e)]
    if not low:
        return None
    digits = scene.plan.decimals
    parts = [
        f"{side} limit: attains {percent(e.attained or 0.0, 1)}; rank interval {number(e.rank_low or 0.0, digits)} to "
        f"{number(e.rank_high or 0.0, digits)}"
        + (f" attains {percent(e.rank_attained, 1)}" if e.rank_attained is not None else "")
        for side, e in low
    ]
    return (
        f"the {percent(low[0][1].level)} bootstrap interval for {scene.name} claims more than it attains, quote the "
        "rank interval "
        f"({'; '.join(parts)})"
    )


def _extreme(scene: GroupScene) -> str | None:
    limits = scene.group.limits
    if limits.method != "rank":
        return None
    ends = [side for side, p, _ in limits_of(scene) if place_of(p, limits.n).extreme]
    if not ends:
        return None
    return (
        f"for {scene.name} the {listing(ends)} {'limit is' if len(ends) == 1 else 'limits are'} the most extreme "
        "value itself: "
        f"{limits.n} values do not reach so far out"
    )


def _wide(scene: GroupScene) -> str | None:
    found = limits_of(scene)
    if len(found) < 2:
        return None
    width = found[1][2].estimate - found[0][2].estimate
    wide = [
        side
        for side, _, e in found
        if e.low is not None and e.high is not None and e.high - e.low > WIDEST * width
    ]
    if not wide:
        return None
    return (
        f"for {scene.name} the interval of the {listing(wide)} {'limit' if len(wide) == 1 else 'limits'} is wider "
        "than 0.2 of the "
        "reference interval (it happens in 60 % of ordinary studies with 120 values): more values would narrow it"
    )


def _limit_change(scene: GroupScene) -> str | None:
    outside, adopted = scene.group.outside_adopted, scene.group.adopted
    if outside is None or adopted is None:
        return None
    parts = []
    for side, p, _ in limits_of(scene):
        if side == "lower":
            count, low, high, limit, expected = (
                outside.below, outside.below_low, outside.below_high, adopted.low, p,
            )
        else:
            count, low, high, limit, expected = (
                outside.above, outside.above_low, outside.above_high, adopted.high, 1 - p,
            )
        if count is None or low is None or high is None or limit is None or low <= expected <= high:
            continue
        parts.append(
            f"{count} of {outside.n} values lie {'below' if side == 'lower' else 'above'} "
            f"{with_unit(plain(limit), scene.plan.unit)} ({number(1000 * count / outside.n, 0)} per 1,000, interval "
            f"{number(1000 * low, 0)} to {number(1000 * high, 0)}) where {number(1000 * expected, 0)} per 1,000 are "
            "meant, so the "
            f"new limit would flag {'fewer' if expected < low else 'more'} healthy people"
        )
    if not parts:
        return None
    return f"new limits would change what is flagged among {scene.name}: {'; '.join(parts)}"


def _estimates(scene: GroupScene) -> Iterator[tuple[str, Estimate]]:
    for side, _, estimate in limits_of(scene):
        yield f"the {side} limit of {scene.name}", estimate


def _no_interval(scene: GroupScene) -> str | None:
    return no_interval(_estimates(scene))


def _replaced(scene: GroupScene) -> str | None:
    return replaced(_estimates(scene))


def _failed(scene: GroupScene) -> str | None:
    return failed_resamples(_estimates(scene))


GROUP_RULES: tuple[Rule[GroupScene], ...] = (
    Rule("reference-not-computed", "stop", _not_computed),
    Rule("reference-not-computed", "caution", _some_missing),
    Rule("few-reference-values", "caution", _very_few),
    Rule("few-reference-values", "caution", _few),
    Rule("no-rank-interval", "caution", _no_rank_interval),
    Rule("skewed-values", "caution", _skewed),
    Rule("bootstrap-undercovers", "caution", _undercovers),
    Rule("extreme-limit", "caution", _extreme),
    Rule("limit-change", "caution", _limit_change),
    Rule("no-interval", "caution", _no_interval),
    Rule("failed-resamples", "note", _failed),
    Rule("interval-replaced", "note", _replaced),
    Rule("wide-limit", "note", _wide),
)
