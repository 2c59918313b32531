"""Allowances as a laboratory writes them: ``"8"``, ``"10 %"``, ``"8 or 10 %"``, ``"8 and 10 %"``, ``"-4 to 8"``."""

from __future__ import annotations

import math
import re
from dataclasses import dataclass
from typing import Literal

from labstat.errors import ArgumentError

_NUMBER = r"[+\u2212-]?(?:\d+(?:\.\d*)?|\.\d+)"
_TERM = re.compile(rf"({_NUMBER})\s*(%?)")


@dataclass(frozen=True, slots=True)
class Term:
    """A number of units, or of percent of the level's absolute value."""

    amount: float
    percent: bool

    def at(self, level: float) -> float:
        return self.amount * abs(level) / 100.0 if self.percent else self.amount


@dataclass(frozen=True, slots=True)
class Allowance:
    """What is allowed on each side, as written and as understood.

    ``rule`` is ``"larger"`` for *or*, ``"smaller"`` for *and*, ``"range"`` for *to*, ``"single"`` for one term
    (labstat interface, round folder; practice, findings).
    """

    text: str
    rule: Literal["single", "larger", "smaller", "range"]
    terms: tuple[Term, ...]

    def at(self, level: float) -> tuple[float, float]:
        """Lowest and highest allowed bias at a level, in units."""
        amounts = [term.at(level) for term in self.terms]
        if self.rule == "range":
            return amounts[0], amounts[1]
        size = min(amounts) if self.rule == "smaller" else max(amounts)
        return -size, size


def parse_allowance(text: str) -> Allowance:
    """Read an allowance; raises :class:`ArgumentError` with the forms that are understood."""
    words = text.strip()
    for separator, rule in ((" or ", "larger"), (" and ", "smaller"), (" to ", "range")):
        if separator in words:
            parts = words.split(separator)
            terms = tuple(_term(part, text) for part in parts)
            if len(terms) != 2:
                raise _refused(text)
            if rule == "range":
                # "-4 to 8 %" means percent on both sides: nobody writes the sign twice
                if terms[1].percent and not terms[0].percent:
                    terms = (Term(terms[0].amount, percent=True), terms[1])
                if terms[0].percent != terms[1].percent or not terms[0].amount <= 0 <= terms[1].amount:
                    raise _refused(text)
                if terms[0].amount == terms[1].amount:
                    raise _refused(text)
                return Allowance(text, "range", terms)
            if any(term.amount <= 0 for term in terms):
                raise _refused(text)
            return Allowance(text, "larger" if rule == "larger" else "smaller", terms)
    term = _term(words, text)
    if term.amount <= 0:
        raise _refused(text)
    return Allowance(text, "single", (term,))


def _term(part: str, text: str) -> Term:
    match = _TERM.fullmatch(part.strip())
    if match is None:
        raise _refused(text)
    amount = float(match.group(1).replace("\u2212", "-"))
    if not math.isfinite(amount):
        raise _refused(text)
    return Term(amount, percent=match.group(2) == "%")


def _refused(text: str) -> ArgumentError:
    rule = 'must be like "8", "10 %", "8 or 10 %", "8 and 10 %" or "-4 to 8", above zero'
    return ArgumentError("allowable", rule, text)
