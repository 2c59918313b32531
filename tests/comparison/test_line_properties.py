"""Invariances of the lines, shown on generated data: exchange, scale, shift, order, duplication, seeds."""

from __future__ import annotations

from typing import Any

import numpy as np
import numpy.typing as npt
import pytest
from hypothesis import assume, given
from hypothesis import strategies as st

from labstat.comparison.lines import METHODS, LineFit, fit_line
from labstat.errors import NotComputableError

Array = npt.NDArray[np.float64]
FAST: dict[str, Any] = {"resamples": 99, "seed": 1, "interval": "jackknife"}


@st.composite
def related(draw: st.DrawFn) -> tuple[Array, Array]:
    """5 to 25 pairs with one decimal, clearly related, ties welcome; positive, so that every method applies."""
    n = draw(st.integers(5, 25))
    x = np.array(draw(st.lists(st.integers(100, 900), min_size=n, max_size=n)), dtype=float)
    noise = np.array(draw(st.lists(st.integers(-12, 12), min_size=n, max_size=n)), dtype=float)
    assume(np.unique(x).size >= 4)
    assume(np.ptp(x) > 100)
    return x / 10, np.round(1.1 * x + noise) / 10


def fitted(x: Array, y: Array, **options: Any) -> LineFit:
    """A fit with a jackknife interval; examples without a line are not what these properties are about."""
    try:
        return fit_line(x, y, **{**FAST, **options})
    except NotComputableError:
        assume(False)
        raise


@given(related(), st.sampled_from([0.25, 0.7, 1.0, 3.0]))
def test_exchanging_the_procedures_inverts_a_deming_line(data: tuple[Array, Array], ratio: float) -> None:
    """With the reciprocal variance ratio the slope becomes 1/b and the intercept -a/b."""
    x, y = data
    forth = fitted(x, y, method="deming", variance_ratio=ratio)
    back = fitted(y, x, method="deming", variance_ratio=1 / ratio)
    assert back.slope.estimate == pytest.approx(1 / forth.slope.estimate, rel=1e-9)
    assert back.intercept.estimate == pytest.approx(-forth.intercept.estimate / forth.slope.estimate, abs=1e-6)


@given(related(), st.sampled_from([0.25, 1.0, 3.0]))
def test_exchanging_the_procedures_inverts_a_weighted_deming_line(data: tuple[Array, Array], ratio: float) -> None:
    """The weights 1/((X + λY)/(1 + λ))² change by a common factor only when x, y and λ are exchanged."""
    x, y = data
    forth = fitted(x, y, method="weighted-deming", variance_ratio=ratio)
    back = fitted(y, x, method="weighted-deming", variance_ratio=1 / ratio)
    assert back.slope.estimate == pytest.approx(1 / forth.slope.estimate, rel=1e-7)
    assert back.intercept.estimate == pytest.approx(-forth.intercept.estimate / forth.slope.estimate, abs=1e-5)


@given(related())
def test_exchanging_the_procedures_inverts_a_passing_bablok_line(data: tuple[Array, Array]) -> None:
    """Slope 1/b, intercept -a/b, and the rank interval from 1/high to 1/low."""
    x, y = data
    forth, back = fitted(x, y, method="passing-bablok"), fitted(y, x, method="passing-bablok")
    assert back.slope.estimate == pytest.approx(1 / forth.slope.estimate, rel=1e-12)
    assert back.intercept.estimate == pytest.approx(-forth.intercept.estimate / forth.slope.estimate, abs=1e-9)
    low, high = forth.slope.rank_low, forth.slope.rank_high
    assert back.slopes_used == forth.slopes_used
    if low is not None and high is not None and low > 0:
        assert back.slope.rank_low == pytest.approx(1 / high, rel=1e-12)
        assert back.slope.rank_high == pytest.approx(1 / low, rel=1e-12)


@pytest.mark.parametrize("method", METHODS)
@given(data=related(), factor=st.sampled_from([0.01, 0.1, 0.37, 4.0, 10.0, 1000.0]))
def test_multiplying_both_procedures_changes_nothing_but_the_intercept(
    method: str, data: tuple[Array, Array], factor: float
) -> None:
    """In another unit the slope, its jackknife interval and K and N stay, the intercept is multiplied."""
    x, y = data
    one, other = fitted(x, y, method=method), fitted(factor * x, factor * y, method=method)
    assert other.slope.estimate == pytest.approx(one.slope.estimate, rel=1e-9)
    assert (other.slope.low, other.slope.high) == pytest.approx((one.slope.low, one.slope.high), rel=1e-7, abs=1e-7)
    assert other.intercept.estimate / factor == pytest.approx(one.intercept.estimate, rel=1e-7, abs=1e-6)
    assert (other.pairs_below_minus_one, other.slopes_used) == (one.pairs_below_minus_one, one.slopes_used)


@pytest.mark.parametrize("method", ["ordinary", "deming", "passing-bablok"])
@given(data=related(), right=st.integers(-50, 500), up=st.integers(-50, 500))
def test_shifting_the_procedures_shifts_the_intercept_alone(
    method: str, data: tuple[Array, Array], right: int, up: int
) -> None:
    """x + s and y + t have the same slope, and the intercept moves by t - b s."""
    x, y = data
    one, other = fitted(x, y, method=method), fitted(x + right, y + up, method=method)
    assert other.slope.estimate == pytest.approx(one.slope.estimate, rel=1e-9)
    moved = one.intercept.estimate + up - one.slope.estimate * right
    assert other.intercept.estimate == pytest.approx(moved, rel=1e-7, abs=1e-5)


@given(related(), st.sampled_from([0.5, 3.0]), st.sampled_from([0.5, 1.0, 2.0]))
def test_a_unit_of_the_candidate_alone_multiplies_a_deming_slope(
    data: tuple[Array, Array], factor: float, ratio: float
) -> None:
    """y in another unit multiplies slope and intercept, when the variance ratio is in the new unit too."""
    x, y = data
    one = fitted(x, y, method="deming", variance_ratio=ratio)
    other = fitted(x, factor * y, method="deming", variance_ratio=ratio / factor**2)
    assert other.slope.estimate == pytest.approx(factor * one.slope.estimate, rel=1e-9)
    assert other.intercept.estimate == pytest.approx(factor * one.intercept.estimate, rel=1e-7, abs=1e-6)


@given(related())
def test_an_error_free_comparative_makes_deming_the_ordinary_line(data: tuple[Array, Array]) -> None:
    """As var(x error) / var(y error) goes to 0 the Deming slope goes to that of least squares of y on x."""
    x, y = data
    ordinary = fitted(x, y, method="ordinary").slope.estimate
    assert fitted(x, y, method="deming", variance_ratio=1e-12).slope.estimate == pytest.approx(ordinary, rel=1e-9)


@pytest.mark.parametrize("method", METHODS)
@given(data=related(), shuffle=st.randoms(use_true_random=False))
def test_the_order_of_the_rows_changes_nothing(method: str, data: tuple[Array, Array], shuffle: Any) -> None:
    """With the same seed a permuted table gives the same estimates and intervals, to the last bit.

    K alone may differ: a vertical pair counts by which of its points stands first (Passing & Bablok 1983).
    """
    x, y = data
    order = list(range(x.size))
    shuffle.shuffle(order)
    options = {"method": method, "interval": "bca", "resamples": 199}
    one, other = fitted(x, y, **options), fitted(x[order], y[order], **options)
    assert (one.slope, one.intercept) == (other.slope, other.intercept)
    assert one.bias_at([50.0]) == other.bias_at([50.0])


@given(related(), st.integers(2, 4))
def test_a_data_set_several_times_over_has_the_same_deming_line(data: tuple[Array, Array], times: int) -> None:
    """Duplicating every pair leaves slope and intercept of the Deming and ordinary lines."""
    x, y = data
    for method in ("ordinary", "deming", "weighted-deming"):
        one, other = fitted(x, y, method=method), fitted(np.tile(x, times), np.tile(y, times), method=method)
        assert other.slope.estimate == pytest.approx(one.slope.estimate, rel=1e-9)
        assert other.intercept.estimate == pytest.approx(one.intercept.estimate, rel=1e-7, abs=1e-6)


@pytest.mark.parametrize("method", METHODS)
@given(data=related(), slope=st.sampled_from([0.5, 1.0, 1.25]), intercept=st.integers(0, 20))
def test_points_on_a_line_give_that_line(
    method: str, data: tuple[Array, Array], slope: float, intercept: int
) -> None:
    """Without any error every method finds the line, and the bias at a level follows from it."""
    x, _ = data
    fit = fitted(x, intercept + slope * x, method=method)
    assert fit.slope.estimate == pytest.approx(slope, rel=1e-9)
    assert fit.intercept.estimate == pytest.approx(intercept, abs=1e-6)
    (bias,) = fit.bias_at([40.0])
    assert bias.bias.estimate == pytest.approx(intercept + (slope - 1) * 40, abs=1e-6)


def rounded(n: int = 40) -> tuple[Array, Array]:
    """Whole numbers over a narrow range: many pair slopes are the same fraction."""
    rng = np.random.default_rng(3)
    x = np.round(rng.normal(140, 4, n))
    return x, np.round(x + rng.normal(0, 1.4, n))


@pytest.mark.parametrize("divisor", [10.0, 100.0])
@pytest.mark.parametrize("parameter", [0, 1], ids=["slope", "intercept"])
def test_tied_resamples_stay_tied_in_another_unit(parameter: int, divisor: float) -> None:
    """Of rounded results as many resamples tie with the estimate, or lie below it, in whole numbers as in decimals.

    0.3 - 0.2 is not 0.1 in floating point, so slopes that are one fraction differ in their last bits. BCa and the
    calibration count resamples at or below the estimate: what ties is a fact of the decimal data.
    """
    x, y = rounded()
    counted = []
    for unit in (1.0, divisor):
        fit = fit_line(x / unit, y / unit, method="passing-bablok", interval="bca", resamples=999, seed=1)
        values, estimate = fit.kept.values[:, parameter], fit.kept.estimate[parameter]
        counted.append((int(np.sum(values < estimate)), int(np.sum(values == estimate))))
    assert counted[0][1] > 50  # ties are what this test is about
    assert counted[1] == counted[0]


@pytest.mark.parametrize("interval", ["percentile", "bca", "calibrated"])
def test_intervals_of_rounded_results_are_the_same_in_another_unit(interval: str) -> None:
    """Multiplying both procedures by 0.1 leaves the slope's interval and what it attains, ties or not."""
    x, y = rounded()
    options = {"method": "passing-bablok", "interval": interval, "resamples": 199, "seed": 1}
    one, other = fit_line(x, y, **options), fit_line(x / 10, y / 10, **options)
    assert (other.slope.low, other.slope.high) == pytest.approx((one.slope.low, one.slope.high), rel=1e-9)
    assert other.intercept.low * 10 == pytest.approx(one.intercept.low, abs=1e-6)
    assert other.intercept.high * 10 == pytest.approx(one.intercept.high, abs=1e-6)
    assert other.slope.attained == one.slope.attained
    assert other.intercept.attained == one.intercept.attained
    assert (one.slope.interval, one.slope.replaced) == (other.slope.interval, other.slope.replaced)
