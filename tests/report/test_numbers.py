"""Numbers and ticks as the page shows them."""

from __future__ import annotations

import itertools

import pytest
from hypothesis import given
from hypothesis import strategies as st

from labstat.report.numbers import number, p_value, percent, signed, significant, span
from labstat.report.ticks import linear_ticks, log_ticks, tick_labels

FINITE = st.floats(-1e9, 1e9, allow_nan=False)


@pytest.mark.parametrize(
    ("value", "decimals", "shown"),
    [
        (None, 1, "–"),
        (float("nan"), 1, "–"),
        (-1.25, 1, "−1.2"),
        (-0.04, 1, "0.0"),
        (-0.0, 0, "0"),
        (9999.0, 0, "9999"),
        (10000.0, 0, "10\u202f000"),
        (-1234567.891, 2, "−1\u202f234\u202f567.89"),
        (9999.96, 1, "10\u202f000.0"),
    ],
)
def test_a_number_has_fixed_decimals_a_true_minus_and_grouped_thousands(
    value: float | None, decimals: int, shown: str
) -> None:
    assert number(value, decimals) == shown


@given(FINITE, st.integers(0, 6))
def test_a_shown_number_reads_back_as_the_rounded_value(value: float, decimals: int) -> None:
    shown = number(value, decimals)
    assert "-" not in shown
    assert float(shown.replace("\u202f", "").replace("−", "-")) == float(f"{value:.{decimals}f}")


@given(FINITE, st.integers(0, 4))
def test_zero_never_carries_a_sign(value: float, decimals: int) -> None:
    if float(f"{value:.{decimals}f}") == 0.0:
        assert number(value, decimals)[0] == signed(value, decimals)[0] == "0"


def test_signed_numbers_carry_their_sign() -> None:
    assert [signed(value, 1) for value in (1.25, -1.25, 0.04, None)] == ["+1.2", "−1.2", "0.0", "–"]


def test_intervals_shares_and_p_values_are_worded() -> None:
    assert span(-1.2, 3.4, 1) == "−1.2 to 3.4"
    assert span(None, 3.4, 1) == "no interval"
    assert percent(0.0314) == "3.1\u202f%"
    assert percent(None) == "–"
    assert (p_value(0.0004), p_value(0.0321)) == ("p < 0.001", "p = 0.032")


def test_significant_digits_follow_the_size_of_the_value() -> None:
    assert [significant(value) for value in (0.0012345, 1.2345, 123.45, 0.0, None)] == [
        "0.00123", "1.23", "123", "0", "–",
    ]


@given(st.floats(-1e6, 1e6), st.floats(1e-6, 1e6), st.integers(3, 9))
def test_linear_ticks_are_few_rising_evenly_spaced_and_inside(low: float, spread: float, most: int) -> None:
    high = low + spread
    ticks = linear_ticks(low, high, most=most)
    assert 1 <= len(ticks) <= most
    slack = 1e-6 * (high - low) + 1e-9 * max(abs(low), abs(high))
    assert all(low - slack <= tick <= high + slack for tick in ticks)
    steps = [b - a for a, b in itertools.pairwise(ticks)]
    assert all(step > 0 and abs(step - steps[0]) <= slack for step in steps)


@given(st.floats(0, 1e5), st.floats(1e-3, 1e5))
def test_linear_tick_labels_differ_from_each_other(low: float, spread: float) -> None:
    ticks = linear_ticks(low, low + max(spread, 1e-3 * low))
    assert len(set(tick_labels(ticks))) == len(ticks)


@given(st.floats(1e-4, 1e4), st.floats(30.0, 1e6))
def test_log_ticks_are_inside_rise_and_have_distinct_labels(low: float, ratio: float) -> None:
    ticks = log_ticks(low, low * ratio)
    assert ticks
    assert ticks == sorted(set(ticks))
    assert all(low * (1 - 1e-8) <= tick <= low * ratio * (1 + 1e-8) for tick in ticks)
    assert len(set(tick_labels(ticks))) == len(ticks)
