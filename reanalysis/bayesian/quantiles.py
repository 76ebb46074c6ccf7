"""Quantiles of the prior distributions, for showing what a prior says."""

from __future__ import annotations

import math
from typing import Any

from scipy import stats

from reanalysis.study.distributions import (
    Cauchy,
    Distribution,
    Exponential,
    Gamma,
    HalfCauchy,
    HalfNormal,
    HalfStudentT,
    Laplace,
    LogNormal,
    Normal,
    StudentT,
    Uniform,
)


def quantile(distribution: Distribution, probability: float) -> float:
    """Return a quantile.

    Parameters
    ----------
    distribution : Distribution
        A proper one.
    probability : float
        Between 0 and 1.

    Raises
    ------
    TypeError
        For an improper distribution, which has none.
    """
    if isinstance(distribution, HalfStudentT):
        # scipy has no half t: its quantiles are the upper ones of the whole.
        whole = stats.t(distribution.df, 0.0, distribution.scale)
        return float(whole.ppf(0.5 + probability / 2.0))
    return float(_scipy_distribution(distribution).ppf(probability))


def _scipy_distribution(distribution: Distribution) -> Any:
    match distribution:
        case Normal(mean=mean, sd=sd):
            return stats.norm(mean, sd)
        case StudentT(df=df, location=location, scale=scale):
            return stats.t(df, location, scale)
        case Cauchy(location=location, scale=scale):
            return stats.cauchy(location, scale)
        case Laplace(location=location, scale=scale):
            return stats.laplace(location, scale)
        case Uniform(low=low, high=high):
            return stats.uniform(low, high - low)
        case LogNormal(meanlog=meanlog, sdlog=sdlog):
            return stats.lognorm(sdlog, scale=math.exp(meanlog))
        case Gamma(shape=shape, rate=rate):
            return stats.gamma(shape, scale=1.0 / rate)
        case Exponential(rate=rate):
            return stats.expon(scale=1.0 / rate)
        case HalfNormal(sd=sd):
            return stats.halfnorm(scale=sd)
        case HalfCauchy(scale=scale):
            return stats.halfcauchy(scale=scale)
        case _:
            raise TypeError(f"{distribution.dist} is improper: it has no quantiles")
