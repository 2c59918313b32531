"""Studies made by hand: a clean one, and every piece of it replaceable, so that each rule meets a case of its own."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import numpy as np

from labstat.comparison.lines import LineFit
from labstat.comparison.results import Bias, Difference, Linearity, SideChange
from labstat.reference.results import OutsideCount, ReferenceLimits
from labstat.resample.estimate import Estimate
from labstat.round.allowance import parse_allowance
from labstat.round.model import (
    Adopted,
    AnalyteData,
    AnalytePlan,
    ComparisonData,
    ComparisonPlan,
    Elsewhere,
    Level,
    ReferencePlan,
    RoundPlan,
    RowCount,
)
from labstat.study.results import BiasAtLevel, ComparisonResult, GroupResult, StudyResult

ROUND = RoundPlan(
    title="Chemistry",
    laboratory="Quillfen District Laboratory",
    prepared_by="Validation lead",
    reviewer="Laboratory director",
    seed=1,
    resamples=999,
    level=0.95,
    limit_level=0.90,
    page="A4",
    issued=None,
    report_number=None,
    approved=None,
    deviations=(),
    criteria_hash="aa",
    analytes=(),
)


def estimate(value: float, low: float | None, high: float | None, **more: Any) -> Estimate:
    return Estimate(value, low, high, **{"level": 0.95, "interval": "calibrated", "resamples": 999, **more})


def bias(at: float, value: float, low: float | None, high: float | None, **more: Any) -> Bias:
    return Bias(at, estimate(value, low, high, **more), None if at == 0 else estimate(100 * value / at, None, None))


def level(
    at: float = 90.0,
    value: float = 1.0,
    low: float | None = -2.0,
    high: float | None = 4.0,
    allowable: str | None = "9",
    source: str | None = "Quality plan, table 3",
    total: str | None = None,
    **more: Any,
) -> BiasAtLevel:
    """A decision level; the defaults are within 9 units, well covered, and rest on nothing."""
    found = bias(at, value, low, high)
    values: dict[str, Any] = {
        "level": Level(
            at,
            None if allowable is None else parse_allowance(allowable),
            None if total is None else parse_allowance(total),
            source,
        ),
        "bias": found,
        "by_day": None,
        "leading": found,
        "leading_unit": "specimens",
        "near": 12,
        "covered": True,
        "censored_near": (),
        "without_specimen": (),
        "without_outliers": None,
        "changes": SideChange(at, 60, 0, 0.0, 0.06, 0, 0.0, 0.06),
    }
    return BiasAtLevel(**{**values, **more})


def line(**more: Any) -> LineFit:
    values: dict[str, Any] = {
        "method": "passing-bablok",
        "n": 60,
        "slope": estimate(1.0, 0.97, 1.03),
        "intercept": estimate(0.0, -3.0, 3.0),
        "variance_ratio": None,
        "pairs_below_minus_one": 0,
        "slopes_used": 1770,
        "seed": 1,
        "interval": "calibrated",
        "level": 0.95,
    }
    return LineFit(**{**values, **more})


def comparison(*levels: BiasAtLevel, candidate: str = "Procedure B", n: int = 60, **more: Any) -> ComparisonResult:
    x = np.linspace(40.0, 410.0, n)
    data = ComparisonData(
        comparative="Procedure A",
        candidate=candidate,
        specimens=tuple(f"{i:04d}" for i in range(n)),
        x=x,
        y=x + 1.0,
        x_replicates=tuple((float(v),) for v in x),
        y_replicates=tuple((float(v) + 1,) for v in x),
        subjects=(None,) * n,
        days=tuple(str(i % 6) for i in range(n)),
        censored=(),
    )
    fit = line(n=n)
    values: dict[str, Any] = {
        "data": data,
        "n": n,
        "range": (40.0, 410.0),
        "fits": (fit,),
        "reported": fit,
        "band": None,
        "levels": levels,
        "difference": Difference(
            "absolute",
            n,
            estimate(1.0, -0.5, 2.5),
            4.0,
            estimate(-7.0, -8.0, -6.0),
            estimate(9.0, 8.0, 10.0),
            (estimate(1.0, 0.0, 2.0), estimate(-7.0, -9.0, -5.0), estimate(9.0, 7.0, 11.0)),
        ),
        "linearity": Linearity(0.5, 0.6),
        "outliers": (),
        "days": 6,
        "unit_of_resampling": "specimens",
        "correlation": 0.99,
        "equal_pairs": 2,
        "equal_after_shift": 0,
        "largest": 0,
        "replicates": (1, 1),
    }
    return ComparisonResult(**{**values, **more})


def limit(value: float, low: float | None, high: float | None, **more: Any) -> Estimate:
    values: dict[str, Any] = {
        "level": 0.90,
        "interval": "percentile",
        "resamples": "exact",
        "attained": 0.90,
        "rank_low": low,
        "rank_high": high,
        "rank_attained": 0.92,
        "has_rank": True,
    }
    return Estimate(value, low, high, **{**values, **more})


def group(
    n: int = 130,
    sex: str = "F",
    lower: Estimate | None = None,
    upper: Estimate | None = None,
    adopted: Adopted | None = None,
    outside: OutsideCount | None = None,
    empty: bool = False,
    **more: Any,
) -> GroupResult:
    values: dict[str, Any] = {
        "n": n,
        "method": "rank",
        "asked": "auto",
        "probabilities": (0.025, 0.975),
        "lower": None if empty else lower or limit(45.0, 44.0, 47.0),
        "upper": None if empty else upper or limit(84.0, 82.0, 86.0),
    }
    return GroupResult(
        {"sex": sex} if sex else {}, ReferenceLimits(**{**values, **more}), np.zeros(0), adopted, outside
    )


def study(
    *comparisons: ComparisonResult,
    groups: tuple[GroupResult, ...] = (),
    asks_reference: bool | None = None,
    elsewhere: tuple[Elsewhere, ...] = (),
    decimals: int = 0,
    candidates: tuple[str, ...] | None = None,
    asks_comparison: bool | None = None,
    rows: RowCount | None = None,
    **more: Any,
) -> StudyResult:
    names = candidates or tuple(c.data.candidate for c in comparisons) or ("Procedure B",)
    asked = bool(comparisons) if asks_comparison is None else asks_comparison
    plan = AnalytePlan(
        name="Creatinine",
        unit="µmol/L",
        decimals=decimals,
        measuring_interval=(10.0, 1500.0),
        specimen_type=None,
        comparison=ComparisonPlan(
            comparative="Procedure A",
            candidates=names,
            methods=("passing-bablok",),
            report="passing-bablok",
            interval="calibrated",
            variance_ratio=1.0,
            levels=tuple(lv.level for c in comparisons[:1] for lv in c.levels),
            difference="absolute",
            minimum_n=20,
            recommended_n=40,
        )
        if asked
        else None,
        reference=ReferencePlan(
            limits=(0.025, 0.975),
            partition=("sex",),
            method="auto",
            interval="percentile",
            adopted=(),
            about={},
            minimum_n=20,
            recommended_n=120,
        )
        if (bool(groups) if asks_reference is None else asks_reference)
        else None,
        elsewhere=elsewhere,
    )
    none = RowCount(0, 0, 0, 0, 0, 0)
    data = AnalyteData(
        plan=plan,
        comparisons=tuple(c.data for c in comparisons),
        reference=None,
        rows={"comparison": rows or none, "reference": none, "precision": none},
        left_out=(),
        problems=(),
    )
    values: dict[str, Any] = {
        "data": data,
        "comparisons": comparisons,
        "groups": groups,
        "not_computed": (),
        "reason": None,
    }
    made = StudyResult(**{**values, **{k: v for k, v in more.items() if k != "left_out"}})
    if "left_out" in more:
        made = replace(made, data=replace(data, left_out=more["left_out"]))
    return made
