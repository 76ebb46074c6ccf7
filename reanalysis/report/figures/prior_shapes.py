"""Shapes of the prior distributions, for drawing: densities and central intervals."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from reanalysis.bayesian.densities import is_proper, log_density
from reanalysis.bayesian.quantiles import quantile
from reanalysis.study.distributions import Distribution

FloatArray = NDArray[np.float64]


def prior_density(distribution: Distribution, x: FloatArray) -> FloatArray | None:
    """Return the density at `x`, per unit of `x`; None when the prior is improper.

    Parameters
    ----------
    distribution : Distribution
    x : ndarray, shape (m,)
    """
    return np.exp(log_density(distribution, x)) if is_proper(distribution) else None


def prior_interval(distribution: Distribution, level: float) -> tuple[float, float, float] | None:
    """Return the central interval at a level and the median: low, median, high; None when improper."""
    if not is_proper(distribution):
        return None
    low, middle, high = (
        quantile(distribution, share) for share in ((1.0 - level) / 2.0, 0.5, (1.0 + level) / 2.0)
    )
    return low, middle, high
