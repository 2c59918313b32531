"""The search for outlying differences against Rosner's example."""

from __future__ import annotations

import numpy as np
from outside_cases import columns, expect, one

from labstat.comparison.outliers import flagged, search


def test_extreme_deviates_are_those_of_rosners_example() -> None:
    """R₁ … R₁₀ and λ₁ … λ₁₀ meet the print (Technometrics 1983;25:165; e-Handbook 1.3.5.17.3).

    The printed figures are truncated, not rounded, and were recalled before computing: hence a tolerance of one digit.
    """
    case = one("rosner-esd")
    (values,) = columns(case)
    steps = search(values, most=case["inputs"]["k"], alpha=case["inputs"]["alpha"])
    expect(case, "R", [step.statistic for step in steps])
    expect(case, "lambda", [step.critical for step in steps])


def test_rosners_three_outliers_are_flagged_though_the_first_two_deviates_are_not_significant() -> None:
    """The largest i with Rᵢ > λᵢ counts: 6.01, 5.42 and 5.34 are flagged because the third step is significant."""
    case = one("rosner-esd")
    (values,) = columns(case)
    found = flagged(values)
    assert len(found) == case["expected"]["n_outliers"]["value"]
    expect(case, "outliers", [step.value for step in found])
    assert [step.statistic > step.critical for step in found] == [False, False, True]
    np.testing.assert_array_equal(values[[step.index for step in found]], [step.value for step in found])
