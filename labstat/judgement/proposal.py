"""The proposal: the first situation of the table that holds, put in at most three sentences. The director decides."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

from labstat.judgement import situations as words
from labstat.judgement.case import Case, finding_of, is_beyond, is_inside, is_outside, is_within, rests, those
from labstat.judgement.findings import Question
from labstat.judgement.reference_words import reference_sentence
from labstat.judgement.wording import listing


@dataclass(frozen=True, slots=True)
class Situation:
    """One row of the table: which questions make it hold, and how it is said."""

    name: str
    urgency: int
    leads: Callable[[Case], tuple[Question, ...] | None]
    says: Callable[[Case, tuple[Question, ...]], str]
    action: Callable[[Case, tuple[Question, ...]], str]


TABLE: tuple[Situation, ...] = (
    Situation(
        "too few specimens, beyond the allowance", 1, words.beyond_and_stop, words.beyond_stop_says,
        lambda case, q: f"find the cause of the bias at {case.at(q)}",
    ),
    Situation(
        "speaks against acceptance", 1, lambda case: those(case.asked, is_beyond), words.beyond_says,
        lambda case, q: f"find the cause of the bias at {case.at(q)}",
    ),
    Situation(
        "no proposal on agreement", 4, words.stop, words.stop_says,
        lambda case, q: "add specimens" if case.stops else "see why it could not be compared",
    ),
    Situation(
        "not shown at every level", 2, lambda case: those(case.asked, lambda f: f.finding == "not covered"),
        words.not_covered_says, lambda case, q: f"add specimens near {case.at(q)} or restrict the measuring interval",
    ),
    Situation("not settled", 3, lambda case: those(case.asked, is_inside), words.inside_says, words.add_near),
    Situation(
        "more likely outside than inside", 3, lambda case: those(case.asked, is_outside), words.outside_says,
        lambda case, q: f"find the cause of the bias at {case.at(q)}",
    ),
    Situation(
        "rests on too little", 3, lambda case: those(case.asked, rests), words.rests_says,
        lambda case, q: f"investigate: {finding_of(q[0]).rests_on}",
    ),
    Situation(
        "within at some levels only", 5, words.partly, words.partly_says,
        lambda case, q: "set a criterion at the other levels",
    ),
    Situation(
        "supports acceptance, with cautions", 5, words.within_with_cautions, words.within_cautions_says,
        lambda case, q: "weigh the cautions, then decide",
    ),
    Situation(
        "supports acceptance", 6, lambda case: those(case.asked, is_within), words.within_says,
        lambda case, q: "decide",
    ),
    Situation(
        "no proposal on reference limits", 4, words.no_reference, words.no_reference_says,
        lambda case, q: "collect more reference values",
    ),
    Situation("estimates only", 7, words.always, words.no_criterion_says, lambda case, q: "set a criterion"),
)
"""The first situation that holds decides. The row for *beyond* with a stop stands before the one for *beyond* alone,
because the general row would otherwise always hide it."""


def situation(case: Case) -> tuple[Situation, tuple[Question, ...]]:
    """The row that holds, with the questions that made it hold."""
    for row in TABLE:
        leading = row.leads(case)
        if leading is not None:
            return row, leading
    raise AssertionError("the last row always holds")


def proposal(case: Case) -> str:
    """At most three sentences: the situation, the other questions, the reference study."""
    row, leading = situation(case)
    sentences = [row.says(case, leading)]
    others = _others(case, leading)
    if others is None and row.name.startswith("supports") and case.not_examined:
        others = f"Not examined here: {listing(case.not_examined)}"
    sentences += [text for text in (others, reference_sentence(case.groups, case.study.not_computed)) if text]
    return " ".join(f"{text.removesuffix('.')}." for text in sentences)


def _others(case: Case, leading: tuple[Question, ...]) -> str | None:
    """What the evidence says at the levels that the first sentence does not name; levels are never averaged."""
    if case.questions and all(q.finding is None for q in case.questions):
        return None  # the first sentence says that there is no criterion
    rest = [q for q in case.asked if q not in leading]
    kinds: tuple[tuple[str, Callable[[Question], bool]], ...] = (
        ("beyond", lambda q: q.finding is not None and is_beyond(q.finding)),
        ("not shown", lambda q: q.finding is not None and q.finding.finding == "not covered"),
        ("not settled", lambda q: q.finding is not None and (is_inside(q.finding) or is_outside(q.finding))),
        ("resting on too little", lambda q: q.finding is not None and rests(q.finding)),
        ("within", lambda q: q.finding is not None and is_within(q.finding)),
        ("no criterion", lambda q: q.finding is None),
    )
    said = []
    for kind, holds in kinds:
        some_of = [q for q in rest if holds(q)]
        if some_of:
            said.append(f"{kind} at {case.at(some_of)}")
    said += _stopped_besides(case, leading)
    if not said:
        return None
    text = "; ".join(said)
    return f"{text[0].upper()}{text[1:]}; levels are never averaged"


def _stopped_besides(case: Case, leading: tuple[Question, ...]) -> list[str]:
    """Candidates without a proposal, where another candidate's evidence leads."""
    if not leading or not (case.stops or case.missing):
        return []
    named = [q.result for q in leading]
    left = [scene for scene in case.stops if scene.result not in named]
    return [
        *(
            f"no proposal for {scene.result.data.candidate} ({scene.result.n} of {scene.asked.minimum_n})"
            for scene in left
        ),
        *(f"{part.where or 'a candidate'} could not be compared" for part in case.missing),
    ]
