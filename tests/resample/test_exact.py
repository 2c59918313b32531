"""The exact bootstrap against enumeration of every resample, published weights and other libraries."""

from __future__ import annotations

import itertools
from fractions import Fraction
from typing import Any

import numpy as np
import pytest
from outside_cases import columns, expect, of_kind, one
from scipy import stats
from scipy.stats import mstats

from labstat.resample.exact import (
    Place,
    bca_tails,
    exact_distribution,
    jackknife_values,
    place_of,
    quantile_at,
    rank_weights,
)


@pytest.mark.parametrize("case", of_kind("exact_boot"))
def test_weights_mean_variance_and_bounds_are_those_of_the_case(case: Any) -> None:
    """Hutson & Ernst 2000 and Harrell & Davis 1982 (sources in the data file)."""
    x = np.sort(columns(case)[0])
    rank = case["inputs"]["r"]
    made = exact_distribution(x, Place(rank, 0.0, extreme=False))
    expect(case, "mean", made.mean)
    if "weights" in case["expected"]:
        first, weights = rank_weights(rank, x.size)
        whole = np.zeros(x.size)
        whole[first - 1 : first - 1 + weights.size] = weights
        expect(case, "weights", whole)
        expect(case, "var", made.variance)
    else:
        expect(case, "sd", made.variance**0.5)
        expect(case, "exact_percentile_90", [made.at_tail(0.05), made.at_tail(0.95)])


def test_the_mean_of_an_interpolated_limit_is_that_of_the_case() -> None:
    case = one("exact-boot-interp-flchain-150")
    x = np.sort(columns(case)[0])
    expect(case, "mean", [exact_distribution(x, place_of(p, x.size)).mean for p in case["inputs"]["p"]])


@pytest.mark.parametrize("values", [(1, 2, 4, 8, 16), (3, 3, 5, 9, 9), (1, 1, 1, 2, 7)])
@pytest.mark.parametrize("p", [0.25, 0.4, 0.5, 0.77])
def test_the_distribution_is_that_of_all_resamples_counted_out(values: tuple[int, ...], p: float) -> None:
    """All 5^5 resamples, by fractions: every value, every probability, bounds by their definition."""
    n = len(values)
    r = Fraction(p).limit_denominator(100) * (n + 1)
    k = int(r)
    g = r - k
    counted: dict[Fraction, int] = {}
    for drawn in itertools.product(values, repeat=n):
        ordered = sorted(drawn)
        value = (1 - g) * ordered[k - 1] + (g * ordered[k] if g else 0)
        counted[value] = counted.get(value, 0) + 1
    made = exact_distribution(np.array(values, dtype=float), place_of(p, n))
    exact = {float(value): number / n**n for value, number in counted.items()}
    assert made.values == pytest.approx(sorted(exact), abs=1e-12)
    assert made.probabilities == pytest.approx([exact[v] for v in sorted(exact)], abs=1e-13)
    for area in (0.025, 0.05, 0.5, 0.95, 0.975):
        total = 0.0
        for value in sorted(exact):
            total += exact[value]
            if total >= area - 1e-12:
                assert made.at_tail(area) == pytest.approx(value, abs=1e-12)
                break


@pytest.mark.parametrize(("n", "p"), [(25, 0.5), (120, 0.025), (119, 0.975), (1000, 0.01), (200_000, 0.025)])
def test_probabilities_sum_to_one_whatever_the_size(n: int, p: float) -> None:
    made = exact_distribution(np.arange(float(n)), place_of(p, n))
    assert made.probabilities.sum() == pytest.approx(1.0, abs=1e-8)
    assert np.all(made.probabilities >= 0.0)


def test_the_mean_is_the_harrell_davis_quantile_where_the_place_is_a_rank() -> None:
    """scipy.stats.mstats.hdquantiles: equal because p(n + 1) is whole."""
    x = np.sort(np.random.default_rng(1).gamma(2.0, size=79))
    made = exact_distribution(x, place_of(0.25, 79)).mean
    assert made == pytest.approx(float(mstats.hdquantiles(x, prob=[0.25])[0]), abs=1e-10)


def test_bounds_are_those_of_many_drawn_resamples() -> None:
    """scipy.stats.bootstrap, 20,000 resamples of 120: its percentile bounds lie within the next order statistics."""
    x = np.sort(np.random.default_rng(4).normal(size=120))
    made = exact_distribution(x, place_of(0.025, 120))

    def lower(sample: np.ndarray, axis: int) -> np.ndarray:
        ordered = np.sort(sample, axis=axis)
        return 0.975 * ordered[..., 2] + 0.025 * ordered[..., 3]

    drawn = stats.bootstrap(
        (x,), lower, n_resamples=20_000, confidence_level=0.9, method="percentile", rng=np.random.default_rng(7)
    ).bootstrap_distribution
    # the share of draws at or below a bound has a standard error of 0.0016 to 0.0035; 5 of these
    for area in (0.05, 0.5, 0.95):
        bound = made.at_tail(area)
        below = float(np.sum(made.probabilities[made.values <= bound]))
        assert np.mean(drawn <= bound + 1e-12) == pytest.approx(below, abs=0.018)


def test_the_quantile_is_type_six_of_a_general_library() -> None:
    x = np.sort(np.random.default_rng(2).normal(size=57))
    for p in (0.025, 0.1, 0.5, 0.9, 0.975):
        assert quantile_at(x, place_of(p, 57)) == pytest.approx(np.quantile(x, p, method="weibull"), abs=1e-12)


def test_a_place_is_whole_where_the_decimals_are() -> None:
    """0.975 * 120 = 117 in decimals, not in binary floating point."""
    assert place_of(0.975, 119) == Place(117, 0.0, extreme=False)
    assert place_of(0.025, 119) == Place(3, 0.0, extreme=False)
    assert place_of(0.01, 50).extreme
    assert place_of(0.99, 50) == Place(50, 0.0, extreme=True)


@pytest.mark.parametrize(("n", "p"), [(20, 0.3), (41, 0.5), (120, 0.025), (133, 0.975)])
def test_jackknife_values_are_those_of_leaving_each_value_out(n: int, p: float) -> None:
    x = np.sort(np.random.default_rng(n).normal(size=n))
    slow = [quantile_at(np.delete(x, i), place_of(p, n - 1)) for i in range(n)]
    assert jackknife_values(x, p) == pytest.approx(slow, abs=1e-14)


def test_bca_tails_follow_efron_from_exact_probabilities() -> None:
    """Efron 1987, written out beside it."""
    x = np.sort(np.random.default_rng(8).lognormal(size=60))
    p = 0.4
    made = exact_distribution(x, place_of(p, 60))
    estimate = quantile_at(x, place_of(p, 60))
    share = made.probabilities[made.values < estimate].sum() + 0.5 * made.probabilities[made.values == estimate].sum()
    z0 = stats.norm.ppf(share)
    left_out = np.array([quantile_at(np.delete(x, i), place_of(p, 59)) for i in range(60)])
    d = left_out.mean() - left_out
    a = (d**3).sum() / (6 * (d**2).sum() ** 1.5)
    slow = [stats.norm.cdf(z0 + (z0 + z) / (1 - a * (z0 + z))) for z in (stats.norm.ppf(0.05), stats.norm.ppf(0.95))]
    assert bca_tails(made, x, p, level=0.90) == pytest.approx(slow, abs=1e-12)


def test_bca_of_equal_values_does_not_exist_and_says_why() -> None:
    x = np.full(30, 4.0)
    with pytest.raises(ValueError, match="jackknife"):
        bca_tails(exact_distribution(x, place_of(0.5, 30)), x, 0.5, level=0.9)


def test_infinite_values_never_become_nan() -> None:
    x = np.concatenate([np.full(3, -np.inf), np.arange(100.0), np.full(2, np.inf)])
    for p in (0.025, 0.5, 0.975):
        made = exact_distribution(x, place_of(p, x.size))
        assert not np.any(np.isnan(made.values))
        assert made.probabilities.sum() == pytest.approx(1.0, abs=1e-9)
