"""Posteriors that are known exactly: one effect with a normal likelihood."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

import numpy as np
import pandas as pd
import pytest
from scipy import stats

from reanalysis.bayesian.result import ComputationCheck, Draws, ParameterPrior, PosteriorFit, PriorSet
from reanalysis.bayesian.summaries import summarise
from reanalysis.study.distributions import Distribution, Flat, Normal

SOUND = ComputationCheck("sound", 0, 8000, 1.0, 8000.0, 8000.0, 1.0, 1, ())


@dataclass(frozen=True)
class World:
    """An estimate with its standard error; under a normal prior around zero the posterior is normal."""

    y: float
    se: float
    draws: int = 8000

    def posterior(self, width: float, mean: float = 0.0) -> Any:
        """The exact posterior under N(mean, width^2); an infinite width is a flat prior."""
        precision = 1.0 / self.se**2 + 1.0 / width**2
        return stats.norm((self.y / self.se**2 + mean / width**2) / precision, precision**-0.5)

    def sample(self, distribution: Any) -> Any:
        """Draws without chance: shuffled quantiles in four chains, shape (4, draws / 4)."""
        shares = (np.arange(self.draws) + 0.5) / self.draws
        return np.random.default_rng(11).permutation(distribution.ppf(shares)).reshape(4, -1)

    def fit(self, prior: Distribution, name: str = "weak") -> PosteriorFit:
        """The fit under a normal or flat prior."""
        width = prior.sd if isinstance(prior, Normal) else np.inf
        exact = self.posterior(width, prior.mean if isinstance(prior, Normal) else 0.0)
        return self.fit_of(self.sample(exact), prior, name)

    def fit_of(self, draws: Any, prior: Distribution, name: str) -> PosteriorFit:
        """A fit with these draws."""
        prior_set = PriorSet(name, "a test", "centre", (ParameterPrior("x", prior, "stated"),), ())
        return PosteriorFit(
            prior_set=prior_set,
            level=0.95,
            draws=Draws(draws[..., None], np.empty((*draws.shape, 0))),
            coefficients=(summarise(draws, 0.95),),
            centred_intercept=None,
            auxiliary=(),
            check=SOUND,
        )


@pytest.fixture(scope="session")
def world() -> Callable[..., World]:
    """The class of such posteriors."""
    return World


@pytest.fixture(scope="session")
def one_column(design_of: Callable[..., Any]) -> Any:
    """A design with one column and no auxiliary parameter; its data play no part."""
    frame = pd.DataFrame({"y": [0.0, 1.0, 1.0, 0.0], "x": [-1.0, 0.5, 2.0, 1.0]})
    return design_of(frame, "y ~ 0 + x", "bernoulli")


@pytest.fixture(scope="session")
def flat() -> Flat:
    """The flat prior."""
    return Flat()
