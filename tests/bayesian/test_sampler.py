"""One run of the sampler: draws of the right parameters, and runs that cannot start."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import numpy as np
import nutpie
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
    inputs = bound_inputs(plant, prior_set, choose_scaling(plant, prior_set))
    structure = structure_of(plant, prior_set)
    model = store.get(structure, inputs)

    for _ in range(3):
        assert sample(model.bind(replace(inputs, response=values)), structure, sampler) is None
    assert "panicked" not in capfd.readouterr().err


@pytest.mark.parametrize(
    "message, hidden",
    [
        (
            "All initialization points failed\n\nCaused by:\n    Logp function returned error: ErrorCode(3)",
            True,
        ),
        (
            "All initialization points failed\n\nCaused by:\n    Logp function returned error: ErrorCode(4)",
            True,
        ),
        (
            "All initialization points failed\n\nCaused by:\n    Logp function returned error: ErrorCode(1)",
            False,
        ),
        ("Sampling was interrupted", False),
    ],
)
def test_only_a_density_without_a_finite_value_is_the_datas_fault(
    plant: Design, sampler: Any, monkeypatch: pytest.MonkeyPatch, message: str, hidden: bool
) -> None:
    """Code 3 (gradient) and 4 (density) mean not finite; what could not be computed at all is a defect.

    The messages are nutpie 0.16's; a model that is really broken may read beyond its arrays, so none is run.
    """

    def fail(*_: object, **__: object) -> None:
        raise RuntimeError(message)

    monkeypatch.setattr(nutpie, "sample", fail)
    structure = structure_of(plant, weak_priors(plant))

    if hidden:
        assert sample(None, structure, sampler) is None
        return
    with pytest.raises(RuntimeError, match=message.splitlines()[0]):
        sample(None, structure, sampler)
