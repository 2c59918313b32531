"""What ``import labstat`` offers, and that it costs nothing until it is used."""

from __future__ import annotations

import subprocess
import sys

import pytest

import labstat


def test_every_public_name_is_there_and_listed():
    for name in labstat.__all__:
        assert getattr(labstat, name) is not None
    assert set(labstat.__all__) <= set(dir(labstat))
    with pytest.raises(AttributeError, match="no attribute 'fit_curve'"):
        labstat.fit_curve  # noqa: B018


def test_importing_the_package_loads_no_library():
    heavy = "('numpy', 'scipy', 'click', 'reportlab', 'pydantic')"
    code = f"import sys, labstat; print([name for name in {heavy} if name in sys.modules])"
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert done.stdout == "[]\n"


def test_the_calls_of_the_interface_give_numbers_with_intervals():
    x = [float(i) for i in range(1, 31)]
    y = [value * 1.02 + (7 * i % 11 - 5) / 10 for i, value in enumerate(x)]
    fit = labstat.fit_line(x, y, method="passing-bablok", interval="percentile", resamples=199, seed=1)
    assert fit.slope.low < fit.slope.estimate < fit.slope.high
    assert [bias.at for bias in fit.bias_at([5, 25])] == [5.0, 25.0]
    limits = labstat.reference_limits([float(i) for i in range(1, 121)], method="rank", interval="percentile")
    # ranks 0.025 · 121 and 0.975 · 121, where every value is its own rank
    assert (limits.lower.estimate, limits.upper.estimate) == pytest.approx((3.025, 117.975), rel=1e-12)
    assert labstat.reference_limits(range(1, 121), probabilities=(0.9,)).lower is None


def test_bad_input_raises_the_documented_family():
    with pytest.raises(labstat.ArgumentError) as caught:
        labstat.fit_line([1.0, 2.0], [1.0])
    assert isinstance(caught.value, labstat.LabstatError)
    with pytest.raises(labstat.LabstatError):
        labstat.reference_limits([1.0, float("nan")])
