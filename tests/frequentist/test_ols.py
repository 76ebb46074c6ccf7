"""Least squares against certified values, closed forms and known changes of the data."""

from __future__ import annotations

import math

import numpy as np
import pandas as pd
import pytest
from scipy import stats

from reanalysis.frequentist.fit import fit_frequentist
from reanalysis.frequentist.result import Estimate, NotEstimable

DIGITS_8 = 1e-8  # relative: eight significant digits


def numbers(fit, field):
    """One field of all coefficients."""
    return np.array([getattr(result, field) for result in fit.coefficients])


def powers(table, degree):
    """Add raw powers of x as columns x2, x3, ..."""
    return table.assign(**{f"x{power}": table["x"] ** power for power in range(2, degree + 1)})


FORMULAS = {
    "norris": "y ~ x",
    "pontius": "y ~ x + x2",
    "noint1": "y ~ 0 + x",
    "longley": "y ~ GNPDEFL + GNP + UNEMP + ARMED + POP + YEAR",
    "wampler1": "y ~ x + x2 + x3 + x4 + x5",
    "wampler2": "y ~ x + x2 + x3 + x4 + x5",
    "filip": "y ~ x + x2 + x3 + x4 + x5 + x6 + x7 + x8 + x9 + x10",
}


@pytest.fixture
def nist_fit(design_of, table_of):
    """Give a function that fits one of NIST's problems."""

    def fit(name):
        table = table_of(f"nist_{name}")
        if "x" in table:
            table = powers(table.astype(float), 10 if name == "filip" else 5)
        return fit_frequentist(design_of(table, FORMULAS[name]), level=0.95, seed=1)

    return fit


@pytest.mark.parametrize("name", ["norris", "pontius", "noint1", "longley"])
def test_certified_coefficients_and_errors(nist_fit, nist, name):
    """Estimates, standard errors, residual sd and R squared have eight certified digits."""
    fit, certified = nist_fit(name), nist[name]
    np.testing.assert_allclose(numbers(fit, "estimate"), certified["beta"], rtol=DIGITS_8)
    np.testing.assert_allclose(numbers(fit, "se"), certified["se"], rtol=DIGITS_8)
    assert math.sqrt(fit.goodness.scale) == pytest.approx(certified["resid_sd"], rel=DIGITS_8)
    assert fit.goodness.r_squared == pytest.approx(certified["r_squared"], rel=DIGITS_8)
    assert fit.goodness.df_residual == certified["df_resid"]
    assert fit.warnings == ()


@pytest.mark.parametrize("name", ["wampler1", "wampler2"])
def test_perfect_fit_is_reported_without_dividing_by_zero(nist_fit, nist, name):
    """A polynomial that passes through all points has exact coefficients, errors of 0 and says so."""
    fit = nist_fit(name)
    np.testing.assert_allclose(numbers(fit, "estimate"), nist[name]["beta"], rtol=DIGITS_8)
    assert np.all(numbers(fit, "se") == 0.0)
    assert np.all(numbers(fit, "p") == 0.0)
    assert np.all(numbers(fit, "low") == numbers(fit, "estimate"))
    assert fit.goodness.scale == 0.0
    assert fit.goodness.r_squared == 1.0
    assert np.all(fit.residuals == 0.0)
    assert "reproduces the response exactly" in fit.warnings[0]


def test_ill_conditioned_problem_carries_a_warning(nist_fit, nist):
    """Filip's raw powers keep six digits, and the fit says how many can be trusted."""
    fit = nist_fit("filip")
    np.testing.assert_allclose(numbers(fit, "estimate"), nist["filip"]["beta"], rtol=1e-6)
    np.testing.assert_allclose(numbers(fit, "se"), nist["filip"]["se"], rtol=1e-6)
    assert fit.goodness.condition_number == pytest.approx(5.2e9, rel=0.01)
    assert "only about 5 significant digits" in fit.warnings[0]


def test_no_intercept_labels_r_squared_uncentred(nist_fit):
    """Without an intercept R squared is about zero, and is labelled so."""
    assert nist_fit("noint1").goodness.r_squared_kind == "uncentred"
    assert nist_fit("norris").goodness.r_squared_kind == "centred"


def test_all_levels_without_intercept_is_uncentred(design_of):
    """One column for each level spans a constant, but is still a model without an intercept."""
    frame = pd.DataFrame({"y": [1.0, 2.0, 4.0, 6.0], "g": ["a", "a", "b", "b"]})
    fit = fit_frequentist(design_of(frame, "y ~ 0 + g"), level=0.95, seed=1)
    assert fit.goodness.null_deviance == pytest.approx(57.0)
    assert fit.goodness.r_squared == pytest.approx(1.0 - 2.5 / 57.0)
    assert fit.goodness.r_squared_kind == "uncentred"


def test_plant_weights(design_of, table_of, published):
    """Dobson's two groups: estimate, error, t, p and interval as printed."""
    values = published["plant_weight"]
    fit = fit_frequentist(design_of(table_of(values["data"]), "weight ~ group"), level=0.95, seed=1)
    np.testing.assert_allclose(numbers(fit, "estimate"), values["coef"], rtol=1e-12)
    np.testing.assert_allclose(numbers(fit, "se"), values["se"], rtol=1e-12)
    np.testing.assert_allclose(numbers(fit, "statistic"), values["t"], rtol=1e-11)
    np.testing.assert_allclose(numbers(fit, "p"), values["p"], rtol=1e-9)
    np.testing.assert_allclose(
        np.column_stack([numbers(fit, "low"), numbers(fit, "high")]), values["conf_int"], rtol=1e-9
    )
    assert np.all(numbers(fit, "df") == values["df_resid"])
    assert (fit.method, fit.distribution, fit.converged) == ("OLS", "t", True)


def test_transposed_levels_change_the_sign(design_of, table_of, published):
    """With the treated group as reference the difference has the other sign."""
    table = table_of("dobson_plant_weight")
    table["group"] = pd.Categorical(table["group"], categories=["trt", "ctl"], ordered=True)
    fit = fit_frequentist(design_of(table, "weight ~ group"), level=0.95, seed=1)
    assert fit.coefficient("group[ctl]").estimate == pytest.approx(0.371)
    assert fit.coefficient("Intercept").estimate == pytest.approx(5.032 - 0.371)


def test_measures_of_the_whole_fit(design_of):
    """Log-likelihood, deviances and AIC are those of their definitions."""
    y, x = np.array([1.0, 3.0, 2.0, 5.0, 4.0]), np.arange(5.0)
    design = design_of(pd.DataFrame({"y": y, "x": x}), "y ~ x")
    goodness = fit_frequentist(design, level=0.95, seed=1).goodness
    residuals = y - (1.4 + 0.8 * x)
    rss = float(residuals @ residuals)
    loglik = float(np.sum(stats.norm.logpdf(residuals, scale=math.sqrt(rss / 5))))
    assert goodness.deviance == pytest.approx(rss)
    assert goodness.null_deviance == pytest.approx(10.0)
    assert goodness.loglik == pytest.approx(loglik)
    assert goodness.aic == pytest.approx(4.0 - 2.0 * loglik)
    assert goodness.scale == pytest.approx(rss / 3)


def test_covariance_is_that_of_the_normal_equations(design_of):
    """On a small well-conditioned problem the covariance is s squared times the inverse of X'X."""
    frame = pd.DataFrame({"y": [1.0, 3.0, 2.0, 5.0, 4.0], "x": [0.0, 1.0, 2.0, 3.0, 4.0]})
    design = design_of(frame, "y ~ x")
    fit = fit_frequentist(design, level=0.95, seed=1)
    expected = fit.goodness.scale * np.linalg.inv(design.matrix.T @ design.matrix)
    np.testing.assert_allclose(fit.covariance, expected, rtol=1e-12)
    assert fit.covariance[0, 1] < 0.0


def test_studentised_residuals_by_hand(design_of):
    """Each residual is divided by s times the root of one minus its leverage."""
    y = np.array([1.0, 3.0, 2.0, 5.0, 4.0])
    x = np.arange(5.0)
    fit = fit_frequentist(design_of(pd.DataFrame({"y": y, "x": x}), "y ~ x"), level=0.95, seed=1)
    leverage = 0.2 + (x - 2.0) ** 2 / 10.0
    residuals = y - (1.4 + 0.8 * x)
    expected = residuals / np.sqrt(fit.goodness.scale * (1.0 - leverage))
    np.testing.assert_allclose(fit.residuals, expected, rtol=1e-10)


def test_row_that_alone_holds_a_level_has_residual_zero(design_of):
    """A level seen once is fitted exactly; its residual is 0 and not 0 / 0."""
    y, x = np.random.default_rng(9).normal(size=(2, 12))
    frame = pd.DataFrame({"y": y, "x": x, "g": ["a"] * 11 + ["b"]})
    fit = fit_frequentist(design_of(frame, "y ~ g + x"), level=0.95, seed=1)
    assert fit.residuals[11] == 0.0
    assert np.all(np.abs(fit.residuals[:11]) > 1e-4)
    assert fit.fitted[11] == pytest.approx(y[11])


def test_dependent_columns_have_no_estimate_and_the_rest_is_kept(design_of):
    """Columns that cannot be told apart get no estimate; an unrelated one gets the usual one."""
    rng = np.random.default_rng(8)
    frame = pd.DataFrame({name: rng.normal(size=30) for name in "yxzw"})
    frame["s"] = frame["x"] + 2.0 * frame["z"]
    fit = fit_frequentist(design_of(frame, "y ~ x + z + s + w"), level=0.9, seed=1)
    without = fit_frequentist(design_of(frame, "y ~ x + z + w"), level=0.9, seed=1)
    for name in ("x", "z", "s"):
        result = fit.coefficient(name)
        assert isinstance(result, NotEstimable)
        assert "s = x + 2 * z" in result.reason
    w, reference = fit.coefficient("w"), without.coefficient("w")
    assert isinstance(w, Estimate)
    assert (w.estimate, w.se, w.low) == pytest.approx((reference.estimate, reference.se, reference.low))
    assert fit.goodness.df_residual == 26.0
    assert np.isnan(fit.covariance[1]).all()
    assert fit.covariance[4, 4] == pytest.approx(reference.se**2)


def test_intercept_alone_is_a_t_test_of_the_mean(design_of):
    """A model with an intercept alone gives the one-sample t test."""
    y = np.array([0.3, -0.1, 1.2, 0.8, 0.4])
    fit = fit_frequentist(design_of(pd.DataFrame({"y": y}), "y ~ 1"), level=0.95, seed=1)
    test = stats.ttest_1samp(y, 0.0)
    result = fit.coefficient("Intercept")
    assert result.estimate == pytest.approx(np.mean(y))
    assert result.p == pytest.approx(test.pvalue)
    assert (result.low, result.high) == pytest.approx(tuple(test.confidence_interval(0.95)))
    assert fit.goodness.r_squared == pytest.approx(0.0)
