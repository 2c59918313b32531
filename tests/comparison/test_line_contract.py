"""What a caller of the lines and differences can rely on: seeds, frozen results, refusals, counted failures."""

from __future__ import annotations

import dataclasses
from typing import Any

import numpy as np
import pytest
from slow.intervals import slow_percentile

import labstat
from labstat.comparison.differences import difference
from labstat.comparison.lines import METHODS, fit_line
from labstat.errors import ArgumentError, LabstatError, NotComputableError
from labstat.resample.counts import first_level

RNG = np.random.default_rng(42)
X = np.round(RNG.uniform(20, 200, 24), 1)
Y = np.round(1.03 * X + RNG.normal(0, 3, 24), 1)


@pytest.mark.parametrize("interval", ["calibrated", "percentile", "bca", "jackknife"])
@pytest.mark.parametrize("method", METHODS)
def test_two_calls_with_one_seed_are_identical(method: str, interval: str) -> None:
    """Every number of slope, intercept and bias is the same in two calls with the same seed."""
    options = {"method": method, "interval": interval, "resamples": 99, "seed": 7}
    one, other = fit_line(X, Y, **options), fit_line(X, Y, **options)
    assert (one.slope, one.intercept) == (other.slope, other.intercept)
    assert one.bias_at([30, 150]) == other.bias_at([30, 150])
    assert one.seed == 7


@pytest.mark.parametrize("method", METHODS)
def test_two_seeds_draw_different_resamples(method: str) -> None:
    """Another seed gives other bounds and the same estimate."""
    one, other = (fit_line(X, Y, method=method, interval="bca", resamples=199, seed=seed) for seed in (1, 2))
    assert one.slope.estimate == other.slope.estimate
    assert (one.slope.low, one.slope.high) != (other.slope.low, other.slope.high)


def test_a_seed_drawn_afresh_is_recorded_and_repeats_the_fit() -> None:
    """``seed=None`` draws a new seed each time; the recorded one gives the same numbers again."""
    one = fit_line(X, Y, method="deming", interval="bca", resamples=199)
    other = fit_line(X, Y, method="deming", interval="bca", resamples=199)
    assert one.seed != other.seed
    again = fit_line(X, Y, method="deming", interval="bca", resamples=199, seed=one.seed)
    assert (again.slope, again.intercept) == (one.slope, one.intercept)


def test_an_estimate_says_how_it_was_obtained() -> None:
    """Level, interval, resamples, failed resamples and Monte-Carlo error stand in the estimate itself."""
    fit = fit_line(X, Y, method="deming", interval="bca", level=0.9, resamples=499, seed=1)
    slope = fit.slope
    assert (slope.level, slope.interval, slope.resamples, slope.failed_resamples) == (0.9, "bca", 499, 0)
    assert slope.low < slope.estimate < slope.high
    assert 0 < slope.monte_carlo_error < slope.high - slope.low
    assert (fit.n, fit.method, fit.variance_ratio) == (24, "deming", 1.0)
    assert (fit.pairs_below_minus_one, fit.slopes_used) == (None, None)


def test_a_higher_level_gives_a_wider_interval() -> None:
    """From the same resamples, 99 % holds 95 % holds 80 %."""
    for interval in ("percentile", "bca", "jackknife", "calibrated"):
        fits = [
            fit_line(X, Y, method="deming", interval=interval, level=level, resamples=199, seed=1).slope
            for level in (0.8, 0.95, 0.99)
        ]
        lows, highs = [fit.low for fit in fits], [fit.high for fit in fits]
        assert lows == sorted(lows, reverse=True)
        assert highs == sorted(highs)
        assert lows[0] > lows[-1]


def test_bias_at_levels_is_read_from_the_lines_own_resamples() -> None:
    """Bias a + (b - 1) X and its percent: estimate and percentile bounds from slope and intercept, draw by draw."""
    fit = fit_line(X, Y, method="deming", interval="percentile", resamples=199, seed=3)
    biases = fit.bias_at([30.0, 150.0])
    assert [bias.at for bias in biases] == [30.0, 150.0]
    for bias in biases:
        assert bias.bias.estimate == pytest.approx(
            fit.intercept.estimate + (fit.slope.estimate - 1) * bias.at, rel=1e-12
        )
        drawn = [a + (b - 1) * bias.at for b, a in fit.kept.values]
        assert (bias.bias.low, bias.bias.high) == pytest.approx(slow_percentile(drawn, 0.95), rel=1e-9)
        assert bias.percent is not None
        for name in ("estimate", "low", "high", "monte_carlo_error"):
            assert getattr(bias.percent, name) == pytest.approx(getattr(bias.bias, name) * 100 / bias.at, rel=1e-9)


def test_percent_bias_has_no_value_at_zero_and_keeps_its_sign_below() -> None:
    """At a level of 0 there is no percent; at a negative level it is percent of the absolute value."""
    zero, below = fit_line(X - 100, Y - 100, method="deming", interval="bca", resamples=99, seed=1).bias_at([0, -50])
    assert zero.percent is None
    assert below.percent is not None
    assert below.percent.estimate == pytest.approx(below.bias.estimate * 100 / 50, rel=1e-9)
    assert below.percent.low == pytest.approx(below.bias.low * 2, rel=1e-9)
    assert below.percent.low < below.percent.high


def test_results_are_frozen() -> None:
    """No field of a fit, an estimate or a bias can be written."""
    fit = fit_line(X, Y, method="deming", interval="jackknife", resamples=99, seed=1)
    for thing, name in [(fit, "n"), (fit.slope, "estimate"), (fit.bias_at([50])[0], "at")]:
        with pytest.raises(dataclasses.FrozenInstanceError):
            setattr(thing, name, 1)


def test_the_rank_interval_of_1983_leads_when_it_is_asked_for() -> None:
    """``interval="rank"`` gives the classical bounds, without resamples, under its own name."""
    fit = fit_line(X, Y, method="passing-bablok", interval="rank", resamples=99, seed=1)
    for estimate in (fit.slope, fit.intercept):
        assert estimate.interval == "rank"
        assert (estimate.low, estimate.high) == (estimate.rank_low, estimate.rank_high)
        assert estimate.resamples is None
        assert estimate.low <= estimate.estimate <= estimate.high
    (bias,) = fit.bias_at([50])
    assert bias.bias.replaced == "rank"  # a bias has no rank interval
    assert bias.bias.reason


def test_a_rank_interval_that_runs_off_the_slopes_is_replaced_by_name() -> None:
    """At n = 4 the ranks do not exist: another interval stands in, and says so."""
    fit = fit_line([1, 2, 3, 4.5], [1.1, 2.3, 2.9, 4.4], method="passing-bablok", interval="rank", resamples=99, seed=1)
    assert fit.slope.rank_low is None
    assert fit.slope.replaced == "rank"
    assert fit.slope.interval != "rank"
    assert fit.slope.reason


def test_failed_resamples_are_counted_and_above_one_percent_there_is_no_interval() -> None:
    """Resamples that hold one distinct comparative result have no line: as many as are drawn, each counted."""
    x, y = np.array([5.0, 5.0, 5.0, 5.0, 8.0]), np.array([4.9, 5.1, 5.0, 5.2, 8.3])
    fit = fit_line(x, y, method="ordinary", interval="percentile", resamples=499, seed=1)
    counts = np.concatenate(list(first_level(5, 499, seed=fit.kept.seed)))
    without = int(np.sum((counts[:, 4] == 0) | (counts[:, 4] == 5)))
    assert fit.slope.failed_resamples == without > 5
    assert (fit.slope.low, fit.slope.high) == (None, None)
    assert str(without) in fit.slope.reason


BAD: list[tuple[str, dict[str, Any]]] = [
    ("y", {"y": Y[:-1]}),
    ("x", {"x": X[:2], "y": Y[:2]}),
    ("x", {"x": np.where(np.arange(24) == 3, np.nan, X)}),
    ("y", {"y": np.where(np.arange(24) == 3, np.inf, Y)}),
    ("x", {"x": X.reshape(2, 12)}),
    ("x", {"x": ["five"] * 24}),
    ("method", {"method": "least-squares"}),
    ("interval", {"interval": "guess"}),
    ("interval", {"interval": "rank", "method": "deming"}),
    ("level", {"level": 0.0}),
    ("level", {"level": 1.0}),
    ("level", {"level": 95}),
    ("level", {"level": float("nan")}),
    ("variance_ratio", {"variance_ratio": 0.0, "method": "deming"}),
    ("variance_ratio", {"variance_ratio": -1.0, "method": "deming"}),
    ("variance_ratio", {"variance_ratio": float("inf"), "method": "deming"}),
    ("variance_ratio", {"variance_ratio": "replicates", "method": "deming"}),
    ("resamples", {"resamples": 0}),
    ("resamples", {"resamples": -5}),
    ("resamples", {"resamples": 999.5}),
    ("resamples", {"resamples": True}),
    ("seed", {"seed": 1.5}),
    ("seed", {"seed": "today"}),
    ("seed", {"seed": True}),
    ("clusters", {"clusters": [1, 2, 3]}),
    ("clusters", {"clusters": [1] * 24}),
]


@pytest.mark.parametrize(("argument", "changed"), BAD)
def test_bad_input_to_a_line_names_argument_rule_and_value(argument: str, changed: dict[str, Any]) -> None:
    """One documented exception family, with the argument, the rule and the value received."""
    call = {"x": X, "y": Y, "method": "passing-bablok", "resamples": 99, "seed": 1, **changed}
    with pytest.raises(ArgumentError) as caught:
        fit_line(call.pop("x"), call.pop("y"), **call)
    assert caught.value.argument == argument
    assert caught.value.rule
    assert str(caught.value).startswith(argument)
    assert repr(caught.value.value) in str(caught.value)
    assert isinstance(caught.value, LabstatError)


@pytest.mark.parametrize(
    ("argument", "changed"),
    [
        ("y", {"y": Y[:-1]}),
        ("scale", {"scale": "ratio"}),
        ("interval", {"interval": "rank"}),
        ("level", {"level": 1.5}),
        ("resamples", {"resamples": 0}),
        ("resamples", {"resamples": 99.5}),
        ("seed", {"seed": "today"}),
    ],
)
def test_bad_input_to_a_difference_names_argument_rule_and_value(argument: str, changed: dict[str, Any]) -> None:
    """The differences refuse by the same exception."""
    call = {"x": X, "y": Y, "interval": "bca", "resamples": 99, "seed": 1, **changed}
    with pytest.raises(ArgumentError) as caught:
        difference(call.pop("x"), call.pop("y"), **call)
    assert caught.value.argument == argument


def test_options_are_keyword_only() -> None:
    """What comes after the data must be named."""
    with pytest.raises(TypeError):
        fit_line(X, Y, "deming")
    with pytest.raises(TypeError):
        difference(X, Y, "percent")


@pytest.mark.parametrize("method", METHODS)
def test_equal_comparative_results_have_no_line(method: str) -> None:
    """All x equal: a refusal in words, no number and no bare numpy error."""
    with pytest.raises(NotComputableError, match="comparative"):
        fit_line(np.full(24, 5.0), Y, method=method, resamples=99, seed=1)


@pytest.mark.parametrize("method", ["deming", "weighted-deming", "passing-bablok"])
def test_equal_candidate_results_have_no_line(method: str) -> None:
    """All y equal: the line with error in both has no direction to take."""
    with pytest.raises(NotComputableError, match="candidate"):
        fit_line(X, np.full(24, 5.0), method=method, resamples=99, seed=1)


@pytest.mark.parametrize("method", ["deming", "weighted-deming"])
@pytest.mark.parametrize("swapped", [False, True])
def test_unrelated_decimal_results_have_no_deming_line(method: str, swapped: bool) -> None:
    """A sum of products that is zero in decimals is zero: a refusal, not a slope of 1e16 made of rounding.

    Deviations of x are -4, 2, 2, 0 hundredths and of y -0.5, -0.5, -0.5, 1.5: their products sum to 2 - 1 - 1 + 0 = 0.
    """
    x, y = [0.07, 0.13, 0.13, 0.11], [0.09, 0.09, 0.09, 0.11]
    if swapped:
        x, y = y, x
    with pytest.raises(NotComputableError):
        fit_line(x, y, method=method, resamples=99, seed=1)


def test_a_negative_relation_has_no_passing_bablok_line() -> None:
    """Candidate falling while the comparative rises: no positive relation, a refusal."""
    with pytest.raises(NotComputableError, match="no positive relation"):
        fit_line(X, 300 - 1.4 * X, method="passing-bablok", resamples=99, seed=1)


def test_results_that_differ_by_rounding_alone_are_equal() -> None:
    """Means of replicates equal but for their last bits make a vertical pair, and equal points are no pair at all.

    0.1 + 0.2 and 0.3 are one result: the pairs dropped, those below -1 and the line are those of the decimal data.
    """
    options = {"method": "passing-bablok", "interval": "jackknife", "resamples": 99, "seed": 1}
    y = [0.31, 0.31, 0.5, 0.9, 1.2, 1.7]
    decimal = fit_line([0.3, 0.3, 0.3, 0.8, 1.3, 1.6], y, **options)
    rounded = fit_line([0.3, 0.1 + 0.2, 0.3, 0.8, 1.3, 1.6], y, **options)
    assert (rounded.slopes_used, rounded.pairs_below_minus_one) == (14, 0)  # 15 pairs less one; two rise vertically
    assert (decimal.slopes_used, decimal.pairs_below_minus_one) == (14, 0)
    assert rounded.slope.estimate == pytest.approx(decimal.slope.estimate, rel=1e-12)


def test_differences_are_candidate_minus_comparative() -> None:
    """Mean y - x and limits mean ± 1.96 s; the same in percent of the mean of the two."""
    found = difference(X, Y, interval="bca", resamples=199, seed=1)
    d = Y - X
    assert found.mean.estimate == pytest.approx(d.mean(), rel=1e-12)
    assert found.sd == pytest.approx(d.std(ddof=1), rel=1e-12)
    assert found.lower.estimate == pytest.approx(d.mean() - 1.959963984540054 * d.std(ddof=1), rel=1e-10)
    assert found.upper.estimate == pytest.approx(d.mean() + 1.959963984540054 * d.std(ddof=1), rel=1e-10)
    percent = difference(X, Y, scale="percent", interval="bca", resamples=199, seed=1)
    assert percent.mean.estimate == pytest.approx((200 * d / (X + Y)).mean(), rel=1e-12)
    assert (found.n, found.scale, percent.scale) == (24, "absolute", "percent")


def test_differences_do_not_depend_on_the_order_of_the_rows() -> None:
    """A permuted table gives the same estimates and intervals with the same seed."""
    order = np.random.default_rng(1).permutation(24)
    options = {"interval": "calibrated", "resamples": 199, "seed": 5}
    assert difference(X, Y, **options) == difference(X[order], Y[order], **options)


def test_percent_differences_of_results_at_zero_are_refused() -> None:
    """A pair whose mean is not positive has no percent difference."""
    with pytest.raises(NotComputableError, match="positive"):
        difference(np.r_[X, 0.0], np.r_[Y, 0.0], scale="percent", resamples=99, seed=1)


def test_the_line_is_reached_from_the_package_itself() -> None:
    """``labstat.fit_line`` is the documented entry."""
    assert labstat.fit_line is fit_line


def test_a_large_passing_bablok_study_is_not_calibrated_and_a_larger_one_is_refused() -> None:
    """Above 1000 pairs the percentile interval takes the calibrated one's place by name; above 3000 no line."""
    truth = np.linspace(1.0, 100.0, 3001)
    y = truth + np.random.default_rng(1).normal(0.0, 1.0, 3001)
    fit = fit_line(truth[:1001], y[:1001], resamples=99, seed=1)
    assert (fit.slope.interval, fit.slope.replaced) == ("percentile", "calibrated")
    assert "too many units" in str(fit.slope.reason)
    with pytest.raises(NotComputableError, match="3000 pairs"):
        fit_line(truth, y, resamples=99, seed=1)


def test_a_bias_can_be_read_like_an_estimate() -> None:
    """One estimate a level: estimate, low and high are those in units."""
    x = np.linspace(1.0, 100.0, 30)
    first, second = fit_line(x, 1.1 * x + np.sin(x), method="deming", resamples=99, seed=1).bias_at([10, 50])
    assert (first.estimate, first.low, first.high) == (first.bias.estimate, first.bias.low, first.bias.high)
    assert (first.at, second.at) == (10.0, 50.0)
