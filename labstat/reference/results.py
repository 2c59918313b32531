"""Frozen results of a reference study."""

from __future__ import annotations

from dataclasses import dataclass

from labstat.resample.estimate import Estimate


@dataclass(frozen=True, slots=True)
class ReferenceLimits:
    """Reference limits of one group. A limit that was not asked for, or could not be computed, is ``None``.

    ``method`` is the one that was used (``"rank"``, ``"robust"``), ``asked`` the one in the plan (``"auto"``).
    ``notes`` says in plain words what could not be computed and what would be needed; ``failure`` why there are no
    limits although there are enough values. ``seed`` is the one used where resamples were drawn.
    """

    n: int
    method: str
    asked: str
    probabilities: tuple[float, ...]
    lower: Estimate | None
    upper: Estimate | None
    notes: tuple[str, ...] = ()
    seed: int | None = None
    failure: str | None = None


@dataclass(frozen=True, slots=True)
class OutsideCount:
    """Reference individuals outside an interval, each side apart, with exact (Clopper-Pearson) 95 % intervals.

    A side without a limit has ``None``. Intervals are shares between 0 and 1.
    """

    n: int
    below: int | None
    below_low: float | None
    below_high: float | None
    above: int | None
    above_low: float | None
    above_high: float | None
