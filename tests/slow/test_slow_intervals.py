"""Intervals and diagnostics against loops in the standard library."""

from __future__ import annotations

import math
from fractions import Fraction
from typing import Any

import numpy as np
import pytest
from outside_cases import columns, one
from slow.diagnostics import slow_cusum, slow_esd
from slow.intervals import (
    slow_attained,
    slow_bca,
    slow_bca_areas,
    slow_bound,
    slow_calibrated_area,
    slow_percentile,
)
from slow.lines import slow_deming

from labstat.comparison.linearity import cusum
from labstat.comparison.lines import fit_line
from labstat.comparison.outliers import search
from labstat.resample.counts import first_level, second_level
from labstat.resample.engine import Sample
from labstat.resample.intervals import estimate_from, tails


def random_samples(number: int, seed: int) -> list[tuple[Sample, float]]:
    """Samples of 19 to 400 values, skewed, half of them rounded so that values tie, each with a level."""
    rng = np.random.default_rng(seed)
    made = []
    for index in range(number):
        values = rng.gamma(2.0, size=int(rng.integers(19, 400)))
        jackknife = 2.0 + rng.gamma(1.0, size=int(rng.integers(5, 40)))
        estimate = float(np.median(values))
        if index % 2:
            values, estimate = np.round(values, 1), round(estimate, 1)
        made.append((Sample(estimate, values, jackknife, None), float(rng.choice([0.8, 0.9, 0.95, 0.99]))))
    return made


def test_slow_intervals_meet_r_and_scipy() -> None:
    """The loops are themselves right: R's percentile bounds and scipy's BCa areas on R's 999 replicates."""
    case: dict[str, Any] = one("r-boot-city-intervals")
    u, x = columns(case)
    values = case["data"]["replicates"]
    jackknife = [np.delete(x, i).sum() / np.delete(u, i).sum() for i in range(u.size)]
    assert slow_percentile(values, 0.9) == pytest.approx(case["expected"]["R_percentile"]["value"], abs=1e-6)
    areas = slow_bca_areas(x.sum() / u.sum(), values, jackknife, 0.9)
    assert np.quantile(values, areas) == pytest.approx(case["expected"]["scipy_bca"]["value"], abs=1e-9)


def test_percentile_intervals_are_those_of_the_loop() -> None:
    """On 300 samples, rounded ones among them, at four levels, also where the rank runs off the end."""
    for sample, level in random_samples(300, seed=1):
        found = estimate_from(sample, interval="percentile", level=level)
        assert (found.low, found.high) == pytest.approx(slow_percentile(list(sample.values), level), rel=1e-12)


def test_bca_intervals_are_those_of_the_loop() -> None:
    """On 300 samples, ties with the estimate counted half, influence values centred for this parameter alone."""
    for sample, level in random_samples(300, seed=2):
        found = estimate_from(sample, interval="bca", level=level)
        expected = slow_bca(sample.estimate, list(sample.values), list(sample.jackknife), level)
        assert found.interval == "bca"
        assert (found.low, found.high) == pytest.approx(expected, rel=1e-9)


@pytest.mark.parametrize("level", [0.9, 0.95])
def test_calibrated_tails_are_those_of_the_loop(level: float) -> None:
    """Calibrated tail, bounds and attained coverage of a Deming fit, from its own second-level values, by loops."""
    rng = np.random.default_rng(7)
    truth = np.exp(rng.uniform(0, 4, 20))
    x, y = truth * (1 + 0.05 * rng.normal(size=20)), truth * (1 + 0.05 * rng.normal(size=20))
    fit = fit_line(x, y, method="deming", interval="calibrated", level=level, resamples=499, seed=11)
    inner = fit.kept.inner
    assert inner is not None
    assert fit.slope.interval == "calibrated"
    rows = [list(row) for row in inner[:, :, 0]]
    area = slow_calibrated_area(fit.slope.estimate, rows, level)
    values = list(fit.kept.values[:, 0])
    # The tail is 0 < β < (1 - level)/2 here: the plain interval is too short for data whose spread grows.
    assert 0 < area < (1 - level) / 2
    assert fit.slope.low == pytest.approx(slow_bound(values, area), rel=1e-12)
    assert fit.slope.high == pytest.approx(slow_bound(values, 1 - area), rel=1e-12)
    assert fit.slope.attained == pytest.approx(slow_attained(fit.slope.estimate, rows, level), abs=1e-12)


def test_calibration_counts_second_level_values_at_the_estimate_as_below_it() -> None:
    """u is the share at or below the estimate: with values on a grid the ties belong to the lower share."""
    rng = np.random.default_rng(8)
    values = np.round(rng.normal(1, 0.2, 999), 1)
    inner = np.round(rng.normal(values[:400, None], 0.2, (400, 199)), 1)
    sample = Sample(1.0, values, np.arange(10.0), inner)
    found = tails(sample, interval="calibrated", level=0.95)
    rows = [list(row) for row in inner]
    assert found.kind == "calibrated"
    assert found.low == pytest.approx(slow_calibrated_area(1.0, rows, 0.95), rel=1e-12)
    assert found.high == pytest.approx(1 - found.low, rel=1e-12)
    assert found.attained == pytest.approx(slow_attained(1.0, rows, 0.95), abs=1e-12)


def test_second_level_values_are_refits_of_resamples_of_resamples() -> None:
    """Drawn from the counts that the core gives, second-level slopes are total least squares on repeated points."""
    rng = np.random.default_rng(9)
    x = rng.uniform(1, 9, 12)
    y = x + rng.normal(0, 0.3, 12)
    fit = fit_line(x, y, method="deming", resamples=99, seed=5)
    order = np.lexsort((y, x))
    first = np.concatenate(list(first_level(12, 99, seed=fit.kept.seed)))
    second = second_level(first, 0, fit.kept.inner.shape[1], seed=fit.kept.seed)
    for outer, inner in [(0, 0), (0, 7), (13, 100), (98, 498)]:
        counts = second[outer * fit.kept.inner.shape[1] + inner]
        assert not np.any(counts[first[outer] == 0])  # drawn from the resample, not from the data
        slope, _ = slow_deming(np.repeat(x[order], counts), np.repeat(y[order], counts))
        assert fit.kept.inner[outer, inner, 0] == pytest.approx(slope, rel=1e-9)
    slope, _ = slow_deming(np.repeat(x[order], first[42]), np.repeat(y[order], first[42]))
    assert fit.kept.values[42, 0] == pytest.approx(slope, rel=1e-9)


def test_jackknife_values_are_refits_without_one_point() -> None:
    """Each jackknife value of a Deming fit is total least squares on the other points."""
    rng = np.random.default_rng(10)
    x = np.sort(rng.uniform(1, 9, 15))
    y = x + rng.normal(0, 0.3, 15)
    fit = fit_line(x, y, method="deming", interval="jackknife", resamples=99, seed=5)
    left_out = [slow_deming(np.delete(x, i), np.delete(y, i))[0] for i in range(15)]
    np.testing.assert_allclose(fit.kept.jackknife[:, 0], left_out, rtol=1e-10)
    spread = math.sqrt(14 / 15 * sum((value - sum(left_out) / 15) ** 2 for value in left_out))
    t = 2.1447866879169273  # Student's t, 14 degrees of freedom, 97.5 % (any printed table: 2.145)
    assert fit.slope.high - fit.slope.estimate == pytest.approx(t * spread, rel=1e-9)


def test_bca_falls_back_by_name_when_all_resamples_lie_on_one_side() -> None:
    """Without a z0 the percentile interval stands in, named as such, with what was asked for and the reason."""
    sample = Sample(0.0, np.arange(1.0, 200.0), np.arange(10.0), None)
    found = estimate_from(sample, interval="bca", level=0.95)
    assert (found.interval, found.replaced) == ("percentile", "bca")
    assert found.reason
    assert tails(sample, interval="bca", level=0.95).kind == "percentile"


def test_bca_falls_back_by_name_when_all_influence_values_are_equal() -> None:
    """Without an acceleration the percentile interval stands in, by name."""
    sample = Sample(100.0, np.arange(1.0, 200.0), np.full(10, 100.0), None)
    found = estimate_from(sample, interval="bca", level=0.95)
    assert (found.interval, found.replaced) == ("percentile", "bca")


def test_cusum_is_the_exact_loop_on_whole_numbers() -> None:
    """On 500 sets of whole numbers, with ties along the line and points on it: exact sides and projections."""
    rng = np.random.default_rng(12)
    one_sided = on_line = 0
    for _ in range(500):
        n = int(rng.integers(4, 30))
        x = rng.integers(1, 15, n)
        y = x + rng.integers(-2, 3, n)
        slope, intercept = Fraction(int(rng.integers(3, 6)), 4), Fraction(int(rng.integers(-2, 3)), 2)
        found = cusum(x, y, float(slope), float(intercept))
        expected = slow_cusum([int(v) for v in x], [int(v) for v in y], slope, intercept)
        assert found.statistic == pytest.approx(expected, rel=1e-12, abs=1e-12)
        one_sided += expected == 0
        on_line += any(v == intercept + slope * int(u) for u, v in zip(x, y, strict=True))
    assert one_sided > 20
    assert on_line > 200


def test_extreme_deviates_are_those_of_the_loop() -> None:
    """On 200 samples, all steps of the search: value, deviate and critical value."""
    rng = np.random.default_rng(13)
    for _ in range(200):
        values = rng.standard_t(3, size=int(rng.integers(15, 60)))
        found = search(values, most=5, alpha=0.05)
        for step, (value, statistic, critical) in zip(found, slow_esd(values, 5, 0.05), strict=True):
            assert step.value == value
            assert step.statistic == pytest.approx(statistic, rel=1e-12)
            assert step.critical == pytest.approx(critical, rel=1e-12)
