"""The plan as a file may say it: every key, its type and its default. Unknown keys and wrong types are errors.

``[defaults.comparison]`` and ``[defaults.reference]`` hold keys that every analyte's own section inherits, and the
files ``analytes`` and ``allowances`` hold analytes and decision levels as tables, so that forty analytes need no forty
blocks.
"""

from __future__ import annotations

from datetime import date
from typing import Annotated, Any, Literal

from pydantic import BaseModel, ConfigDict, Field

Probability = Annotated[float, Field(gt=0.0, lt=1.0, allow_inf_nan=False)]
Number = Annotated[float, Field(allow_inf_nan=False)]
Text = Annotated[str, Field(min_length=1, max_length=500)]


class Strict(BaseModel):
    """No unknown key, no silent conversion."""

    model_config = ConfigDict(extra="forbid", strict=True, frozen=True)


class ApprovalKeys(Strict):
    """Who approved the criteria and when; ``criteria`` is the hash that ``labstat check`` printed then."""

    by: Text
    on: Text | date
    criteria: str | None = None


class RoundKeys(Strict):
    """``[round]``: what belongs to all analytes."""

    title: Text
    laboratory: Text
    prepared_by: Text
    reviewer: Text
    seed: int = Field(ge=0, lt=2**63)
    resamples: int = Field(default=9999, ge=99, le=1_000_000)
    level: Probability = 0.95
    limit_level: Probability = 0.90
    page: Literal["A4", "Letter"] = "A4"
    issued: Text | date | None = None
    report_number: Text | None = None
    approved: ApprovalKeys | None = None
    deviations: list[Text] = []


class FileKeys(Strict):
    """One file of a table, with everything that its export needs to be read as it is."""

    path: Text
    delimiter: Annotated[str, Field(min_length=1, max_length=1)] | None = None
    decimal: Literal[".", ","] | None = None
    encoding: Text | None = None
    sheet: Text | None = None
    columns: dict[str, Text] = {}
    constants: dict[str, Text] = {}
    wide: dict[str, Text | list[Text]] = {}


Files = Text | FileKeys | list[Text | FileKeys]


class FilesKeys(Strict):
    """``[files]``: where the tables are."""

    comparison: Files | None = None
    reference: Files | None = None
    precision: Files | None = None
    allowances: Files | None = None
    analytes: Files | None = None
    other_analytes: Literal["refuse", "ignore"] = "refuse"


class LevelKeys(Strict):
    """One decision level with what is allowed there."""

    at: Number
    allowable: Text | None = None
    total_error: Text | None = None
    source: Text | None = None


class ComparisonKeys(Strict):
    """``[analyte.comparison]``."""

    comparative: Text
    candidate: Text | list[Text]
    methods: list[Literal["ordinary", "deming", "weighted-deming", "passing-bablok"]] = Field(
        default=["passing-bablok", "deming"], min_length=1
    )
    report: Literal["ordinary", "deming", "weighted-deming", "passing-bablok"] | None = None
    interval: Literal["calibrated", "percentile", "bca", "jackknife", "rank"] = "calibrated"
    variance_ratio: Annotated[float, Field(gt=0.0, allow_inf_nan=False)] | Literal["replicates", "precision"] = 1.0
    levels: list[LevelKeys] = []
    difference: Literal["absolute", "percent"] = "absolute"
    purpose: Literal["new", "lot", "comparability"] = "new"
    minimum_n: int = Field(default=20, ge=20)
    recommended_n: int = Field(default=40, ge=40)
    ignore_procedures: list[Text] = []


class ReferenceKeys(Strict):
    """``[analyte.reference]``. An adopted interval names its group by the partition's columns beside low and high."""

    limits: list[Probability] = Field(default=[0.025, 0.975], min_length=1, max_length=2)
    partition: list[Text] = []
    method: Literal["auto", "rank", "robust", "transformed"] = "auto"
    interval: Literal["percentile", "bca", "rank"] = "percentile"
    adopted: list[dict[str, Any]] = []
    minimum_n: int = Field(default=20, ge=20)
    recommended_n: int = Field(default=120, ge=120)
    recruitment: Text | None = None
    criteria: Text | None = None
    fasting: Text | None = None
    posture: Text | None = None
    specimen_type: Text | None = None


class ElsewhereKeys(Strict):
    """``[[analyte.elsewhere]]``: what was examined elsewhere."""

    item: Text
    document: Text
    outcome: Text


class AnalyteKeys(Strict):
    """``[[analyte]]``."""

    name: Text
    unit: Text
    decimals: int = Field(default=2, ge=0, le=8)
    measuring_interval: Annotated[list[Number], Field(min_length=2, max_length=2)] | None = None
    specimen_type: Text | None = None
    comparison: ComparisonKeys | None = None
    reference: ReferenceKeys | None = None
    elsewhere: list[ElsewhereKeys] = []


class DefaultsKeys(Strict):
    """``[defaults]``: keys that every analyte's own section inherits."""

    comparison: dict[str, Any] = {}
    reference: dict[str, Any] = {}


class PlanKeys(Strict):
    """``round.toml`` as a whole."""

    round: RoundKeys
    files: FilesKeys = FilesKeys()
    defaults: DefaultsKeys = DefaultsKeys()
    analyte: list[AnalyteKeys] = []
