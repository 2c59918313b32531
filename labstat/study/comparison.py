"""One candidate against the comparative procedure: from its specimens to everything its findings rest on."""

from __future__ import annotations

from collections.abc import Hashable, Sequence

import numpy as np
import numpy.typing as npt

from labstat.comparison.differences import difference, differences
from labstat.comparison.linearity import cusum
from labstat.comparison.lines import LineFit, band_of, bias_sample, fit_line
from labstat.comparison.outliers import flagged
from labstat.comparison.results import Bias, Difference, WithoutUnit
from labstat.comparison.sides import side_change
from labstat.errors import NotComputableError
from labstat.resample.engine import absent
from labstat.resample.influence import bounds_without_each
from labstat.resample.intervals import tails
from labstat.resample.seeds import derived_seed
from labstat.round.model import AnalytePlan, CensoredPair, ComparisonData, ComparisonPlan, Level, RoundPlan
from labstat.study.results import BiasAtLevel, ComparisonResult, NotComputed, Outlier

NEAR = 0.25
"""Specimens within this share of a level speak for it (common practice, no source)."""

CENSORED_REACH = 2.0
"""A censored pair within this factor of a level leaves the level uncovered."""

FEWEST_DAYS = 5
"""Fewer days than this carry no day-clustered interval."""

FEWEST_PAIRS = 3


def compare(
    data: ComparisonData, analyte: AnalytePlan, plan: RoundPlan
) -> tuple[ComparisonResult | None, tuple[NotComputed, ...]]:
    """Everything the plan asks of one candidate; ``None`` with the reason where the reported line does not exist."""
    asked = analyte.comparison
    if asked is None:
        raise ValueError("the plan asks for no comparison")
    n = len(data.specimens)
    if n < FEWEST_PAIRS:
        reason = f"{n} specimens with a number from both procedures: at least {FEWEST_PAIRS} are needed for any line"
        return None, (NotComputed("comparison", data.candidate, reason),)
    work = _Work(data, analyte, asked, plan)
    try:
        reported = work.fit(asked.report)
    except NotComputableError as error:
        return None, (NotComputed("comparison", data.candidate, str(error)),)
    missing: list[NotComputed] = []
    fits = [reported]
    for method in asked.methods:
        if method == asked.report:
            continue
        try:
            fits.append(work.fit(method))
        except NotComputableError as error:
            missing.append(NotComputed("comparison", f"{data.candidate}, {method}", str(error), whole=False))
    fits.sort(key=lambda fit: asked.methods.index(fit.method) if fit.method in asked.methods else -1)
    agreement, found = work.agreement(missing)
    outliers = _outliers(data, found)
    days = _known_days(data)
    by_day = work.fit(asked.report, days=days) if days is not None and len(set(days)) >= FEWEST_DAYS else None
    without = work.without_outliers(outliers, missing)
    low, high = float(np.min(data.x)), float(np.max(data.x))
    result = ComparisonResult(
        data=data,
        n=n,
        range=(low, high),
        fits=tuple(fit.light() for fit in fits),
        reported=reported.light(),
        band=band_of(reported, low=low, high=high),
        levels=tuple(work.at_level(level, reported, by_day, without) for level in asked.levels),
        difference=agreement,
        linearity=cusum(data.x, data.y, reported.slope.estimate, reported.intercept.estimate),
        outliers=outliers,
        days=None if days is None else len(set(days)),
        unit_of_resampling="subjects" if work.subjects is not None else "specimens",
        correlation=_correlation(data),
        equal_pairs=int(np.count_nonzero(data.x == data.y)),
        equal_after_shift=max(_equal(data.x[1:], data.y[:-1]), _equal(data.x[:-1], data.y[1:])),
        largest=int(np.argmax(np.abs(data.y - data.x))),
        replicates=(max(map(len, data.x_replicates)), max(map(len, data.y_replicates))),
    )
    return result, tuple(missing)


class _Work:
    """The pieces of one comparison that share its data and its seed."""

    def __init__(self, data: ComparisonData, analyte: AnalytePlan, asked: ComparisonPlan, plan: RoundPlan) -> None:
        self.data = data
        self.asked = asked
        self.plan = plan
        self.seed = derived_seed(plan.seed, analyte.name, data.candidate)
        self.lowest = analyte.measuring_interval[0] if analyte.measuring_interval is not None else 0.0
        self.subjects = _repeated_subjects(data)

    def fit(
        self, method: str, *, days: Sequence[Hashable] | None = None, keep: npt.NDArray[np.bool_] | None = None
    ) -> LineFit:
        """A line; with ``days`` these are the units, and the interval is the jackknife's.

        Five to eight clusters leave a second bootstrap too few distinct resamples (its tail ends at its bound), while
        Student's t on days minus one degrees of freedom held its level in simulation.
        """
        data = self.data
        kept = np.ones(data.x.size, dtype=bool) if keep is None else keep
        units = days if days is not None else self.subjects
        labels = None if units is None else [unit for unit, use in zip(units, kept, strict=True) if use]
        interval = "jackknife" if days is not None else self.asked.interval
        if interval == "rank" and method != "passing-bablok":
            interval = "calibrated"
        return fit_line(
            data.x[kept], data.y[kept], method=method, variance_ratio=self.asked.variance_ratio, interval=interval,
            level=self.plan.level, resamples=self.plan.resamples, seed=self.seed, lowest=self.lowest, clusters=labels,
        )

    def agreement(self, missing: list[NotComputed]) -> tuple[Difference | None, npt.NDArray[np.float64]]:
        """Mean difference and limits of agreement, and the single differences (absolute where percent do not exist)."""
        data, asked = self.data, self.asked
        interval = "calibrated" if asked.interval == "rank" else asked.interval
        try:
            made = difference(
                data.x, data.y, scale=asked.difference, interval=interval, level=self.plan.level,
                resamples=self.plan.resamples, seed=self.seed, clusters=self.subjects,
            )
            return made, differences(data.x, data.y, scale=asked.difference)
        except NotComputableError as error:
            missing.append(NotComputed("comparison", f"{data.candidate}, differences", str(error), whole=False))
            return None, data.y - data.x

    def without_outliers(self, outliers: tuple[Outlier, ...], missing: list[NotComputed]) -> LineFit | None:
        if not outliers:
            return None
        names = {outlier.specimen for outlier in outliers}
        keep = np.array([specimen not in names for specimen in self.data.specimens])
        try:
            return self.fit(self.asked.report, keep=keep)
        except NotComputableError as error:
            where = f"{self.data.candidate}, without the flagged outliers"
            missing.append(NotComputed("comparison", where, str(error), whole=False))
            return None

    def at_level(
        self, level: Level, fit: LineFit, by_day: LineFit | None, without: LineFit | None
    ) -> BiasAtLevel:
        data, at = self.data, level.at
        bias = fit.bias_at([at])[0]
        day_bias = None if by_day is None else by_day.bias_at([at])[0]
        unit = "subjects" if self.subjects is not None else "specimens"
        leading, leading_unit = bias, unit
        if day_bias is not None and _width(day_bias) > _width(bias):
            leading, leading_unit = day_bias, "days"
        return BiasAtLevel(
            level=level, bias=bias, by_day=day_bias, leading=leading, leading_unit=leading_unit,
            near=int(np.count_nonzero(np.abs(data.x - at) <= NEAR * abs(at))),
            covered=bool(np.min(data.x) <= at <= np.max(data.x)),
            censored_near=tuple(pair.specimen for pair in data.censored if _near(pair, at)),
            without_specimen=self._without_each(fit, at),
            without_outliers=None if without is None else without.bias_at([at])[0],
            changes=side_change(data.x, data.y, at),
        )

    def _without_each(self, fit: LineFit, at: float) -> tuple[WithoutUnit, ...]:
        """The units whose absence moves a bound furthest, each way (jackknife-after-bootstrap, Efron 1992)."""
        draws = fit.kept
        sample = bias_sample(draws, at)
        found = tails(sample, interval=fit.interval, level=fit.level)
        missing = absent(draws.units, self.plan.resamples, seed=draws.seed)
        bounds = bounds_without_each(sample, missing, found)
        names = self._unit_names(fit)
        known = np.flatnonzero(np.all(np.isfinite(bounds), axis=1) & np.isfinite(sample.jackknife))
        if known.size == 0:
            return ()
        chosen: list[int] = []
        for side in (0, 1):
            order = known[np.argsort(bounds[known, side], kind="stable")]
            chosen += [int(i) for i in (*order[:2], *order[-2:]) if int(i) not in chosen]
        whole = bounds[known].mean(axis=0)
        chosen.sort(key=lambda i: -float(np.max(np.abs(bounds[i] - whole))))
        return tuple(
            WithoutUnit(names[i], float(sample.jackknife[i]), float(bounds[i, 0]), float(bounds[i, 1]))
            for i in chosen
        )

    def _unit_names(self, fit: LineFit) -> list[str]:
        """Names of the resampled units in the order of the fit."""
        if self.subjects is None:
            return [self.data.specimens[i] for i in fit.order]
        return [name for _, name in dict.fromkeys(self.subjects[i] for i in fit.order)]


def _repeated_subjects(data: ComparisonData) -> list[tuple[str, str]] | None:
    """A label a specimen, shared by the specimens of one subject; ``None`` when no subject gave several."""
    known = [subject for subject in data.subjects if subject is not None]
    if len(set(known)) == len(known):
        return None
    return [
        ("subject", subject) if subject is not None else ("specimen", specimen)
        for subject, specimen in zip(data.subjects, data.specimens, strict=True)
    ]


def _known_days(data: ComparisonData) -> list[str] | None:
    days = [day for day in data.days if day is not None]
    return days if len(days) == len(data.days) else None


def _width(bias: Bias) -> float:
    made = bias.bias
    return np.inf if made.low is None or made.high is None else made.high - made.low


def _near(pair: CensoredPair, at: float) -> bool:
    """Whether a censored pair's number, or the bound it lies beyond, is within a factor of two of the level."""
    low, high = sorted((at / CENSORED_REACH, at * CENSORED_REACH))
    numbers = (pair.comparative_value, pair.candidate_value)
    return any(low <= number <= high for number in numbers if number is not None)


def _outliers(data: ComparisonData, found: npt.NDArray[np.float64]) -> tuple[Outlier, ...]:
    scale = float(max(np.max(np.abs(data.x)), np.max(np.abs(data.y))))
    return tuple(
        Outlier(
            data.specimens[flag.index], float(data.x[flag.index]), float(data.y[flag.index]),
            flag.value, flag.statistic, flag.critical,
        )
        for flag in flagged(found, scale=scale)
    )


def _correlation(data: ComparisonData) -> float | None:
    if np.ptp(data.x) == 0.0 or np.ptp(data.y) == 0.0:
        return None
    return float(np.corrcoef(data.x, data.y)[0, 1])


def _equal(x: npt.NDArray[np.float64], y: npt.NDArray[np.float64]) -> int:
    return int(np.count_nonzero(x == y))
