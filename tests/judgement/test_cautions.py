"""Each caution has a data set that raises it and one that does not."""

from __future__ import annotations

from dataclasses import replace

import pytest
from studies import ROUND, bias, comparison, estimate, group, level, limit, line, study

from labstat.comparison.results import Linearity, SideChange, WithoutUnit
from labstat.judgement import judge
from labstat.reference.results import OutsideCount
from labstat.round.model import Adopted, Approval, LeftOut, RowCount
from labstat.study.results import NotComputed, Outlier

CLEAN = study(comparison(level(), level(at=250.0)), groups=(group(), group(sex="M")))
OUTLIER = (Outlier("0417", 100.0, 130.0, 30.0, 5.0, 3.0),)


def raised(made, code, plan=ROUND):
    return [caution for caution in judge(made, plan).cautions if caution.code == code]


def test_a_clean_study_raises_nothing():
    assert judge(CLEAN, ROUND).cautions == ()


def excluded(identity, procedure, result):
    return LeftOut("comparison", "comparison.csv", 3, identity, procedure, None, result, "excluded", "haemolysed")


ONE_SIDED = tuple(excluded(str(i), p, r) for i in range(3) for p, r in (("A", "10"), ("B", str(11 + i))))
TWO_SIDED = (*ONE_SIDED[:4], excluded("9", "A", "10"), excluded("9", "B", "9,5"))

COMPARISON_CASES = {
    "too few specimens": ("few-specimens", "stop", "14 specimens", comparison(level(), n=14)),
    "few specimens": ("few-specimens", "caution", "39 specimens", comparison(level(), n=39)),
    "twenty are not stopped": ("few-specimens", "caution", "20 specimens", comparison(level(), n=20)),
    "unknown days": ("few-days", "caution", "not known", comparison(level(), days=None)),
    "four days": ("few-days", "caution", "4 days", comparison(level(), days=4)),
    "weak correlation": ("swapped-columns", "caution", "r = 0.899", comparison(level(), correlation=0.899)),
    "shifted rows": ("swapped-columns", "caution", "30 of 60", comparison(level(), equal_after_shift=30)),
    "copied": ("copied-results", "caution", "31 of 60", comparison(level(), equal_pairs=31)),
    "bent": ("not-linear", "caution", "p = 0.049", comparison(level(), linearity=Linearity(1.4, 0.049))),
    "ordinary line": (
        "ordinary-line",
        "caution",
        "free of error",
        comparison(level(), reported=line(method="ordinary")),
    ),
    "outlier": ("outlier", "note", "0417", comparison(level(), outliers=OUTLIER)),
    "large specimen": ("single-specimen-large", "caution", "+30 µmol/L", comparison(level(), outliers=OUTLIER)),
    "opposite": (
        "opposite-bias",
        "caution",
        "high at 90 µmol/L and low at 250 µmol/L",
        comparison(level(low=0.5), level(at=250.0, value=-3.0, low=-5.0, high=-0.5)),
    ),
    "jump": ("serial-results", "note", "+1 at 90 µmol/L", comparison(level(low=0.5))),
    "critical": ("critical-limits", "note", "delta-check", comparison(level(low=0.5))),
    "side changes": (
        "selected-specimens",
        "note",
        "not rates among patients",
        comparison(level(changes=SideChange(90.0, 60, 2, 0.0, 0.1, 0, 0.0, 0.06))),
    ),
    "no allowance at all": ("no-allowance", "note", "no allowable bias at any", comparison(level(allowable=None))),
    "no allowance at one": (
        "no-allowance",
        "note",
        "at 250 µmol/L",
        comparison(level(), level(at=250.0, allowable=None)),
    ),
    "no source": ("no-source", "caution", "names no source", comparison(level(source=" "))),
    "total error": ("no-precision", "caution", "precision study", comparison(level(total="20 %"))),
    "near": ("few-near-level", "caution", "4 specimens within 25 %", comparison(level(near=4))),
    "not covered": ("not-covered", "caution", "from 40 to 410 µmol/L", comparison(level(at=700.0, covered=False))),
    "censored near": ("censored-near-level", "caution", "0002", comparison(level(censored_near=("0002",)))),
    "rests": (
        "rests-on",
        "caution",
        "rests on specimen 0417",
        comparison(level(without_specimen=(WithoutUnit("0417", 2.0, 1.0, 9.5),))),
    ),
    "level zero": ("level-zero", "note", "percentage exists", comparison(level(at=0.0))),
}


@pytest.mark.parametrize("case", COMPARISON_CASES)
def test_a_comparison_raises_its_caution(case):
    code, weight, words, result = COMPARISON_CASES[case]
    found = raised(study(result), code)
    assert [caution.weight for caution in found] == [weight]
    assert words in found[0].text
    assert found[0].question is not None
    assert found[0].question.startswith("bias")
    assert not found[0].text[0].islower()
    assert found[0].text[-1] in ".?"


NEAR_MISSES = {
    "few-specimens": comparison(level(), n=40),
    "few-days": comparison(level(), days=5),
    "swapped-columns": comparison(level(), correlation=0.9, equal_after_shift=29),
    "copied-results": comparison(level(), equal_pairs=30),
    "not-linear": comparison(level(), linearity=Linearity(1.4, 0.05)),
    "single-specimen-large": comparison(level(), outliers=(Outlier("0417", 100.0, 109.0, 9.0, 5.0, 3.0),)),
    "opposite-bias": comparison(level(low=0.5), level(at=250.0, value=-3.0, low=-5.0, high=0.0)),
    "serial-results": comparison(level(low=0.0)),
    "critical-limits": comparison(level(low=0.0)),
    "few-near-level": comparison(level(near=5)),
    "rests-on": comparison(level(without_specimen=(WithoutUnit("0417", 2.0, 1.0, 9.0),))),
}


@pytest.mark.parametrize("code", NEAR_MISSES)
def test_a_comparison_just_on_the_right_side_raises_nothing(code):
    assert raised(study(NEAR_MISSES[code]), code) == []


def test_a_correlation_that_does_not_exist_accuses_nobody():
    assert raised(study(comparison(level(), correlation=None)), "swapped-columns") == []


def with_estimate(**more):
    found = bias(90.0, 1.0, -2.0, 4.0, **more)
    return level(bias=found, leading=found)


@pytest.mark.parametrize(
    ("error", "weight"),
    [
        (0.25, None),
        (0.26, "note"),
        (2.6, "caution"),
    ],  # a quarter of the last digit; twice 2.6 reaches over the allowed 9
)
def test_the_monte_carlo_error_is_named_when_a_digit_or_a_finding_hangs_on_it(error, weight):
    found = raised(study(comparison(with_estimate(monte_carlo_error=error))), "monte-carlo")
    assert [caution.weight for caution in found] == ([] if weight is None else [weight])


def test_an_interval_of_another_kind_is_named_with_its_reason():
    fit = line(slope=estimate(1.0, 0.9, 1.1, interval="percentile", replaced="bca", reason="all resamples equal"))
    found = raised(study(comparison(level(), fits=(fit,))), "interval-replaced")
    assert "percentile interval stands in for the bca one of the slope" in found[0].text
    assert "all resamples equal" in found[0].text


def test_failed_resamples_and_missing_intervals_are_counted():
    few = line(slope=estimate(1.0, 0.9, 1.1, failed_resamples=3))
    assert "3 of 999 resamples" in raised(study(comparison(level(), fits=(few,))), "failed-resamples")[0].text
    none = line(slope=estimate(1.0, None, None, failed_resamples=30, reason="does not exist in 30 of 999 resamples"))
    found = raised(study(comparison(level(), fits=(none,))), "no-interval")
    assert "there is no interval for the slope" in found[0].text.casefold()
    assert raised(study(comparison(level(), fits=(none,))), "failed-resamples") != []


def test_exclusions_are_named_above_five_percent_or_all_on_one_side():
    assert raised(study(comparison(level()), rows=RowCount(100, 95, 5, 0, 0, 0)), "exclusions") == []
    assert "6.0 %" in raised(study(comparison(level()), rows=RowCount(100, 94, 6, 0, 0, 0)), "exclusions")[0].text
    found = raised(study(comparison(level()), left_out=ONE_SIDED), "exclusions")
    assert "all 3 excluded specimens differ in the same direction" in found[0].text.casefold()
    assert raised(study(comparison(level()), left_out=TWO_SIDED), "exclusions") == []
    assert raised(study(comparison(level()), left_out=ONE_SIDED[:4]), "exclusions") == []


def test_censored_results_are_noted():
    assert (
        "3 results"
        in raised(study(comparison(level()), rows=RowCount(100, 97, 0, 3, 0, 0)), "censored-results")[0].text
    )
    assert raised(study(comparison(level()), rows=RowCount(100, 97, 3, 0, 0, 0)), "censored-results") == []


def test_criteria_that_changed_after_their_approval_are_named():
    approved = replace(ROUND, approved=Approval("Dr A", "2026-11-01", "bb"))
    assert raised(CLEAN, "changed-criterion", approved)[0].question is None
    for held in (
        ROUND,
        replace(ROUND, approved=Approval("Dr A", "2026-11-01", "aa")),
        replace(ROUND, approved=Approval("Dr A", "2026-11-01", None)),
    ):
        assert raised(CLEAN, "changed-criterion", held) == []


def groups_study(*groups):
    return study(comparison(level()), groups=groups)


REFERENCE_CASES = {
    "none": ("reference-not-computed", "stop", "19 reference values, 20", group(n=19, empty=True)),
    "one missing": (
        "reference-not-computed",
        "caution",
        "too skewed",
        group(n=130, notes=("too skewed",), empty=True),
    ),
    "very few": ("few-reference-values", "caution", "very few", group(n=39)),
    "few": ("few-reference-values", "caution", "119 reference values", group(n=119)),
    "no rank interval": (
        "no-rank-interval",
        "caution",
        "119 for the lower limit",
        group(n=100, lower=limit(45.0, 44.0, 47.0, rank_low=None, rank_high=None, attained=0.8)),
    ),
    "undercovers": (
        "bootstrap-undercovers",
        "caution",
        "attains 87.9 %",
        group(lower=limit(45.0, 44.0, 47.0, attained=0.879, rank_low=43.0, rank_high=48.0)),
    ),
    "extreme": ("extreme-limit", "caution", "lower and upper", group(n=38)),
    "failed": (
        "reference-not-computed",
        "stop",
        "the values are all alike",
        group(failure="the values are all alike", empty=True),
    ),
    "skewed": (
        "skewed-values",
        "caution",
        "the values are skewed",
        group(n=125, method="robust", notes=("the values are skewed (p = 0.001)",)),
    ),
    "wide": ("wide-limit", "note", "wider than 0.2", group(lower=limit(44.0, 42.0, 50.1))),
    "change": (
        "limit-change",
        "caution",
        "12 of 130",
        group(adopted=Adopted({}, 45.0, 84.0), outside=OutsideCount(130, 3, 0.005, 0.07, 12, 0.049, 0.157)),
    ),
    "replaced": (
        "interval-replaced",
        "note",
        "lower limit of sex F",
        group(lower=limit(45.0, 44.0, 47.0, replaced="bca", reason="no acceleration")),
    ),
    "bare": (
        "no-interval",
        "caution",
        "lower limit of sex F",
        group(lower=limit(45.0, None, None, reason="one value")),
    ),
}


@pytest.mark.parametrize("case", REFERENCE_CASES)
def test_a_reference_study_raises_its_caution(case):
    code, weight, words, made = REFERENCE_CASES[case]
    found = raised(groups_study(made), code)
    assert [caution.weight for caution in found] == [weight]
    assert words in found[0].text
    assert found[0].question == "reference limits, sex F"


REFERENCE_MISSES = {
    "few-reference-values": group(n=120),
    "bootstrap-undercovers": group(lower=limit(45.0, 44.0, 47.0, attained=0.881)),
    "extreme-limit": group(n=39),  # 0.025 (39 + 1) = 1: just inside
    "wide-limit": group(lower=limit(44.0, 42.0, 50.0)),
    "limit-change": group(adopted=Adopted({}, 45.0, 84.0), outside=OutsideCount(130, 3, 0.005, 0.07, 3, 0.005, 0.07)),
    "reference-not-computed": group(n=20),
    "no-rank-interval": group(n=119, lower=limit(45.0, None, None, rank_low=None, rank_high=None)),
    "skewed-values": group(method="robust"),
}


@pytest.mark.parametrize("code", REFERENCE_MISSES)
def test_a_reference_study_just_on_the_right_side_raises_nothing(code):
    assert raised(groups_study(REFERENCE_MISSES[code]), code) == []


def test_an_undercovering_bootstrap_without_a_rank_interval_has_nothing_to_quote_instead():
    made = group(lower=limit(45.0, 44.0, 47.0, attained=0.7, rank_low=None, rank_high=None))
    assert raised(groups_study(made), "bootstrap-undercovers") == []


def test_a_part_that_could_not_be_computed_stops_its_own_question_only():
    missing = (NotComputed("comparison", "Procedure C", "no positive relation"),)
    found = raised(
        study(comparison(level()), candidates=("Procedure B", "Procedure C"), not_computed=missing), "not-computed"
    )
    assert [(c.weight, c.question) for c in found] == [("stop", "bias, Procedure C")]
    second = (NotComputed("comparison", "Procedure B, deming", "no positive relation", whole=False),)
    assert raised(study(comparison(level()), not_computed=second), "not-computed")[0].weight == "caution"


def test_stops_come_first_and_notes_last():
    made = study(comparison(level(low=0.5, near=3), n=14, days=None), groups=(group(n=12, empty=True),))
    weights = [caution.weight for caution in judge(made, ROUND).cautions]
    assert weights == sorted(weights, key=["stop", "caution", "note"].index)
    assert weights.count("stop") == 2


def test_every_caution_of_two_candidates_names_its_candidate():
    made = study(comparison(level(), n=30), comparison(level(), n=30, candidate="Procedure C"))
    questions = [caution.question for caution in raised(made, "few-specimens")]
    assert questions == ["bias, Procedure B", "bias, Procedure C"]


def test_a_group_that_failed_is_told_once():
    missing = (NotComputed("reference", "sex F", "all alike"),)
    made = study(comparison(level()), groups=(group(failure="all alike", empty=True),), not_computed=missing)
    assert len(raised(made, "reference-not-computed")) == 1
    assert judge(made, ROUND).proposal.count("sex F") == 1
    alone = study(comparison(level()), asks_reference=True, not_computed=missing)
    assert [caution.weight for caution in raised(alone, "reference-not-computed")] == ["stop"]
    assert "No reference limits for sex F." in judge(alone, ROUND).proposal
