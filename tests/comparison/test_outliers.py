"""Flagging outlying differences: what is looked for, what is left alone, and what must not choose."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy import stats

from labstat.comparison.outliers import flagged, search
from labstat.errors import ArgumentError


def normal_scores(n: int) -> np.ndarray:
    """n values spread as a normal sample is expected to be."""
    return stats.norm.ppf((np.arange(1, n + 1) - 0.5) / n)


def test_two_outliers_that_hide_each_other_are_both_flagged() -> None:
    """Two gross values inflate the SD until neither stands out alone; looked for together both are found."""
    values = np.append(normal_scores(30), [4.5, 4.6])
    found = flagged(values)
    assert [step.index for step in found] == [31, 30]
    assert found[0].statistic < found[1].statistic


def test_one_gross_value_is_flagged_with_its_place_and_value() -> None:
    """Index and value are those of the array handed in."""
    values = np.insert(normal_scores(40), 7, -9.0)
    (found,) = flagged(values)
    assert (found.index, found.value) == (7, -9.0)
    assert found.statistic > found.critical


def test_a_normal_sample_is_left_alone() -> None:
    """Expected normal scores hold nothing to flag, from 10 to 200 values."""
    for n in (10, 25, 60, 200):
        assert flagged(normal_scores(n)) == ()


@pytest.mark.parametrize("n", [10, 25, 60])
def test_a_normal_sample_is_flagged_in_alpha_of_cases(n: int) -> None:
    """In 1,000 normal samples anything is flagged in about 5 %: three standard errors and Rosner's half a point."""
    rng = np.random.default_rng(n)
    share = np.mean([bool(flagged(rng.normal(size=n))) for _ in range(1000)])
    assert abs(share - 0.05) < 3 * math.sqrt(0.05 * 0.95 / 1000) + 0.005


@pytest.mark.parametrize(("n", "most"), [(10, 1), (19, 1), (20, 2), (54, 5), (100, 10), (400, 10)])
def test_the_search_looks_for_a_tenth_and_never_for_more_than_ten(n: int, most: int) -> None:
    """r = max(1, a tenth of n, rounded down) up to 10: of many gross values no more than r are flagged."""
    # Far apart from each other, so that each step finds a value that stands out from the rest.
    gross = 10.0 ** np.arange(3, 3 + most + 1) if most > 1 else np.array([1e3])
    values = np.append(normal_scores(n - gross.size), gross)
    assert len(flagged(values)) == most


def test_a_larger_share_looks_for_more() -> None:
    """``largest_share`` moves the number that is looked for."""
    values = np.append(normal_scores(17), [50.0, 500.0, 5000.0])
    assert len(flagged(values)) == 2
    assert len(flagged(values, largest_share=0.2)) == 3


def test_fewer_than_ten_values_flag_nothing() -> None:
    """With 9 values there is no search; with 10 there is."""
    assert flagged([0.0, 1, 2, 3, 4, 5, 6, 7, 1e6]) == ()
    assert len(flagged([0.0, 1, 2, 3, 4, 5, 6, 7, 8, 1e6])) == 1


def test_equal_differences_flag_nothing() -> None:
    """Without spread there is no deviate, even where equal decimals differ in their last bits."""
    assert flagged(np.full(30, 2.0)) == ()
    assert flagged(np.zeros(30)) == ()
    x = np.arange(1, 31) / 10
    assert np.unique((x + 0.1) - x).size > 1  # rounding alone
    assert flagged((x + 0.1) - x) == ()
    one_bit_off = np.full(30, 0.1)
    one_bit_off[3] = np.nextafter(0.1, 1.0)
    assert flagged(one_bit_off) == ()


def test_of_two_values_equally_far_out_the_larger_goes_first() -> None:
    """-8.6 and 9.2 lie 8.9 from the mean of 0.3; the last bit of either distance must not choose."""
    tenths = [round(0.3 + side * k / 10, 1) for k in range(14) for side in (1, -1)]
    for extremes in ([9.2, -8.6], [-8.6, 9.2]):
        values = np.array(tenths + extremes)
        distances = np.abs(values[-2:] - math.fsum(values) / values.size)
        assert distances[0] != distances[1]  # by one bit, and the smaller value is the one further out
        first, second = search(values, most=2)
        assert (first.value, second.value) == (9.2, -8.6)


def test_deviates_do_not_depend_on_the_order_in_the_last_bit() -> None:
    """200 permutations of uneven numbers give one and the same deviate: the sums are exact."""
    rng = np.random.default_rng(1)
    for values in (rng.normal(size=50) * 10.0 ** rng.integers(-3, 3, 50), 1000.0 + rng.normal(size=50)):
        statistics = {search(rng.permutation(values), most=1)[0].statistic for _ in range(200)}
        assert len(statistics) == 1


def test_rounding_of_means_is_no_spread_beside_the_results() -> None:
    """Differences that are zero but for rounding are told by the size of the results they come from."""
    noise = np.append(np.zeros(29), 1e-14)
    assert len(flagged(noise)) == 1
    assert flagged(noise, scale=150.0) == ()


def test_one_value_apart_from_equal_ones_is_flagged_and_the_search_ends() -> None:
    """What is left has no spread: one step, no division by zero."""
    values = np.append(np.full(29, 0.1), 0.4)
    steps = search(values, most=3)
    assert len(steps) == 1
    # (n - 1)/√n is the largest deviate that n values can have
    assert steps[0].statistic == pytest.approx(29 / math.sqrt(30), rel=1e-9)
    assert len(flagged(values)) == 1


@given(st.lists(st.integers(-30, 30), min_size=10, max_size=40), st.randoms(use_true_random=False))
def test_the_order_of_the_values_changes_nothing_but_the_places(values: list[int], shuffle: object) -> None:
    """Values, deviates and critical values are the same for a permuted array."""
    order = list(range(len(values)))
    shuffle.shuffle(order)  # type: ignore[attr-defined]
    tenths = np.array([*values, 400]) / 10
    order.append(len(values))
    one, other = flagged(tenths), flagged(tenths[order])
    assert [(s.value, s.statistic, s.critical) for s in one] == [(s.value, s.statistic, s.critical) for s in other]
    assert all(tenths[order][s.index] == s.value for s in other)


@given(st.lists(st.integers(-30, 30), min_size=10, max_size=40, unique=True), st.floats(0.01, 100), st.integers(-9, 9))
def test_another_unit_flags_the_same_values(values: list[int], factor: float, shift: int) -> None:
    """Multiplying and shifting leaves the flagged places."""
    array = np.array([*values, 500.0])
    assert [s.index for s in flagged(array)] == [s.index for s in flagged(array * factor + shift)]


@pytest.mark.parametrize(
    ("argument", "call"),
    [
        ("differences", lambda: flagged([1.0, float("nan")] * 10)),
        ("differences", lambda: flagged([[1.0, 2.0]])),
        ("largest_share", lambda: flagged(np.arange(20.0), largest_share=0.5)),
        ("largest_share", lambda: flagged(np.arange(20.0), largest_share=0.0)),
        ("alpha", lambda: flagged(np.arange(20.0), alpha=1.0)),
        ("alpha", lambda: flagged(np.arange(20.0), alpha=0.0)),
        ("most", lambda: search(np.arange(20.0), most=19)),
        ("most", lambda: search(np.arange(20.0), most=0)),
        ("scale", lambda: flagged(np.arange(20.0), scale=float("inf"))),
    ],
)
def test_bad_input_names_the_argument(argument: str, call: object) -> None:
    """Refusals carry argument, rule and value."""
    with pytest.raises(ArgumentError) as caught:
        call()  # type: ignore[operator]
    assert caught.value.argument == argument
