"""Intervals from resamples: functions of arrays.

Percentile: with the B values sorted, the bound at tail area a is at rank a(B + 1), linear between ranks.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from scipy import special, stats

from labstat.resample.calibration import calibrate
from labstat.resample.engine import Array, Sample
from labstat.resample.estimate import Estimate
from labstat.resample.ranks import at_rank, at_tail

KINDS = ("calibrated", "percentile", "bca", "jackknife")

AT_BOUND = "calibrated-bound"
"""Used instead of a calibrated interval whose tail is smaller than the second level can tell: the smallest it can."""

FAILED_SHARE = 0.01
"""Above this share of failed resamples there is no interval."""


@dataclass(frozen=True, slots=True)
class Tails:
    """Tail areas at which the sorted resamples are read, and how they were found.

    ``spread`` is the standard error of the tail area itself (calibration draws a finite number of resamples).
    """

    low: float
    high: float
    kind: str
    spread: float = 0.0
    attained: float | None = None
    replaced: str | None = None
    reason: str | None = None


def tails(sample: Sample, *, interval: str, level: float) -> Tails:
    """Tail areas of a percentile, BCa or calibrated interval at confidence ``level``.

    BCa: Efron (1987). Calibrated: Loh (1987), Beran (1987), Hall & Martin (1988). A kind that does not exist for these
    resamples is replaced by the percentile interval, by name and with a reason.
    """
    alpha = 1.0 - level
    attained = None
    if sample.inner is not None:
        calibration = calibrate(sample, level=level)
        attained = calibration.attained
        if interval == "calibrated":
            if calibration.reason is None or calibration.at_bound:
                kind, replaced = ("calibrated", None) if calibration.reason is None else (AT_BOUND, "calibrated")
                return Tails(
                    calibration.tail, 1.0 - calibration.tail, kind, calibration.spread, attained, replaced,
                    calibration.reason,
                )
            return Tails(
                alpha / 2, 1.0 - alpha / 2, "percentile", 0.0, attained, "calibrated", calibration.reason
            )
    if interval == "calibrated" and sample.inner is None:
        too_many = "there are too many units for a second bootstrap"
        return Tails(alpha / 2, 1.0 - alpha / 2, "percentile", 0.0, None, "calibrated", too_many)
    if interval == "bca":
        low, high, reason = _bca(sample, alpha)
        if reason is not None:
            return Tails(alpha / 2, 1.0 - alpha / 2, "percentile", 0.0, attained, "bca", reason)
        return Tails(low, high, "bca", 0.0, None)
    return Tails(alpha / 2, 1.0 - alpha / 2, "percentile", 0.0, attained)


def _bca(sample: Sample, alpha: float) -> tuple[float, float, str | None]:
    values = sample.values[np.isfinite(sample.values)]
    below = np.count_nonzero(values < sample.estimate) + 0.5 * np.count_nonzero(values == sample.estimate)
    share = below / values.size
    if share in (0.0, 1.0):
        return 0.0, 0.0, "all resamples lie on one side of the estimate"
    jackknife = sample.jackknife
    if not np.all(np.isfinite(jackknife)):
        return 0.0, 0.0, "the statistic does not exist without some unit"
    influence = jackknife.mean() - jackknife
    spread = float(np.sum(influence**2))
    scale = float(np.max(np.abs(jackknife)))
    if spread <= (1e-14 * scale) ** 2 * jackknife.size:
        return 0.0, 0.0, "all jackknife values are equal, so the acceleration does not exist"
    acceleration = float(np.sum(influence**3)) / (6.0 * spread**1.5)
    z0 = float(special.ndtri(share))

    def adjusted(area: float) -> float:
        z = z0 + float(special.ndtri(area))
        return float(special.ndtr(z0 + z / (1.0 - acceleration * z)))

    return adjusted(alpha / 2), adjusted(1.0 - alpha / 2), None


def jackknife_error(jackknife: Array) -> float:
    """Standard error of the delete-one jackknife (Efron & Tibshirani 1993, eq. 11.5)."""
    n = jackknife.size
    return float(np.sqrt((n - 1) / n * np.sum((jackknife - jackknife.mean()) ** 2)))


def estimate_from(sample: Sample, *, interval: str, level: float) -> Estimate:
    """The estimate of one parameter with the interval asked for; see :class:`Estimate` for what it carries."""
    finite = np.isfinite(sample.values)
    drawn = int(sample.values.size)
    failed = drawn - int(np.count_nonzero(finite))
    if interval == "jackknife":
        return _jackknife(sample, level)
    if failed > FAILED_SHARE * drawn:
        return Estimate(
            sample.estimate, None, None, level, interval, drawn, None, failed,
            reason=f"the statistic does not exist in {failed} of {drawn} resamples",
        )
    found = tails(sample, interval=interval, level=level)
    ordered = np.sort(sample.values[finite])
    low, high = at_tail(ordered, found.low), at_tail(ordered, found.high)
    error = max(_bound_error(ordered, found.low, found.spread), _bound_error(ordered, found.high, found.spread))
    return Estimate(
        sample.estimate, low, high, level, found.kind, drawn, error, failed, found.attained,
        replaced=found.replaced, reason=found.reason,
    )


def _bound_error(ordered: Array, area: float, spread: float) -> float:
    """Standard error of a bound from the binomial spread of its rank and from the spread of the tail area."""
    size = ordered.size
    rank = area * (size + 1)
    step = np.sqrt(size * area * (1.0 - area) + (spread * size) ** 2)
    step = max(float(step), 0.5)  # a bound at the very end still has its neighbour
    return (at_rank(ordered, rank + step) - at_rank(ordered, rank - step)) / 2.0


def _jackknife(sample: Sample, level: float) -> Estimate:
    values = sample.jackknife
    if not np.all(np.isfinite(values)):
        missing = int(np.count_nonzero(~np.isfinite(values)))
        return Estimate(
            sample.estimate, None, None, level, "jackknife",
            reason=f"the statistic does not exist without some single unit ({missing} of {values.size})",
        )
    half = float(stats.t.ppf(0.5 + level / 2, values.size - 1)) * jackknife_error(values)
    return Estimate(sample.estimate, sample.estimate - half, sample.estimate + half, level, "jackknife")
