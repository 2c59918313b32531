"""Cautions about one decision level."""

from __future__ import annotations

from labstat.judgement.findings import FEWEST_NEAR, compare
from labstat.judgement.scene import LevelScene, Rule
from labstat.judgement.wording import counted, number, plain, some, with_unit
from labstat.resample.estimate import Estimate


def _at(scene: LevelScene) -> str:
    return with_unit(plain(scene.question.level.level.at), scene.plan.unit)


def _near(scene: LevelScene) -> str | None:
    near = scene.question.level.near
    if near >= FEWEST_NEAR:
        return None
    return (
        f"{counted(near, 'specimen')} within 25 % of {_at(scene)}, {FEWEST_NEAR} are needed: the bias there rests on "
        "the line "
        "through specimens further away"
    )


def _not_covered(scene: LevelScene) -> str | None:
    if scene.question.level.covered:
        return None
    low, high = scene.result.range
    return (
        f"the bias at {_at(scene)} is extrapolated: the specimens reach from {number(low, scene.plan.decimals)} to "
        f"{scene.amount(high)}"
    )


def _censored(scene: LevelScene) -> str | None:
    near = scene.question.level.censored_near
    if not near:
        return None
    return (
        f"{counted(len(near), 'specimen')} within a factor of two of {_at(scene)} with a result outside a measuring "
        "interval "
        f"({some(near)}): how the procedures agree there is not known"
    )


def _changed_by_chance(estimate: Estimate, scene: LevelScene) -> str | None:
    """Whether other resamples could give another word: the bounds moved by twice their Monte-Carlo error."""
    error, allowance = estimate.monte_carlo_error, scene.question.level.level.allowable
    if error is None or estimate.low is None or estimate.high is None or allowance is None:
        return None
    edges = allowance.at(scene.question.level.level.at)
    word = compare(estimate.low, estimate.high, *edges)
    for low in (estimate.low - 2 * error, estimate.low + 2 * error):
        for high in (estimate.high - 2 * error, estimate.high + 2 * error):
            if low <= high and compare(low, high, *edges) != word:
                return compare(low, high, *edges)
    return None


def _chance_finding(scene: LevelScene) -> str | None:
    estimate = scene.question.level.leading.bias
    other = _changed_by_chance(estimate, scene)
    if other is None:
        return None
    return (
        f"with other random numbers the bias at {_at(scene)} could be found {other}: the bounds are known to "
        f"± {number(2 * (estimate.monte_carlo_error or 0.0), scene.plan.decimals + 2)}; take more resamples than "
        f"{estimate.resamples}"
    )


def _chance_digit(scene: LevelScene) -> str | None:
    estimate = scene.question.level.leading.bias
    error = estimate.monte_carlo_error
    if error is None or _changed_by_chance(estimate, scene) is not None:
        return None
    if error <= 10.0**-scene.plan.decimals / 4:
        return None
    return (
        f"the last digit of the interval at {_at(scene)} could change with other random numbers (Monte-Carlo error "
        f"{number(error, scene.plan.decimals + 2)})"
    )


def _total_error(scene: LevelScene) -> str | None:
    if scene.question.level.level.total_error is None:
        return None
    return (
        f"the allowable total error at {_at(scene)} ({scene.question.level.level.total_error.text}) was not "
        "assessed: it needs a "
        "precision study"
    )


def _no_allowance(scene: LevelScene) -> str | None:
    others = any(q.finding is not None for q in scene.questions)
    if scene.question.finding is not None or not others:
        return None  # where no level has one, the comparison says so once
    return f"the plan gives no allowable bias at {_at(scene)}: the number there is an estimate only"


def _no_source(scene: LevelScene) -> str | None:
    level = scene.question.level.level
    named = level.source is not None and level.source.strip()
    if level.allowable is None or named:
        return None
    return f"the allowance at {_at(scene)} ({level.allowable.text}) names no source"


def _rests(scene: LevelScene) -> str | None:
    finding = scene.question.finding
    if finding is None or finding.rests_on is None:
        return None
    if finding.finding == finding.counts:
        return f"the finding at {_at(scene)}, {finding.finding}, {finding.rests_on}: otherwise it would be another"
    return (
        f"the finding at {_at(scene)}, {finding.finding}, {finding.rests_on} and counts as {finding.counts}: "
        "investigate before "
        "deciding"
    )


def _percent_missing(scene: LevelScene) -> str | None:
    if scene.question.level.bias.percent is not None:
        return None
    return f"no percentage exists at a level of {_at(scene)}"


LEVEL_RULES: tuple[Rule[LevelScene], ...] = (
    Rule("not-covered", "caution", _not_covered),
    Rule("censored-near-level", "caution", _censored),
    Rule("few-near-level", "caution", _near),
    Rule("rests-on", "caution", _rests),
    Rule("monte-carlo", "caution", _chance_finding),
    Rule("monte-carlo", "note", _chance_digit),
    Rule("no-precision", "caution", _total_error),
    Rule("no-source", "caution", _no_source),
    Rule("no-allowance", "note", _no_allowance),
    Rule("level-zero", "note", _percent_missing),
)

__all__ = ["LEVEL_RULES"]
