"""Reference limits of one group: the method that its size allows, with intervals and notes."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

import numpy as np
import numpy.typing as npt
from scipy import stats

from labstat.checking import checked_resamples, checked_seed, checked_share, checked_values, checked_whole
from labstat.errors import ArgumentError, NotComputableError
from labstat.reference.rank import rank_limit
from labstat.reference.ranks import smallest_n
from labstat.reference.results import ReferenceLimits
from labstat.reference.robust import robust_limits
from labstat.resample.estimate import Estimate
from labstat.resample.exact import place_of

Array = npt.NDArray[np.float64]

METHODS = ("auto", "rank", "robust")
INTERVALS = ("percentile", "bca", "rank")

FEWEST = 20
"""Below this no limits (CLSI EP28; common practice)."""

RANK_FROM = 120
"""From here on auto takes ranks; below it the robust method (CLSI EP28)."""

SKEWED = 0.01
"""Below this p-value of the skewness test the robust method is noted not to fit."""


def reference_limits(
    values: npt.ArrayLike,
    *,
    probabilities: Sequence[float] = (0.025, 0.975),
    method: str = "rank",
    interval: str = "percentile",
    level: float = 0.90,
    resamples: int = 9999,
    seed: int | None = None,
    minimum_n: int = FEWEST,
) -> ReferenceLimits:
    """Reference limits of ``values`` (n,), in their unit, with confidence intervals on the limits.

    ``probabilities``: one or two; a single one gives ``upper`` for 0.5 and above, ``lower`` below. ``method``:
    ``"rank"`` (nonparametric; Solberg 1987, CLSI EP28), ``"robust"`` (Horn, Pesce & Copeland 1998) or ``"auto"`` (rank
    from n = 120, robust below). ``interval``: ``"percentile"`` or ``"bca"`` (exact bootstrap for ranks: no Monte
    Carlo), or ``"rank"`` (Reed, Henry & Mason 1971). ``seed`` serves the robust method; ``None`` draws a fresh one and
    records it.

    Raises :class:`ArgumentError` for bad input and :class:`NotComputableError` below ``minimum_n`` values or where the
    robust method does not exist. When not to use it: several populations in one sample (partition first), results of
    patients, decision limits set by a guideline.
    """
    x = checked_values("values", values)
    asked = _checked_probabilities(probabilities)
    for name, value, allowed in (("method", method, METHODS), ("interval", interval, INTERVALS)):
        if value not in allowed:
            raise ArgumentError(name, f"must be one of {', '.join(allowed)}", value)
    if method == "robust" and interval == "rank":
        raise ArgumentError("interval", "must be percentile or bca for robust limits", interval)
    checked_share("level", level)
    checked_resamples(resamples)
    checked_whole("minimum_n", minimum_n, lowest=1)
    used_seed = checked_seed(seed)
    if x.size < minimum_n:
        raise NotComputableError(f"no reference limits from {x.size} values: at least {minimum_n} are needed")
    made = limits_of_group(
        x, probabilities=asked, method=method, interval=interval, level=level, resamples=int(resamples),
        seed=used_seed, minimum_n=minimum_n,
    )
    if made.failure is not None:
        raise NotComputableError(made.failure)
    return made


def limits_of_group(
    values: Array, *, probabilities: tuple[float, ...], method: str, interval: str, level: float,
    resamples: int, seed: int, minimum_n: int = FEWEST,
) -> ReferenceLimits:
    """The same for checked values, among which -inf and +inf stand for results outside the measuring interval.

    Where there are any of these, ``"auto"`` takes ranks whatever the number of values. Never raises for what the values
    are: ``notes`` say what could not be computed, ``failure`` why nothing could.
    """
    n = values.size
    outside = int(np.count_nonzero(~np.isfinite(values)))
    by_rank = n >= RANK_FROM or outside > 0  # results without a number have a rank all the same
    used = ("rank" if by_rank else "robust") if method == "auto" else method
    nothing = ReferenceLimits(n, used, method, probabilities, None, None, (), seed)
    if n < minimum_n:
        return replace(nothing, notes=(f"{_values(n)}: no limits are computed below {minimum_n}",))
    if used == "rank":
        made_by_rank = _by_rank(np.sort(values), nothing, interval, level)
        if outside == 0:
            return made_by_rank
        taken = f"{outside} of {_values(n)} lie outside the measuring interval and take part by their rank"
        return replace(made_by_rank, notes=(taken, *made_by_rank.notes))
    if outside:
        sentence = f"{outside} of {_values(n)} lie outside the measuring interval, and the robust method needs numbers"
        return replace(nothing, failure=f"{sentence}: ask for method rank")
    try:
        made = robust_limits(
            values, probabilities, interval="percentile" if interval == "rank" else interval, level=level,
            resamples=resamples, seed=seed,
        )
    except NotComputableError as error:
        return replace(nothing, failure=str(error))
    if interval == "rank":
        made = tuple(replace(e, replaced="rank", reason="robust limits have no rank interval") for e in made)
    notes = []
    p = float(stats.skewtest(values).pvalue)
    if p < SKEWED:
        notes.append(
            f"the values are skewed (p = {p:.2g}) and the robust method takes them as they are: its limits do not fit "
            f"skewed values, and {RANK_FROM} values would allow limits by rank"
        )
    return _placed(nothing, made, tuple(notes))


def _by_rank(ordered: Array, nothing: ReferenceLimits, interval: str, level: float) -> ReferenceLimits:
    n = ordered.size
    made: list[Estimate | None] = []
    notes: list[str] = []
    for probability in nothing.probabilities:
        estimate = rank_limit(ordered, probability, interval=interval, level=level)
        side = "upper" if probability >= 0.5 else "lower"
        if estimate.rank_low is None:
            needed = smallest_n(probability, level=level)
            notes.append(
                f"no {100 * level:g} % rank interval exists for the {side} limit from {_values(n)}: {needed} are needed"
            )
        if place_of(probability, n).extreme:
            notes.append(f"the {side} limit is the {'largest' if side == 'upper' else 'smallest'} value itself")
        if not np.isfinite(estimate.estimate):
            where = "below" if estimate.estimate < 0 else "above"
            notes.append(f"the {side} limit lies among the results {where} the measuring interval: no number exists")
            made.append(None)
            continue
        made.append(_finite_bounds(estimate))
    return _placed(nothing, tuple(made), tuple(notes))


def _finite_bounds(estimate: Estimate) -> Estimate:
    """Bounds among results outside the measuring interval have no number: said, never guessed."""
    bounds = (estimate.low, estimate.high)
    if any(b is not None and not np.isfinite(b) for b in bounds):
        estimate = replace(
            estimate, low=None, high=None, reason="a bound lies among the results outside the measuring interval"
        )
    ranks = (estimate.rank_low, estimate.rank_high)
    if any(b is not None and not np.isfinite(b) for b in ranks):
        estimate = replace(estimate, rank_low=None, rank_high=None, rank_attained=None)
    return estimate


def _placed(
    nothing: ReferenceLimits, made: tuple[Estimate | None, ...], notes: tuple[str, ...]
) -> ReferenceLimits:
    if len(made) == 1:
        upper = nothing.probabilities[0] >= 0.5
        return replace(nothing, lower=None if upper else made[0], upper=made[0] if upper else None, notes=notes)
    return replace(nothing, lower=made[0], upper=made[1], notes=notes)


def _values(n: int) -> str:
    return "1 value" if n == 1 else f"{n} values"


def _checked_probabilities(probabilities: Sequence[float]) -> tuple[float, ...]:
    try:
        asked = tuple(float(p) for p in probabilities)
    except (TypeError, ValueError):
        raise ArgumentError("probabilities", "must be one or two numbers between 0 and 1", probabilities) from None
    if len(asked) not in (1, 2) or any(not 0.0 < p < 1.0 for p in asked):
        raise ArgumentError("probabilities", "must be one or two numbers between 0 and 1", probabilities)
    if len(asked) == 2 and not asked[0] < asked[1]:
        raise ArgumentError("probabilities", "must ascend", probabilities)
    return asked
