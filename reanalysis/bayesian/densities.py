"""Log densities of the prior distributions, and the same distributions on another scale.

The densities are normalised (improper ones are given up to their constant) and
written out here rather than taken from the sampler, so that log priors of draws
do not depend on which parameterisation the sampler used.
"""

from __future__ import annotations

from functools import singledispatch
from typing import Any

import numpy as np
from numpy.typing import NDArray
from scipy import special

from reanalysis.study.distributions import (
    Cauchy,
    Distribution,
    Exponential,
    Flat,
    Gamma,
    HalfCauchy,
    HalfFlat,
    HalfNormal,
    HalfStudentT,
    Laplace,
    LogFlat,
    LogNormal,
    Normal,
    PositiveDistribution,
    RealDistribution,
    StudentT,
    Uniform,
)

FloatArray = NDArray[np.float64]

LOG_TWO = float(np.log(2.0))
HALF_LOG_TWO_PI = 0.5 * float(np.log(2.0 * np.pi))


def is_proper(distribution: Distribution) -> bool:
    """Whether the distribution integrates to one."""
    return not isinstance(distribution, Flat | HalfFlat | LogFlat)


def is_positive(distribution: Distribution) -> bool:
    """Whether the distribution lives on the positive half line."""
    return isinstance(distribution, PositiveDistribution)


def is_unbounded(distribution: Distribution) -> bool:
    """Whether the distribution lives on the whole line."""
    return isinstance(distribution, RealDistribution)


def log_density(distribution: Distribution, x: FloatArray) -> FloatArray:
    """Evaluate a log density.

    Parameters
    ----------
    distribution : Distribution
    x : ndarray, any shape

    Returns
    -------
    ndarray, shape of `x`
        Minus infinity outside the support. Improper distributions: 0 for the flat ones and
        -log(x) for ``log_flat``, their constants being arbitrary.
    """
    if isinstance(distribution, RealDistribution):
        return np.asarray(_real_log_density(distribution, x))
    if isinstance(distribution, Uniform):
        inside = (x >= distribution.low) & (x <= distribution.high)
        return np.where(inside, -np.log(distribution.high - distribution.low), -np.inf)
    # Those with a logarithm in their density leave zero out.
    open_at_zero = isinstance(distribution, Gamma | LogFlat | LogNormal)
    inside = x > 0.0 if open_at_zero else x >= 0.0
    return np.where(inside, _positive_log_density(distribution, np.where(inside, x, 1.0)), -np.inf)


def _real_log_density(distribution: RealDistribution, x: FloatArray) -> Any:
    match distribution:
        case Flat():
            return np.zeros_like(x)
        case Normal(mean=mean, sd=sd):
            return -0.5 * ((x - mean) / sd) ** 2 - np.log(sd) - HALF_LOG_TWO_PI
        case Laplace(location=location, scale=scale):
            return -np.abs(x - location) / scale - np.log(2.0 * scale)
        case Cauchy(location=location, scale=scale):
            return _student_t(x, 1.0, location, scale)
        case StudentT(df=df, location=location, scale=scale):
            return _student_t(x, df, location, scale)


def _positive_log_density(distribution: PositiveDistribution, x: FloatArray) -> Any:
    match distribution:
        case HalfFlat():
            return np.zeros_like(x)
        case LogFlat():
            return -np.log(x)
        case HalfNormal(sd=sd):
            return LOG_TWO - 0.5 * (x / sd) ** 2 - np.log(sd) - HALF_LOG_TWO_PI
        case HalfCauchy(scale=scale):
            return LOG_TWO + _student_t(x, 1.0, 0.0, scale)
        case HalfStudentT(df=df, scale=scale):
            return LOG_TWO + _student_t(x, df, 0.0, scale)
        case LogNormal(meanlog=meanlog, sdlog=sdlog):
            z = (np.log(x) - meanlog) / sdlog
            return -0.5 * z**2 - np.log(sdlog) - HALF_LOG_TWO_PI - np.log(x)
        case Gamma(shape=shape, rate=rate):
            constant = shape * np.log(rate) - special.gammaln(shape)
            return constant + (shape - 1.0) * np.log(x) - rate * x
        case Exponential(rate=rate):
            return np.log(rate) - rate * x


def _student_t(x: FloatArray, df: float, location: float, scale: float) -> FloatArray:
    constant = special.gammaln((df + 1.0) / 2.0) - special.gammaln(df / 2.0) - 0.5 * np.log(df * np.pi)
    tails = 0.5 * (df + 1.0) * np.log1p(((x - location) / scale) ** 2 / df)
    return np.asarray(constant - np.log(scale) - tails)


@singledispatch
def affine(distribution: Distribution, shift: float, factor: float) -> Distribution:
    """Return the distribution of ``(x - shift) * factor`` when x has `distribution`.

    Parameters
    ----------
    distribution : Distribution
    shift : float
        Must be 0 for distributions on the positive half line.
    factor : float
        Positive.

    Raises
    ------
    ValueError
        When a positive distribution would be shifted: no distribution of the table describes the result.
    """
    if shift != 0.0:
        raise ValueError(f"{distribution.dist} lives on the positive half line and cannot be shifted")
    return _scaled(distribution, factor)


@affine.register
def _(distribution: Flat, shift: float, factor: float) -> Distribution:  # noqa: ARG001
    return distribution


@affine.register
def _(distribution: Normal, shift: float, factor: float) -> Distribution:
    return Normal(mean=(distribution.mean - shift) * factor, sd=distribution.sd * factor)


@affine.register
def _(distribution: StudentT, shift: float, factor: float) -> Distribution:
    return StudentT(
        df=distribution.df,
        location=(distribution.location - shift) * factor,
        scale=distribution.scale * factor,
    )


@affine.register
def _(distribution: Cauchy, shift: float, factor: float) -> Distribution:
    return Cauchy(location=(distribution.location - shift) * factor, scale=distribution.scale * factor)


@affine.register
def _(distribution: Laplace, shift: float, factor: float) -> Distribution:
    return Laplace(location=(distribution.location - shift) * factor, scale=distribution.scale * factor)


@affine.register
def _(distribution: Uniform, shift: float, factor: float) -> Distribution:
    return Uniform(low=(distribution.low - shift) * factor, high=(distribution.high - shift) * factor)


def _scaled(distribution: Distribution, factor: float) -> Distribution:
    match distribution:
        case LogNormal():
            meanlog = distribution.meanlog + float(np.log(factor))
            return LogNormal(meanlog=meanlog, sdlog=distribution.sdlog)
        case Gamma():
            return Gamma(shape=distribution.shape, rate=distribution.rate / factor)
        case Exponential():
            return Exponential(rate=distribution.rate / factor)
        case HalfNormal():
            return HalfNormal(sd=distribution.sd * factor)
        case HalfCauchy():
            return HalfCauchy(scale=distribution.scale * factor)
        case HalfStudentT():
            return HalfStudentT(df=distribution.df, scale=distribution.scale * factor)
        case _:  # half_flat and log_flat keep their shape under any change of unit
            return distribution
