"""Numbers as the page shows them: true minus signs, fixed decimals, nothing invented."""

from __future__ import annotations

import math

from labstat.judgement.wording import MINUS, plain

NONE = "–"
THIN = "\u202f"
NOTHING = 1e-12
"""Smaller than this is rounding of a computed zero."""


def number(value: float | None, decimals: int) -> str:
    """A number with fixed decimals; a dash for none, narrow spaces between thousands from 10 000 on."""
    if value is None or not math.isfinite(value):
        return NONE
    text = f"{abs(value):.{decimals}f}"
    whole, _, part = text.partition(".")
    if len(whole) > 4:
        whole = f"{int(whole):,}".replace(",", THIN)
    sign = MINUS if value < 0 and float(text) != 0.0 else ""
    return sign + whole + (f".{part}" if part else "")


def signed(value: float | None, decimals: int) -> str:
    """The same with a plus sign where the rounded number is above zero."""
    text = number(value, decimals)
    if value is None or not math.isfinite(value) or float(f"{value:.{decimals}f}") <= 0.0:
        return text
    return "+" + text


def span(low: float | None, high: float | None, decimals: int) -> str:
    """An interval in words: "−1.2 to 3.4"; "no interval" where there is none."""
    if low is None or high is None:
        return "no interval"
    return f"{number(low, decimals)} to {number(high, decimals)}"


def signed_span(low: float | None, high: float | None, decimals: int) -> str:
    """An interval of differences, with signs."""
    if low is None or high is None:
        return "no interval"
    return f"{signed(low, decimals)} to {signed(high, decimals)}"


def percent(share: float | None, digits: int = 1) -> str:
    """A share between 0 and 1 in percent."""
    return NONE if share is None else f"{number(100.0 * share, digits)}\u202f%"


def significant(value: float | None, digits: int = 3) -> str:
    """A number to so many significant digits, never in powers of ten within reason."""
    if value is None or not math.isfinite(value):
        return NONE
    if abs(value) < NOTHING:
        return "0"
    decimals = max(0, digits - 1 - math.floor(math.log10(abs(value))))
    return number(value, min(decimals, 9))


def p_value(p: float) -> str:
    """A p-value: "p = 0.032", "p < 0.001"."""
    return "p < 0.001" if p < 0.001 else f"p = {p:.3f}"


__all__ = [
    "MINUS", "NONE", "number", "p_value", "percent", "plain", "signed", "signed_span", "significant", "span",
]
