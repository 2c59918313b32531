"""From intervals and allowances to findings: comparing, nothing else."""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass

from labstat.comparison.results import Bias
from labstat.comparison.settle import settling_n
from labstat.judgement.model import Finding, FindingWord
from labstat.judgement.wording import listing, plain, some, with_unit
from labstat.study.results import BiasAtLevel, ComparisonResult, StudyResult

FEWEST_NEAR = 5
"""Specimens within 25 % of a level below which nothing counts as within (common practice, no source)."""


@dataclass(frozen=True, slots=True, eq=False)
class Question:
    """One decision level of one comparison with its finding (``None`` where nothing is allowed, so nothing asked)."""

    result: ComparisonResult
    level: BiasAtLevel
    where: str
    finding: Finding | None


def compare(low: float, high: float, allowed_low: float, allowed_high: float) -> FindingWord:
    """An interval against an allowance: both closed, both unrounded."""
    if allowed_low <= low and high <= allowed_high:
        return "within"
    if high < allowed_low or low > allowed_high:
        return "beyond"
    return "unsettled"


def questions(study: StudyResult) -> tuple[Question, ...]:
    """Every decision level of every comparison, in the plan's order."""
    unit = study.data.plan.unit
    return tuple(
        Question(result, level, where, _finding(result, level, where))
        for result in study.comparisons
        for level in result.levels
        for where in (f"{with_unit(plain(level.level.at), unit)}, {result.data.candidate}",)
    )


def _finding(result: ComparisonResult, level: BiasAtLevel, where: str) -> Finding | None:
    allowance = level.level.allowable
    if allowance is None:
        return None
    edges = allowance.at(level.level.at)
    leading = level.leading.bias
    raw = _word(level.leading, edges)
    finding: FindingWord = raw
    rests_on = None
    if not level.covered or level.censored_near:
        finding = "not covered"
    else:
        rests_on = "; ".join(_changes(result, level, raw, edges)) or None
        if raw == "within" and level.near < FEWEST_NEAR:
            finding = "unsettled"
    counts: FindingWord = "unsettled" if rests_on else finding
    settles = _settles(result.n, level, edges) if raw == finding == "unsettled" else None
    return Finding(
        study="comparison",
        question="bias",
        where=where,
        candidate=result.data.candidate,
        at=level.level.at,
        estimate=leading.estimate,
        low=leading.low,
        high=leading.high,
        allowance=allowance.text,
        allowed_low=edges[0],
        allowed_high=edges[1],
        source=level.level.source,
        finding=finding,
        counts=counts,
        rests_on=rests_on,
        settles_at_n=settles,
    )


def _word(bias: Bias, edges: tuple[float, float]) -> FindingWord:
    if bias.bias.low is None or bias.bias.high is None:
        return "unsettled"  # without an interval nothing is settled
    return compare(bias.bias.low, bias.bias.high, *edges)


def _changes(
    result: ComparisonResult, level: BiasAtLevel, word: FindingWord, edges: tuple[float, float]
) -> Iterator[str]:
    """On what the finding rests: what, left out or taken differently, would change its word."""
    units = [
        without.unit
        for without in level.without_specimen
        if math.isfinite(without.low) and math.isfinite(without.high)
        and compare(without.low, without.high, *edges) != word
    ]
    one = result.unit_of_resampling.removesuffix("s")
    if len(units) == 1:
        yield f"rests on {one} {units[0]}"
    elif units:
        yield f"rests on any single one of {one}s {some(units)}"
    if level.without_outliers is not None and _word(level.without_outliers, edges) != word:
        flagged = [outlier.specimen for outlier in result.outliers]
        if flagged != units:
            yield f"rests on the flagged {'outlier' if len(flagged) == 1 else 'outliers'} {some(flagged)}"
    if level.by_day is not None and _word(level.by_day, edges) != _word(level.bias, edges):
        words = [f"{_word(bias, edges)} by {unit}" for bias, unit in ((level.bias, one + "s"), (level.by_day, "days"))]
        yield f"rests on the unit that is resampled ({listing(words)})"


def _settles(n: int, level: BiasAtLevel, edges: tuple[float, float]) -> int | None:
    bias = level.leading.bias
    if bias.low is None or bias.high is None:
        return None
    margin = min(bias.estimate - edges[0], edges[1] - bias.estimate)  # below zero outside the allowance
    return settling_n(n, (bias.high - bias.low) / 2, margin)
