"""Specimens that change side of a level, and how many specimens would settle a finding."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy import stats

from labstat.comparison.settle import settling_n
from labstat.comparison.sides import side_change
from labstat.errors import ArgumentError


def test_a_result_at_the_level_stands_on_its_upper_side() -> None:
    """Up is x < at <= y, down is y < at <= x: four specimens around 100, one of each kind and two that stay."""
    found = side_change([99, 100, 100, 80], [100, 99, 100, 99], 100)
    assert (found.n, found.up, found.down, found.at) == (4, 1, 1, 100.0)


def test_a_mean_of_replicates_is_not_put_below_the_level_by_rounding() -> None:
    """A result one bit below 0.15 is at 0.15, on either side of the comparison; a real difference counts."""
    at = 0.15
    just_below = float(np.nextafter(at, 0))
    assert side_change([just_below], [at], at).up == 0
    assert side_change([at], [just_below], at).down == 0
    assert side_change([0.14], [just_below], at).up == 1
    assert side_change([at - 1e-9], [at], at).up == 1


def test_shares_have_exact_intervals() -> None:
    """Clopper & Pearson (1934): 0 of 20 reaches to 1 - 0.025^(1/20) = 0.1684, and 5 of 20 from 0.0866 to 0.4910.

    The first from the closed form, the second as printed in tables of the binomial distribution (8.7 % to 49.1 %).
    """
    x = np.full(20, 90.0)
    y = np.where(np.arange(20) < 5, 110.0, 95.0)
    found = side_change(x, y, 100.0)
    assert (found.up, found.down) == (5, 0)
    assert (found.down_low, found.down_high) == pytest.approx((0.0, 1 - 0.025 ** (1 / 20)), abs=1e-12)
    assert (found.up_low, found.up_high) == pytest.approx((0.0866, 0.4910), abs=5e-5)


@given(st.integers(1, 60), st.data())
def test_exact_intervals_solve_the_binomial_tails(n: int, data: st.DataObject) -> None:
    """At the bounds the chance of the count, or one further out, is 2.5 %."""
    count = data.draw(st.integers(0, n))
    x = np.where(np.arange(n) < count, 1.0, 3.0)
    found = side_change(x, np.full(n, 3.0), 2.0)
    assert found.up == count
    if count > 0:
        assert stats.binom.sf(count - 1, n, found.up_low) == pytest.approx(0.025, rel=1e-6)
    if count < n:
        assert stats.binom.cdf(count, n, found.up_high) == pytest.approx(0.025, rel=1e-6)


@given(st.lists(st.tuples(st.integers(0, 20), st.integers(0, 20)), min_size=1, max_size=30), st.integers(0, 20))
def test_exchanging_the_procedures_exchanges_up_and_down(pairs: list[tuple[int, int]], at: int) -> None:
    """What goes up one way goes down the other, with the same intervals."""
    x, y = [u for u, _ in pairs], [v for _, v in pairs]
    one, other = side_change(x, y, at), side_change(y, x, at)
    assert (one.up, one.up_low, one.up_high) == (other.down, other.down_low, other.down_high)
    assert (one.down, one.down_low, one.down_high) == (other.up, other.up_low, other.up_high)


@pytest.mark.parametrize(
    ("argument", "x", "y", "at"),
    [
        ("x", [], [], 1.0),
        ("y", [1.0], [1.0, 2.0], 1.0),
        ("x", [float("inf")], [1.0], 1.0),
        ("at", [1.0], [1.0], float("nan")),
    ],
)
def test_bad_input_to_a_side_change_names_the_argument(
    argument: str, x: list[float], y: list[float], at: float
) -> None:
    """Refusals carry argument, rule and value."""
    with pytest.raises(ArgumentError) as caught:
        side_change(x, y, at)
    assert caught.value.argument == argument


@pytest.mark.parametrize(
    ("n", "half_width", "margin", "expected"),
    [
        (20, 3.0, 2.0, 93),  # 20 · (1.43 · 1.5)² = 92.02
        (40, 2.0, 2.0, 82),  # 40 · 1.43² = 81.80
        (40, 1.0, 1.43, 41),  # exactly 40, but 40 have not settled it
        (40, 0.1, 5.0, 41),
        (100, 1.5, 1.0, 461),  # 460.1
        (100, 1.5632, 1.0, 500),  # 499.7
        (100, 1.57, 1.0, None),  # 504.05
        (100, 1e9, 1e-9, None),
        (20, 1.0, 5e-324, None),
        (20, 3.0, 0.0, None),
        (20, 3.0, -1.0, None),
        (20, 0.0, 1.0, 21),
        (499, 0.5, 1.0, 500),
        (20, 2.1, 1.001, 180),  # exactly 180, though 180.00000000000006 in floating point
        (500, 0.1, 1.0, None),
    ],
)
def test_specimens_in_all_that_would_settle_it(
    n: int, half_width: float, margin: float, expected: int | None
) -> None:
    """n (1.43 h/m)² rounded up, above n, nothing above 500, nothing for an estimate on or outside the edge."""
    assert settling_n(n, half_width, margin) == expected


def test_the_factor_gives_a_chance_of_about_eighty_percent() -> None:
    """With that many specimens a normal interval lies inside the edge in 80 % of repetitions.

    1.43 = (1.96 + 0.84)/1.96: m / SE = 1.43 · 1.96 = 2.80, so that estimate + 1.96 SE stays below the edge with a
    chance of Φ(0.84).
    """
    n, half_width, margin = 50, 1.5, 1.0
    needed = settling_n(n, half_width, margin)
    assert needed is not None
    error = half_width / 1.96 * math.sqrt(n / needed)
    assert stats.norm.cdf(margin / error - 1.96) == pytest.approx(0.80, abs=0.01)


@pytest.mark.parametrize(
    ("argument", "call"),
    [("n", (0, 1.0, 1.0)), ("half_width", (20, -1.0, 1.0)), ("half_width", (20, float("nan"), 1.0)),
     ("margin", (20, 1.0, float("inf")))],
)
def test_bad_input_to_a_settling_number_names_the_argument(argument: str, call: tuple[int, float, float]) -> None:
    """Refusals carry argument, rule and value."""
    with pytest.raises(ArgumentError) as caught:
        settling_n(*call)
    assert caught.value.argument == argument
