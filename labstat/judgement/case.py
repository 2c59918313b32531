"""What the proposal's table looks at."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass

from labstat.judgement.findings import Question
from labstat.judgement.model import Caution, Finding
from labstat.judgement.scene import ComparisonScene, GroupScene
from labstat.judgement.wording import listing, plain, with_unit
from labstat.study.results import NotComputed, StudyResult


@dataclass(frozen=True, slots=True, eq=False)
class Case:
    """All that the table looks at. ``asked`` holds the questions that no stop silences."""

    study: StudyResult
    questions: tuple[Question, ...]
    stops: tuple[ComparisonScene, ...]
    missing: tuple[NotComputed, ...]  # candidates that could not be compared
    groups: tuple[GroupScene, ...]
    cautions: tuple[Caution, ...]
    not_examined: tuple[str, ...]

    @property
    def asked(self) -> tuple[Question, ...]:
        silenced = [scene.result for scene in self.stops]
        return tuple(q for q in self.questions if q.result not in silenced)

    @property
    def unit(self) -> str:
        return self.study.data.plan.unit

    @property
    def decimals(self) -> int:
        return self.study.data.plan.decimals

    def at(self, questions: Sequence[Question]) -> str:
        """``90 and 250 µmol/L``, with the candidate where there are several."""
        plan = self.study.data.plan.comparison
        several = plan is not None and len(plan.candidates) > 1
        parts = []
        for candidate in dict.fromkeys(q.result.data.candidate for q in questions):
            levels = [plain(q.level.level.at) for q in questions if q.result.data.candidate == candidate]
            parts.append(with_unit(listing(levels), self.unit) + (f" ({candidate})" if several else ""))
        return listing(parts)


def finding_of(question: Question) -> Finding:
    if question.finding is None:
        raise ValueError("a level without an allowance has no finding")
    return question.finding


def those(questions: Sequence[Question], holds: Callable[[Finding], bool]) -> tuple[Question, ...] | None:
    return tuple(q for q in questions if q.finding is not None and holds(q.finding)) or None


def is_beyond(finding: Finding) -> bool:
    return finding.counts == "beyond"


def is_inside(finding: Finding) -> bool:
    """Not settled, with the estimate inside the allowance."""
    return finding.finding == "unsettled" and not is_outside(finding)


def is_outside(finding: Finding) -> bool:
    if finding.finding != "unsettled" or finding.estimate is None:
        return False
    if finding.allowed_low is None or finding.allowed_high is None:
        return False
    return not finding.allowed_low <= finding.estimate <= finding.allowed_high


def rests(finding: Finding) -> bool:
    return finding.finding in ("within", "beyond") and finding.counts == "unsettled"


def is_within(finding: Finding) -> bool:
    return finding.counts == "within"
