"""Log densities of the prior distributions, and the same distributions on another scale.

The densities are normalised (improper ones are given up to their constant) and
written out here rather than taken from the sampler, so that log priors of draws
do not depend on which parameterisation the sampler used.
"""

from __future__ import annotations

from functools import singledispatch
from typing import Protocol

import numpy as np
from numpy.typing import NDArray
from scipy import stats

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


class Frozen(Protocol):
    """The part of a frozen scipy distribution that is used here and in pictures."""

    def pdf(self, x: FloatArray) -> FloatArray:
        """Density."""

    def logpdf(self, x: FloatArray) -> FloatArray:
        """Logarithm of the density."""

    def ppf(self, q: float) -> float:
        """Quantile."""


@singledispatch
def frozen(distribution: Distribution) -> Frozen:
    """Return the scipy distribution with these parameters.

    Parameters
    ----------
    distribution : Distribution
        A proper one; `is_proper` tells.

    Raises
    ------
    TypeError
        For an improper distribution, which has no scipy counterpart.
    """
    raise TypeError(f"{distribution.dist} is improper")


@frozen.register
def _(distribution: Normal) -> Frozen:
    return stats.norm(distribution.mean, distribution.sd)


@frozen.register
def _(distribution: StudentT) -> Frozen:
    return stats.t(distribution.df, distribution.location, distribution.scale)


@frozen.register
def _(distribution: Cauchy) -> Frozen:
    return stats.cauchy(distribution.location, distribution.scale)


@frozen.register
def _(distribution: Laplace) -> Frozen:
    return stats.laplace(distribution.location, distribution.scale)


@frozen.register
def _(distribution: Uniform) -> Frozen:
    return stats.uniform(distribution.low, distribution.high - distribution.low)


@frozen.register
def _(distribution: LogNormal) -> Frozen:
    return stats.lognorm(distribution.sdlog, scale=np.exp(distribution.meanlog))


@frozen.register
def _(distribution: Gamma) -> Frozen:
    return stats.gamma(distribution.shape, scale=1.0 / distribution.rate)


@frozen.register
def _(distribution: Exponential) -> Frozen:
    return stats.expon(scale=1.0 / distribution.rate)


@frozen.register
def _(distribution: HalfNormal) -> Frozen:
    return stats.halfnorm(scale=distribution.sd)


@frozen.register
def _(distribution: HalfCauchy) -> Frozen:
    return stats.halfcauchy(scale=distribution.scale)


@frozen.register
def _(distribution: HalfStudentT) -> Frozen:
    # scipy has no half t; the density is twice that of the t on the positive half line.
    return stats.t(distribution.df, 0.0, distribution.scale)


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
    if isinstance(distribution, Flat):
        return np.zeros_like(x)
    with np.errstate(divide="ignore", invalid="ignore"):
        if isinstance(distribution, HalfFlat):
            return np.where(x > 0.0, 0.0, -np.inf)
        if isinstance(distribution, LogFlat):
            return np.where(x > 0.0, -np.log(np.abs(x)), -np.inf)
        if isinstance(distribution, HalfStudentT):
            return np.where(x >= 0.0, np.log(2.0) + frozen(distribution).logpdf(x), -np.inf)
        return np.asarray(frozen(distribution).logpdf(x), dtype=np.float64)


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
