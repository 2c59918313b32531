"""One analyte: its rows in, its results out. Where the sciences meet."""

from __future__ import annotations

from labstat.round.model import AnalyteData, RoundPlan
from labstat.study.comparison import compare
from labstat.study.reference import reference_groups
from labstat.study.results import ComparisonResult, NotComputed, StudyResult


def compute(data: AnalyteData, plan: RoundPlan) -> StudyResult:
    """Compute all that the plan asks for one analyte.

    An analyte with bad rows is not computed at all: its numbers would rest on an unknown selection. A part whose
    statistic does not exist is left out by name; the other parts are computed. The same data, plan and seed give the
    same numbers, whatever else is in the round.
    """
    if data.problems:
        return StudyResult(data, (), (), (), _bad_rows(data))
    comparisons: list[ComparisonResult] = []
    missing: list[NotComputed] = []
    if data.plan.comparison is not None:
        for pairs in data.comparisons:
            result, parts = compare(pairs, data.plan, plan)
            missing += parts
            if result is not None:
                comparisons.append(result)
    groups, parts = reference_groups(data, plan)
    missing += parts
    reason = None
    if not comparisons and not groups:
        reason = "; ".join(part.reason for part in missing) or "nothing to compute"
    return StudyResult(data, tuple(comparisons), groups, tuple(missing), reason)


def _bad_rows(data: AnalyteData) -> str:
    count = len(data.problems)
    rows = "1 row cannot be used" if count == 1 else f"{count} rows cannot be used, the first"
    return f"{rows}: {data.problems[0]}"
