"""What a reference study says, in one sentence: limits for which groups, and how sure they are."""

from __future__ import annotations

from collections.abc import Iterable

from labstat.judgement.rules_reference import limits_of, undercovers
from labstat.judgement.scene import GroupScene
from labstat.judgement.wording import listing, percent, some
from labstat.study.results import NotComputed


def reference_sentence(scenes: tuple[GroupScene, ...], missing: Iterable[NotComputed]) -> str | None:
    """``None`` where no reference study was asked for."""
    computed = [scene for scene in scenes if limits_of(scene)]
    without = [
        f"{scene.name} ({scene.group.limits.n} values, {scene.asked.minimum_n} needed)"
        if scene.group.limits.n < scene.asked.minimum_n
        else scene.name
        for scene in scenes
        if not limits_of(scene)
    ]
    if not scenes:
        without = [part.where or "the study" for part in missing if part.study == "reference" and part.whole]
    if not computed and not without:
        return None
    none = f"no reference limits for {some(without)}" if without else ""
    if not computed:
        return f"{none[0].upper()}{none[1:]}"
    groups = listing(f"{scene.name} (n = {scene.group.limits.n})" for scene in computed[:4])
    more = f" and {len(computed) - 4} more groups" if len(computed) > 4 else ""
    return f"Reference limits were computed for {groups}{more}{_how_sure(computed)}" + (f"; {none}" if none else "")


def _how_sure(scenes: list[GroupScene]) -> str:
    """How often intervals like these hold the true limit: of the ones to quote."""
    estimates = [estimate for scene in scenes for _, _, estimate in limits_of(scene)]
    level = percent(estimates[0].level)
    attained = [
        share
        for e in estimates
        for share in (e.rank_attained if undercovers(e) else e.attained,)
        if share is not None
    ]
    if not attained:
        return f", with {level} intervals"
    low, high = percent(min(attained)), percent(max(attained))
    between = low if low == high else f"{low} to {high}"
    return f"; their intervals, meant to hold the true limit in {level} of studies, do so in {between}"
