"""Log prior and log likelihood of each draw, summed by hand with scipy."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np
import pandas as pd
import pytest
from scipy import special, stats

from reanalysis.bayesian import log_density
from reanalysis.bayesian.log_density import log_likelihood, log_prior
from reanalysis.bayesian.result import Draws
from reanalysis.design.model import Design
from reanalysis.study import distributions as dist

RNG = np.random.default_rng(21)
FRAME = pd.DataFrame(
    {
        "x": RNG.normal(9.0, 2.0, 12),
        "hours": RNG.uniform(1.0, 4.0, 12),
        "gaussian": RNG.normal(20.0, 3.0, 12),
        "bernoulli": np.tile([0.0, 1.0, 1.0], 4),
        "poisson": RNG.poisson(5.0, 12).astype(float),
    }
)
SLOPES = RNG.normal(0.0, 0.2, (2, 3, 2))
SIGMA = RNG.uniform(1.0, 4.0, (2, 3, 1))

BY_HAND: dict[tuple[str, str], Callable[..., Any]] = {
    ("gaussian", "identity"): lambda y, eta, sigma: stats.norm.logpdf(y, eta, sigma),
    ("bernoulli", "logit"): lambda y, eta, _: stats.bernoulli.logpmf(y, special.expit(eta)),
    ("bernoulli", "probit"): lambda y, eta, _: stats.bernoulli.logpmf(y, stats.norm.cdf(eta)),
    ("bernoulli", "cloglog"): lambda y, eta, _: np.where(
        y > 0.5, np.log(-np.expm1(-np.exp(eta))), -np.exp(eta)
    ),
    ("poisson", "log"): lambda y, eta, _: stats.poisson.logpmf(y, np.exp(eta)),
}


def draws_of(family: str) -> Draws:
    """Two chains of three draws."""
    return Draws(SLOPES, SIGMA if family == "gaussian" else np.empty((2, 3, 0)))


@pytest.mark.parametrize("family, link", BY_HAND)
def test_log_likelihood_is_the_sum_over_rows(
    design_of: Callable[..., Design], family: str, link: str, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Draw by draw and row by row with scipy, the exposure's logarithm added to the linear predictor."""
    keys = {"exposure": "hours"} if family == "poisson" else {}
    design = design_of(FRAME, f"{family} ~ x", family, link=link, **keys)
    want = []
    for (intercept, slope), sigma in zip(SLOPES.reshape(-1, 2), SIGMA.ravel(), strict=True):
        eta = intercept + slope * FRAME["x"] + (np.log(FRAME["hours"]) if keys else 0.0)
        want.append(BY_HAND[family, link](FRAME[family], eta, sigma).sum())

    assert log_likelihood(draws_of(family), design) == pytest.approx(want, rel=1e-10)
    monkeypatch.setattr(log_density, "CHUNK", 2 * len(FRAME))  # two draws at a time
    assert log_likelihood(draws_of(family), design) == pytest.approx(want, rel=1e-10)


@pytest.mark.parametrize("at", ["centre", "zero"])
def test_log_prior_is_the_sum_over_parameters(design_of: Callable[..., Design], priors: Any, at: str) -> None:
    """Each prior is evaluated at what it is about: the intercept's at the centre of the data, or at zero."""
    design = design_of(FRAME, "gaussian ~ x")
    prior_set = priors(
        design,
        dist.Normal(mean=20.0, sd=5.0),
        dist.StudentT(df=3.0, location=0.1, scale=0.5),
        auxiliary=dist.HalfStudentT(df=4.0, scale=3.0),
        intercept_at=at,
    )
    about = SLOPES[..., 0] + (FRAME["x"].mean() * SLOPES[..., 1] if at == "centre" else 0.0)
    want = (
        stats.norm.logpdf(about, 20.0, 5.0)
        + stats.t.logpdf(SLOPES[..., 1], 3.0, 0.1, 0.5)
        + np.log(2.0)
        + stats.t.logpdf(SIGMA[..., 0], 4.0, 0.0, 3.0)
    )

    assert log_prior(draws_of("gaussian"), prior_set, design) == pytest.approx(want.ravel(), rel=1e-12)


def test_flat_prior_has_a_constant_density(design_of: Callable[..., Design], priors: Any) -> None:
    """Flat coefficients add nothing; the reference prior of sigma adds -log sigma."""
    design = design_of(FRAME, "gaussian ~ x")
    prior_set = priors(design, dist.Flat(), dist.Flat(), auxiliary=dist.LogFlat())

    assert log_prior(draws_of("gaussian"), prior_set, design) == pytest.approx(-np.log(SIGMA.ravel()))
