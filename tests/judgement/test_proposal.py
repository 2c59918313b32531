"""The proposal follows from the first situation that holds, in at most three sentences, with its scope and numbers."""

from __future__ import annotations

import re

import pytest
from studies import ROUND, comparison, group, level, limit, study

from labstat.comparison.results import WithoutUnit
from labstat.judgement import judge
from labstat.judgement.wording import decimals_that_tell, number, signed
from labstat.round.model import Elsewhere
from labstat.study.results import NotComputed

BEYOND = {"value": 14.0, "low": 11.0, "high": 17.0}
UNSETTLED = {"value": 5.0, "low": -1.0, "high": 11.0}
OUTSIDE = {"value": 10.0, "low": 7.0, "high": 13.0}
RESTS = {"without_specimen": (WithoutUnit("0417", 2.0, 1.0, 9.5),)}


def judged(*levels, **more):
    return judge(study(comparison(*levels, **more)), ROUND)


CASES = {
    "beyond": (
        judged(level(**BEYOND)),
        "speaks against acceptance",
        1,
        "The evidence speaks against acceptance: at 90 µmol/L the bias, +14 (11 to 17), exceeds the allowed 9.",
    ),
    "beyond and stop": (
        judged(level(**BEYOND), n=14),
        "too few specimens, beyond the allowance",
        1,
        (
            "Too few specimens for a proposal (14 of 20), but what there is already exceeds the allowance: at 90 "
            "µmol/L the "
            "bias, +14 (11 to 17), exceeds the allowed 9."
        ),
    ),
    "stop": (
        judged(level(), n=14),
        "no proposal on agreement",
        4,
        "No proposal on agreement: 14 specimens, 20 needed.",
    ),
    "not covered": (
        judged(level(at=700.0, covered=False)),
        "not shown at every level",
        2,
        (
            "Agreement is not shown at 700 µmol/L: specimens end at 410; restrict the measuring interval or add "
            "specimens "
            "there."
        ),
    ),
    "unsettled inside": (
        judged(level(**UNSETTLED)),
        "not settled",
        3,
        (
            "Not settled at 90 µmol/L: the bias is +5 (−1 to 11) and may be as large as 11, allowed 9; about 277 "
            "specimens in "
            "all would probably settle it (a rough guide)."
        ),
    ),
    "unsettled outside": (
        judged(level(**OUTSIDE)),
        "more likely outside than inside",
        3,
        (
            "More likely outside the allowance than inside: at 90 µmol/L the bias, +10 (7 to 13), allowed 9; more "
            "specimens are "
            "unlikely to rescue it."
        ),
    ),
    "rests": (
        judged(level(**RESTS)),
        "rests on too little",
        3,
        "Investigate before deciding: at 90 µmol/L the finding within rests on specimen 0417.",
    ),
    "some levels only": (
        judged(level(), level(at=250.0, allowable=None)),
        "within at some levels only",
        5,
        "Within at 90 µmol/L only.",
    ),
    "with cautions": (
        judged(level(), level(at=250.0), n=30),
        "supports acceptance, with cautions",
        5,
        (
            "The evidence supports acceptance on agreement with Procedure A at 90 and 250 µmol/L, provided the "
            "reviewer is "
            "satisfied about the small number of specimens."
        ),
    ),
    "all within": (
        judged(level(), level(at=250.0)),
        "supports acceptance",
        6,
        "The evidence supports acceptance on agreement with Procedure A at 90 and 250 µmol/L.",
    ),
    "no allowance": (
        judged(level(allowable=None)),
        "estimates only",
        7,
        "Estimates only at 90 µmol/L: the plan has no criterion.",
    ),
}


@pytest.mark.parametrize("case", CASES)
def test_each_situation_has_its_sentence_and_its_urgency(case):
    made, situation, urgency, first = CASES[case]
    assert (made.situation, made.urgency) == (situation, urgency)
    assert made.proposal.startswith(first)
    assert made.next_action


@pytest.mark.parametrize("case", CASES)
def test_a_proposal_has_at_most_three_sentences(case):
    proposal = CASES[case][0].proposal
    assert proposal.endswith(".")
    assert len(re.findall(r"\.(?: |$)", proposal)) <= 3


def test_all_within_names_what_was_not_examined():
    made = judged(level())
    assert (
        "Not examined here: linearity, limit of quantitation, interference, carry-over, stability, precision"
        in made.proposal
    )
    elsewhere = tuple(Elsewhere(item, "doc 3", "passed") for item in ("Linearity", "Interference by haemolysis"))
    left = judge(study(comparison(level()), elsewhere=elsewhere), ROUND).not_examined
    assert left == ("limit of quantitation", "carry-over", "stability", "precision", "total error", "reference limits")


def test_other_levels_are_named_and_never_averaged():
    made = judged(level(**BEYOND), level(at=250.0), level(at=300.0, **UNSETTLED), level(at=700.0, covered=False))
    assert made.situation == "speaks against acceptance"
    assert (
        "Not shown at 700 µmol/L; not settled at 300 µmol/L; within at 250 µmol/L; levels are never averaged."
        in made.proposal
    )


def test_beyond_that_rests_on_one_specimen_asks_for_investigation():
    made = judged(level(**BEYOND, without_specimen=(WithoutUnit("0417", 8.0, 5.0, 12.0),)))
    assert made.situation == "rests on too little"
    assert "the finding beyond rests on specimen 0417" in made.proposal
    assert made.next_action == "investigate: rests on specimen 0417"


def test_a_stop_of_one_candidate_does_not_silence_the_other():
    made = judge(study(comparison(level(), n=14), comparison(level(**BEYOND), candidate="Procedure C")), ROUND)
    assert made.situation == "speaks against acceptance"
    assert "at 90 µmol/L (Procedure C) the bias" in made.proposal
    assert "no proposal for Procedure B (14 of 20)" in made.proposal.replace("No", "no")


def test_a_stopped_candidate_beside_a_good_one_leaves_the_good_one_its_finding():
    made = judge(study(comparison(level(), n=14), comparison(level(), candidate="Procedure C")), ROUND)
    assert made.proposal.startswith(
        "No proposal on agreement: 14 specimens, 20 needed. Within at 90 µmol/L (Procedure C)"
    )


def test_a_stop_of_the_reference_study_leaves_agreement_its_proposal():
    made = judge(study(comparison(level()), groups=(group(n=14, empty=True),)), ROUND)
    assert made.situation == "supports acceptance"
    assert made.proposal.endswith("No reference limits for sex F (14 values, 20 needed).")


def test_reference_limits_are_named_with_their_groups_and_how_sure_they_are():
    low = limit(45.0, 44.0, 47.0, attained=0.80, rank_attained=0.93)
    made = judge(study(comparison(level()), groups=(group(lower=low), group(sex="M", n=125))), ROUND)
    assert made.proposal.endswith(
        "Reference limits were computed for sex F (n = 130) and sex M (n = 125); their intervals, meant to hold the "
        "true "
        "limit in 90 % of studies, do so in 90 % to 93 %."
    )


def test_a_reference_study_alone_has_no_criterion():
    made = judge(study(groups=(group(sex=""),)), ROUND)
    assert made.situation == "estimates only"
    assert made.proposal.startswith("Estimates only: the plan has no criterion. Reference limits were computed for all")
    none = judge(study(groups=(group(n=14, empty=True),)), ROUND)
    assert (none.situation, none.urgency) == ("no proposal on reference limits", 4)


def test_a_candidate_that_could_not_be_compared_stops_the_proposal_and_comes_first():
    missing = (NotComputed("comparison", "Procedure C", "no positive relation"),)
    made = judge(study(comparison(level()), candidates=("Procedure B", "Procedure C"), not_computed=missing), ROUND)
    assert made.urgency == 0
    assert made.proposal.startswith("No proposal on agreement: Procedure C: no positive relation.")


def test_few_specimens_near_a_level_are_the_reason_that_is_given():
    made = judged(level(near=3))
    assert "but 3 specimens within 25 % of the level, 5 needed" in made.proposal
    assert made.next_action == "add specimens near 90 µmol/L"


def test_a_bound_that_would_print_like_the_allowance_gets_more_decimals():
    made = judged(level(value=5.0, low=1.0, high=9.04))
    assert "+5.00 (1.00 to 9.04)" in made.proposal
    assert decimals_that_tell([9.0], [9.0], 0) == 0  # a true tie needs none
    assert decimals_that_tell([9.4], [9.0], 0) == 1


def test_numbers_have_real_minus_signs_and_no_negative_zero():
    assert number(-0.04, 1) == "0.0"
    assert number(-3.25, 1) == "−3.2"
    assert (signed(0.2, 0), signed(3.0, 0), signed(-3.0, 0)) == ("0", "+3", "−3")


def test_every_proposal_carries_the_unit_beside_its_levels():
    for made, *_ in CASES.values():
        assert "µmol/L" in made.proposal or made.situation == "no proposal on agreement"
