"""The fast statistics by counts are those of a refit with the points really repeated, and the refits are right."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from outside_cases import columns, of_kind, one
from slow.lines import repeated, slow_deming, slow_passing_bablok, slow_weighted_deming
from slow.small_data import small_data

from labstat.comparison.lines import fit_line
from labstat.comparison.moments import deming, ordinary
from labstat.comparison.pair_slopes import pair_slopes
from labstat.comparison.passing_bablok import passing_bablok, rank_interval
from labstat.comparison.weighted_deming import weighted_deming
from labstat.errors import NotComputableError


def decimals(values: np.ndarray) -> list[str]:
    """The shortest decimal strings of floats: what was in the table."""
    return [repr(float(value)) for value in values]


@pytest.mark.parametrize("case", [p for p in of_kind("passing_bablok") if p.id != "mc-davis-height-pb"])
def test_slow_passing_bablok_meets_the_exact_cases(case: dict[str, Any]) -> None:
    """The rational implementation is itself right: slope, intercept, N, K and ranks of 12 cases of the data file.

    The thirteenth has 183 points, which takes seconds in rational arithmetic and adds nothing.
    """
    x, y = columns(case)
    expected = {key: entry["value"] for key, entry in case["expected"].items()}
    found = slow_passing_bablok(decimals(x), decimals(y))
    if expected["slope"] <= 0:
        assert found is None
        return
    assert found is not None
    names = {
        "slope": found.slope, "intercept": found.intercept, "N": found.n_slopes, "K": found.below,
        "M1": found.m1, "M2": found.m2, "slope_lo": found.slope_low, "slope_hi": found.slope_high,
        "int_lo": found.intercept_low, "int_hi": found.intercept_high,
    }
    for key, value in names.items():
        if key in expected:
            assert value == pytest.approx(expected[key], rel=1e-12, abs=1e-12), key


def test_slow_deming_meets_pearson() -> None:
    """Total least squares gives the line that Pearson (1901) printed: 5.784 - 0.5456 x (recalled, not seen)."""
    x, y = columns(one("pearson-orthogonal"))
    slope, intercept = slow_deming(x, y)
    assert slope == pytest.approx(-0.5456, abs=5e-5)
    assert intercept == pytest.approx(5.784, abs=5e-4)


def test_slow_weighted_deming_meets_odrpacks_fixed_point() -> None:
    """The point-by-point iteration ends where odrpack with frozen weights does (formula from memory)."""
    case = one("mc-milk-wdeming")
    slope, intercept = slow_weighted_deming(*columns(case))
    assert slope == pytest.approx(case["expected"]["slope"]["value"], abs=case["expected"]["slope"]["tol"])
    assert intercept == pytest.approx(case["expected"]["intercept"]["value"], abs=case["expected"]["intercept"]["tol"])


def test_passing_bablok_by_counts_is_a_refit_with_repeated_points() -> None:
    """On 2,000 small data sets and three resamples of each: slope, intercept, and whether there is a line at all.

    The data sets hold what goes wrong: ties, vertical pairs, duplicates, exact slopes of -1, K above 0, one decimal.
    """
    met = {"line": 0, "no line": 0, "minus one": 0, "below": 0, "vertical": 0}
    for data in small_data(2000, seed=1):
        pairs = pair_slopes(data.x, data.y)
        if pairs.slopes.size == 0:
            continue
        found = passing_bablok(data.x, data.y, pairs)(data.counts)
        for row, counts in zip(found, data.counts, strict=True):
            xs, ys = repeated(data.xs, counts), repeated(data.ys, counts)
            exact = slow_passing_bablok(xs, ys)
            if exact is None:
                met["no line"] += 1
                assert np.isnan(row).all(), (xs, ys, row)
                continue
            met["line"] += 1
            met["below"] += exact.below > 0
            assert row[0] == pytest.approx(exact.slope, rel=1e-12), (xs, ys)
            assert row[1] == pytest.approx(exact.intercept, rel=1e-12, abs=1e-12 * 1400), (xs, ys)
        upper = np.triu_indices(data.x.size, 1)
        dx, dy = np.subtract.outer(data.x, data.x)[upper], np.subtract.outer(data.y, data.y)[upper]
        met["minus one"] += bool(np.any((np.abs(dx + dy) < 1e-9) & (np.abs(dx) > 1e-9)))
        met["vertical"] += bool(np.any((dx == 0) & (dy != 0)))
    # The comparison says something only where the troubles really occurred.
    assert min(met.values()) > 200, met


def test_numbers_and_rank_interval_of_a_fit_are_those_of_the_rational_refit() -> None:
    """N, K, the rank interval of slope and intercept and the refusals of ``fit_line`` on 500 small data sets."""
    refused = 0
    for data in small_data(500, seed=2, rows=1):
        exact = slow_passing_bablok(data.xs, data.ys)
        if exact is None:
            refused += 1
            with pytest.raises(NotComputableError):
                fit_line(data.x, data.y, method="passing-bablok", interval="jackknife", resamples=99, seed=1)
            continue
        fit = fit_line(data.x, data.y, method="passing-bablok", interval="jackknife", resamples=99, seed=1)
        assert (fit.slopes_used, fit.pairs_below_minus_one) == (exact.n_slopes, exact.below)
        assert fit.slope.estimate == pytest.approx(exact.slope, rel=1e-12)
        assert fit.intercept.estimate == pytest.approx(exact.intercept, rel=1e-12, abs=1e-9)
        for mine, theirs in [
            (fit.slope.rank_low, exact.slope_low), (fit.slope.rank_high, exact.slope_high),
            (fit.intercept.rank_low, exact.intercept_low), (fit.intercept.rank_high, exact.intercept_high),
        ]:
            assert (mine is None) == (theirs is None), (data.xs, data.ys)
            if mine is not None:
                assert mine == pytest.approx(theirs, rel=1e-12, abs=1e-9), (data.xs, data.ys)
    assert 5 < refused < 250


def test_the_1983_rank_interval_exists_at_twenty_points_and_is_the_rational_one() -> None:
    """At n = 20, where the ranks lie well inside, all four bounds are the rational refit's on 40 rounded data sets."""
    rng = np.random.default_rng(5)
    for _ in range(40):
        x = np.round(rng.uniform(1, 9, 20), 1)
        y = np.round(x * 1.05 + rng.normal(0, 0.4, 20), 1)
        exact = slow_passing_bablok(decimals(x), decimals(y), level=0.9)
        ranks = rank_interval(x, y, pair_slopes(x, y), level=0.9)
        assert exact is not None
        np.testing.assert_allclose(
            [ranks.slope_low, ranks.slope_high, ranks.intercept_low, ranks.intercept_high],
            [exact.slope_low, exact.slope_high, exact.intercept_low, exact.intercept_high], rtol=1e-12, atol=1e-12,
        )


@pytest.mark.parametrize("variance_ratio", [0.25, 1.0, 3.0])
def test_deming_by_counts_is_total_least_squares_on_repeated_points(variance_ratio: float) -> None:
    """On 600 small data sets and three resamples of each, moments by counts give the direction that the SVD finds."""
    compared = 0
    for data in small_data(600, seed=3):
        found = deming(data.x, data.y, variance_ratio)(data.counts)
        for row, counts in zip(found, data.counts, strict=True):
            x, y = np.repeat(data.x, counts), np.repeat(data.y, counts)
            product = float(np.sum((x - x.mean()) * (y - y.mean())))
            if abs(product) < 1e-9 * max(np.abs(x).max(), np.abs(y).max(), 1.0):
                assert np.isnan(row[0]), (x, y, row)  # not related at all: no line
                continue
            slope, intercept = slow_deming(x, y, variance_ratio)
            compared += 1
            # With an offset of 140 or 1400 the SVD itself loses some digits.
            assert row[0] == pytest.approx(slope, rel=1e-9), (x, y)
            assert row[1] == pytest.approx(intercept, rel=1e-9, abs=1e-9 * (1 + abs(slope)) * 1400), (x, y)
    assert compared > 1500


def test_ordinary_by_counts_is_polyfit_on_repeated_points() -> None:
    """On 300 small data sets, least squares by counts is numpy's on repeated points; all x equal is no line."""
    compared = 0
    for data in small_data(300, seed=4):
        found = ordinary(data.x, data.y)(data.counts)
        for row, counts in zip(found, data.counts, strict=True):
            x, y = np.repeat(data.x, counts), np.repeat(data.y, counts)
            if np.ptp(x) == 0:
                assert np.isnan(row).all()
                continue
            compared += 1
            slope, intercept = np.polyfit(x - data.x.mean(), y, 1)
            assert row[0] == pytest.approx(slope, rel=1e-9, abs=1e-9)
            assert row[1] == pytest.approx(intercept - slope * data.x.mean(), rel=1e-9, abs=1e-6)
    assert compared > 700


@pytest.mark.parametrize("variance_ratio", [0.5, 1.0, 2.0])
def test_weighted_deming_by_counts_is_the_iteration_on_repeated_points(variance_ratio: float) -> None:
    """On 40 comparisons over two decades with constant CV and two resamples of each."""
    rng = np.random.default_rng(6)
    for _ in range(40):
        truth = np.exp(rng.uniform(0, np.log(100), 15))
        x, y = truth * (1 + 0.05 * rng.normal(size=15)), 1.1 * truth * (1 + 0.05 * rng.normal(size=15))
        counts = np.vstack([np.ones(15, dtype=int), rng.multinomial(15, np.full(15, 1 / 15))]).astype(np.uint16)
        for row, some in zip(weighted_deming(x, y, variance_ratio)(counts), counts, strict=True):
            slope, intercept = slow_weighted_deming(np.repeat(x, some), np.repeat(y, some), variance_ratio)
            assert row[0] == pytest.approx(slope, rel=1e-8)
            assert row[1] == pytest.approx(intercept, rel=1e-7, abs=1e-8)
