"""One run of the sampler: draws of the right parameters, and runs that cannot start."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import numpy as np
import pytest

from reanalysis.bayesian.fit import bound_inputs, structure_of
from reanalysis.bayesian.priors import weak_priors
from reanalysis.bayesian.sampler import sample
from reanalysis.bayesian.scaling import choose_scaling
from reanalysis.design.model import Design


@pytest.mark.mcmc
def test_draws_have_the_parameters_shapes(plant: Design, store: Any, sampler: Any) -> None:
    """Coefficients and sigma for each chain and draw; energies and divergences alike; sigma positive."""
    prior_set = weak_priors(plant)
    inputs = bound_inputs(plant, prior_set, choose_scaling(plant, prior_set))
    structure = structure_of(plant, prior_set)
    settings = replace(sampler, draws=260, tune=200, chains=3)

    raw = sample(store.get(structure, inputs).bind(inputs), structure, settings)

    assert raw is not None
    assert (raw.coefficients.shape, raw.auxiliary.shape) == ((3, 260, 2), (3, 260, 1))
    assert raw.diverging.shape == raw.energy.shape == (3, 260)
    assert raw.diverging.dtype == np.bool_
    assert raw.auxiliary.min() > 0.0
    assert raw.coefficients.min() < 0.0
    assert np.all(np.isfinite(raw.energy))


@pytest.mark.mcmc
def test_a_density_without_a_finite_value_has_no_draws(
    plant: Design, store: Any, sampler: Any, capfd: pytest.CaptureFixture[str]
) -> None:
    """An infinite outcome, which no data file gets past us, ends without draws and without a crash report."""
    values = np.array(plant.response.values)
    values[3] = np.inf
    prior_set = weak_priors(plant)
    inputs = replace(bound_inputs(plant, prior_set, choose_scaling(plant, prior_set)), response=values)
    structure = structure_of(plant, prior_set)

    assert sample(store.get(structure, inputs).bind(inputs), structure, sampler) is None
    assert "panicked" not in capfd.readouterr().err


@pytest.mark.mcmc
def test_a_density_that_cannot_be_computed_is_a_defect(plant: Design, store: Any, sampler: Any) -> None:
    """A matrix and an outcome of different lengths are no property of the data: the error is not hidden."""
    prior_set = weak_priors(plant)
    inputs = bound_inputs(plant, prior_set, choose_scaling(plant, prior_set))
    structure = structure_of(plant, prior_set)
    short = store.get(structure, inputs).bind(replace(inputs, response=inputs.response[:-1]))

    with pytest.raises(RuntimeError, match="initialization points failed"):
        sample(short, structure, sampler)
