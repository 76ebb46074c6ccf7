"""The sampler's own scale: columns centred and scaled, priors carried along exactly, draws brought back.

A year near 2000 or a price in millions would otherwise make the sampler crawl.
Location-scale priors keep their form under a change of origin and unit, so the
posterior is the same one, told in other units.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from reanalysis.bayesian.densities import affine, is_positive
from reanalysis.bayesian.result import Draws, PriorSet
from reanalysis.design.model import Design
from reanalysis.study.distributions import Distribution

FloatArray = NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class Scaling:
    """How design and outcome are changed for the sampler.

    With ``x' = (x - origin) / unit`` for each column and ``y' = (y - shift) / spread``.

    Attributes
    ----------
    origin, unit : ndarray, shape (k,)
        The intercept's column has origin 0 and unit 1.
    shift, spread : float
        Of the outcome; 0 and 1 for every family but gaussian.
    intercept : int or None
        Position of the intercept's column.
    """

    origin: FloatArray
    unit: FloatArray
    shift: float
    spread: float
    intercept: int | None


def choose_scaling(design: Design, prior_set: PriorSet) -> Scaling:
    """Choose origin and unit of each column, and of the outcome, for one prior set.

    Columns are centred only when the intercept's prior is about the centre of the data: centring
    under a prior at zero predictors would change the model.
    """
    centred = design.has_intercept and prior_set.intercept_at == "centre"
    origin = np.array([column.mean if centred else 0.0 for column in design.columns])
    unit = np.array([column.sd if column.sd > 0.0 else 1.0 for column in design.columns])
    if design.has_intercept:
        origin[0], unit[0] = 0.0, 1.0
    shift, spread = 0.0, 1.0
    if design.family.name == "gaussian":
        spread = float(np.std(design.response.values)) or 1.0
        if design.has_intercept and not is_positive(prior_set.coefficients[0].distribution):
            shift = float(np.mean(design.response.values))
    return Scaling(origin, unit, shift, spread, 0 if design.has_intercept else None)


def scaled_matrix(design: Design, scaling: Scaling) -> FloatArray:
    """The design matrix that the sampler sees, shape (n, k)."""
    return np.ascontiguousarray((design.matrix - scaling.origin) / scaling.unit)


def scaled_response(design: Design, scaling: Scaling) -> FloatArray:
    """The outcome that the sampler sees, shape (n,)."""
    return (design.response.values - scaling.shift) / scaling.spread


def scaled_priors(prior_set: PriorSet, scaling: Scaling) -> tuple[Distribution, ...]:
    """The priors that the sampler sees: one for each column, then the auxiliary ones."""
    coefficients = [
        affine(
            prior.distribution,
            scaling.shift if position == scaling.intercept else 0.0,
            float(scaling.unit[position]) / scaling.spread,
        )
        for position, prior in enumerate(prior_set.coefficients)
    ]
    auxiliary = [affine(prior.distribution, 0.0, 1.0 / scaling.spread) for prior in prior_set.auxiliary]
    return (*coefficients, *auxiliary)


def unscaled_draws(coefficients: FloatArray, auxiliary: FloatArray, scaling: Scaling) -> Draws:
    """Bring draws back to the data's scale, the intercept to zero predictors.

    Parameters
    ----------
    coefficients : ndarray, shape (chains, draws, k)
        On the sampler's scale.
    auxiliary : ndarray, shape (chains, draws, a)
        On the sampler's scale.
    scaling : Scaling
    """
    slopes = coefficients * (scaling.spread / scaling.unit)
    if scaling.intercept is not None:
        moved = slopes @ scaling.origin  # the intercept's own origin is 0
        slopes[..., scaling.intercept] += scaling.shift - moved
    return Draws(slopes, auxiliary * scaling.spread)


def centred_intercept(coefficients: FloatArray, design: Design) -> FloatArray:
    """The intercept at the centre of the predictors, for coefficients with the intercept at zero predictors.

    Parameters
    ----------
    coefficients : ndarray, shape (..., k)

    Returns
    -------
    ndarray, shape (...)
    """
    means = np.array([column.mean for column in design.columns])  # the intercept's column has mean 1
    return np.asarray(coefficients @ means)
