"""Power-scaling sensitivity where prior and likelihood are normal, and no false conflicts."""

from __future__ import annotations

from typing import Any

import numpy as np
import pandas as pd
import pytest
from scipy import stats

from reanalysis.bayesian.log_density import log_likelihood, log_prior
from reanalysis.bayesian.result import ParameterPrior, PriorSet
from reanalysis.bayesian.scaling import centred_intercept
from reanalysis.sensitivity.power_scaling import power_scaling
from reanalysis.sensitivity.result import POWER_SCALING_THRESHOLD
from reanalysis.study.distributions import HalfStudentT, Normal

# Sensitivities by quadrature of the exactly power-scaled posteriors, over the range that 4,000
# draws have (the measure depends on it a little; ArviZ on 400,000 draws is within the tolerance).
TABLE = [
    (1.2, 0.5, 10.0, 0.00103, 0.0827, "none"),
    (1.2, 0.5, 0.7, 0.1176, 0.1385, "prior and data both matter"),
    (5.0, 0.5, 1.0, 0.2782, 0.3119, "prior and data both matter"),
    (0.3, 2.0, 0.5, 0.0807, 0.0089, "prior dominates"),
]


@pytest.mark.parametrize("y, se, width, prior, likelihood, diagnosis", TABLE)
def test_sensitivities_of_a_normal_posterior(
    world: Any, y: float, se: float, width: float, prior: float, likelihood: float, diagnosis: str
) -> None:
    """Prior and likelihood sensitivity are those of quadrature within 15 %, the diagnosis follows."""
    truth = world(y, se, 4000)
    draws = truth.sample(truth.posterior(width))

    got = power_scaling(
        draws, stats.norm.logpdf(draws.ravel(), 0.0, width), stats.norm.logpdf(y, draws.ravel(), se)
    )

    assert got.prior == pytest.approx(prior, rel=0.15)
    assert got.likelihood == pytest.approx(likelihood, rel=0.15)
    assert got.diagnosis == diagnosis


def test_a_constant_prior_has_no_sensitivity(world: Any) -> None:
    """Nothing is scaled where the log prior is the same for every draw, and constants don't count."""
    truth = world(1.2, 0.5, 4000)
    draws = truth.sample(truth.posterior(np.inf))
    likelihood = stats.norm.logpdf(1.2, draws.ravel(), 0.5)

    got = power_scaling(draws, np.full(4000, -3.3), likelihood)
    shifted = power_scaling(draws, np.zeros(4000), likelihood - 700.0)

    assert (got.prior, got.diagnosis) == (0.0, "none")
    assert shifted.likelihood == pytest.approx(got.likelihood, rel=1e-3)  # ties in the tail fall otherwise


@pytest.mark.mcmc
def test_an_intercept_far_from_zero_is_no_conflict(design_of: Any, posterior_of: Any) -> None:
    """A mild prior that fits the centre of the data is not flagged, though zero predictors lie far away.

    Scored at the intercept at zero predictors, as the libraries do, the same prior would be.
    """
    rng = np.random.default_rng(2)
    x = rng.normal(50.0, 4.0, 40)
    design = design_of(
        pd.DataFrame({"x": x, "y": 26.0 + 2.0 * (x - 50.0) + rng.normal(0.0, 4.0, 40)}), "y ~ x"
    )
    coefficients = (
        ParameterPrior("Intercept", Normal(mean=26.0, sd=10.0), "stated"),
        ParameterPrior("x", Normal(sd=20.0), "stated"),
    )
    auxiliary = (ParameterPrior("sigma", HalfStudentT(df=4.0, scale=10.0), "stated"),)
    prior_set = PriorSet("mild", "a test", "centre", coefficients, auxiliary)
    fit = posterior_of(design, prior_set)
    likelihood = log_likelihood(fit.draws, design)
    prior = log_prior(fit.draws, prior_set, design)
    at_zero = PriorSet("mild", "a test", "zero", coefficients, auxiliary)
    false = log_prior(fit.draws, at_zero, design)
    centred = centred_intercept(fit.draws.coefficients, design)

    for scalar in (fit.draws.coefficients[..., 0], fit.draws.coefficients[..., 1], centred):
        got = power_scaling(scalar, prior, likelihood)
        assert got.prior < POWER_SCALING_THRESHOLD / 2.0
        assert got.diagnosis == "none"
    assert power_scaling(fit.draws.coefficients[..., 1], false, likelihood).diagnosis != "none"
