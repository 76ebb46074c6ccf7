"""Log prior and log likelihood of each posterior draw, written out here.

The libraries' own log prior scores the intercept at zero predictors against a
prior that is about the centre of the data, which invents conflicts between
prior and data. Here each prior is evaluated at what it is about.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from reanalysis.bayesian.densities import log_density
from reanalysis.bayesian.result import Draws, PriorSet
from reanalysis.bayesian.scaling import centred_intercept
from reanalysis.design.model import Design

FloatArray = NDArray[np.float64]

CHUNK = 2_000_000
"""Linear predictors held in memory at once (numbers)."""


def log_prior(draws: Draws, prior_set: PriorSet, design: Design) -> FloatArray:
    """Joint log prior density of each draw, shape (chains * draws,).

    Improper priors count with an arbitrary constant, which no use of the result depends on.
    """
    coefficients = draws.flat
    total = np.zeros(coefficients.shape[0])
    for position, prior in enumerate(prior_set.coefficients):
        values = coefficients[:, position]
        if design.columns[position].kind == "intercept" and prior_set.intercept_at == "centre":
            values = centred_intercept(coefficients, design)
        total += log_density(prior.distribution, values)
    for position, prior in enumerate(prior_set.auxiliary):
        total += log_density(prior.distribution, draws.flat_auxiliary[:, position])
    return total


def log_likelihood(draws: Draws, design: Design) -> FloatArray:
    """Log likelihood of the whole data set for each draw, shape (chains * draws,)."""
    coefficients = draws.flat
    sigma = draws.flat_auxiliary[:, :1] if draws.auxiliary.shape[-1] else np.ones((len(coefficients), 1))
    total = np.empty(len(coefficients))
    step = max(CHUNK // max(design.rows.used, 1), 1)
    for start in range(0, len(coefficients), step):
        part = slice(start, start + step)
        eta = coefficients[part] @ design.matrix.T
        if design.offset is not None:
            eta = eta + design.offset
        total[part] = design.family.log_likelihood(design.response.values, eta, sigma[part]).sum(axis=1)
    return total
