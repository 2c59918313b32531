"""One analyte through its study: what leads, what is left out, what a single specimen does, what cannot be computed."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import numpy as np
import pytest

import labstat
from labstat.resample.seeds import derived_seed
from labstat.round.allowance import parse_allowance
from labstat.round.model import (
    Adopted,
    AnalyteData,
    AnalytePlan,
    CensoredPair,
    ComparisonData,
    ComparisonPlan,
    Level,
    Problem,
    ReferenceData,
    ReferencePlan,
    RoundPlan,
    RowCount,
)
from labstat.study import compute

NOTHING = RowCount(0, 0, 0, 0, 0, 0)
PLAN = RoundPlan(
    "T", "L", "P", "R", 11, 499, 0.95, 0.90, "A4", None, None, None, (), "00" * 32, ()
)
LEVEL = Level(150.0, parse_allowance("8"), None, "Quality plan")


def _analyte(
    x: Any, y: Any, *, levels: tuple[Level, ...] = (LEVEL,), report: str = "deming", **fields: Any
) -> AnalyteData:
    n = len(x)
    data = ComparisonData(
        "A", "B", tuple(f"S{i}" for i in range(n)), np.asarray(x, float), np.asarray(y, float),
        tuple((float(v),) for v in x), tuple((float(v),) for v in y),
        fields.get("subjects", (None,) * n), fields.get("days", (None,) * n), fields.get("censored", ()),
    )
    asked = ComparisonPlan("A", ("B",), (report,), report, "percentile", 1.0, levels, "absolute", 20, 40)
    plan = AnalytePlan("Test", "U/L", 1, None, None, asked, None, ())
    return AnalyteData(plan, (data,), None, dict.fromkeys(("comparison", "reference", "precision"), NOTHING), (), ())


def _pairs(n: int = 40, seed: int = 1) -> tuple[Any, Any]:
    rng = np.random.default_rng(seed)
    truth = rng.uniform(50, 250, n)
    return truth + rng.normal(0, 3, n), truth + rng.normal(0, 3, n)


def test_the_study_gives_the_numbers_of_the_python_call_with_its_recorded_seed() -> None:
    x, y = _pairs()
    result = compute(_analyte(x, y), PLAN).comparisons[0]
    again = labstat.fit_line(
        x, y, method="deming", interval="percentile", resamples=499, seed=result.reported.seed
    )
    assert result.reported.seed == derived_seed(11, "Test", "B")
    assert (again.slope, again.intercept) == (result.reported.slope, result.reported.intercept)
    assert again.bias_at([150.0])[0] == result.levels[0].bias


def test_the_numbers_of_an_analyte_do_not_depend_on_the_others() -> None:
    x, y = _pairs()
    first = compute(_analyte(x, y), PLAN).comparisons[0].levels[0]
    other_plan = replace(PLAN, analytes=(compute(_analyte(x, y), PLAN).data.plan,) * 3)
    assert compute(_analyte(x, y), other_plan).comparisons[0].levels[0].bias == first.bias


def test_the_wider_of_specimens_and_days_leads() -> None:
    rng = np.random.default_rng(4)
    truth = rng.uniform(50, 250, 40)
    day = np.arange(40) % 5
    shift = np.array([-8.0, 8.0, 0.0, -6.0, 6.0])[day]
    item = compute(
        _analyte(truth, truth + shift + rng.normal(0, 0.5, 40), days=tuple(f"d{d}" for d in day)), PLAN
    ).comparisons[0].levels[0]
    assert item.by_day is not None
    assert item.leading_unit == "days"
    assert item.leading == item.by_day
    assert item.by_day.bias.interval == "jackknife"


def test_fewer_than_five_days_or_an_unknown_one_give_no_interval_by_days() -> None:
    x, y = _pairs()
    for days in (tuple(f"d{i % 4}" for i in range(40)), (*(f"d{i % 8}" for i in range(39)), None)):
        result = compute(_analyte(x, y, days=days), PLAN).comparisons[0]
        assert result.levels[0].by_day is None
        assert result.levels[0].leading_unit == "specimens"


def test_specimens_of_one_subject_are_resampled_together() -> None:
    x, y = _pairs()
    subjects = tuple(f"P{i // 4}" for i in range(40))
    alone = compute(_analyte(x, y), PLAN).comparisons[0]
    result = compute(_analyte(x, y + np.repeat(np.linspace(-9, 9, 10), 4), subjects=subjects), PLAN).comparisons[0]
    assert alone.unit_of_resampling == "specimens"
    assert result.unit_of_resampling == "subjects"
    assert {w.unit for w in result.levels[0].without_specimen} <= set(subjects)
    # ten units instead of forty that share their shift: the interval must be much wider
    made, other = result.levels[0].bias.bias, alone.levels[0].bias.bias
    assert made.high - made.low > 2 * (other.high - other.low)


def test_a_gross_difference_is_flagged_kept_and_left_out_beside() -> None:
    x, y = _pairs()
    y[7] += 80.0
    result = compute(_analyte(x, y), PLAN).comparisons[0]
    assert [o.specimen for o in result.outliers] == ["S7"]
    assert result.n == 40
    item = result.levels[0]
    assert item.without_outliers is not None
    clean = labstat.fit_line(
        np.delete(x, 7), np.delete(y, 7), method="deming", interval="percentile", resamples=499,
        seed=result.reported.seed,
    )
    assert item.without_outliers == clean.bias_at([150.0])[0]
    assert item.without_specimen[0].unit == "S7"
    assert item.without_specimen[0].estimate == pytest.approx(clean.bias_at([150.0])[0].estimate, abs=1e-9)
    assert result.largest == 7


@pytest.mark.parametrize(("at", "covered"), [(40.0, False), (150.0, True), (400.0, False)])
def test_a_level_outside_the_specimens_is_not_covered(at: float, covered: bool) -> None:
    x, y = _pairs()
    item = compute(_analyte(x, y, levels=(replace(LEVEL, at=at),)), PLAN).comparisons[0].levels[0]
    assert item.covered is covered
    assert item.near == int(np.sum(np.abs(x - at) <= 0.25 * at))


@pytest.mark.parametrize(("bound", "near"), [(74.0, False), (75.0, True), (300.0, True), (301.0, False)])
def test_a_censored_pair_within_a_factor_of_two_is_named(bound: float, near: bool) -> None:
    x, y = _pairs()
    pair = CensoredPair("C1", f"<{bound:g}", f"<{bound:g}", bound, bound, "below", "below")
    item = compute(_analyte(x, y, censored=(pair,)), PLAN).comparisons[0].levels[0]
    assert item.censored_near == (("C1",) if near else ())


def test_what_cannot_be_computed_is_named_with_its_reason() -> None:
    x, _ = _pairs()
    falling = compute(_analyte(x, 300.0 - x, report="passing-bablok"), PLAN)
    assert falling.comparisons == ()
    assert "no positive relation" in str(falling.reason)
    assert "2 specimens" in str(compute(_analyte([1.0, 2.0], [1.0, 2.0]), PLAN).reason)
    assert "comparative results are equal" in str(compute(_analyte([5.0] * 20, list(range(20))), PLAN).reason)


def test_a_bad_row_keeps_its_analyte_from_being_computed() -> None:
    x, y = _pairs()
    problem = Problem("comparison.csv", 7, "result", "abc", "not a number", "correct it", "Test")
    made = compute(replace(_analyte(x, y), problems=(problem, problem)), PLAN)
    assert made.comparisons == ()
    assert made.reason == f"2 rows cannot be used, the first: {problem}"


def test_each_group_has_its_own_limits_and_the_interval_in_use_that_fits_it_best() -> None:
    rng = np.random.default_rng(2)
    values = np.concatenate([rng.normal(80, 5, 125), rng.normal(95, 5, 15)])
    plan = AnalytePlan(
        "Test", "U/L", 1, None, None, None,
        ReferencePlan(
            (0.025, 0.975), ("sex",), "auto", "percentile",
            (Adopted({}, 60.0, None), Adopted({"sex": "F"}, 70.0, 90.0)), {}, 20, 120,
        ), (),
    )
    data = AnalyteData(
        plan, (), ReferenceData(tuple(map(str, range(140))), values, {"sex": ("F",) * 125 + ("M",) * 15}, ()),
        dict.fromkeys(("comparison", "reference", "precision"), NOTHING), (), (),
    )
    women, men = compute(data, PLAN).groups
    assert women.limits == replace(labstat.reference_limits(values[:125]), asked="auto", seed=women.limits.seed)
    assert women.adopted == Adopted({"sex": "F"}, 70.0, 90.0)
    assert women.outside_adopted is not None
    assert women.outside_adopted.above == int(np.sum(values[:125] > 90.0))
    assert (men.limits.lower, men.limits.upper) == (None, None)
    assert men.adopted == Adopted({}, 60.0, None)
    assert men.outside_adopted is not None
    assert men.outside_adopted.above is None
