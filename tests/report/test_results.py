"""From an analysis to the numbers of `results.json`: every one where it belongs, none changed."""

from __future__ import annotations

import json
import math
from pathlib import Path

import numpy as np
import pytest
from scipy import stats

from reanalysis.bayesian.result import NoPosterior
from reanalysis.report import schema
from reanalysis.report.export import results_json
from reanalysis.report.results import build_results, library_versions

STUDIES = ("sample_data/firmness", "sample_data/storage_rot", "sample_data/spots", "tests/studies/separated")

MARGINAL = {
    *("mean", "median", "sd", "low", "high", "level", "hdi_low", "hdi_high", "prob_positive", "mcse_mean"),
    *("rhat", "ess_bulk", "ess_tail"),
}
PROMISED = {
    "": {"schema_version", "study", "data", "design", "coefficients", "auxiliary", "questions", "computation",
         "fit", "notes"},
    "study": {"title", "client", "author", "date", "context"},
    "data": {"rows_read", "rows_used", "dropped", "sha256"},
    "design": {"columns", "formula", "family", "link", "factors"},
    "coefficients.1": {"term", "unit", "frequentist", "posterior"},
    "coefficients.1.frequentist": {"estimate", "se", "statistic", "df", "p", "low", "high", "level"},
    "coefficients.1.posterior.weak": MARGINAL,
    "auxiliary.sigma": {"frequentist", "posterior"},
    "auxiliary.sigma.posterior.flat": MARGINAL,
    "questions.0": {"name", "kind", "direction", "matters_beyond", "act_when", "frequentist", "posterior",
                    "agreement", "sensitivity"},
    "questions.0.frequentist": {"estimate", "low", "high", "p"},
    "questions.0.posterior.sceptical": {"median", "low", "high", "prob_direction", "prob_beyond"},
    "computation.informed": {"verdict", "divergences", "max_rhat", "min_ess_bulk", "min_ess_tail",
                             "min_bfmi"},
    "fit": {"n", "df_residual", "loglik", "deviance", "aic", "r_squared", "scale", "converged"},
}  # fmt: skip


def at(whole: object, path: str) -> object:
    """The part of a piece of JSON that a dotted path leads to."""
    for step in filter(None, path.split(".")):
        whole = whole[int(step)] if step.isdigit() else whole[step]
    return whole


@pytest.mark.parametrize("path", PROMISED)
def test_promised_keys_are_there(analysed, path: str) -> None:
    """Every key that readers of the file may rely on is there."""
    whole = json.loads(results_json(build_results(analysed("sample_data/firmness"))))

    assert PROMISED[path] <= set(at(whole, path))


def test_frequentist_numbers_are_least_squares(analysed) -> None:
    """Estimates, standard errors, p and limits are those of a regression worked out from the file."""
    study = analysed("tests/studies/pears").prepared.study
    rows = [line.split(",") for line in study.data_path.read_text().splitlines()[1:]]
    full = [(float(g), b, float(w)) for g, b, w in rows if g and w]
    X = np.array([[1.0, b == "paper", b == "net", w] for _, b, w in full], dtype=float)
    y = np.array([g for g, _, _ in full])
    beta = np.linalg.lstsq(X, y, rcond=None)[0]
    variance = float(np.sum((y - X @ beta) ** 2)) / 24.0
    se = np.sqrt(variance * np.diag(np.linalg.inv(X.T @ X)))

    results = build_results(analysed("tests/studies/pears"))

    assert [one.term for one in results.coefficients] == ["Intercept", "bag[paper]", "bag[net]", "weeks"]
    for k, one in enumerate(results.coefficients):
        part = one.frequentist
        assert part.estimate == pytest.approx(beta[k], rel=1e-9)
        assert part.se == pytest.approx(se[k], rel=1e-9)
        assert part.p == pytest.approx(2.0 * stats.t.sf(abs(beta[k] / se[k]), 24), rel=1e-7)
        assert part.high == pytest.approx(beta[k] + stats.t.isf(0.025, 24) * se[k], rel=1e-9)
        assert (part.df, part.level) == (24.0, 0.95)
    assert results.auxiliary["sigma"].frequentist == pytest.approx(math.sqrt(variance), rel=1e-9)
    assert (results.data.rows_read, results.data.rows_used) == (30, 28)
    assert results.data.dropped == {"grams": 1, "weeks": 2}
    assert (results.fit.n, results.fit.df_residual) == (28, 24.0)


def test_flat_prior_gives_the_confidence_interval(analysed) -> None:
    """Without prior information, credible limits are the confidence limits within Monte Carlo error."""
    for one in build_results(analysed("tests/studies/pears")).coefficients:
        flat, frequentist = one.posterior["flat"], one.frequentist
        assert abs(flat.median - frequentist.estimate) < 4.0 * flat.mcse_median
        assert abs(flat.low - frequentist.low) < 4.0 * flat.mcse_low
        assert abs(flat.high - frequentist.high) < 4.0 * flat.mcse_high


@pytest.mark.parametrize("study", STUDIES)
def test_posterior_numbers_are_those_of_the_draws(analysed, study: str) -> None:
    """Medians, limits and probabilities can be worked out again from the draws, sign and size included."""
    analysis = analysed(study)
    results = build_results(analysis)
    for fit in analysis.posteriors:
        if isinstance(fit, NoPosterior):
            continue
        for compared, question in zip(analysis.questions, results.questions, strict=True):
            draws = fit.draws.flat[:, compared.question.column]
            answer, limit = question.posterior[fit.prior_set.name], question.matters_beyond
            above, below = float(np.mean(draws > 0.0)), float(np.mean(draws < 0.0))
            by_direction = {"greater": above, "less": below, "either": max(above, below)}
            assert answer.prob_direction == pytest.approx(by_direction[question.direction], abs=1e-12)
            assert answer.median == pytest.approx(float(np.median(draws)), rel=1e-6)
            assert [answer.low, answer.high] == pytest.approx(np.quantile(draws, [0.025, 0.975]), rel=1e-6)
            assert (limit is None) == (answer.prob_beyond is None) == (answer.prob_negligible is None)
            if limit is not None:
                beyond = draws > limit if question.direction == "greater" else draws < -limit
                assert answer.prob_beyond == pytest.approx(float(np.mean(beyond)), abs=1e-12)
                assert answer.prob_negligible == pytest.approx(float(np.mean(abs(draws) < limit)), abs=1e-12)


@pytest.mark.parametrize("study", STUDIES)
def test_parts_agree_with_each_other(analysed, study: str) -> None:
    """A question's numbers are its coefficient's, and its conclusion follows from them and the bar."""
    results = build_results(analysed(study))
    coefficients = {one.term: one for one in results.coefficients}
    for question in results.questions:
        coefficient = coefficients[question.effect]
        assert question.unit == coefficient.unit
        if not isinstance(question.frequentist, schema.AbsentPart):
            assert question.frequentist.estimate == coefficient.frequentist.estimate
            assert question.frequentist.p == coefficient.frequentist.p
        for name, answer in question.posterior.items():
            if isinstance(answer, schema.AbsentPart):
                assert coefficient.posterior[name].kind == "absent"
                continue
            assert answer.median == coefficient.posterior[name].median
            supported = answer.prob_direction >= question.act_when
            assert (answer.conclusion.direction == "supported") == supported
        assert list(question.posterior) == [prior_set.name for prior_set in results.prior_sets]
    assert results.study.main_prior in results.computation


def test_z_has_no_degrees_of_freedom(analysed) -> None:
    """A normal reference distribution has null for degrees of freedom, never infinity."""
    results = build_results(analysed("sample_data/spots"))

    assert {one.frequentist.df for one in results.coefficients} == {None}
    assert results.fit.distribution == "z"
    assert results.design.exposure == "apples"
    assert results.auxiliary == {}


def test_absent_numbers_have_a_reason(analysed) -> None:
    """Without an estimate or a posterior, the reason stands in its place and the check has failed."""
    results = build_results(analysed("tests/studies/improper"))

    spray = results.coefficients[1]
    assert spray.frequentist.reason.startswith("separated: all 20 rows with spray[sulphur]")
    assert spray.posterior["flat"].reason.startswith("it would be improper")
    assert (results.computation["flat"].verdict, results.computation["flat"].attempts) == ("failed", 0)
    assert results.computation["flat"].max_rhat is None
    assert results.computation["weak"].verdict == "sound"
    assert {question.agreement for question in results.questions} == {"cannot be compared"}
    assert results.status == "failed"
    assert results.notes[0].kind == "status"
    assert "There is no posterior under the flat prior set" in results.notes[0].message


def test_priors_are_given_in_numbers(analysed) -> None:
    """Every prior set lists every parameter with a distribution whose parameters are numbers."""
    results = build_results(analysed("sample_data/firmness"))

    assert [one.name for one in results.prior_sets] == ["flat", "weak", "sceptical", "informed"]
    for prior_set in results.prior_sets:
        names = [prior.parameter for prior in prior_set.priors]
        assert names == ["Intercept", "liner[film]", "liner[foam]", "days", "sigma"]
    informed = results.prior_sets[3].priors[1].distribution
    assert informed == {"dist": "normal", "mean": 4.5, "sd": 2.4}


@pytest.mark.parametrize("study", STUDIES)
def test_nothing_of_the_machine(analysed, study: str) -> None:
    """No absolute path stands in the file, and no date but the study's own."""
    analysis = analysed(study)
    text = results_json(build_results(analysis))

    assert str(analysis.prepared.study.path.parent) not in text
    assert str(Path.home()) not in text
    assert text.count("2025-11-24") == text.count('"date": "2025-11-24"')
    assert set(library_versions()) == set(json.loads(text)["versions"])
