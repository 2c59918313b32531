"""A finding compares the leading interval with the allowance; what it counts as depends on what it rests."""

from __future__ import annotations

import math
from dataclasses import replace

import pytest
from hypothesis import given
from hypothesis import strategies as st
from studies import ROUND, bias, comparison, level, study

from labstat.comparison.results import WithoutUnit
from labstat.judgement import judge
from labstat.judgement.findings import compare
from labstat.study.results import Outlier


def finding(*levels, **more):
    found = judge(study(comparison(*levels, **more)), ROUND).findings
    assert len(found) == 1
    return found[0]


@pytest.mark.parametrize(
    ("low", "high", "word"),
    [
        (-9.0, 9.0, "within"),  # closed: on the edge is allowed
        (-9.0, math.nextafter(9.0, 10), "unsettled"),  # unrounded: one bit beyond is not
        (math.nextafter(9.0, 10), 12.0, "beyond"),
        (9.0, 12.0, "unsettled"),
        (-12.0, math.nextafter(-9.0, -10), "beyond"),
        (-12.0, -9.0, "unsettled"),
        (-20.0, 20.0, "unsettled"),
    ],
)
def test_an_interval_is_compared_closed_and_unrounded(low, high, word):
    assert compare(low, high, -9.0, 9.0) == word


NUMBERS = st.floats(-1e6, 1e6)


@given(st.tuples(NUMBERS, NUMBERS).map(sorted), st.tuples(NUMBERS, NUMBERS).map(sorted))
def test_exactly_one_word_fits_any_interval_and_it_mirrors(interval, allowed):
    (low, high), (bottom, top) = interval, allowed
    word = compare(low, high, bottom, top)
    inside = all(bottom <= end <= top for end in (low, high))
    apart = not (low <= top and high >= bottom)
    assert word == ("within" if inside else "beyond" if apart else "unsettled")
    assert word == compare(-high, -low, -top, -bottom)


def test_a_clean_level_is_within_with_its_numbers_and_source():
    made = finding(level())
    assert (made.finding, made.counts, made.rests_on, made.settles_at_n) == ("within", "within", None, None)
    assert (made.study, made.question, made.where) == ("comparison", "bias", "90 µmol/L, Procedure B")
    assert (made.estimate, made.low, made.high) == (1.0, -2.0, 4.0)
    assert (made.allowance, made.allowed_low, made.allowed_high) == ("9", -9.0, 9.0)
    assert made.source == "Quality plan, table 3"


def test_the_allowance_is_taken_at_the_level_and_on_each_side():
    assert finding(level(at=250.0, allowable="8 or 10 %", high=20.0)).allowed_high == 25.0
    one_sided = finding(level(allowable="-4 to 8", low=-5.0, high=-4.5, value=-4.7))
    assert (one_sided.finding, one_sided.allowed_low) == ("beyond", -4.0)


def test_a_level_outside_the_specimens_is_not_covered_whatever_the_interval():
    assert finding(level(covered=False)).finding == "not covered"
    assert finding(level(covered=False, low=20.0, high=30.0)).counts == "not covered"
    assert finding(level(censored_near=("0417",))).finding == "not covered"


def test_within_needs_five_specimens_near_the_level_and_beyond_does_not():
    assert finding(level(near=5)).finding == "within"
    few = finding(level(near=4))
    assert (few.finding, few.settles_at_n) == ("unsettled", None)
    assert finding(level(near=0, value=14.0, low=11.0, high=17.0)).finding == "beyond"


def test_the_wider_of_specimens_and_days_leads():
    by_day = bias(90.0, 1.0, -3.0, 5.0)
    made = finding(level(by_day=by_day, leading=by_day, leading_unit="days"))
    assert (made.low, made.high, made.finding, made.rests_on) == (-3.0, 5.0, "within", None)


def test_a_finding_that_changes_from_specimens_to_days_counts_as_unsettled_and_says_so():
    by_day = bias(90.0, 1.0, -12.0, 14.0)
    made = finding(level(by_day=by_day, leading=by_day, leading_unit="days"))
    assert (made.finding, made.counts) == ("unsettled", "unsettled")
    assert made.rests_on == "rests on the unit that is resampled (within by specimens and unsettled by days)"


def test_a_finding_that_changes_without_one_specimen_counts_as_unsettled():
    changes = level(without_specimen=(WithoutUnit("0417", 2.0, -1.0, 9.5), WithoutUnit("0003", 1.0, -1.0, 8.5)))
    made = finding(changes)
    assert (made.finding, made.counts, made.rests_on) == ("within", "unsettled", "rests on specimen 0417")
    harmless = level(without_specimen=(WithoutUnit("0417", 2.0, -8.9, 9.0),))
    assert finding(harmless).counts == "within"


def test_beyond_that_rests_on_one_subject_counts_as_unsettled_too():
    made = finding(
        level(value=14.0, low=11.0, high=17.0, without_specimen=(WithoutUnit("S12", 9.0, 8.0, 12.0),)),
        unit_of_resampling="subjects",
    )
    assert (made.finding, made.counts, made.rests_on) == ("beyond", "unsettled", "rests on subject S12")


def test_several_specimens_that_decide_alone_are_named():
    without = tuple(WithoutUnit(f"{i}", 2.0, -1.0, 9.5) for i in range(5))
    assert (
        finding(level(without_specimen=without)).rests_on == "rests on any single one of specimens 0, 1, 2 and 2 more"
    )


def test_a_unit_whose_absence_could_not_be_judged_changes_nothing():
    assert finding(level(without_specimen=(WithoutUnit("0417", 2.0, math.nan, math.nan),))).counts == "within"


def test_a_finding_that_changes_without_the_flagged_outliers_counts_as_unsettled():
    flagged = tuple(Outlier(name, 100.0, 130.0, 30.0, 5.0, 3.0) for name in ("0417", "0388"))
    made = finding(level(without_outliers=bias(90.0, 6.0, 3.0, 9.5)), outliers=flagged)
    assert (made.counts, made.rests_on) == ("unsettled", "rests on the flagged outliers 0417 and 0388")
    assert finding(level(without_outliers=bias(90.0, 0.5, -1.0, 3.0)), outliers=flagged).counts == "within"


def test_without_an_interval_nothing_is_settled():
    bare = bias(90.0, 1.0, None, None, reason="too many resamples failed", failed_resamples=40)
    made = finding(level(bias=bare, leading=bare))
    assert (made.finding, made.low, made.settles_at_n) == ("unsettled", None, None)


def test_an_unsettled_finding_says_how_many_specimens_would_settle_it():
    """n (1.43 h / m)²: 60 (1.43 · 6 / 4)² = 276.06, so 277 specimens."""
    assert finding(level(value=5.0, low=-1.0, high=11.0)).settles_at_n == 277
    assert finding(level(value=8.9, low=2.9, high=14.9)).settles_at_n is None  # above 500
    assert finding(level(value=10.0, low=7.0, high=13.0)).settles_at_n is None  # the estimate lies outside


def test_a_level_without_an_allowance_is_no_question():
    assert judge(study(comparison(level(allowable=None, source=None))), ROUND).findings == ()


def test_closeness_is_the_largest_share_of_the_allowance_that_an_interval_reaches():
    made = judge(study(comparison(level(), level(at=250.0, low=-8.1, high=1.0))), ROUND)
    assert made.closeness == pytest.approx(0.9, rel=1e-12)
    assert judge(study(comparison(level(allowable="0 to 8", low=0.0, high=6.0))), ROUND).closeness == pytest.approx(
        0.75
    )


def test_findings_keep_the_order_of_candidates_and_levels():
    one, two = comparison(level(), level(at=250.0)), comparison(level(), level(at=250.0), candidate="Procedure C")
    made = judge(study(one, two), replace(ROUND)).findings
    assert [(f.candidate, f.at) for f in made] == [
        ("Procedure B", 90.0),
        ("Procedure B", 250.0),
        ("Procedure C", 90.0),
        ("Procedure C", 250.0),
    ]
