"""Cautions in a few words, for the condition of a proposal."""

from __future__ import annotations

from collections.abc import Iterable

from labstat.judgement.model import Caution
from labstat.judgement.scene import LIMITS
from labstat.judgement.wording import some

SHORT: dict[str, str] = {
    "few-specimens": "the small number of specimens",
    "few-days": "the few or unknown days of measurement",
    "swapped-columns": "possibly swapped or shifted results",
    "copied-results": "possibly copied results",
    "not-linear": "a possible bend in the relation",
    "ordinary-line": "the ordinary least-squares line",
    "opposite-bias": "a bias of opposite sign at other levels",
    "single-specimen-large": "one specimen that differs widely",
    "no-interval": "numbers without an interval",
    "rests-on": "evidence that rests on little",
    "monte-carlo": "a finding that other random numbers could change",
    "no-precision": "the total error, which was not assessed",
    "no-source": "an allowance without a source",
    "changed-criterion": "criteria changed after their approval",
    "exclusions": "the excluded rows",
    "not-computed": "a part that could not be computed",
    "few-near-level": "few specimens near a level",
    "not-covered": "a level that the specimens do not reach",
    "censored-near-level": "results outside a measuring interval",
}


def provided(cautions: Iterable[Caution]) -> str:
    """The cautions that weigh on agreement, in a few words; empty where there are none.

    Notes do not weigh, and neither do cautions of the reference study: it answers another question.
    """
    codes = dict.fromkeys(
        caution.code
        for caution in cautions
        if caution.weight == "caution" and not (caution.question or "").startswith(LIMITS)
    )
    return some([SHORT.get(code, code) for code in codes], 4)
