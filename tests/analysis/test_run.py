"""Whole analyses: the stories of the sample studies, and data that leave something without an answer."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np
import pandas as pd
import pytest

from reanalysis.analysis.run import analyse
from reanalysis.bayesian.result import NoPosterior, PosteriorFit
from reanalysis.comparison.result import Conclusion, NoConclusion
from reanalysis.effects.result import NoFrequentistAnswer
from reanalysis.frequentist.result import NotEstimable
from reanalysis.progress import StageClock
from reanalysis.sensitivity.result import NoSweep, NoTipping, Sweep, TippingPrior

pytestmark = pytest.mark.mcmc

SETS = ["flat", "weak", "sceptical", "informed"]


@pytest.mark.parametrize("name", ["firmness", "spots", "storage_rot"])
def test_sample_studies_are_sound(sample: Any, name: str) -> None:
    """Every prior set gives a sound posterior, and nothing stands between reader and results."""
    got = sample(name)

    assert (got.status.verdict, got.status.caveats) == ("sound", ())
    assert [one.prior_set.name for one in got.posteriors] == SETS
    assert {one.check.verdict for one in got.posteriors} == {"sound"}
    assert got.main is got.posterior("weak")
    assert got.settings.seed == 20251124
    assert all(isinstance(question.sweep, Sweep) for question in got.questions)
    with pytest.raises(KeyError, match="enthusiastic"):
        got.posterior("enthusiastic")


def test_firm_apples_agree(sample: Any) -> None:
    """Both analyses find an effect of film that matters and none of foam, whatever the prior."""
    film, foam = sample("firmness").questions

    assert film.frequentist_conclusion == film.main.conclusion == Conclusion("supported", "supported")
    assert foam.frequentist_conclusion == foam.main.conclusion == Conclusion("open", "contradicted")
    for question in (film, foam):
        assert (question.agreement, question.reason, question.dependence) == ("agree", "none", "none")
    # A sceptic gives in at a prior SD below the 1.2 N of "5 % beyond 2 N".
    assert film.sweep.beyond_tipping == TippingPrior("beyond", pytest.approx(0.85, abs=0.15), "wider")
    assert foam.sweep.beyond_tipping == NoTipping("beyond", "never")


def test_spots_are_fewer_but_not_by_enough(sample: Any) -> None:
    """The net's effect is beyond doubt, and beyond doubt smaller than what matters."""
    (net,) = sample("spots").questions

    assert net.frequentist.p < 0.01
    assert net.frequentist_conclusion == Conclusion("supported", "contradicted")
    assert {reading.conclusion for reading in net.readings} == {Conclusion("supported", "contradicted")}
    assert (net.agreement, net.dependence) == ("agree", "none")


def test_rot_depends_on_the_prior(sample: Any) -> None:
    """The interval just holds zero, the probability suffices to act, and a sceptic would not act."""
    (dip,) = sample("storage_rot").questions

    assert 0.05 < dip.frequentist.p < 0.07
    assert dip.frequentist_conclusion == Conclusion("open", "open")
    assert dip.main.conclusion == Conclusion("supported", "open")
    assert (dip.agreement, dip.reason, dip.dependence) == (
        "differ on direction",
        "different bars",
        "direction",
    )
    by_name = {reading.prior_set: reading.answer.direction.value for reading in dip.readings}
    assert by_name["sceptical"] < 0.95 < by_name["weak"] < by_name["flat"] < by_name["informed"]
    assert dip.sweep.direction_tipping == TippingPrior("direction", pytest.approx(0.75, abs=0.1), "wider")
    assert dip.power_scaling.diagnosis == "prior and data both matter"


def test_flat_gaussian_posterior_is_the_frequentist_fit(sample: Any) -> None:
    """Through the whole pipeline credible and confidence limits agree within Monte Carlo error."""
    got = sample("firmness")
    flat = got.posterior("flat")

    for estimate, marginal in zip(got.frequentist.coefficients, flat.coefficients, strict=True):
        assert marginal.mean == pytest.approx(estimate.estimate, abs=4 * marginal.mcse_mean)
        assert marginal.low == pytest.approx(estimate.low, abs=4 * marginal.mcse_low)
        assert marginal.high == pytest.approx(estimate.high, abs=4 * marginal.mcse_high)


def test_stages_are_announced(sample: Any, stages: StageClock) -> None:
    """Every stage is named and timed, one for each prior set."""
    sample("firmness")

    assert list(stages.seconds)[:2] == ["data and design", "frequentist fit"]
    assert {f"posterior, {name} priors" for name in SETS} <= set(stages.seconds)
    assert "prior sensitivity" in stages.seconds


LOGIT = 'formula = "HG ~ NV + PI"\nfamily = "bernoulli"\n'
NV = '[[question]]\nname = "NV"\neffect = "NV"\ndirection = "greater"\nmatters_beyond = 0.5\n'


def test_separated_data_need_a_proper_prior(study_of: Callable[..., Any], table_of: Any, store: Any) -> None:
    """NV = 1 only with HG = 1: no estimate and no flat posterior, but proper priors answer."""
    study = study_of(table_of("endometrial"), LOGIT, NV)

    got = analyse(study, store=store, cores=2)

    (question,) = got.questions
    flat, weak, sceptical = got.posteriors
    assert isinstance(got.frequentist.coefficient("NV"), NotEstimable)
    assert isinstance(flat, NoPosterior)
    assert flat.reason.startswith("it would be improper: the prior says nothing about NV")
    assert isinstance(weak, PosteriorFit)
    assert isinstance(sceptical, PosteriorFit)
    assert weak.coefficients[1].median > sceptical.coefficients[1].median > 0.0
    assert got.status.verdict == "doubtful"
    assert any("flat prior set: it would be improper" in caveat.message for caveat in got.status.caveats)
    assert any("No maximum-likelihood estimate exists for NV" in c.message for c in got.status.caveats)
    assert isinstance(question.frequentist, NoFrequentistAnswer)
    assert (question.agreement, question.reason) == ("cannot be compared", "no estimate")
    assert isinstance(question.sweep, Sweep)


def test_a_main_prior_set_without_posterior_fails(
    study_of: Callable[..., Any], table_of: Any, store: Any
) -> None:
    """With the flat set as the main one, the same data give no headline numbers and say so."""
    study = study_of(table_of("endometrial"), LOGIT + 'main_prior = "flat"', NV)

    got = analyse(study, store=store, cores=2)

    (question,) = got.questions
    assert got.status.verdict == "failed"
    assert got.status.caveats[0].severity == "failed"
    assert isinstance(got.main, NoPosterior)
    assert isinstance(question.main.conclusion, NoConclusion)
    assert isinstance(question.sweep, NoSweep)
    assert question.power_scaling is None
    assert question.dependence in {"none", "size", "direction", "both"}


def test_dependent_columns_are_told_apart_only_by_the_prior(study_of: Callable[..., Any], store: Any) -> None:
    """Two columns and their sum: no flat posterior, and a weak one of what the data do say."""
    rng = np.random.default_rng(8)
    a, b = rng.normal(size=40), rng.normal(size=40)
    frame = pd.DataFrame({"a": a, "b": b, "s": a + b, "y": 2.0 * a + b + rng.normal(0.0, 0.5, 40)})

    got = analyse(study_of(frame, 'formula = "y ~ a + b + s"\nfamily = "gaussian"'), store=store, cores=2)

    assert isinstance(got.posterior("flat"), NoPosterior)
    weak = got.posterior("weak")
    assert isinstance(weak, PosteriorFit)
    draws = weak.draws.flat
    least_squares = np.linalg.lstsq(np.column_stack([np.ones(40), a, b]), frame["y"].to_numpy(), rcond=None)[
        0
    ]
    assert (draws[:, 1] + draws[:, 3]).mean() == pytest.approx(least_squares[1], abs=0.03)
    assert (draws[:, 2] + draws[:, 3]).mean() == pytest.approx(least_squares[2], abs=0.03)
    assert draws[:, 3].std() > 5.0 * (draws[:, 1] + draws[:, 3]).std()
    assert got.status.verdict == "doubtful"


def test_a_perfect_fit_has_no_posterior(study_of: Callable[..., Any], store: Any) -> None:
    """An outcome computed from the predictors leaves no residual variation: nothing is sampled."""
    frame = pd.DataFrame({"x": np.arange(8.0), "y": 1.0 + 2.0 * np.arange(8.0)})

    got = analyse(study_of(frame, 'formula = "y ~ x"\nfamily = "gaussian"'), store=store)

    assert all(isinstance(one, NoPosterior) for one in got.posteriors)
    assert {one.check for one in got.posteriors} == {None}
    assert "reproduces the outcome exactly" in got.main.reason
    assert got.status.verdict == "failed"


def test_results_do_not_depend_on_who_came_before(
    study_of: Callable[..., Any], table_of: Any, store: Any
) -> None:
    """The same study gives the same draws on a store that others have used, with one core or two."""
    study = study_of(table_of("endometrial"), LOGIT)

    first = analyse(study, store=store, cores=1).posterior("sceptical")
    second = analyse(study, store=store, cores=2).posterior("sceptical")

    assert np.array_equal(first.draws.coefficients, second.draws.coefficients)
