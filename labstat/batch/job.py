"""One analyte from its rows to its record and its report: what a worker does."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass

from labstat.errors import LabstatError
from labstat.judgement import Judgement, judge
from labstat.judgement.wording import group_name
from labstat.record import analyte_record, failed_record, stray_record
from labstat.record.values import Json
from labstat.report.analyte import analyte_report
from labstat.report.model import OverviewEntry, RunContext
from labstat.round.model import AnalyteData, Problem
from labstat.study import compute
from labstat.study.results import StudyResult


@dataclass(frozen=True, slots=True, eq=False)
class Job:
    """One analyte to compute; ``file`` is its report's name relative to the overview."""

    data: AnalyteData
    context: RunContext
    file: str


@dataclass(frozen=True, slots=True, eq=False)
class Outcome:
    """What became of one analyte. ``complete`` is false when anything that was asked for could not be computed."""

    record: Json
    pdf: bytes | None
    entry: OverviewEntry
    complete: bool


def work(job: Job) -> Outcome:
    """Compute, judge and draw one analyte. Whatever goes wrong fails this analyte and no other."""
    try:
        study = compute(job.data, job.context.plan)
        if study.reason is not None:
            return failed_outcome(job, study.reason)
        judgement = judge(study, job.context.plan)
        pdf = analyte_report(study, judgement, job.context)
        return _computed(job, study, judgement, pdf)
    except LabstatError as error:
        return failed_outcome(job, str(error))
    except Exception as error:  # an error of ours must not cost the other analytes
        return failed_outcome(job, f"unexpected {type(error).__name__}: {error}")


def _computed(job: Job, study: StudyResult, judgement: Judgement, pdf: bytes) -> Outcome:
    missing = [part for part in study.not_computed if part.whole]
    reason = "; ".join(f"{part.study} {part.where}: {part.reason}".replace(" :", ":") for part in missing) or None
    plan = study.data.plan
    entry = OverviewEntry(
        name=plan.name,
        unit=plan.unit,
        file=job.file,
        outcome="computed",
        reason=reason,
        n=_sizes(study),
        days=min((result.days for result in study.comparisons if result.days is not None), default=None),
        judgement=judgement,
        decimals=plan.decimals,
    )
    return Outcome(analyte_record(study, judgement), pdf, entry, not missing)


def _sizes(study: StudyResult) -> tuple[tuple[str, int], ...]:
    several = len(study.data.comparisons) > 1
    return (
        *(
            (f"comparison {result.data.candidate}" if several else "comparison", result.n)
            for result in study.comparisons
        ),
        *((f"reference {group_name(group.partition)}", group.limits.n) for group in study.groups),
    )


def failed_outcome(job: Job, reason: str) -> Outcome:
    """An analyte that could not be computed."""
    plan = job.data.plan
    entry = OverviewEntry(plan.name, plan.unit, None, "not computed", reason, (), None, None, plan.decimals)
    return Outcome(failed_record(job.data, reason), None, entry, False)


def stray_outcome(name: str, problems: Iterable[Problem]) -> Outcome:
    """Rows of an analyte that the plan does not know."""
    listed = tuple(problems)
    first = f": {listed[0]}" if listed else ""
    reason = f"the plan does not know this analyte{first}"
    entry = OverviewEntry(name, "", None, "not computed", reason, (), None, None, 0)
    return Outcome(stray_record(name, reason, listed), None, entry, False)
