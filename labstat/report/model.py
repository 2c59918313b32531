"""What a report needs beside the study and its judgement."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from labstat.judgement.model import Judgement
from labstat.round.model import InputFile, RoundPlan


@dataclass(frozen=True, slots=True)
class RunContext:
    """The run as a whole: what was read, with what, from which seed."""

    plan: RoundPlan
    inputs: tuple[InputFile, ...]
    versions: Mapping[str, str]  # "labstat", "python", "numpy", ...
    seed: int  # the one used (the command line may override the plan)
    resamples: int
    notes: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class OverviewEntry:
    """One analyte's row in the overview. ``judgement`` is ``None`` when nothing could be computed."""

    name: str
    unit: str
    file: str | None  # report's file name relative to the overview, "reports/Creatinine.pdf"
    outcome: str  # "computed" or "not computed"
    reason: str | None
    n: tuple[tuple[str, int], ...]  # ("comparison", 60), ("reference sex F", 130), ...
    days: int | None
    judgement: Judgement | None
    decimals: int
