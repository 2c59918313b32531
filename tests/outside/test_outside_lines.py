"""Lines against published values, certified values and other libraries. Each case names its source in the data file."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from odrpack import odr_fit
from outside_cases import columns, expect, of_kind, one
from scipy import stats

from labstat.comparison.lines import fit_line
from labstat.comparison.passing_bablok import pair_slopes, rank_interval
from labstat.errors import NotComputableError

Case = dict[str, Any]
FAST: dict[str, Any] = {"resamples": 99, "seed": 1, "interval": "jackknife"}


def jackknife_error(estimate: Any, n: int) -> float:
    """Standard error behind a jackknife interval: half its width over Student's t with n - 1 degrees of freedom."""
    return float((estimate.high - estimate.low) / 2 / stats.t.ppf(0.5 + estimate.level / 2, n - 1))


@pytest.mark.parametrize("case", of_kind("ols"))
def test_ordinary_line_is_the_certified_one(case: Case) -> None:
    """Slope and intercept of ordinary least squares meet NIST's certified values and scipy's linregress."""
    x, y = columns(case)
    fit = fit_line(x, y, method="ordinary", **FAST)
    expect(case, "slope", fit.slope.estimate)
    expect(case, "intercept", fit.intercept.estimate)
    # se_slope, se_intercept, resid_sd, r2 and F are those of the normal model, which the project does not compute.


@pytest.mark.parametrize("case", of_kind("deming"))
def test_deming_line_is_the_eigenvectors_one(case: Case) -> None:
    """Deming's slope, intercept and jackknife errors meet Pearson's print, the eigenvector route and odrpack.

    The cases state the error variance of y over that of x; ``variance_ratio`` is its reciprocal (Linnet's lambda).
    """
    x, y = columns(case)
    fit = fit_line(x, y, method="deming", variance_ratio=1 / case["inputs"]["var_ratio_y_over_x"], **FAST)
    expect(case, "slope", fit.slope.estimate)
    expect(case, "intercept", fit.intercept.estimate)
    if "jack_slope_se" in case["expected"]:
        expect(case, "jack_slope_se", jackknife_error(fit.slope, x.size))
        expect(case, "jack_intercept_se", jackknife_error(fit.intercept, x.size))
        jackknife = fit.kept.jackknife[:, 0]
        pseudo_mean = x.size * fit.slope.estimate - (x.size - 1) * jackknife.mean()
        expect(case, "jack_slope_pseudomean", pseudo_mean)


@pytest.mark.parametrize("case", of_kind("passing_bablok"))
def test_passing_bablok_line_is_the_exact_rational_one(case: Case) -> None:
    """Slope, intercept, N, K and the 1983 rank interval meet exact rational arithmetic on the decimal data.

    ``slope`` is the 1983 definition (geometric mean of the two middle slopes for even N), not ``slope_arith``.
    """
    x, y = columns(case)
    if case["expected"]["slope"]["value"] <= 0:
        with pytest.raises(NotComputableError, match="no positive relation"):
            fit_line(x, y, method="passing-bablok", **FAST)
        return
    fit = fit_line(x, y, method="passing-bablok", **FAST)
    expect(case, "slope", fit.slope.estimate)
    expect(case, "intercept", fit.intercept.estimate)
    assert fit.slopes_used == case["expected"]["N"]["value"]
    assert fit.pairs_below_minus_one == case["expected"]["K"]["value"]
    found = {
        "slope_lo": fit.slope.rank_low, "slope_hi": fit.slope.rank_high,
        "int_lo": fit.intercept.rank_low, "int_hi": fit.intercept.rank_high,
        "theil_slope": fit.slope.estimate, "theil_lo": fit.slope.rank_low, "theil_hi": fit.slope.rank_high,
    }
    for key, value in found.items():
        if key in case["expected"]:
            expect(case, key, value)
    if "M1" in case["expected"]:
        ordered = pair_slopes(x, y).slopes
        m1, m2 = case["expected"]["M1"]["value"], case["expected"]["M2"]["value"]
        assert (fit.slope.rank_low, fit.slope.rank_high) == (ordered[m1 - 1], ordered[m2 - 1])


@pytest.mark.parametrize("case", of_kind("pb_swap"))
def test_passing_bablok_slope_of_swapped_procedures_is_the_reciprocal(case: Case) -> None:
    """Exchanging the procedures gives the reciprocal slope, to the tolerance of the exact rational check."""
    x, y = columns(case)
    forth, back = (fit_line(*pair, method="passing-bablok", **FAST).slope.estimate for pair in ((x, y), (y, x)))
    expect(case, "slope_swapped", back)
    expect(case, "product_of_slopes", forth * back)


@pytest.mark.parametrize("case", of_kind("theil_sen"))
def test_passing_bablok_is_theil_and_sen_where_no_slope_is_below_minus_one(case: Case) -> None:
    """Without ties in x and without slopes at or below -1 the line and its rank interval are those of Sen (1968).

    The Forbes data have an even number of slopes: there the two middle ones are averaged geometrically (1983), not
    arithmetically as by Sen, which shows in the eighth digit.
    """
    x, y = columns(case)
    level = case["inputs"]["conf"]
    fit = fit_line(x, y, method="passing-bablok", level=level, **FAST)
    if fit.slopes_used % 2:
        expect(case, "slope", fit.slope.estimate)
        if "intercept" in case["expected"]:
            expect(case, "intercept", fit.intercept.estimate)
    else:
        slopes = pair_slopes(x, y).slopes
        middle = slopes[slopes.size // 2 - 1 : slopes.size // 2 + 1]
        expect(case, "slope", middle.mean())
        assert fit.slope.estimate == pytest.approx(np.sqrt(middle.prod()), rel=1e-14)
    expect(case, "slope_lo", fit.slope.rank_low)
    expect(case, "slope_hi", fit.slope.rank_high)


@pytest.mark.parametrize("size", [6, 7, 10, 11, 15, 22])
def test_passing_bablok_is_scipys_theil_slope_on_increasing_data(size: int) -> None:
    """For increasing data with an odd number of slopes, line and rank interval are those of scipy.stats.theilslopes."""
    rng = np.random.default_rng(size)
    x, y = np.cumsum(rng.uniform(0.5, 1.5, size)), np.cumsum(rng.uniform(0.5, 1.5, size))
    assert size * (size - 1) // 2 % 2 == 1
    fit = fit_line(x, y, method="passing-bablok", **FAST)
    outside = stats.theilslopes(y, x, alpha=0.95, method="joint")
    np.testing.assert_allclose(
        [fit.slope.estimate, fit.intercept.estimate, fit.slope.rank_low, fit.slope.rank_high],
        [outside.slope, outside.intercept, outside.low_slope, outside.high_slope],
        rtol=1e-12, atol=1e-12,  # the same slopes by the same division; the intercept is near zero
    )
    assert fit.pairs_below_minus_one == 0


@pytest.mark.parametrize("case", of_kind("weighted_deming"))
def test_weighted_deming_line_is_the_fixed_point_of_its_weights(case: Case) -> None:
    """Weighted Deming meets odrpack's fit with frozen weights, iterated to a fixed point.

    From memory: the weight formula was recalled and not checked against Linnet (1993); the numbers are the
    self-consistent solution of that formula.
    """
    assert case["provenance"] == "from memory"
    x, y = columns(case)
    ratio = case["inputs"]["lambda_varx_over_vary"]
    fit = fit_line(x, y, method="weighted-deming", variance_ratio=ratio, **FAST)
    expect(case, "slope", fit.slope.estimate)
    expect(case, "intercept", fit.intercept.estimate)


@pytest.mark.parametrize("case", of_kind("ols_bias"))
def test_bias_of_the_ordinary_line_is_the_fitted_value_less_the_level(case: Case) -> None:
    """The bias read from the ordinary line meets the fitted value that statsmodels gives at the level.

    Its interval there is the normal model's; the project resamples instead, so it is not compared.
    """
    x, y = columns(case)
    at = case["inputs"]["xc"]
    (bias,) = fit_line(x, y, method="ordinary", **FAST).bias_at([at])
    expect(case, "bias", bias.bias.estimate)
    expect(case, "yhat", bias.bias.estimate + at)
    assert bias.percent is not None
    np.testing.assert_allclose(
        bias.percent.estimate, 100 * case["expected"]["bias"]["value"] / at,
        rtol=0, atol=100 * case["expected"]["bias"]["tol"] / at,
    )


@pytest.mark.parametrize("case", of_kind("deming_bias"))
def test_bias_of_the_deming_line_has_the_jackknife_error_of_the_eigenvector_route(case: Case) -> None:
    """Bias at a level and its jackknife error meet leave-one-out refits by eigenvectors."""
    x, y = columns(case)
    ratio = 1 / case["inputs"]["var_ratio_y_over_x"]
    (bias,) = fit_line(x, y, method="deming", variance_ratio=ratio, **FAST).bias_at([case["inputs"]["xc"]])
    expect(case, "bias", bias.bias.estimate)
    expect(case, "jack_se", jackknife_error(bias.bias, x.size))


@pytest.mark.parametrize("variance_ratio", [0.01, 0.25, 0.5, 1.0, 2.0, 4.0, 100.0])
@pytest.mark.parametrize("identifier", ["mc-ironslag-ols", "mc-milk-ols", "mc-forbes-ols", "mc-pearson-ols"])
def test_deming_is_orthogonal_distance_regression(identifier: str, variance_ratio: float) -> None:
    """Deming's line is the minimum that odrpack finds numerically, for error variances in any ratio.

    odrpack's minimum is flat: a sum of squares exact to 1e-16 leaves some 1e-8 in the parameters, and more where the
    line is ill-determined; started anew from its own result it comes to rest within 1e-7 on these data.
    """
    x, y = columns(one(identifier))
    fit = fit_line(x, y, method="deming", variance_ratio=variance_ratio, **FAST)
    beta = np.polyfit(x, y, 1)[::-1]
    for _ in range(4):
        beta = odr_fit(
            lambda at, b: b[0] + b[1] * at, x, y, beta0=beta, weight_x=1.0, weight_y=variance_ratio,
            jac_beta=lambda at, _: np.stack([np.ones_like(at), at]), jac_x=lambda at, b: np.full_like(at, b[1]),
            partol=1e-15, sstol=1e-15, maxit=1000,
        ).beta
    np.testing.assert_allclose(fit.slope.estimate, beta[1], rtol=1e-7)
    np.testing.assert_allclose(fit.intercept.estimate, beta[0], rtol=0, atol=1e-7 * np.abs(y).max())


@pytest.mark.parametrize("case", of_kind("kendall_rank_ci"))
def test_number_of_slopes_without_ties_is_that_of_kendalls_distribution(case: Case) -> None:
    """Without ties every pair gives a slope; for n = 7 the rank M1 of the 95 % interval is Kendall's exact one."""
    n = case["data"]["n"]
    x = np.arange(n, dtype=float)
    y = x + 0.01 * x**2
    ranks = rank_interval(x, y, pairs := pair_slopes(x, y), level=0.95)
    assert pairs.slopes.size == case["expected"]["N"]["value"]
    # N and z alone give M1 = (N - C)/2 rounded: 4 for n = 7, where the normal approximation meets the exact rank, and
    # 12 for n = 10, one rank inside the exact 11, which is the price of the approximation and not an error.
    assert ranks.slope_low == pairs.slopes[{7: 4, 10: 12}[n] - 1]
