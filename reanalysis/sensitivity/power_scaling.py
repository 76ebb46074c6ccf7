"""Power-scaling sensitivity: what happens when prior or likelihood are raised to a power near one.

Kallioinen, Paananen, Buerkner and Vehtari (2024), Statistics and Computing 34:57,
as implemented in ArviZ, with log prior and log likelihood from
`reanalysis.bayesian.log_density`.
"""

from __future__ import annotations

import numpy as np
from arviz_stats.base import array_stats
from numpy.typing import NDArray

from reanalysis.sensitivity.result import POWER_SCALING_THRESHOLD, PowerScaling

FloatArray = NDArray[np.float64]

ALPHAS = (0.99, 1.01)


def power_scaling(draws: FloatArray, log_prior: FloatArray, log_likelihood: FloatArray) -> PowerScaling:
    """Power-scaling sensitivity of one scalar.

    Parameters
    ----------
    draws : ndarray, shape (chains, draws)
        Of the scalar.
    log_prior, log_likelihood : ndarray, shape (chains * draws,)
        Joint log densities of the same draws, up to a constant.

    Notes
    -----
    Prior and likelihood both sensitive: the two pull against each other, or the prior is merely
    informative; read it as "prior and data both matter". Prior alone: it dominates a weak likelihood.
    """
    prior = _sensitivity(draws, log_prior)
    likelihood = _sensitivity(draws, log_likelihood)
    if prior < POWER_SCALING_THRESHOLD:
        return PowerScaling(prior, likelihood, "none")
    both = likelihood >= POWER_SCALING_THRESHOLD
    return PowerScaling(prior, likelihood, "prior and data both matter" if both else "prior dominates")


def _sensitivity(draws: FloatArray, component: FloatArray) -> float:
    centred = (component - component.mean()).reshape(draws.shape)
    if not np.ptp(centred) > 0.0:
        return 0.0  # a flat prior has nothing to scale
    lower, upper = (
        np.exp(array_stats.power_scale_lw(centred, alpha=alpha, axis=(-2, -1))) for alpha in ALPHAS
    )
    return float(
        array_stats.power_scale_sense(draws, lower, upper, lower_alpha=ALPHAS[0], upper_alpha=ALPHAS[1])
    )
