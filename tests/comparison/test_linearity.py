"""The cusum test: scores, order, ties, and the cases without a score."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from labstat.comparison.linearity import cusum
from labstat.errors import ArgumentError


def test_scores_and_statistic_follow_the_definition_by_hand() -> None:
    """Three above, two below, one on the line, worked by hand.

    Residuals along x = 1 … 6: + 0 − + − +. Above scores √(2/3) = 0.8165, below −√(3/2) = −1.2247. The cusum runs
    0.8165, 0.8165, −0.4082, 0.4082, −0.8165, 0; its largest size is 0.8165, over √(L + 1) = √3: 0.4714.
    """
    x = np.array([1.0, 2, 3, 4, 5, 6])
    y = x + np.array([0.1, 0, -0.1, 0.1, -0.1, 0.1])
    found = cusum(x, y, 1.0, 0.0)
    assert found.statistic == pytest.approx(math.sqrt(2 / 3) / math.sqrt(3), rel=1e-12)
    assert found.p_value == pytest.approx(0.9794, abs=5e-4)  # Kolmogorov's series at 0.4714, three terms


def test_above_and_below_do_not_play_the_same_part() -> None:
    """The divisor counts the points below alone: 8 above then 2 below is not 2 above then 8 below."""
    x = np.arange(1.0, 11.0)
    up_first = cusum(x, x + np.where(x <= 8, 0.1, -0.1), 1.0, 0.0).statistic
    down_first = cusum(x, x + np.where(x <= 8, -0.1, 0.1), 1.0, 0.0).statistic
    assert up_first == pytest.approx(8 * math.sqrt(2 / 8) / math.sqrt(3), rel=1e-12)
    assert down_first == pytest.approx(8 * math.sqrt(2 / 8) / math.sqrt(9), rel=1e-12)


def test_a_curve_gives_a_small_p_and_scatter_a_large_one() -> None:
    """Sixty points on a parabola against its chord run to one side and back; alternating points do not."""
    x = np.linspace(1, 10, 60)
    curved = x + 0.05 * (x - 5.5) ** 2
    assert cusum(x, curved, 1.0, float(np.median(curved - x))).p_value < 0.01
    assert cusum(x, x + 0.1 * (-1.0) ** np.arange(60), 1.0, 0.0).p_value > 0.99


def test_points_enter_in_the_order_of_their_projections_not_of_x() -> None:
    """With slope 2 a point far above stands further along the line than its x, or its x + y, says.

    Residuals + + − − at x = 0, 1, 2, 3 and projections x + 2y = 0.2, 10.4, 9.8, 14.8: the order is + − + −, whose
    cusum never exceeds 1. In the order of x, or of x + y = 0.1, 5.7, 5.9, 8.9, it would reach 2.
    """
    x = np.array([0.0, 1.0, 2.0, 3.0])
    y = 2 * x + np.array([0.1, 2.7, -0.1, -0.1])
    assert cusum(x, y, 2.0, 0.0).statistic == pytest.approx(1 / math.sqrt(3), rel=1e-12)


def test_a_falling_line_is_followed_downwards() -> None:
    """For a negative slope the projections still order the points along the line."""
    x = np.arange(1.0, 11.0)
    y = 20 - x + np.where(x <= 5, 0.1, -0.1)
    assert cusum(x, y, -1.0, 20.0).statistic == pytest.approx(5 / math.sqrt(6), rel=1e-12)


def test_points_level_along_the_line_enter_together() -> None:
    """Two points on one perpendicular, one above and one below: neither order counts, only the sum after both.

    At (1, 2) and (2, 1) with the line y = x the projections are 3 and 3; then 5.9 below and 8.1 above.
    """
    x, y = np.array([1.0, 2.0, 3.0, 4.0]), np.array([2.0, 1.0, 2.9, 4.1])
    expected = 1 / math.sqrt(3)
    for order in ([0, 1, 2, 3], [1, 0, 2, 3], [3, 2, 1, 0]):
        assert cusum(x[order], y[order], 1.0, 0.0).statistic == pytest.approx(expected, rel=1e-12)


def test_points_on_the_line_but_for_rounding_score_nothing() -> None:
    """3 · 0.1 is not 0.3 in floating point: such points are on the line, on whichever side their last bit lies."""
    x = np.arange(1, 31) / 10
    y = np.round(3 * x, 1)
    assert set(np.sign(y - 3 * x)) == {-1.0, 0.0, 1.0}
    assert cusum(x, y, 3.0, 0.0).statistic == 0.0


def test_all_points_on_one_side_have_no_score() -> None:
    """With none below or none above every score is 0: statistic 0, p 1."""
    x = np.arange(1.0, 9.0)
    for y in (x + 0.5, x - 0.5, x):
        found = cusum(x, y, 1.0, 0.0)
        assert (found.statistic, found.p_value) == (0.0, 1.0)


@given(
    st.lists(st.tuples(st.integers(1, 12), st.integers(-3, 3)), min_size=4, max_size=25),
    st.randoms(use_true_random=False),
    st.sampled_from([0.1, 1.0, 10.0]),
)
def test_order_and_unit_change_nothing(points: list[tuple[int, int]], shuffle: object, factor: float) -> None:
    """A permuted table in another unit has the same statistic."""
    x = np.array([float(u) for u, _ in points])
    y = x + np.array([float(v) for _, v in points])
    order = list(range(len(points)))
    shuffle.shuffle(order)  # type: ignore[attr-defined]
    one = cusum(x, y, 1.0, 0.5)
    other = cusum(factor * x[order], factor * y[order], 1.0, 0.5 * factor)
    assert other.statistic == pytest.approx(one.statistic, rel=1e-12, abs=1e-12)


@pytest.mark.parametrize(
    ("argument", "x", "y", "slope", "intercept"),
    [
        ("x", [1.0, float("nan")], [1.0, 2.0], 1.0, 0.0),
        ("y", [1.0, 2.0], [1.0, 2.0, 3.0], 1.0, 0.0),
        ("x", [1.0], [1.0], 1.0, 0.0),
        ("slope", [1.0, 2.0], [1.0, 2.0], float("nan"), 0.0),
        ("intercept", [1.0, 2.0], [1.0, 2.0], 1.0, float("inf")),
    ],
)
def test_bad_input_names_the_argument(
    argument: str, x: list[float], y: list[float], slope: float, intercept: float
) -> None:
    """Refusals carry argument, rule and value."""
    with pytest.raises(ArgumentError) as caught:
        cusum(x, y, slope, intercept)
    assert caught.value.argument == argument
