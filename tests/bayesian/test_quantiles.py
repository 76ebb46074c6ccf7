"""Quantiles of every proper prior distribution."""

from __future__ import annotations

import math

import numpy as np
import pytest

from reanalysis.bayesian.densities import log_density
from reanalysis.bayesian.quantiles import quantile
from reanalysis.study import distributions as dist

PROPER = (
    dist.Normal(mean=-1.0, sd=2.0),
    dist.StudentT(df=5.0, location=2.0, scale=0.5),
    dist.Cauchy(location=1.0, scale=0.3),
    dist.Laplace(location=-2.0, scale=1.5),
    dist.Uniform(low=-1.0, high=3.0),
    dist.LogNormal(meanlog=0.2, sdlog=0.6),
    dist.Gamma(shape=3.0, rate=0.5),
    dist.Exponential(rate=4.0),
    dist.HalfNormal(sd=2.0),
    dist.HalfCauchy(scale=0.7),
    dist.HalfStudentT(df=4.0, scale=1.2),
)


@pytest.mark.parametrize("distribution", PROPER, ids=lambda distribution: distribution.dist)
def test_quantiles_hold_the_probability_between_them(distribution: dist.Distribution) -> None:
    """Our own density between the quartiles integrates to one half: rates are not taken for scales."""
    low, high = quantile(distribution, 0.25), quantile(distribution, 0.75)
    grid = np.linspace(low, high, 20_001)

    assert np.trapezoid(np.exp(log_density(distribution, grid)), grid) == pytest.approx(0.5, abs=1e-6)


def test_medians_are_the_known_ones() -> None:
    """The median of an exponential is log 2 / rate; of a log-normal, exp(meanlog)."""
    assert quantile(dist.Exponential(rate=4.0), 0.5) == pytest.approx(math.log(2.0) / 4.0)
    assert quantile(dist.LogNormal(meanlog=2.0, sdlog=0.3), 0.5) == pytest.approx(math.exp(2.0))


@pytest.mark.parametrize("improper", [dist.Flat(), dist.HalfFlat(), dist.LogFlat()])
def test_improper_distributions_have_no_quantiles(improper: dist.Distribution) -> None:
    """To ask for one is a defect of the program."""
    with pytest.raises(TypeError, match=f"{improper.dist} is improper"):
        quantile(improper, 0.5)
