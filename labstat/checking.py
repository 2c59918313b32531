"""Checks of arguments that several rooms share: each raises :class:`ArgumentError` with argument, rule and value."""

from __future__ import annotations

import math

import numpy as np
import numpy.typing as npt

from labstat.errors import ArgumentError
from labstat.resample.seeds import fresh_seed

FEWEST_RESAMPLES = 99
"""Fewer cannot hold the tails of any interval."""


def checked_values(name: str, values: npt.ArrayLike) -> npt.NDArray[np.float64]:
    """A one-dimensional array of finite numbers, copied; raises :class:`ArgumentError` otherwise."""
    try:
        array = np.array(values, dtype=np.float64)
    except (TypeError, ValueError):
        raise ArgumentError(name, "must hold numbers only", values) from None
    if array.ndim != 1:
        raise ArgumentError(name, "must be one-dimensional, but its shape is", array.shape)
    if not np.all(np.isfinite(array)):
        first = int(np.flatnonzero(~np.isfinite(array))[0])
        raise ArgumentError(name, f"must hold finite numbers only, but at position {first} holds", float(array[first]))
    return array


def checked_share(name: str, value: float) -> float:
    """A number strictly between 0 and 1; raises :class:`ArgumentError` otherwise."""
    if isinstance(value, bool) or not isinstance(value, (int, float, np.floating)) or not 0.0 < value < 1.0:
        raise ArgumentError(name, "must lie between 0 and 1", value)
    return float(value)


def checked_number(name: str, value: object) -> float:
    """``value`` as a finite float; raises :class:`ArgumentError` otherwise."""
    if isinstance(value, bool) or not isinstance(value, (int, float, np.integer, np.floating)):
        raise ArgumentError(name, "must be a number", value)
    number = float(value)
    if not math.isfinite(number):
        raise ArgumentError(name, "must be a finite number", value)
    return number


def checked_whole(name: str, value: object, *, lowest: int) -> int:
    """``value`` as a whole number of at least ``lowest``; raises :class:`ArgumentError` otherwise."""
    if isinstance(value, bool) or not isinstance(value, (int, np.integer)) or int(value) < lowest:
        raise ArgumentError(name, f"must be a whole number of at least {lowest}", value)
    return int(value)


def checked_resamples(value: object) -> int:
    """A number of resamples."""
    return checked_whole("resamples", value, lowest=FEWEST_RESAMPLES)


def checked_seed(value: object) -> int:
    """A seed, or a fresh one for ``None``."""
    return fresh_seed() if value is None else checked_whole("seed", value, lowest=0)


__all__ = ["checked_number", "checked_resamples", "checked_seed", "checked_share", "checked_values", "checked_whole"]
