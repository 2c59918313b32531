"""The judgement of one study: findings, cautions and the proposal."""

from __future__ import annotations

from labstat.judgement.case import Case
from labstat.judgement.cautions import cautions, comparison_scenes, group_scenes
from labstat.judgement.findings import questions
from labstat.judgement.model import Finding, Judgement
from labstat.judgement.proposal import proposal, situation
from labstat.judgement.rules_comparison import stopped
from labstat.round.model import AnalytePlan, RoundPlan
from labstat.study.results import StudyResult

EXAMINED_BESIDE: tuple[str, ...] = (
    "linearity", "limit of quantitation", "interference", "carry-over", "stability", "precision", "total error",
)
"""What a validation also needs and this program does not examine, or not yet for this analyte."""


def judge(study: StudyResult, plan: RoundPlan) -> Judgement:
    """What the evidence says, what the reviewer must know, and the sentence put to the director.

    A finding compares the leading interval (the wider of specimens and days) with the allowance: closed, unrounded. A
    stop silences the proposal of its own question and nothing else, and it does not hide ``beyond``.
    """
    asked = questions(study)
    scenes = comparison_scenes(study, plan, asked)
    raised = cautions(study, plan, asked)
    left = not_examined(study.data.plan)
    case = Case(
        study=study,
        questions=asked,
        stops=tuple(scene for scene in scenes if stopped(scene)),
        missing=tuple(part for part in study.not_computed if part.study == "comparison" and part.whole),
        groups=group_scenes(study, plan),
        cautions=raised,
        not_examined=left,
    )
    row, leading = situation(case)
    findings = tuple(q.finding for q in asked if q.finding is not None)
    return Judgement(
        findings=findings,
        cautions=raised,
        proposal=proposal(case),
        urgency=0 if any(part.whole for part in study.not_computed) else row.urgency,
        closeness=max((_share(finding) for finding in findings), default=0.0),
        next_action=row.action(case, leading),
        not_examined=left,
        situation=row.name,
    )


def not_examined(plan: AnalytePlan) -> tuple[str, ...]:
    """What neither this study nor a document named in the plan has examined."""
    named = " / ".join(item.item for item in plan.elsewhere).casefold()
    asked = (
        *(() if plan.comparison is not None else ("agreement with the procedure in use",)),
        *EXAMINED_BESIDE,
        *(() if plan.reference is not None else ("reference limits",)),
    )
    return tuple(item for item in asked if item.casefold() not in named)


def _share(finding: Finding) -> float:
    """The largest share of the allowance that the interval reaches on either side."""
    low, high, bottom, top = finding.low, finding.high, finding.allowed_low, finding.allowed_high
    if low is None or high is None or bottom is None or top is None:
        return 0.0
    shares = [bound / edge for bound, edge in ((high, top), (low, bottom)) if edge != 0]
    return max(shares, default=0.0)
