"""The sampler's own scale is the same model told in other units."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np
import pandas as pd
import pytest

from reanalysis.bayesian.scaling import (
    centred_intercept,
    choose_scaling,
    scaled_matrix,
    scaled_priors,
    scaled_response,
    unscaled_draws,
)
from reanalysis.design.model import Design
from reanalysis.study import distributions as dist


@pytest.fixture(scope="module")
def years(design_of: Callable[..., Design]) -> Callable[..., Design]:
    """Give a function that makes a design with a year near 2000 and an outcome in thousands."""
    rng = np.random.default_rng(12)
    year = np.arange(1990.0, 2014.0)
    frame = pd.DataFrame({"year": year, "g": np.tile(["a", "b", "b"], 8), "n": rng.poisson(3.0, 24)})
    frame["y"] = 5000.0 + 12.0 * (year - 2000.0) + rng.normal(0.0, 30.0, 24)
    return lambda formula, family="gaussian": design_of(frame, formula, family)


NORMAL = dist.Normal(mean=1.0, sd=2.0)


@pytest.mark.parametrize("at", ["centre", "zero"])
@pytest.mark.parametrize("formula, family", [("y ~ year + g", "gaussian"), ("n ~ year + g", "poisson")])
def test_predictions_survive_the_change_of_scale(
    years: Any, priors: Any, formula: str, family: str, at: str
) -> None:
    """The linear predictor of any draw is the same on both scales, sigma comes along."""
    design = years(formula, family)
    auxiliary = dist.HalfNormal(sd=1.0) if family == "gaussian" else None
    scaling = choose_scaling(design, priors(design, *[NORMAL] * 3, auxiliary=auxiliary, intercept_at=at))
    sampled = np.random.default_rng(1).normal(size=(2, 5, 3))
    sigma = np.full((2, 5, 1), 0.4)

    draws = unscaled_draws(sampled, sigma, scaling)

    on_theirs = sampled @ scaled_matrix(design, scaling).T * scaling.spread + scaling.shift
    assert draws.coefficients @ design.matrix.T == pytest.approx(on_theirs, rel=1e-9, abs=1e-9)
    assert draws.auxiliary == pytest.approx(sigma * scaling.spread)
    assert draws.flat.shape == (10, 3)
    assert draws.flat[6].tolist() == draws.coefficients[1, 1].tolist()


def test_columns_are_standardised_and_the_outcome_too(years: Any, priors: Any) -> None:
    """With the intercept's prior at the centre every column but the intercept has mean 0 and SD 1."""
    design = years("y ~ year + g")
    scaling = choose_scaling(design, priors(design, *[NORMAL] * 3, auxiliary=dist.HalfNormal(sd=1.0)))

    matrix, response = scaled_matrix(design, scaling), scaled_response(design, scaling)

    assert matrix[:, 0].tolist() == [1.0] * 24
    assert matrix[:, 1:].mean(axis=0) == pytest.approx([0.0, 0.0], abs=1e-12)
    assert matrix[:, 1:].std(axis=0) == pytest.approx([1.0, 1.0])
    assert (response.mean(), response.std()) == pytest.approx((0.0, 1.0), abs=1e-12)


@pytest.mark.parametrize(
    "formula, at, first", [("y ~ year", "zero", NORMAL), ("y ~ 0 + year", "centre", NORMAL)]
)
def test_columns_are_not_centred_where_that_would_change_the_model(
    years: Any, priors: Any, formula: str, at: str, first: dist.Distribution
) -> None:
    """A prior at zero predictors, and a model without an intercept, leave the origin alone."""
    design = years(formula)
    prior_set = priors(
        design, *[first] * len(design.columns), auxiliary=dist.HalfNormal(sd=1.0), intercept_at=at
    )

    scaling = choose_scaling(design, prior_set)

    assert scaling.origin.tolist() == [0.0] * len(design.columns)
    assert scaling.unit[-1] == pytest.approx(np.arange(24.0).std())
    assert (scaling.shift == 0.0) == (not design.has_intercept)


def test_an_outcome_is_not_shifted_under_a_positive_intercept(years: Any, priors: Any) -> None:
    """A positive prior of the intercept cannot be shifted, so the outcome is only scaled."""
    design = years("y ~ year")
    prior_set = priors(design, dist.Gamma(shape=2.0, rate=0.001), NORMAL, auxiliary=dist.LogFlat())

    scaling = choose_scaling(design, prior_set)

    assert (scaling.shift, scaling.spread) == (0.0, pytest.approx(np.std(design.response.values)))
    assert scaled_priors(prior_set, scaling)[0] == dist.Gamma(shape=2.0, rate=0.001 * scaling.spread)


def test_priors_are_told_in_the_samplers_units(years: Any, priors: Any) -> None:
    """Intercept: shifted by mean(y), over sd(y); slope: times sd(x) / sd(y); sigma: over sd(y)."""
    design = years("y ~ year")
    y, x = np.asarray(design.response.values), design.matrix[:, 1]
    prior_set = priors(
        design,
        dist.Normal(mean=5100.0, sd=60.0),
        dist.Normal(mean=10.0, sd=4.0),
        auxiliary=dist.HalfNormal(sd=50.0),
    )

    intercept, slope, sigma = scaled_priors(prior_set, choose_scaling(design, prior_set))

    assert (intercept.mean, intercept.sd) == pytest.approx(((5100.0 - y.mean()) / y.std(), 60.0 / y.std()))
    assert (slope.mean, slope.sd) == pytest.approx((10.0 * x.std() / y.std(), 4.0 * x.std() / y.std()))
    assert sigma.sd == pytest.approx(50.0 / y.std())


def test_centred_intercept_is_the_outcome_at_mean_predictors(years: Any) -> None:
    """Intercept plus slopes times column means, for each draw."""
    design = years("y ~ year + g")
    coefficients = np.array([[[100.0, 2.0, -6.0], [0.0, 0.0, 3.0]]])

    got = centred_intercept(coefficients, design)

    assert got.shape == (1, 2)
    assert got[0] == pytest.approx([100.0 + 2.0 * 2001.5 - 6.0 * 2.0 / 3.0, 2.0])
