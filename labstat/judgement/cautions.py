"""All rules put to one study, each caution with the question it belongs to."""

from __future__ import annotations

from collections.abc import Iterable, Iterator

from labstat.judgement.findings import Question
from labstat.judgement.model import Caution, Weight
from labstat.judgement.rules_analyte import ANALYTE_RULES
from labstat.judgement.rules_comparison import COMPARISON_RULES
from labstat.judgement.rules_level import LEVEL_RULES
from labstat.judgement.rules_reference import GROUP_RULES
from labstat.judgement.scene import (
    BIAS,
    LIMITS,
    AnalyteScene,
    ComparisonScene,
    GroupScene,
    LevelScene,
    Rule,
    S,
)
from labstat.round.model import RoundPlan
from labstat.study.results import StudyResult

ORDER: dict[Weight, int] = {"stop": 0, "caution": 1, "note": 2}


def comparison_scenes(
    study: StudyResult, plan: RoundPlan, questions: tuple[Question, ...]
) -> tuple[ComparisonScene, ...]:
    asked = study.data.plan.comparison
    if asked is None:
        return ()
    return tuple(
        ComparisonScene(study, plan, asked, result, tuple(q for q in questions if q.result is result))
        for result in study.comparisons
    )


def group_scenes(study: StudyResult, plan: RoundPlan) -> tuple[GroupScene, ...]:
    asked = study.data.plan.reference
    return () if asked is None else tuple(GroupScene(study, plan, asked, group) for group in study.groups)


def cautions(study: StudyResult, plan: RoundPlan, questions: tuple[Question, ...]) -> tuple[Caution, ...]:
    """Every caution that holds: stops first, notes last, otherwise in the order of the studies and the rules."""
    found = sorted(_all(study, plan, questions), key=lambda caution: ORDER[caution.weight])
    return tuple(found)


def _all(study: StudyResult, plan: RoundPlan, questions: tuple[Question, ...]) -> Iterator[Caution]:
    yield from _parts_not_computed(study)
    scenes = comparison_scenes(study, plan, questions)
    for scene in scenes:
        candidate = f"{BIAS}, {scene.result.data.candidate}"
        yield from _apply(COMPARISON_RULES, scene, BIAS if len(scenes) == 1 else candidate)
        for question in scene.questions:
            at = LevelScene(study, plan, scene.asked, scene.result, scene.questions, question)
            yield from _apply(LEVEL_RULES, at, f"{BIAS}, {question.where}")
    for group in group_scenes(study, plan):
        yield from _apply(GROUP_RULES, group, f"{LIMITS}, {group.name}")
    yield from _apply(ANALYTE_RULES, AnalyteScene(study, plan), None)


def _apply(rules: Iterable[Rule[S]], scene: S, question: str | None) -> Iterator[Caution]:
    for rule in rules:
        text = rule.says(scene)
        if text is not None:
            yield Caution(rule.code, rule.weight, _sentence(text), question)


def _parts_not_computed(study: StudyResult) -> Iterator[Caution]:
    """Parts that the plan asks for and that do not exist: a stop for their own question."""
    told_by_group = any(group.limits.failure is not None for group in study.groups)
    for part in study.not_computed:
        if part.study == "reference" and told_by_group:
            continue
        base = BIAS if part.study == "comparison" else LIMITS
        code = "not-computed" if part.study == "comparison" else "reference-not-computed"
        where = f" ({part.where})" if part.where else ""
        text = f"the {part.study} could not be computed{where}: {part.reason}"
        weight: Weight = "stop" if part.whole else "caution"
        yield Caution(code, weight, _sentence(text), f"{base}, {part.where}" if part.where else base)


def _sentence(text: str) -> str:
    text = text[:1].upper() + text[1:]
    return text if text.endswith((".", "?", "!")) else f"{text}."
