"""One cell of a result column: a number, a censored result, nothing, or text that is none of these."""

from __future__ import annotations

import math
import re
from dataclasses import dataclass
from functools import lru_cache
from typing import Literal

_NUMBER = re.compile(r"[+-]?(?:\d+(?:\.\d*)?|\.\d+)(?:[eE][+-]?\d{1,3})?", re.ASCII)
_SIGNS = {"<": "below", "≤": "below", ">": "above", "≥": "above", "<=": "below", ">=": "above"}


@dataclass(frozen=True, slots=True)
class Result:
    """What a result cell says. ``value`` is the number, or the bound of a censored result."""

    kind: Literal["number", "censored", "missing", "bad"]
    value: float = math.nan
    side: Literal["below", "above", "inside"] = "inside"
    what: str = ""
    remedy: str = ""


def read_number(text: str, *, decimal: str) -> float | None:
    """A finite number as a laboratory writes it, or ``None``; blanks around and a true minus sign are understood."""
    words = text.strip().replace("\u2212", "-")
    if decimal == ",":
        if "." in words:
            return None
        words = words.replace(",", ".")
    if _NUMBER.fullmatch(words) is None:
        return None
    value = float(words)
    return value if math.isfinite(value) else None


def read_result(text: str, *, decimal: str) -> Result:
    """A result: ``12.3``, ``<0.5``, ``> 1000``, or nothing. Never guesses: a thousands separator is refused."""
    words = text.strip()
    if not words:
        return Result("missing")
    for sign in ("<=", ">=", "<", ">", "≤", "≥"):
        if words.startswith(sign):
            bound = read_number(words[len(sign) :], decimal=decimal)
            if bound is None:
                rest = words[len(sign) :].strip()
                what = "no number after the sign"
                if read_number(rest, decimal="," if decimal == "." else ".") is not None:
                    what = why_not(rest, decimal)
                return Result("bad", what=what, remedy="write it like <0.5 or >1000")
            side: Literal["below", "above"] = "below" if _SIGNS[sign] == "below" else "above"
            return Result("censored", bound, side)
    value = read_number(words, decimal=decimal)
    if value is not None:
        return Result("number", value)
    remedy = "correct it, leave it empty, or give the row an exclude reason"
    return Result("bad", what=why_not(words, decimal), remedy=remedy)


def why_not(words: str, decimal: str) -> str:
    """Why a text is no number."""
    other = "," if decimal == "." else "."
    if other in words and read_number(words, decimal=other) is not None:
        return (
            f'not a number with decimal mark "{decimal}" '
            "(thousands separators are not accepted; the mark can be set as decimal in [files])"
        )
    return "not a number"


@lru_cache(maxsize=100_000)
def natural(name: str) -> tuple[tuple[int, int, str], ...]:
    """A sorting key by which specimen 2 comes before specimen 10, whatever the order of the rows."""
    parts = re.findall(r"\d+|\D+", name)
    return (*((0, int(p), p) if p.isdecimal() and p.isascii() else (1, 0, p) for p in parts), (2, 0, name))
