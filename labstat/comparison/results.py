"""Frozen results of a comparison of two measurement procedures."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

import numpy as np
import numpy.typing as npt

from labstat.resample.estimate import Estimate

Array = npt.NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class Bias:
    """Bias a + (b - 1) X at one level, in units and in percent of the level (``None`` at a level of 0).

    ``estimate``, ``low`` and ``high`` are those of the bias in units.
    """

    at: float
    bias: Estimate
    percent: Estimate | None

    @property
    def estimate(self) -> float:
        return self.bias.estimate

    @property
    def low(self) -> float | None:
        return self.bias.low

    @property
    def high(self) -> float | None:
        return self.bias.high


@dataclass(frozen=True, slots=True)
class Difference:
    """Mean difference and limits of agreement (Bland & Altman 1986, 1999), candidate minus comparative.

    ``scale`` is ``"absolute"`` (units) or ``"percent"`` (of the mean of the two results). ``normal`` holds the t
    intervals of mean, lower and upper limit beside those that were asked for.
    """

    scale: Literal["absolute", "percent"]
    n: int
    mean: Estimate
    sd: float
    lower: Estimate
    upper: Estimate
    normal: tuple[Estimate, Estimate, Estimate]


@dataclass(frozen=True, slots=True)
class Linearity:
    """Cusum test of linearity (Passing & Bablok 1983); a large p does not show linearity."""

    statistic: float
    p_value: float


@dataclass(frozen=True, slots=True, eq=False)
class Band:
    """Pointwise confidence band of a line over ``x``, for drawing."""

    x: Array
    low: Array
    high: Array
    level: float


@dataclass(frozen=True, slots=True)
class WithoutUnit:
    """What one quantity's interval becomes when one unit (a specimen, a day) is left out."""

    unit: str
    estimate: float
    low: float
    high: float


@dataclass(frozen=True, slots=True)
class SideChange:
    """Specimens that change side of a level between the procedures, with exact (Clopper-Pearson) 95 % intervals.

    ``up``: below the level by the comparative, at or above it by the candidate; ``down``: the other way.
    Intervals are shares between 0 and 1.
    """

    at: float
    n: int
    up: int
    up_low: float
    up_high: float
    down: int
    down_low: float
    down_high: float


__all__ = [
    "Array", "Band", "Bias", "Difference", "Linearity", "SideChange", "WithoutUnit",
]
