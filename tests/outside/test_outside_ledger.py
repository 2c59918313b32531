"""No case is passed over in silence: each kind is taken here, taken by the reference tests, or named as untested."""

from __future__ import annotations

from pathlib import Path

from outside_cases import all_cases

HERE = {
    "ols": 10, "deming": 28, "passing_bablok": 13, "pb_swap": 3, "theil_sen": 3, "weighted_deming": 2,
    "ols_bias": 2, "deming_bias": 1, "kendall_rank_ci": 2, "loa": 5, "loa_summary": 1, "loa_ratio": 1,
    "boot_replicates": 1, "jack_corr": 1, "two_means": 1, "gesd": 1, "kolmogorov": 1, "univariate": 5,
}
"""Kinds that the files beside this one test, and how many cases each has."""

REFERENCE = ("np_limits", "exact_boot", "exact_boot_interp", "rank_table", "min_n", "biweight")
"""Kinds that the tests of the reference limits take."""

LATER = {
    "oneway": "analysis of variance belongs to the precision study, which does not exist yet",
    "oneway_vc": "components of variance belong to the precision study",
    "oneway_iso5725": "repeatability and reproducibility belong to the precision study",
    "nested3": "nested components of variance belong to the precision study",
    "nested4": "nested components of variance belong to the precision study",
    "icc": "mean squares of a two-way layout belong to the precision study",
    "gum_h5": "a between-day component belongs to the precision study",
    "welch_satterthwaite": "effective degrees of freedom belong to the precision study",
    "uvl": "the verification of a precision claim belongs to the precision study",
    "loa_repeat": "limits of agreement from duplicates are not computed yet",
    "loa_anova_diff": "limits of agreement with several results a subject are not computed yet",
    "boxcox": "transformed reference limits are not computed yet",
    "normality": "the normality check belongs to transformed reference limits",
    "pred_interval": "the robust method meets the prediction interval for large normal samples only, tested there",
    "param_limit_ci": "limits from a normal distribution belong to transformed reference limits",
    "dixon_reed": "outliers among reference values are not looked for yet",
    "partition": "tests of partitions are not computed yet",
    "binom_verify": "verification of a reference interval is not computed yet",
    "harrell_davis": "the project uses no Harrell-Davis quantile",
    "k_nist": "the project uses no tolerance factor",
}
"""Kinds that nothing tests yet, each with its reason."""


def test_every_kind_of_case_is_taken_or_named_with_its_reason() -> None:
    """The three lists cover the kinds of the data file, and no kind stands in two of them."""
    kinds = {case["kind"] for case in all_cases()}
    listed = [*HERE, *REFERENCE, *LATER]
    assert sorted(listed) == sorted(kinds)


def test_every_case_of_a_kind_is_there() -> None:
    """A case that is dropped from the data file is missed, and so is one that is added under a kind tested here."""
    counted = {kind: sum(case["kind"] == kind for case in all_cases()) for kind in HERE}
    assert counted == HERE
    assert len({case["id"] for case in all_cases()}) == len(all_cases()) == 136


def test_every_kind_taken_here_is_read_by_a_test() -> None:
    """Each kind, or a case of it, is named in a test file of this directory."""
    text = "".join(
        path.read_text(encoding="utf-8")
        for path in sorted(Path(__file__).parent.glob("test_outside_*.py"))
        if path.name != Path(__file__).name
    )
    for kind in HERE:
        ids = [case["id"] for case in all_cases() if case["kind"] == kind]
        assert f'of_kind("{kind}")' in text or all(f'"{name}"' in text for name in ids), kind


def test_every_case_states_its_source_and_its_provenance() -> None:
    """Source, provenance and a tolerance beside each expected number: the copy has not lost them."""
    for case in all_cases():
        assert case["source"]
        assert case["provenance"] in {
            "reproduced from certified values", "recomputed", "from memory", "common practice",
        }
        for entry in case["expected"].values():
            assert {"value", "tol", "src"} <= set(entry)
