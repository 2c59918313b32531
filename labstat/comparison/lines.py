"""Lines through a comparison of two measurement procedures, with bootstrap intervals."""

from __future__ import annotations

from collections.abc import Callable, Hashable, Sequence
from dataclasses import dataclass, field, replace

import numpy as np
import numpy.typing as npt

from labstat.checking import checked_number, checked_resamples, checked_seed, checked_share, checked_values
from labstat.comparison.moments import deming, ordinary
from labstat.comparison.pairs import checked_pairs, cluster_members
from labstat.comparison.passing_bablok import RankInterval, pair_slopes, passing_bablok, rank_interval
from labstat.comparison.results import Array, Band, Bias
from labstat.comparison.weighted_deming import weighted_deming
from labstat.errors import ArgumentError, NotComputableError
from labstat.resample.engine import Draws, Sample, Statistic, bootstrap, by_cluster
from labstat.resample.estimate import Estimate
from labstat.resample.intervals import KINDS, estimate_from
from labstat.resample.ranks import at_tail

INNER = {"ordinary": 499, "deming": 499, "weighted-deming": 199, "passing-bablok": 199}
"""Methods, and how many second-level resamples calibrate each (the dearer ones get fewer)."""

METHODS = tuple(INNER)

MOST_CALIBRATED = 1000
"""Passing-Bablok pairs above which the level is not calibrated: a second bootstrap of n² slopes would take minutes."""

MOST_PAIRS = 3000
"""Passing-Bablok pairs above which the n² slopes would not fit in modest memory."""

RANK = "rank"


@dataclass(frozen=True, slots=True, eq=False)
class LineFit:
    """A line y = intercept + slope x with intervals, and the resamples from which biases are read.

    ``n`` pairs; ``interval``, ``level`` and ``seed`` as used; ``pairs_below_minus_one`` is K and ``slopes_used`` N of
    Passing-Bablok (``None`` elsewhere); ``variance_ratio`` is ``None`` where the method has none. ``draws`` is
    ``None`` once the fit was :meth:`light`\\ ened; then :meth:`bias_at` is no longer there to be asked.
    """

    method: str
    n: int
    slope: Estimate
    intercept: Estimate
    variance_ratio: float | None
    pairs_below_minus_one: int | None
    slopes_used: int | None
    seed: int
    interval: str
    level: float
    draws: Draws | None = field(default=None, repr=False)
    order: tuple[int, ...] = field(default=(), repr=False)

    def bias_at(self, levels: npt.ArrayLike) -> tuple[Bias, ...]:
        """Bias intercept + (slope - 1) X at each level X, from the same resamples as the line.

        A bias has no classical rank interval: with ``interval="rank"`` it is calibrated, and says so.
        """
        return tuple(
            bias_from(self.kept, float(at), interval=self.interval, level=self.level)
            for at in checked_values("levels", levels)
        )

    @property
    def kept(self) -> Draws:
        """The resamples; raises :class:`NotComputableError` when they were let go."""
        if self.draws is None:
            raise NotComputableError("the resamples of this fit were let go: fit the line again")
        return self.draws

    def light(self) -> LineFit:
        """The same fit without its resamples."""
        return replace(self, draws=None)


def fit_line(
    x: npt.ArrayLike,
    y: npt.ArrayLike,
    *,
    method: str = "passing-bablok",
    variance_ratio: float = 1.0,
    interval: str = "calibrated",
    level: float = 0.95,
    resamples: int = 9999,
    seed: int | None = None,
    lowest: float = 0.0,
    clusters: Sequence[Hashable] | None = None,
) -> LineFit:
    """Fit a line through pairs of results and resample it.

    ``x`` (comparative) and ``y`` (candidate): n finite numbers each, n >= 3, in one unit. ``method``: ``"ordinary"``
    (least squares, for reference only), ``"deming"`` (Linnet 1990), ``"weighted-deming"`` (Linnet 1993; levels below
    ``lowest`` weigh as ``lowest``), ``"passing-bablok"`` (Passing & Bablok 1983). ``variance_ratio``: var(error of x) /
    var(error of y), for the Deming lines. ``interval``: ``"calibrated"`` (Loh 1987), ``"percentile"``, ``"bca"``
    (Efron 1987), ``"jackknife"`` or, for Passing-Bablok, ``"rank"``. ``clusters``: a label a pair; pairs with one label
    are resampled together. ``seed=None`` draws a fresh one and records it. The order of the pairs does not matter.

    Raises :class:`ArgumentError` for bad input and :class:`NotComputableError` where the line does not exist (all
    results equal; no positive relation; more than 3000 pairs for Passing-Bablok, which is not calibrated above 1000).
    When not to use it: below 20 pairs, a range narrower than the error, curved relations; see each method.
    """
    first, second = checked_pairs(x, y)
    if method not in METHODS:
        raise ArgumentError("method", f"must be one of {', '.join(METHODS)}", method)
    _check_interval(interval, method)
    checked_share("level", level)
    if checked_number("variance_ratio", variance_ratio) <= 0.0:
        raise ArgumentError("variance_ratio", "must be a number above zero", variance_ratio)
    checked_resamples(resamples)
    used_seed = checked_seed(seed)
    # sorted, so that the order of the rows changes nothing, not even the last bit
    order = np.lexsort((second, first))
    first, second = first[order], second[order]
    statistic, ranks, below, slopes = _statistic(method, first, second, variance_ratio, level, lowest, order)
    estimate = statistic(np.ones((1, first.size), dtype=np.uint16))[0]
    if not np.all(np.isfinite(estimate)):
        raise NotComputableError(_why_not(method, first, second))
    inner = INNER[method] if interval in ("calibrated", "percentile", RANK) else 0
    if method == "passing-bablok" and first.size > MOST_CALIBRATED:
        inner = 0
    units = first.size
    if clusters is not None:
        members = cluster_members(clusters, order)
        statistic, units = by_cluster(statistic, members), int(members.max()) + 1
    draws = bootstrap(
        statistic, units, resamples=int(resamples), seed=used_seed, inner=inner,
        resolution=_resolution(first, second, estimate),
    )
    kind = _bootstrap_kind(interval)
    made = [
        _with_rank(estimate_from(draws.parameter(i), interval=kind, level=level), ranks, i, interval) for i in (0, 1)
    ]
    return LineFit(
        method, first.size, made[0], made[1],
        variance_ratio if "deming" in method else None, below, slopes,
        used_seed, interval, level, draws, tuple(int(i) for i in order),
    )


def bias_from(draws: Draws, at: float, *, interval: str, level: float) -> Bias:
    """Bias at one level from a line's resamples (slope, intercept), in units and in percent of the level."""
    kind = _bootstrap_kind(interval)

    def estimate(sample: Sample) -> Estimate:
        made = estimate_from(sample, interval=kind, level=level)
        if interval == RANK:
            return replace(made, replaced=RANK, reason="a bias has no classical rank interval")
        return made

    bias = estimate(bias_sample(draws, at))
    if at == 0.0:
        return Bias(at, bias, None)
    return Bias(at, bias, estimate(draws.combined([100.0, 100.0 / at], -100.0)) if at > 0 else _mirrored(bias, at))


def bias_sample(draws: Draws, at: float) -> Sample:
    """Resampled bias at one level."""
    return draws.combined([at, 1.0], -at)


def band_of(fit: LineFit, *, low: float, high: float, points: int = 41) -> Band:
    """Pointwise percentile band of a fitted line between two levels, for drawing."""
    grid = np.linspace(low, high, points)
    values = fit.kept.values
    finite = values[np.all(np.isfinite(values), axis=1)]
    lower, upper = np.empty(points), np.empty(points)
    alpha = 1.0 - fit.level
    for index, at in enumerate(grid):
        ordered = np.sort(finite[:, 0] * at + finite[:, 1])
        lower[index], upper[index] = at_tail(ordered, alpha / 2), at_tail(ordered, 1.0 - alpha / 2)
    return Band(grid, lower, upper, fit.level)


def _mirrored(bias: Estimate, at: float) -> Estimate:
    """Percent of the absolute value of a negative level."""
    factor = 100.0 / abs(at)

    def scaled(value: float | None) -> float | None:
        return None if value is None else value * factor

    return replace(
        bias, estimate=bias.estimate * factor, low=scaled(bias.low), high=scaled(bias.high),
        monte_carlo_error=scaled(bias.monte_carlo_error),
    )


def _check_interval(interval: str, method: str) -> None:
    allowed = (*KINDS, RANK) if method == "passing-bablok" else KINDS
    if interval not in allowed:
        raise ArgumentError("interval", f"must be one of {', '.join(allowed)} for {method}", interval)


def _bootstrap_kind(interval: str) -> str:
    return "calibrated" if interval == RANK else interval


def _resolution(x: Array, y: Array, estimate: Array) -> Array:
    """Differences of slope and intercept that are rounding: far below the decimal data, far above the last bit."""
    slope = abs(float(estimate[0]))
    return np.array([1e-10 * slope, 1e-11 * (float(np.max(np.abs(y))) + slope * float(np.max(np.abs(x))))])


def _statistic(
    method: str, x: Array, y: Array, variance_ratio: float, level: float, lowest: float, order: npt.NDArray[np.intp]
) -> tuple[Statistic, RankInterval | None, int | None, int | None]:
    if method == "passing-bablok":
        if x.size > MOST_PAIRS:
            raise NotComputableError(
                f"no Passing-Bablok line is computed for more than {MOST_PAIRS} pairs, and there are {x.size}"
            )
        pairs = pair_slopes(x, y, places=order)
        if pairs.slopes.size == 0:
            raise NotComputableError(_why_not(method, x, y))
        ranks = rank_interval(x, y, pairs, level=level)
        return passing_bablok(x, y, pairs), ranks, pairs.below, int(pairs.slopes.size)
    simple: dict[str, Callable[[], Statistic]] = {
        "ordinary": lambda: ordinary(x, y),
        "deming": lambda: deming(x, y, variance_ratio),
        "weighted-deming": lambda: weighted_deming(x, y, variance_ratio, lowest=lowest),
    }
    return simple[method](), None, None, None


def _with_rank(made: Estimate, ranks: RankInterval | None, index: int, interval: str) -> Estimate:
    if ranks is None:
        return made
    low, high = (
        (ranks.slope_low, ranks.slope_high) if index == 0 else (ranks.intercept_low, ranks.intercept_high)
    )
    made = replace(made, has_rank=True, rank_low=low, rank_high=high)
    if interval != RANK:
        return made
    if low is None or high is None:
        return replace(made, replaced=RANK, reason="the rank interval runs off the end of the pair slopes")
    return Estimate(
        made.estimate, low, high, made.level, RANK, None, None, 0, None, low, high, None, has_rank=True,
    )


def _why_not(method: str, x: Array, y: Array) -> str:
    if np.ptp(x) == 0.0:
        return "no line exists: all comparative results are equal"
    if np.ptp(y) == 0.0 and method != "ordinary":
        return "no line exists: all candidate results are equal"
    if method == "passing-bablok":
        return "no Passing-Bablok line exists: the results show no positive relation between the procedures"
    if method == "weighted-deming":
        return "no weighted Deming line exists: a fitted level is not positive, or the weights do not settle"
    return "no Deming line exists: the results of the two procedures are not related"


__all__ = ["INNER", "METHODS", "LineFit", "band_of", "bias_from", "bias_sample", "fit_line"]
