"""Shapes of the prior distributions, for drawing: densities and central intervals.

Only pictures use these; the log densities that the posterior is computed with are elsewhere.
"""

from __future__ import annotations

import math
from typing import Any

import numpy as np
from numpy.typing import NDArray
from scipy import stats

from reanalysis.study import distributions as dist

FloatArray = NDArray[np.float64]


def prior_density(distribution: dist.Distribution, x: FloatArray) -> FloatArray | None:
    """Return the density at `x`, per unit of `x`; None when the prior is improper.

    Parameters
    ----------
    distribution : Distribution
    x : ndarray, shape (m,)
    """
    frozen = _scipy_distribution(distribution)
    return None if frozen is None else np.asarray(frozen.pdf(x), dtype=np.float64)


def prior_interval(distribution: dist.Distribution, level: float) -> tuple[float, float, float] | None:
    """Return the central interval at a level and the median: low, median, high; None when improper."""
    frozen = _scipy_distribution(distribution)
    if frozen is None:
        return None
    low, middle, high = frozen.ppf([(1.0 - level) / 2.0, 0.5, (1.0 + level) / 2.0])
    return float(low), float(middle), float(high)


class _HalfStudentT:
    """The positive half of a Student's t around zero, which scipy does not have."""

    def __init__(self, df: float, scale: float) -> None:
        self._whole = stats.t(df, 0.0, scale)

    def pdf(self, x: FloatArray) -> FloatArray:
        return np.where(x >= 0.0, 2.0 * self._whole.pdf(x), 0.0)

    def ppf(self, q: list[float]) -> FloatArray:
        return np.asarray(self._whole.ppf(0.5 + np.asarray(q) / 2.0))


def _scipy_distribution(distribution: dist.Distribution) -> Any:
    match distribution:
        case dist.Normal():
            return stats.norm(distribution.mean, distribution.sd)
        case dist.StudentT():
            return stats.t(distribution.df, distribution.location, distribution.scale)
        case dist.Cauchy():
            return stats.cauchy(distribution.location, distribution.scale)
        case dist.Laplace():
            return stats.laplace(distribution.location, distribution.scale)
        case dist.Uniform():
            return stats.uniform(distribution.low, distribution.high - distribution.low)
        case dist.LogNormal():
            return stats.lognorm(distribution.sdlog, scale=math.exp(distribution.meanlog))
        case dist.Gamma():
            return stats.gamma(distribution.shape, scale=1.0 / distribution.rate)
        case dist.Exponential():
            return stats.expon(scale=1.0 / distribution.rate)
        case dist.HalfNormal():
            return stats.halfnorm(scale=distribution.sd)
        case dist.HalfCauchy():
            return stats.halfcauchy(scale=distribution.scale)
        case dist.HalfStudentT():
            return _HalfStudentT(distribution.df, distribution.scale)
        case dist.Flat() | dist.HalfFlat() | dist.LogFlat():
            return None
