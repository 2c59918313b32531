"""One analyte: its rows in, its results out."""

from __future__ import annotations

from labstat.round.model import AnalyteData, RoundPlan
from labstat.study_results import StudyResult


def compute(data: AnalyteData, plan: RoundPlan) -> StudyResult:
    """Compute all that the plan asks for one analyte (contract only: the real one is being written)."""
    raise NotImplementedError
