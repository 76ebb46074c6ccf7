"""Randomised quantile residuals."""

from __future__ import annotations

import numpy as np
from scipy import special, stats

from reanalysis.design.model import FloatArray
from reanalysis.study.spec import FamilyName


def quantile_residuals(family: FamilyName, y: FloatArray, mean: FloatArray, seed: int) -> FloatArray:
    """Residuals of a discrete response that are standard normal when the model is right.

    Parameters
    ----------
    family : str
        ``bernoulli`` or ``poisson``.
    y, mean : ndarray, shape (n,)
        Response and fitted mean.
    seed : int
        Of the random point within each outcome's probability.

    Returns
    -------
    ndarray, shape (n,)
        ``Phi^-1(u)`` with u uniform between F(y - 1) and F(y).

    References
    ----------
    Dunn, P. K. and Smyth, G. K. (1996). Randomized quantile residuals. Journal of Computational
    and Graphical Statistics 5, 236-244.
    """
    share = np.random.default_rng(seed).uniform(size=len(y))
    below, mass, above = _split_bernoulli(y, mean) if family == "bernoulli" else _split_poisson(y, mean)
    # Each tail is computed from its own end, so that neither rounds to 1.
    lower, upper = below + share * mass, above + (1.0 - share) * mass
    tiny = np.finfo(float).tiny
    return np.asarray(
        np.where(
            lower < upper,
            special.ndtri(np.maximum(lower, tiny)),
            -special.ndtri(np.maximum(upper, tiny)),
        ),
        dtype=np.float64,
    )


def _split_bernoulli(y: FloatArray, mean: FloatArray) -> tuple[FloatArray, FloatArray, FloatArray]:
    event = y > 0.5
    return np.where(event, 1.0 - mean, 0.0), np.where(event, mean, 1.0 - mean), np.where(event, 0.0, mean)


def _split_poisson(y: FloatArray, mean: FloatArray) -> tuple[FloatArray, FloatArray, FloatArray]:
    return (
        np.asarray(stats.poisson.cdf(y - 1.0, mean), dtype=np.float64),
        np.asarray(stats.poisson.pmf(y, mean), dtype=np.float64),
        np.asarray(stats.poisson.sf(y, mean), dtype=np.float64),
    )
