"""Findings, cautions and the proposal as values."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

FindingWord = Literal["within", "beyond", "unsettled", "not covered"]
Weight = Literal["stop", "caution", "note"]


@dataclass(frozen=True, slots=True)
class Finding:
    """What the evidence says about one question.

    ``finding`` compares the leading interval with the allowance; ``counts`` is what it counts as in the proposal
    (a finding that changes without one specimen, without the outliers or from specimens to days counts as
    ``unsettled``, and ``rests_on`` says in words on what it rests). Numbers are in units of the analyte.
    """

    study: str  # "comparison" or "reference"
    question: str  # "bias"
    where: str  # "90 µmol/L, Procedure B"
    candidate: str | None
    at: float | None
    estimate: float | None
    low: float | None
    high: float | None
    allowance: str | None
    allowed_low: float | None
    allowed_high: float | None
    source: str | None
    finding: FindingWord
    counts: FindingWord
    rests_on: str | None
    settles_at_n: int | None


@dataclass(frozen=True, slots=True)
class Caution:
    """Something the reviewer must know."""

    code: str
    weight: Weight
    text: str
    question: str | None  # the question it belongs to, None for the whole analyte


@dataclass(frozen=True, slots=True)
class Judgement:
    """The rules' outcome for one analyte. ``proposal`` has at most three sentences.

    ``urgency`` sorts the overview (smaller first): 0 could not be computed, 1 beyond, 2 not covered, 3 unsettled,
    4 stop, 5 within with cautions, 6 within, 7 no criterion. ``closeness`` orders within one urgency: the largest
    share of the allowance that an interval reaches (larger first). ``next_action`` is a few words for the overview,
    ``situation`` the row of the proposal table that held, in words.
    """

    findings: tuple[Finding, ...]
    cautions: tuple[Caution, ...]
    proposal: str
    urgency: int
    closeness: float
    next_action: str
    not_examined: tuple[str, ...]
    situation: str = ""
