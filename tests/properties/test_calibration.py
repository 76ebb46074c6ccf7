"""Over many simulated studies, intervals cover what they promise and posteriors are calibrated."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from typing import Any

import numpy as np
import pandas as pd
import pytest
from scipy import special, stats

from reanalysis.bayesian.fit import fit_posterior
from reanalysis.bayesian.result import ParameterPrior, PriorSet
from reanalysis.frequentist.fit import fit_frequentist
from reanalysis.study.distributions import Normal

KEPT, BINS, STUDIES = 39, 8, 96


def test_confidence_intervals_cover_as_often_as_their_level_says(design_of: Callable[..., Any]) -> None:
    """90 % t intervals of a small OLS fit hold the true slope in 90 % of 1,000 studies (within 3 SE)."""
    random = np.random.default_rng(20261201)
    x = random.normal(size=12)
    design = design_of(pd.DataFrame({"y": x + random.normal(size=12), "x": x}), "y ~ x")
    covered = 0
    for _ in range(1000):
        outcome = replace(design.response, values=1.5 - 0.7 * x + random.normal(scale=2.0, size=12))
        estimate = fit_frequentist(replace(design, response=outcome), level=0.9, seed=1).coefficients[1]
        covered += estimate.low < -0.7 < estimate.high
    assert abs(covered / 1000 - 0.9) < 3 * np.sqrt(0.9 * 0.1 / 1000)


@pytest.mark.mcmc
def test_true_values_rank_evenly_among_the_draws(
    design_of: Callable[..., Any], store: Any, sampler: Any
) -> None:
    """Parameters drawn from the prior rank uniformly among posterior draws (Talts et al. 2018)."""
    random = np.random.default_rng(20261202)
    x = random.normal(loc=3.0, size=60)
    frame = pd.DataFrame({"y": np.arange(60) % 2, "x": x})
    design = design_of(frame, "y ~ x", "bernoulli")
    priors = (ParameterPrior("Intercept", Normal(sd=1.0), ""), ParameterPrior("x", Normal(sd=0.8), ""))
    prior_set = PriorSet("simulated", "", "centre", priors, ())
    ranks = np.empty((STUDIES, 2), dtype=int)
    for study in range(STUDIES):
        centred, slope = random.normal(size=2) * (1.0, 0.8)
        happens = random.random(60) < special.expit(centred + slope * (x - x.mean()))
        outcome = replace(design.response, values=happens.astype(float))
        settings = replace(sampler, draws=500, tune=300, seed=study)
        fit = fit_posterior(replace(design, response=outcome), prior_set, settings, 0.9, store)
        # Every 50th draw of 2,000, less one, is near enough independent, and gives 40 ranks for 8 bins.
        coefficients = fit.draws.coefficients.reshape(-1, 2)[::50][:KEPT]
        true = (centred - slope * x.mean(), slope)
        ranks[study] = (coefficients < true).sum(axis=0)
    for column in range(2):
        counts = np.bincount(ranks[:, column] * BINS // (KEPT + 1), minlength=BINS)
        assert stats.chisquare(counts).pvalue > 0.005, counts
