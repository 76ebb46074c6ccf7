"""Designs of published data, prior sets in short, and exact posteriors to compare draws with."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

import numpy as np
import pytest
from arviz_stats.base import array_stats
from numpy.typing import NDArray

from reanalysis.bayesian.priors import flat_priors, sceptical_priors, weak_priors
from reanalysis.bayesian.result import Marginal, ParameterPrior, PosteriorFit, PriorSet
from reanalysis.design.model import Design
from reanalysis.study.distributions import Distribution

FloatArray = NDArray[np.float64]

ERRORS = 4.0
"""Monte Carlo standard errors that an estimate may be away from the exact value."""


@dataclass(frozen=True)
class Exact:
    """What is known exactly of one scalar's posterior."""

    mean: float
    sd: float
    low: float
    median: float
    high: float
    positive: float

    @classmethod
    def from_grid(cls, grid: FloatArray, density: FloatArray) -> Exact:
        """Summarise a density, up to its constant, on an even grid."""
        share = density / density.sum()
        mean = float(share @ grid)
        cdf = np.cumsum(share) - share / 2.0
        low, median, high = np.interp([0.025, 0.5, 0.975], cdf, grid)
        sd = float(np.sqrt(share @ (grid - mean) ** 2))
        return cls(mean, sd, float(low), float(median), float(high), 1.0 - float(np.interp(0.0, grid, cdf)))


@pytest.fixture(scope="session")
def exact() -> type[Exact]:
    """The class that holds an exact posterior."""
    return Exact


@pytest.fixture(scope="session")
def agree() -> Callable[..., None]:
    """Give a function that compares draws and their summary with an exact posterior."""

    def compare(draws: FloatArray, marginal: Marginal, known: Exact) -> None:
        error_sd = float(array_stats.mcse(draws, method="sd"))
        pairs = {
            "mean": (marginal.mean, known.mean, marginal.mcse_mean),
            "sd": (marginal.sd, known.sd, error_sd),
            "low": (marginal.low, known.low, marginal.mcse_low),
            "median": (marginal.median, known.median, marginal.mcse_median),
            "high": (marginal.high, known.high, marginal.mcse_high),
            "positive": (marginal.prob_positive, known.positive, marginal.mcse_prob_positive),
        }
        apart = {name: (got - want) / error for name, (got, want, error) in pairs.items()}
        assert max(abs(value) for value in apart.values()) < ERRORS, apart
        assert error_sd < 0.05 * known.sd  # or the comparison would show nothing

    return compare


@pytest.fixture(scope="session")
def agree_column(agree: Callable[..., None]) -> Callable[..., None]:
    """Give a function that compares one coefficient of a fit with its exact posterior."""

    def compare(fit: PosteriorFit, column: int, known: Exact) -> None:
        agree(fit.draws.coefficients[..., column], fit.coefficients[column], known)

    return compare


@pytest.fixture(scope="session")
def priors() -> Callable[..., PriorSet]:
    """Give a function that makes a prior set of distributions, one for each column."""

    def make(
        design: Design, *stated: Distribution, auxiliary: Distribution | None = None, **keys: Any
    ) -> Any:
        pairs = zip(design.columns, stated, strict=True)
        return PriorSet(
            name=keys.pop("name", "stated"),
            source="a test",
            intercept_at=keys.pop("intercept_at", "centre"),
            coefficients=tuple(ParameterPrior(column.name, prior, "stated") for column, prior in pairs),
            auxiliary=() if auxiliary is None else (ParameterPrior("sigma", auxiliary, "stated"),),
        )

    return make


@pytest.fixture(scope="session")
def plant(design_of: Callable[..., Design], table_of: Callable[[str], Any]) -> Design:
    """Dobson's plant weights: weight on group."""
    return design_of(table_of("dobson_plant_weight"), "weight ~ group")


@pytest.fixture(scope="session")
def norris(design_of: Callable[..., Design], table_of: Callable[[str], Any]) -> Design:
    """NIST's Norris data: y on x."""
    return design_of(table_of("nist_norris"), "y ~ x")


@pytest.fixture(scope="session")
def spector(design_of: Callable[..., Design], table_of: Callable[[str], Any]) -> Design:
    """Spector and Mazzeo's grades, with the teaching method as a factor and two predictors only."""
    table = table_of("spector")
    table["PSI"] = np.where(table["PSI"] > 0.5, "yes", "no")
    return design_of(table, "GRADE ~ GPA + PSI", "bernoulli")


@pytest.fixture(scope="session")
def plant_fits(plant: Design, posterior_of: Callable[..., Any]) -> dict[str, PosteriorFit]:
    """Posteriors of the plant weights under the built-in prior sets."""
    weak = weak_priors(plant)
    sets = (flat_priors(plant), weak, sceptical_priors(plant, weak, ()))
    return {prior_set.name: posterior_of(plant, prior_set) for prior_set in sets}
