"""Columns that say nearly the same meet a mass matrix that expects it."""

from __future__ import annotations

from collections.abc import Callable
from types import SimpleNamespace
from typing import Any

import numpy as np
import pandas as pd
import pytest

from reanalysis.bayesian import fit as fit_module
from reanalysis.bayesian.priors import weak_priors
from reanalysis.bayesian.result import NoPosterior


@pytest.mark.parametrize("difference, correlated", [(1.0, False), (0.01, True)])
def test_correlated_columns_get_their_mass_matrix_at_once(
    design_of: Callable[..., Any],
    sampler: Any,
    monkeypatch: pytest.MonkeyPatch,
    difference: float,
    correlated: bool,
) -> None:
    """The first attempt adapts to correlations when there are some; the second tries the other way."""
    random = np.random.default_rng(20261203)
    x = random.normal(size=50)
    frame = pd.DataFrame({"y": random.normal(size=50), "x": x, "z": x + difference * random.normal(size=50)})
    design = design_of(frame, "y ~ x + z")
    asked: list[bool] = []
    monkeypatch.setattr(fit_module, "sample", lambda *arguments: asked.append(arguments[2].low_rank))
    store = SimpleNamespace(get=lambda *_: SimpleNamespace(bind=lambda _: None))

    result = fit_module.fit_posterior(design, weak_priors(design), sampler, 0.95, store)

    assert isinstance(result, NoPosterior)
    assert asked == [correlated, not correlated]
