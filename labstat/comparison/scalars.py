"""Checks of single numbers, beside those of arrays in ``pairs``."""

from __future__ import annotations

import math

import numpy as np

from labstat.errors import ArgumentError
from labstat.resample.seeds import fresh_seed

FEWEST_RESAMPLES = 99
"""Fewer cannot hold the tails of any interval."""


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


__all__ = ["checked_number", "checked_resamples", "checked_seed", "checked_whole"]
