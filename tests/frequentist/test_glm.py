"""Generalised linear models against published problems and closed forms."""

from __future__ import annotations

import math

import numpy as np
import pandas as pd
import pytest
from scipy import special, stats

from reanalysis.families import FAMILIES, find_family
from reanalysis.frequentist.fit import fit_frequentist
from reanalysis.frequentist.glm import statsmodels_family
from reanalysis.frequentist.result import Estimate, NotEstimable

SHEET = 1e-7  # relative: the reference values come from another program's iterations


def numbers(fit, field):
    """One field of all coefficients."""
    return np.array([getattr(result, field) for result in fit.coefficients])


def rows_of_counts(table, columns, happened, failed):
    """Expand counts of events and of other rows to one row each."""
    parts = []
    for outcome, counts in (("yes", happened), ("no", failed)):
        part = table.loc[table.index.repeat(counts), columns]
        parts.append(part.assign(event=outcome))
    return pd.concat(parts, ignore_index=True)


def beetles(table):
    """One row for each beetle."""
    rows = rows_of_counts(table, ["log10dose"], table["killed"], table["n"] - table["killed"])
    return rows.rename(columns={"log10dose": "dose"})


def snorers(table):
    """One row for each man."""
    return rows_of_counts(table, ["score"], table["yes"], table["no"])


def as_text(table, columns):
    """Read codes as labels."""
    return table.assign(**{name: table[name].astype(str) for name in columns})


PROBLEMS = {
    "dobson_counts_poisson": (
        lambda t: as_text(t, ["outcome", "treatment"]),
        "counts ~ outcome + treatment",
        "poisson",
        {},
    ),
    "dobson_poisson_log": (lambda t: t, "y ~ x", "poisson", {}),
    "crabs_poisson_width": (lambda t: t, "sat ~ width", "poisson", {}),
    "crabs_logit_width": (lambda t: t, "y ~ width", "bernoulli", {}),
    "vaso_logit": (lambda t: t, "y ~ log(rate) + log(volume)", "bernoulli", {}),
    "spector_logit": (lambda t: t, "GRADE ~ GPA + TUCE + PSI", "bernoulli", {}),
    "spector_probit": (lambda t: t, "GRADE ~ GPA + TUCE + PSI", "bernoulli", {"link": "probit"}),
    "beetle_logit": (beetles, "event ~ dose", "bernoulli", {"event": "yes"}),
    "beetle_probit": (beetles, "event ~ dose", "bernoulli", {"event": "yes", "link": "probit"}),
    "beetle_cloglog": (beetles, "event ~ dose", "bernoulli", {"event": "yes", "link": "cloglog"}),
    "snoring_logit": (snorers, "event ~ score", "bernoulli", {"event": "yes"}),
    "snoring_probit": (snorers, "event ~ score", "bernoulli", {"event": "yes", "link": "probit"}),
}
GROUPED = ("beetle", "snoring")


@pytest.fixture
def problem(design_of, table_of, published):
    """Give a function that fits one published problem and returns it with its values."""

    def fit(name, **changes):
        prepare, formula, family, keys = PROBLEMS[name]
        values = published["problems"][name]
        table = prepare(table_of(values["data"]))
        design = design_of(table, formula, family, **{**keys, **changes})
        return fit_frequentist(design, level=0.95, seed=3), values

    return fit


@pytest.mark.parametrize("name", PROBLEMS)
def test_published_problem(problem, name):
    """Coefficients, expected-information standard errors and deviances are the published ones."""
    fit, values = problem(name)
    np.testing.assert_allclose(numbers(fit, "estimate"), values["coef"], rtol=SHEET, atol=1e-9)
    np.testing.assert_allclose(numbers(fit, "se"), values["se"], rtol=SHEET)
    goodness = fit.goodness
    # Grouping rows changes the saturated model, and with it each deviance but not their difference.
    explained = values["null_deviance"] - values["deviance"]
    assert goodness.null_deviance - goodness.deviance == pytest.approx(explained, rel=SHEET)
    if not name.startswith(GROUPED):
        assert goodness.deviance == pytest.approx(values["deviance"], rel=SHEET)
        assert goodness.pearson_chi2 == pytest.approx(values["pearson_chi2"], rel=SHEET)
        assert goodness.df_residual == values["df_resid"]
    assert (fit.method, fit.distribution, fit.converged, fit.warnings) == ("GLM", "z", True, ())


def test_misprinted_row_would_be_noticed(design_of, table_of, published):
    """With 60 in place of 61 beetles killed in row 7, the published slope is missed."""
    table = table_of("bliss_beetle")
    table.loc[6, "killed"] = 60
    fit = fit_frequentist(
        design_of(beetles(table), "event ~ dose", "bernoulli", event="yes"), level=0.95, seed=3
    )
    slope = published["problems"]["beetle_logit"]["coef"][1]
    assert abs(fit.coefficient("dose").estimate - slope) > 0.5


def test_other_event_turns_every_sign(problem):
    """Modelling the other outcome of a logit model turns all signs and keeps the errors."""
    fit, values = problem("snoring_logit", event="no")
    np.testing.assert_allclose(-numbers(fit, "estimate"), values["coef"], rtol=SHEET)
    np.testing.assert_allclose(numbers(fit, "se"), values["se"], rtol=SHEET)


def test_other_event_is_another_model_with_cloglog(problem):
    """The complementary log-log link is not symmetric: the other event does not just turn signs."""
    fit, values = problem("beetle_cloglog", event="no")
    assert abs(-fit.coefficient("dose").estimate - values["coef"][1]) > 0.4


def test_expected_and_observed_information_differ_for_probit(problem):
    """The standard errors are not those of the observed information, which Greene prints."""
    fit, _ = problem("spector_probit")
    assert fit.coefficient("GPA").se == pytest.approx(0.689731, abs=5e-7)
    assert abs(fit.coefficient("GPA").se - 0.693882) > 0.004


def test_counts_table_in_closed_form(problem):
    """Dobson's counts have estimates that are logs of ratios of totals."""
    fit, _ = problem("dobson_counts_poisson")
    expected = [math.log(21), math.log(40 / 63), math.log(47 / 63), 0.0, 0.0]
    np.testing.assert_allclose(numbers(fit, "estimate"), expected, atol=1e-10)
    assert fit.coefficient("treatment[2]").se == pytest.approx(math.sqrt(2 / 50))
    assert fit.goodness.aic == pytest.approx(56.76132, abs=1e-5)


def test_two_by_two_table(design_of, published):
    """The slope of a 2 x 2 table is the log odds ratio with the error of Woolf (1955)."""
    (a, n1), (c, n0) = published["aspirin"]["placebo"], published["aspirin"]["aspirin"]
    b, d = n1 - a, n0 - c
    groups = pd.DataFrame({"group": ["aspirin", "placebo"]})
    frame = rows_of_counts(groups, ["group"], [c, a], [d, b])
    fit = fit_frequentist(design_of(frame, "event ~ group", "bernoulli", event="yes"), level=0.95, seed=3)
    slope = fit.coefficient("group[placebo]")
    assert slope.estimate == pytest.approx(math.log(a * d / (b * c)), rel=1e-9)
    assert slope.se == pytest.approx(math.sqrt(1 / a + 1 / b + 1 / c + 1 / d), rel=1e-8)
    assert (round(slope.estimate, 3), round(slope.se, 3)) == (0.605, 0.123)
    assert (round(math.exp(slope.low), 2), round(math.exp(slope.high), 2)) == (1.44, 2.33)
    assert fit.coefficient("Intercept").estimate == pytest.approx(math.log(c / d), rel=1e-9)


def test_rate_ratio_with_exposure(design_of):
    """With an exposure the slope is the log of the ratio of rates, its error that of the counts."""
    frame = pd.DataFrame(
        {"cases": [5, 7, 9, 11], "years": [100.0, 150.0, 90.0, 60.0], "group": ["a", "a", "b", "b"]}
    )
    design = design_of(frame, "cases ~ group", "poisson", exposure="years")
    fit = fit_frequentist(design, level=0.95, seed=3)
    slope = fit.coefficient("group[b]")
    assert slope.estimate == pytest.approx(math.log((20 / 150) / (12 / 250)), rel=1e-10)
    assert slope.se == pytest.approx(math.sqrt(1 / 12 + 1 / 20), rel=1e-9)
    rate = 32 / 400
    mean = rate * frame["years"]
    null = 2.0 * np.sum(special.xlogy(frame["cases"], frame["cases"] / mean) - (frame["cases"] - mean))
    assert fit.goodness.null_deviance == pytest.approx(null)
    np.testing.assert_allclose(fit.fitted[:2], [100 * 12 / 250, 150 * 12 / 250])


def test_log_likelihood_and_aic(problem):
    """The log-likelihood is that of the outcomes' probabilities and AIC counts the coefficients."""
    fit, _ = problem("spector_logit")
    # The published figure comes from data in single precision.
    assert fit.goodness.loglik == pytest.approx(-12.8896334653335, rel=1e-7)
    assert fit.goodness.aic == pytest.approx(8.0 + 2.0 * 12.8896334653335, rel=1e-7)
    assert fit.goodness.null_deviance == pytest.approx(2.0 * 20.5917297, rel=1e-8)
    assert (fit.goodness.scale, fit.goodness.r_squared, fit.goodness.r_squared_kind) == (1.0, None, "none")


def test_model_without_intercept_is_compared_with_no_effect(design_of):
    """Without an intercept the null model has linear predictor 0, so probability one half."""
    frame = pd.DataFrame({"y": [0, 1, 1, 0, 1, 1], "g": list("aaabbb")})
    fit = fit_frequentist(design_of(frame, "y ~ 0 + g", "bernoulli"), level=0.95, seed=3)
    assert fit.goodness.null_deviance == pytest.approx(12.0 * math.log(2.0))
    assert fit.coefficient("g[a]").estimate == pytest.approx(math.log(2.0))
    assert fit.coefficient("g[b]").estimate == pytest.approx(math.log(2.0))


def test_separated_coefficient_has_no_estimate(design_of, table_of, published):
    """In the endometrial data NV has no finite estimate; the others are those of the limit."""
    values = published["endometrial"]
    design = design_of(table_of("endometrial"), "HG ~ NV + PI + EH", "bernoulli")
    fit = fit_frequentist(design, level=0.95, seed=3)
    nv = fit.coefficient("NV")
    assert isinstance(nv, NotEstimable)
    assert nv.reason == "separated: all 13 rows with NV = 1 have HG = 1"
    rest = [fit.coefficient(name) for name in ("Intercept", "PI", "EH")]
    np.testing.assert_allclose([r.estimate for r in rest], values["coef"], rtol=1e-6)
    np.testing.assert_allclose([r.se for r in rest], values["se"], rtol=1e-6)
    assert fit.goodness.deviance == pytest.approx(values["deviance"], abs=5e-6)
    assert fit.goodness.null_deviance == pytest.approx(values["null_deviance"], abs=5e-6)
    assert fit.goodness.df_residual == 75.0
    assert np.isnan(fit.covariance[1, 0])
    assert fit.covariance[2, 2] == pytest.approx(values["se"][1] ** 2, rel=1e-6)
    assert np.all(fit.fitted[design.matrix[:, 1] == 1.0] == 1.0)
    assert fit.converged
    assert fit.warnings[0].startswith("13 rows are predicted perfectly")


def test_complete_separation_leaves_nothing(design_of):
    """When a predictor tells all outcomes apart, no coefficient has an estimate."""
    frame = pd.DataFrame({"y": [0, 0, 0, 1, 1, 1], "x": [1.0, 2, 3, 4, 5, 6]})
    fit = fit_frequentist(design_of(frame, "y ~ x", "bernoulli"), level=0.95, seed=3)
    assert all(isinstance(result, NotEstimable) for result in fit.coefficients)
    assert fit.goodness.deviance == 0.0
    assert not fit.converged
    assert "Every row is predicted perfectly" in fit.warnings[0]


def test_zero_cell_of_counts(design_of):
    """A level whose counts are all 0 has no estimate; the other levels keep theirs."""
    frame = pd.DataFrame({"n": [3, 5, 0, 0, 8, 6], "g": list("aabbcc")})
    fit = fit_frequentist(design_of(frame, "n ~ g", "poisson"), level=0.95, seed=3)
    missing = fit.coefficient("g[b]")
    assert isinstance(missing, NotEstimable)
    assert missing.reason == "separated: all 2 rows with g[b] have n = 0"
    assert fit.coefficient("g[c]").estimate == pytest.approx(math.log(14 / 8))
    np.testing.assert_allclose(fit.fitted, [4, 4, 0, 0, 7, 7])


def test_zero_cell_in_the_reference_level(design_of):
    """When the reference level is the empty one, the intercept and all contrasts with it go."""
    frame = pd.DataFrame({"n": [0, 0, 3, 5, 8, 6], "g": list("aabbcc"), "x": [1.0, 2, 1, 3, 2, 2.5]})
    fit = fit_frequentist(design_of(frame, "n ~ g + x", "poisson"), level=0.95, seed=3)
    lost = [r.name for r in fit.coefficients if isinstance(r, NotEstimable)]
    assert lost == ["Intercept", "g[b]", "g[c]"]
    reduced = fit_frequentist(design_of(frame[2:], "n ~ g + x", "poisson"), level=0.95, seed=3)
    x, expected = fit.coefficient("x"), reduced.coefficient("x")
    assert isinstance(x, Estimate)
    assert (x.estimate, x.se) == pytest.approx((expected.estimate, expected.se), rel=1e-8)


def test_separated_and_dependent_columns_together(design_of):
    """Each lost coefficient carries its own reason."""
    rng = np.random.default_rng(4)
    x = rng.normal(size=40)
    frame = pd.DataFrame({"y": (rng.uniform(size=40) < 0.5).astype(float), "x": x, "z": 3.0 * x})
    frame["d"] = np.where(np.arange(40) < 6, 1.0, 0.0)
    frame.loc[frame["d"] == 1.0, "y"] = 0.0
    fit = fit_frequentist(design_of(frame, "y ~ x + z + d", "bernoulli"), level=0.95, seed=3)
    assert fit.coefficient("d").reason == "separated: all 6 rows with d = 1 have y = 0"
    assert fit.coefficient("z").reason == "not identified: z = 3 * x"
    assert isinstance(fit.coefficient("Intercept"), Estimate)


def test_library_warnings_stay_inside(design_of):
    """A nearly separated fit may make the library warn: it comes back as sentences, not as a warning."""
    x = np.r_[np.linspace(0, 1, 20), np.linspace(1.0, 2, 20)]
    y = np.r_[np.zeros(20), np.ones(20)]
    y[[19, 20]] = y[[20, 19]]
    x[20] = 0.99
    frame = pd.DataFrame({"y": y, "x": 1e6 + x})
    fit = fit_frequentist(design_of(frame, "y ~ x", "bernoulli"), level=0.95, seed=3)
    assert isinstance(fit.coefficients, tuple)
    assert all(isinstance(sentence, str) for sentence in fit.warnings)


@pytest.mark.parametrize("family", FAMILIES, ids=lambda family: f"{family.name}-{family.link}")
def test_inverse_links_are_those_of_statsmodels(family):
    """Both sides turn a linear predictor into the same mean."""
    eta = np.linspace(-6.0, 3.0, 37)
    np.testing.assert_allclose(
        family.inverse_link(eta), statsmodels_family(family).link.inverse(eta), rtol=1e-12
    )


def test_log_likelihood_is_that_of_statsmodels(design_of, table_of):
    """Our log-likelihood of a Poisson fit equals the library's, constants included."""
    table = table_of("dobson_poisson_regression")
    fit = fit_frequentist(design_of(table, "y ~ x", "poisson"), level=0.95, seed=3)
    expected = statsmodels_family(find_family("poisson", None)).loglike(table["y"].to_numpy(), fit.fitted)
    assert fit.goodness.loglik == pytest.approx(float(expected), rel=1e-12)
    assert fit.goodness.loglik == pytest.approx(float(np.sum(stats.poisson.logpmf(table["y"], fit.fitted))))
