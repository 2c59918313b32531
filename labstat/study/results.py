"""What one analyte's study found: numbers only, no judgement."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from labstat.comparison.lines import LineFit
from labstat.comparison.results import Array, Band, Bias, Difference, Linearity, SideChange, WithoutUnit
from labstat.reference.results import OutsideCount, ReferenceLimits
from labstat.round.model import Adopted, AnalyteData, ComparisonData, Level


@dataclass(frozen=True, slots=True)
class BiasAtLevel:
    """Bias at one decision level with everything that its finding may rest on.

    ``bias`` comes from resampling specimens (subjects, where one gave several), ``by_day`` from resampling days
    (``None`` below five days). ``leading`` is the wider of the two. ``near``: specimens whose comparative result lies
    within 25 % of the level. ``covered``: the level lies in the specimens' range. ``censored_near``: specimens with a
    censored result within a factor of two of the level. ``without_specimen``: single specimens in the order of how far
    their absence moves the interval, those that matter first, at most eight. ``without_outliers``: interval when the
    flagged outliers are left out (``None`` when none is flagged).
    """

    level: Level
    bias: Bias
    by_day: Bias | None
    leading: Bias
    leading_unit: str  # "specimens", "subjects" or "days"
    near: int
    covered: bool
    censored_near: tuple[str, ...]
    without_specimen: tuple[WithoutUnit, ...]
    without_outliers: Bias | None
    changes: SideChange


@dataclass(frozen=True, slots=True)
class Outlier:
    """A difference flagged by the generalized extreme studentized deviate procedure (Rosner 1983)."""

    specimen: str
    x: float
    y: float
    difference: float  # in the scale of the differences
    statistic: float
    critical: float


@dataclass(frozen=True, slots=True, eq=False)
class ComparisonResult:
    """One candidate against the comparative procedure."""

    data: ComparisonData
    n: int
    range: tuple[float, float]
    fits: tuple[LineFit, ...]  # in the plan's order; the reported one always among them
    reported: LineFit
    band: Band | None  # of the reported line
    levels: tuple[BiasAtLevel, ...]
    difference: Difference | None  # None when it cannot be computed, see notes
    linearity: Linearity | None
    outliers: tuple[Outlier, ...]
    days: int | None  # number of days, None when unknown
    unit_of_resampling: str  # "specimens" or "subjects"
    correlation: float | None  # Pearson; None when a procedure gave one value only
    equal_pairs: int  # specimens with x == y
    equal_after_shift: int  # specimens whose y equals the previous or next specimen's x (the larger of both shifts)
    largest: int  # index of the specimen with the largest absolute difference
    replicates: tuple[int, int]  # largest number of replicates, comparative and candidate


@dataclass(frozen=True, slots=True)
class NotComputed:
    """A part of a study that could not be computed, and why.

    ``whole`` is false for a part whose absence leaves the study's questions answered (a second line, say).
    """

    study: str  # "comparison" or "reference"
    where: str  # the candidate, or the partition in words, "" for the whole
    reason: str
    whole: bool = True


@dataclass(frozen=True, slots=True, eq=False)
class GroupResult:
    """Reference limits of one partition."""

    partition: Mapping[str, str]
    limits: ReferenceLimits
    values: Array  # sorted, for drawing
    adopted: Adopted | None
    outside_adopted: OutsideCount | None


@dataclass(frozen=True, slots=True, eq=False)
class StudyResult:
    """Everything computed for one analyte. ``reason`` is set when nothing was, and says why."""

    data: AnalyteData
    comparisons: tuple[ComparisonResult, ...]
    groups: tuple[GroupResult, ...]
    not_computed: tuple[NotComputed, ...]
    reason: str | None


__all__ = [
    "BiasAtLevel", "ComparisonResult", "GroupResult", "NotComputed", "Outlier", "StudyResult",
]
