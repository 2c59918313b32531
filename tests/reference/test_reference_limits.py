"""Reference limits against published ranks, other libraries, slow loops and simulation."""

from __future__ import annotations

from fractions import Fraction
from typing import Any

import numpy as np
import pytest
import slow_robust
from hypothesis import given
from hypothesis import strategies as st
from outside_cases import columns, expect, of_kind, one
from scipy import stats

import labstat
from labstat.errors import ArgumentError, NotComputableError
from labstat.reference.adopted import outside_interval
from labstat.reference.limits import limits_of_group
from labstat.reference.rank import rank_limit
from labstat.reference.ranks import attained_coverage, rank_pair, smallest_n
from labstat.reference.robust import robust
from labstat.resample.counts import first_level

BOTH = (0.025, 0.975)


@pytest.mark.parametrize("case", of_kind("np_limits"))
def test_rank_limits_and_their_rank_interval_are_those_of_other_libraries(case: Any) -> None:
    """Limits as quantile type 6, ranks from exact binomials; sources in the data file."""
    values = columns(case)[0]
    made = labstat.reference_limits(values)
    assert made.lower is not None
    assert made.upper is not None
    expect(case, "limits", [made.lower.estimate, made.upper.estimate])
    ranks = case["expected"]["ranks"]["value"]
    found = rank_pair(0.025, values.size, level=0.90)
    assert found == (None if ranks is None else tuple(ranks))
    if ranks is not None:
        expect(case, "ci_lower", [made.lower.rank_low, made.lower.rank_high])
        expect(case, "ci_upper", [made.upper.rank_low, made.upper.rank_high])
    else:
        assert made.lower.rank_low is None
        assert any("119 are needed" in note for note in made.notes)


def test_the_printed_rank_table_is_the_binomial_rule() -> None:
    """CLSI EP28 and Solberg 1987, ranks for the 2.5th percentile at 90 %, n = 119 to 500 (source in the data file)."""
    rows = one("ep28-rank-table-119-500")["expected"]["rows"]["value"]
    for first, last, low, high in rows:
        for n in range(first, last + 1):
            assert rank_pair(0.025, n, level=0.90) == (low, high), n


@pytest.mark.parametrize("n", [119, 240, 501, 777, 1000])
def test_ranks_beyond_the_table_follow_the_rule_counted_out(n: int) -> None:
    """The rule itself (Reed, Henry & Mason 1971), by exact fractions; the upper limit mirrors the lower."""
    p, tail = Fraction(25, 1000), Fraction(5, 100)
    term, cdf = (1 - p) ** n, []
    total = Fraction(0)
    for k in range(60):
        total += term
        cdf.append(total)
        term = term * (n - k) / (k + 1) * p / (1 - p)
    a = max(k for k in range(1, 60) if cdf[k - 1] <= tail)
    b = min(k for k in range(1, 60) if 1 - cdf[k - 1] <= tail)
    assert rank_pair(0.025, n, level=0.90) == (a, b)
    assert rank_pair(0.975, n, level=0.90) == (n + 1 - b, n + 1 - a)
    assert attained_coverage(0.025, n, a, b) == pytest.approx(float(cdf[b - 1] - cdf[a - 1]), abs=1e-12)


def test_the_smallest_number_of_values_is_the_known_one() -> None:
    """119 for a 2.5th percentile at 90 %, and the others of the case (recomputed there)."""
    case = one("min-n-rank-interval")
    for (p, level), n in zip(case["inputs"]["pairs"], case["expected"]["min_n"]["value"], strict=True):
        assert smallest_n(p, level=level) == n
        assert smallest_n(1 - p, level=level) == n
        assert rank_pair(p, n - 1, level=level) is None


def test_a_bootstrap_interval_says_what_it_attains_in_simulation() -> None:
    """800 samples of 120 standard normals: the share that holds the true limit lies where the ranks say.

    A bound may lie between two ranks; the coverage stated is that of the inner ranks, the outer ones give a ceiling.
    A share of 800 has a standard error of at most 0.0177; 4 of these: false alarm below 1e-4.
    """
    rng = np.random.default_rng(20261201)
    truth = stats.norm.ppf(0.025)
    held, held_rank, attained, ceiling = 0, 0, [], []
    for _ in range(800):
        ordered = np.sort(rng.normal(size=120))
        made = rank_limit(ordered, 0.025, interval="percentile", level=0.90)
        held += made.low <= truth <= made.high
        held_rank += made.rank_low <= truth <= made.rank_high
        attained.append(made.attained)
        outer = int(np.searchsorted(ordered, made.low, "right")), int(np.searchsorted(ordered, made.high)) + 1
        ceiling.append(attained_coverage(0.025, 120, *outer))
    assert float(np.mean(attained)) - 4 * 0.0177 < held / 800 < float(np.mean(ceiling)) + 4 * 0.0177
    assert abs(held_rank / 800 - made.rank_attained) < 4 * 0.0177


@pytest.mark.parametrize("identifier", ["biweight-ais-hg-f", "biweight-igf"])
def test_the_slow_robust_building_blocks_are_those_of_another_library(identifier: str) -> None:
    """Biweight location and midvariance; the recipe's constants are from memory (source in the data file)."""
    case = one(identifier)
    values = [float(v) for v in columns(case)[0]]
    median = float(np.median(values))
    s0 = float(np.median(np.abs(np.array(values) - median))) / 0.6745
    expect(case, "T_bi", slow_robust.location(values, 3.7, s0))
    spread = slow_robust.spread(values, 205.6, median, s0, factor=len(values), plain=True)
    expect(case, "bimidvar_205_6", spread)


def test_robust_limits_by_counts_are_those_of_repeated_values() -> None:
    rng = np.random.default_rng(5)
    values = np.round(rng.normal(100, 8, 45), 0)
    counts = np.concatenate(list(first_level(45, 60, seed=3)))
    fast = robust(values, BOTH)(counts)
    for row, found in zip(counts, fast, strict=True):
        assert found == pytest.approx(slow_robust.limits(list(np.repeat(values, row))), rel=1e-8)


def test_robust_limits_of_a_large_normal_sample_are_its_prediction_interval() -> None:
    """T ± t·s·√(1 + 1/n) within sampling error: the biweight with c = 205.6 is nearly the ordinary SD."""
    values = np.random.default_rng(1).normal(50, 4, 40_000)
    made = robust(values, BOTH)(np.ones((1, values.size), dtype=int))[0]
    reach = stats.t.ppf(0.975, values.size - 1) * values.std(ddof=1) * np.sqrt(1 + 1 / values.size)
    # the location's standard error is 0.02, the spread's 0.014 times 1.96
    assert made == pytest.approx([values.mean() - reach, values.mean() + reach], abs=0.12)


def test_one_robust_limit_has_its_whole_tail_on_one_side() -> None:
    values = list(np.random.default_rng(2).normal(10, 1, 60))
    made = labstat.reference_limits(values, probabilities=(0.95,), method="robust", seed=1, resamples=199)
    assert made.lower is None
    assert made.upper is not None
    assert made.upper.estimate == pytest.approx(slow_robust.limits(values, probability=0.95)[1], rel=1e-8)


def test_equal_values_leave_no_robust_limits() -> None:
    with pytest.raises(NotComputableError, match="MAD is 0"):
        labstat.reference_limits([5.0] * 30 + [6.0, 7.0], method="robust", seed=1)


@pytest.mark.parametrize(("n", "method"), [(120, "rank"), (119, "robust"), (40, "robust")])
def test_auto_takes_ranks_from_120_values_on(n: int, method: str) -> None:
    values = np.random.default_rng(3).normal(size=n)
    assert labstat.reference_limits(values, method="auto", seed=1, resamples=199).method == method


def test_below_twenty_values_there_are_no_limits_and_it_is_said() -> None:
    with pytest.raises(NotComputableError, match="at least 20"):
        labstat.reference_limits(np.arange(19.0))
    made = limits_of_group(
        np.arange(19.0), probabilities=BOTH, method="auto", interval="percentile", level=0.9, resamples=99, seed=1
    )
    assert (made.lower, made.upper) == (None, None)
    assert "below 20" in made.notes[0]


def test_a_single_probability_gives_one_limit() -> None:
    upper = labstat.reference_limits(np.arange(400.0), probabilities=(0.99,))
    assert upper.lower is None
    assert upper.upper is not None
    assert upper.upper.estimate == pytest.approx(0.99 * 401 - 1, abs=1e-9)  # values are their ranks less one
    lower = labstat.reference_limits(np.arange(400.0), probabilities=(0.05,))
    assert lower.upper is None


def test_an_extreme_place_is_the_extreme_value_and_says_so() -> None:
    made = labstat.reference_limits(np.arange(30.0))
    assert made.lower is not None
    assert made.lower.estimate == 0.0
    assert any("smallest value itself" in note for note in made.notes)


def test_results_outside_the_measuring_interval_take_part_by_their_rank() -> None:
    numbers = np.arange(1.0, 141.0)
    with_outside = np.concatenate([np.full(2, -np.inf), numbers[2:]])
    ask = {"probabilities": BOTH, "method": "rank", "interval": "percentile", "level": 0.9, "resamples": 99, "seed": 1}
    made, whole = limits_of_group(with_outside, **ask), limits_of_group(numbers, **ask)
    assert made.lower.estimate == whole.lower.estimate  # rank 3.5 lies above both
    assert made.upper == whole.upper
    assert made.lower.low is None  # its interval reaches down among them
    many = limits_of_group(np.concatenate([np.full(10, -np.inf), numbers[10:]]), **ask)
    assert many.lower is None
    assert any("no number exists" in note for note in many.notes)


@given(st.lists(st.integers(0, 60), min_size=20, max_size=90), st.integers(-50, 50), st.sampled_from([0.5, 2.0, 8.0]))
def test_limits_move_with_the_values(values: list[int], shift: int, factor: float) -> None:
    """Shifting and scaling the values shifts and scales limits and bounds; mirroring swaps the sides."""
    x = np.array(values, dtype=float)
    made = labstat.reference_limits(x)
    moved = labstat.reference_limits(factor * x + shift)
    mirrored = labstat.reference_limits(-x)
    for a, b in ((made.lower, moved.lower), (made.upper, moved.upper)):
        assert b.estimate == pytest.approx(factor * a.estimate + shift, abs=1e-9)
        assert (b.low, b.high) == pytest.approx((factor * a.low + shift, factor * a.high + shift), abs=1e-9)
    assert mirrored.upper.estimate == pytest.approx(-made.lower.estimate, abs=1e-9)
    assert mirrored.upper.rank_low is None if made.lower.rank_high is None else True
    assert labstat.reference_limits(np.random.default_rng(0).permutation(x)).lower == made.lower


@pytest.mark.parametrize(
    ("arguments", "argument"),
    [
        ({"values": [1.0, float("nan")] * 20}, "values"), ({"values": [[1.0, 2.0]]}, "values"),
        ({"values": ["a"] * 30}, "values"), ({"probabilities": (0.9, 0.1)}, "probabilities"),
        ({"probabilities": ()}, "probabilities"), ({"probabilities": (0.0, 0.9)}, "probabilities"),
        ({"method": "transformed"}, "method"), ({"interval": "jackknife"}, "interval"), ({"level": 1.0}, "level"),
        ({"method": "robust", "interval": "rank"}, "interval"), ({"resamples": 10}, "resamples"),
        ({"seed": "today"}, "seed"), ({"level": "90"}, "level"), ({"minimum_n": 0}, "minimum_n"),
    ],
)
def test_bad_input_names_argument_rule_and_value(arguments: dict[str, Any], argument: str) -> None:
    with pytest.raises(ArgumentError) as caught:
        labstat.reference_limits(**{"values": np.arange(130.0), **arguments})
    assert caught.value.argument == argument
    assert caught.value.rule


def test_counts_outside_an_interval_are_strict_and_have_exact_intervals() -> None:
    """Clopper & Pearson 1934; 2 of 40: 0.61 % to 16.92 %, from scipy.stats.beta as the general-purpose library."""
    made = outside_interval(np.array([1.0, 1.0, *range(3, 41)], dtype=float), low=2.0, high=40.0)
    assert (made.below, made.above) == (2, 0)
    assert made.below_low == pytest.approx(stats.beta.ppf(0.025, 2, 39), abs=1e-12)
    assert made.below_high == pytest.approx(stats.beta.ppf(0.975, 3, 38), abs=1e-12)
    assert outside_interval(np.arange(5.0), low=None, high=3.0).below is None


def test_auto_takes_ranks_where_results_lie_outside_the_measuring_interval_and_robust_refuses() -> None:
    values = np.concatenate([[-np.inf], np.random.default_rng(1).normal(50.0, 5.0, 59)])
    ask = {"probabilities": BOTH, "interval": "percentile", "level": 0.9, "resamples": 99, "seed": 1}
    made = limits_of_group(values, method="auto", **ask)
    assert made.method == "rank"
    assert "take part by their rank" in made.notes[0]
    refused = limits_of_group(values, method="robust", **ask)
    assert (refused.lower, refused.upper) == (None, None)
    assert "needs numbers" in str(refused.failure)
