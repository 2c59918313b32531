"""A round as it was understood: frozen values, ready to compute with."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Literal

import numpy as np
import numpy.typing as npt

from labstat.round.allowance import Allowance

Array = npt.NDArray[np.float64]
Why = Literal["excluded", "censored", "missing", "unpaired"]


@dataclass(frozen=True, slots=True)
class Problem:
    """One thing that is wrong with a round; ``analyte`` is ``None`` when it makes the whole round unusable."""

    file: str
    line: int | None
    column: str | None
    value: str | None
    what: str
    remedy: str
    analyte: str | None = None

    def __str__(self) -> str:
        place = self.file if self.line is None else f"{self.file}:{self.line}"
        column = "" if self.column is None else f"{self.column}: "
        value = "" if self.value is None else f'"{self.value}": '
        return f"{place}: {column}{value}{self.what}; {self.remedy}"


@dataclass(frozen=True, slots=True)
class Level:
    """A decision level with what is allowed there. ``source`` belongs to the allowances."""

    at: float
    allowable: Allowance | None
    total_error: Allowance | None
    source: str | None


@dataclass(frozen=True, slots=True)
class ComparisonPlan:
    comparative: str
    candidates: tuple[str, ...]
    methods: tuple[str, ...]
    report: str
    interval: str
    variance_ratio: float
    levels: tuple[Level, ...]
    difference: Literal["absolute", "percent"]
    minimum_n: int  # below it: stop (default 20; the plan may be stricter)
    recommended_n: int  # below it: caution (default 40)


@dataclass(frozen=True, slots=True)
class Adopted:
    """An interval in use; ``where`` holds the partition it belongs to (empty: everyone)."""

    where: Mapping[str, str]
    low: float | None
    high: float | None


@dataclass(frozen=True, slots=True)
class ReferencePlan:
    limits: tuple[float, ...]
    partition: tuple[str, ...]
    method: str  # "auto" | "rank" | "robust" | "transformed"
    interval: str  # "percentile" | "bca" | "rank"
    adopted: tuple[Adopted, ...]
    about: Mapping[str, str]  # recruitment, criteria, fasting, posture, specimen_type: printed
    minimum_n: int  # default 20
    recommended_n: int  # default 120


@dataclass(frozen=True, slots=True)
class Elsewhere:
    item: str
    document: str
    outcome: str


@dataclass(frozen=True, slots=True)
class AnalytePlan:
    name: str
    unit: str
    decimals: int
    measuring_interval: tuple[float, float] | None
    specimen_type: str | None
    comparison: ComparisonPlan | None
    reference: ReferencePlan | None
    elsewhere: tuple[Elsewhere, ...]


@dataclass(frozen=True, slots=True)
class Approval:
    by: str
    on: str
    criteria: str | None  # hash of the criteria as they were approved


@dataclass(frozen=True, slots=True)
class RoundPlan:
    title: str
    laboratory: str
    prepared_by: str
    reviewer: str
    seed: int
    resamples: int
    level: float
    limit_level: float
    page: Literal["A4", "Letter"]
    issued: str | None  # the report's date, from the plan, never the clock
    report_number: str | None
    approved: Approval | None
    deviations: tuple[str, ...]
    criteria_hash: str  # SHA-256 of the criteria as they stand in the plan
    analytes: tuple[AnalytePlan, ...]


@dataclass(frozen=True, slots=True)
class RowCount:
    """read = used + excluded + censored + missing + unpaired, always."""

    read: int
    used: int
    excluded: int
    censored: int
    missing: int
    unpaired: int


@dataclass(frozen=True, slots=True)
class LeftOut:
    """A row that was not used, as it stands in the file, and why."""

    study: Literal["comparison", "reference", "precision"]
    file: str
    line: int
    identity: str  # specimen, subject or material
    procedure: str | None
    replicate: str | None
    result: str  # as written
    why: Why
    reason: str  # the user's words for an exclusion, ours otherwise


@dataclass(frozen=True, slots=True)
class CensoredPair:
    """A specimen with a result outside a measuring interval; numbers are the bounds or the means."""

    specimen: str
    comparative: str  # as written, "<0.5" or "12.3"
    candidate: str
    comparative_value: float | None  # the bound or the mean; None when missing altogether
    candidate_value: float | None
    comparative_side: Literal["below", "above", "inside"]
    candidate_side: Literal["below", "above", "inside"]


@dataclass(frozen=True, slots=True, eq=False)
class ComparisonData:
    """The specimens measured by both procedures, sorted by specimen so that the order of rows does not matter."""

    comparative: str
    candidate: str
    specimens: tuple[str, ...]
    x: Array  # means of replicates, comparative
    y: Array  # means of replicates, candidate
    x_replicates: tuple[tuple[float, ...], ...]
    y_replicates: tuple[tuple[float, ...], ...]
    subjects: tuple[str | None, ...]
    days: tuple[str | None, ...]
    censored: tuple[CensoredPair, ...]


@dataclass(frozen=True, slots=True, eq=False)
class ReferenceData:
    """Reference individuals with a number, sorted by subject; ``columns`` holds every column to partition by."""

    subjects: tuple[str, ...]
    values: Array
    columns: Mapping[str, tuple[str, ...]]
    censored: tuple[tuple[str, str], ...]  # subject, result as written


@dataclass(frozen=True, slots=True, eq=False)
class AnalyteData:
    """All that was read for one analyte. With problems it is not computed."""

    plan: AnalytePlan
    comparisons: tuple[ComparisonData, ...]  # one per candidate, in the plan's order
    reference: ReferenceData | None
    rows: Mapping[str, RowCount]  # keys "comparison", "reference", "precision", always all three
    left_out: tuple[LeftOut, ...]
    problems: tuple[Problem, ...]


@dataclass(frozen=True, slots=True)
class InputFile:
    path: str  # relative to the round folder
    sha256: str


@dataclass(frozen=True, slots=True, eq=False)
class Round:
    """``stray`` holds problems of rows whose analyte the plan does not know, by the name in the table."""

    folder: str
    plan: RoundPlan
    inputs: tuple[InputFile, ...]
    analytes: tuple[AnalyteData, ...]  # the plan's order
    stray: Mapping[str, tuple[Problem, ...]]
    notes: tuple[str, ...]  # what reading noticed that is no problem (encoding, columns not used)
