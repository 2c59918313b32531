"""The resampling core: what is drawn depends on the seed alone, and intervals follow their definitions."""

from __future__ import annotations

import itertools

import numpy as np
import pytest

from labstat.comparison.differences import agreement
from labstat.comparison.moments import deming
from labstat.comparison.pair_slopes import pair_slopes
from labstat.comparison.passing_bablok import passing_bablok
from labstat.comparison.weighted_deming import weighted_deming
from labstat.resample.calibration import calibrate
from labstat.resample.counts import first_level, leave_one_out, second_level
from labstat.resample.engine import Draws, Sample, absent, bootstrap, by_cluster
from labstat.resample.influence import bounds_without_each
from labstat.resample.intervals import estimate_from, jackknife_error, tails
from labstat.resample.ranks import at_rank, at_tail
from labstat.resample.seeds import derived_seed


def _data(n: int, seed: int = 3) -> tuple[np.ndarray, np.ndarray]:
    rng = np.random.default_rng(seed)
    truth = rng.uniform(50, 250, n)
    return np.round(truth + rng.normal(0, 5, n), 1), np.round(truth + rng.normal(0, 5, n), 1)


def _statistics(n: int) -> dict[str, object]:
    x, y = _data(n)
    return {
        "deming": deming(x, y, 1.0),
        "weighted-deming": weighted_deming(x, y, 1.0),
        "passing-bablok": passing_bablok(x, y, pair_slopes(x, y)),
        "agreement": agreement(y - x),
    }


@pytest.mark.parametrize("name", ["deming", "weighted-deming", "passing-bablok", "agreement"])
@pytest.mark.parametrize("block", [1, 7, 300, 100_000])
def test_the_block_size_changes_not_even_the_last_bit(name: str, block: int) -> None:
    statistic = _statistics(23)[name]
    whole = bootstrap(statistic, 23, resamples=301, seed=5, inner=11)
    parts = bootstrap(statistic, 23, resamples=301, seed=5, inner=11, block=block)
    assert np.array_equal(whole.values, parts.values, equal_nan=True)
    assert np.array_equal(whole.jackknife, parts.jackknife, equal_nan=True)
    assert whole.inner is not None
    assert parts.inner is not None
    assert np.array_equal(whole.inner, parts.inner, equal_nan=True)


def test_the_first_resamples_do_not_depend_on_how_many_are_drawn() -> None:
    few = np.concatenate(list(first_level(9, 300, seed=1)))
    many = np.concatenate(list(first_level(9, 999, seed=1)))
    assert np.array_equal(few, many[:300])


def test_counts_of_both_levels_sum_to_the_number_of_units() -> None:
    first = np.concatenate(list(first_level(12, 40, seed=2)))
    second = second_level(first, 0, 5, seed=2)
    assert set(first.sum(axis=1)) == {12}
    assert set(second.sum(axis=1)) == {12}
    # a unit that the first level left out cannot come back in the second
    assert not np.any(second[np.repeat(first, 5, axis=0) == 0])


def test_every_unit_is_drawn_once_on_average() -> None:
    counts = np.concatenate(list(first_level(10, 20_000, seed=4)))
    # the mean of 20,000 counts of variance 0.9: standard error 0.0067; 5 of these: false alarm below 1e-5 in 10 units
    assert np.all(np.abs(counts.mean(axis=0) - 1.0) < 5 * np.sqrt(0.9 / 20_000))


def test_seeds_depend_on_every_word_and_on_their_order() -> None:
    seeds = {derived_seed(1, *words) for words in itertools.permutations(("a", "b", 3))} | {
        derived_seed(2, "a", "b", 3), derived_seed(1, "ab", 3), derived_seed(1, "a", "b3"),
    }
    assert len(seeds) == 9


def test_a_jackknife_row_leaves_out_one_unit() -> None:
    assert np.array_equal(leave_one_out(4), 1 - np.eye(4, dtype=int))


def test_jackknife_error_of_a_mean_is_s_over_root_n() -> None:
    # identity: Efron & Tibshirani 1993, section 11.2
    values = np.array([3.0, 5.0, 8.0, 13.0, 21.0])
    draws = bootstrap(agreement(values), 5, resamples=99, seed=1)
    assert jackknife_error(draws.jackknife[:, 0]) == pytest.approx(np.std(values, ddof=1) / np.sqrt(5), rel=1e-13)


def test_clusters_give_all_their_units_the_same_count() -> None:
    seen: list[np.ndarray] = []

    def spy(counts: np.ndarray) -> np.ndarray:
        seen.append(counts)
        return np.zeros((counts.shape[0], 1))

    bootstrap(by_cluster(spy, np.array([0, 1, 0, 2, 1])), 3, resamples=99, seed=1)
    for counts in seen:
        assert np.array_equal(counts[:, 0], counts[:, 2])
        assert np.array_equal(counts[:, 1], counts[:, 4])


def test_a_bound_at_a_rank_between_two_values_is_interpolated_and_held_at_the_ends() -> None:
    ordered = np.array([1.0, 2.0, 4.0, 8.0])
    assert [at_rank(ordered, r) for r in (0.2, 1.0, 2.5, 4.0, 9.0)] == [1.0, 1.0, 3.0, 8.0, 8.0]
    assert at_tail(np.arange(1.0, 1000.0), 0.025) == 25.0  # rank 0.025 * 1000


def _sample(values: np.ndarray, estimate: float, inner: np.ndarray | None = None) -> Sample:
    return Sample(estimate, values, np.linspace(-1.0, 1.0, 20), inner)


def test_calibration_finds_the_tail_that_a_known_second_level_needs() -> None:
    # rows whose share at or below 0 is exactly k/500 for k = 1..499, twice: the 5 % rank of min(u, 1-u) is known
    inner = np.ones((998, 500))
    for row in range(998):
        inner[row, : row % 499 + 1] = -1.0
    found = calibrate(_sample(np.linspace(-3, 3, 999), 0.0, inner), level=0.95)
    shares = np.sort([min(k, 500 - k) / 500 for k in range(1, 500)] * 2)
    assert found.tail == pytest.approx(at_rank(shares, 0.05 * 999), abs=1e-15)
    assert found.attained == pytest.approx(np.mean([(0.025 < k / 500 < 0.975) for k in range(1, 500)]), abs=1e-15)
    assert found.reason is None


def test_calibration_that_cannot_be_trusted_is_replaced_by_name() -> None:
    coarse = np.where(np.arange(100) < 50, -1.0, 1.0)[None, :].repeat(200, axis=0)
    few = estimate_from(_sample(np.linspace(-3, 3, 999), 0.0, coarse), interval="calibrated", level=0.95)
    assert (few.interval, few.replaced) == ("percentile", "calibrated")
    assert "distinct" in str(few.reason)
    far = np.ones((999, 100))
    for row in range(999):
        far[row, : row % 100] = -1.0
    far[:120] = 1.0  # 12 % of the rows have nothing at or below the estimate
    bound = estimate_from(_sample(np.linspace(-3, 3, 999), 0.0, far), interval="calibrated", level=0.95)
    assert (bound.interval, bound.replaced) == ("calibrated-bound", "calibrated")
    assert bound.low == pytest.approx(at_tail(np.linspace(-3, 3, 999), 1 / 101), abs=1e-12)


def test_bca_falls_back_by_name_when_all_jackknife_values_are_equal() -> None:
    sample = Sample(0.0, np.linspace(-1, 1, 999), np.full(10, 2.0), None)
    made = estimate_from(sample, interval="bca", level=0.95)
    assert (made.interval, made.replaced) == ("percentile", "bca")
    assert "acceleration" in str(made.reason)


def test_more_than_one_percent_of_failed_resamples_leave_no_interval() -> None:
    values = np.linspace(-1, 1, 1000)
    values[:11] = np.nan
    made = estimate_from(_sample(values, 0.0), interval="percentile", level=0.95)
    assert (made.low, made.high, made.failed_resamples) == (None, None, 11)
    values[10] = 0.0
    assert estimate_from(_sample(values, 0.0), interval="percentile", level=0.95).low is not None


def test_the_monte_carlo_error_is_the_spread_of_a_bound_over_seeds() -> None:
    x, y = _data(30)
    made = [
        estimate_from(
            bootstrap(agreement(y - x), 30, resamples=999, seed=seed).parameter(0), interval="percentile", level=0.95
        )
        for seed in range(60)
    ]
    spread = max(np.std([m.low for m in made], ddof=1), np.std([m.high for m in made], ddof=1))
    stated = float(np.mean([m.monte_carlo_error for m in made]))
    # an SD from 60 runs has a relative standard error of 9 %, the stated error (of the worse bound) one of its own
    assert 0.6 < stated / spread < 1.6


def test_bounds_without_a_unit_are_those_of_a_bootstrap_of_the_others() -> None:
    rng = np.random.default_rng(1)
    values = rng.normal(size=15)
    values[4] = 9.0
    draws: Draws = bootstrap(agreement(values), 15, resamples=40_000, seed=1)
    sample = draws.parameter(0)
    found = tails(sample, interval="percentile", level=0.95)
    bounds = bounds_without_each(sample, absent(15, 40_000, seed=1), found)
    others = np.delete(values, 4)
    # 15 draws from 14 values, drawn afresh with another generator
    again = np.sort(rng.choice(others, size=(40_000, 15)).mean(axis=1))
    # each bound has a standard error of about 0.006 here; 6 of these
    assert bounds[4, 0] == pytest.approx(at_tail(again, 0.025), abs=0.04)
    assert bounds[4, 1] == pytest.approx(at_tail(again, 0.975), abs=0.04)
