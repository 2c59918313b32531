"""Checks of single numbers, beside those of arrays in ``pairs``."""

from __future__ import annotations

import math

from labstat.errors import ArgumentError


def checked_number(name: str, value: float) -> float:
    """``value`` as a finite float; raises :class:`ArgumentError` otherwise."""
    try:
        number = float(value)
    except (TypeError, ValueError):
        raise ArgumentError(name, "must be a number", value) from None
    if not math.isfinite(number):
        raise ArgumentError(name, "must be a finite number", value)
    return number


__all__ = ["checked_number"]
