"""What a rule may look at, and what a rule is."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Generic, TypeVar

from labstat.judgement.findings import Question
from labstat.judgement.model import Weight
from labstat.judgement.wording import group_name, number, with_unit
from labstat.round.model import AnalytePlan, ComparisonPlan, ReferencePlan, RoundPlan
from labstat.study.results import ComparisonResult, GroupResult, StudyResult

BIAS = "bias"
LIMITS = "reference limits"


@dataclass(frozen=True, slots=True, eq=False)
class AnalyteScene:
    """The whole analyte."""

    study: StudyResult
    round: RoundPlan

    @property
    def plan(self) -> AnalytePlan:
        return self.study.data.plan

    def amount(self, value: float) -> str:
        """A number in the analyte's decimals and unit."""
        return with_unit(number(value, self.plan.decimals), self.plan.unit)


@dataclass(frozen=True, slots=True, eq=False)
class ComparisonScene(AnalyteScene):
    """One candidate; ``questions`` are its decision levels."""

    asked: ComparisonPlan
    result: ComparisonResult
    questions: tuple[Question, ...]

    @property
    def units(self) -> str:
        return self.result.unit_of_resampling

    @property
    def pair(self) -> str:
        return f"{self.result.data.candidate} against {self.result.data.comparative}"


@dataclass(frozen=True, slots=True, eq=False)
class LevelScene(ComparisonScene):
    """One decision level of one candidate."""

    question: Question


@dataclass(frozen=True, slots=True, eq=False)
class GroupScene(AnalyteScene):
    """One partition of the reference study."""

    asked: ReferencePlan
    group: GroupResult

    @property
    def name(self) -> str:
        return group_name(self.group.partition)


S = TypeVar("S", bound=AnalyteScene)


@dataclass(frozen=True, slots=True)
class Rule(Generic[S]):
    """A caution: its code, its weight, and the sentence where it applies (``None`` where it does not)."""

    code: str
    weight: Weight
    says: Callable[[S], str | None]
