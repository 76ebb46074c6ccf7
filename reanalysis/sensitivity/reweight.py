"""Draws of one fit re-weighted to another prior by Pareto-smoothed importance sampling.

Vehtari, Simpson, Gelman, Yao and Gabry (2024), Journal of Machine Learning
Research 25(72).
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from arviz_stats.base import array_stats
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class Weights:
    """Normalised importance weights and whether to trust them.

    Attributes
    ----------
    values : ndarray, shape (s,)
        Sum to one.
    pareto_k : float
        Shape of the weights' tail; above `pareto_k_limit` the weights are not to be used.
    """

    values: FloatArray
    pareto_k: float


ROUNDING = 1e-9
"""Log ratios that differ by less are equal but for rounding."""


def pareto_k_limit(draws: int) -> float:
    """Largest Pareto k at which weighted means of `draws` draws can be trusted: min(1 - 1/log10 S, 0.7)."""
    return float(min(1.0 - 1.0 / np.log10(draws), 0.7))


def smooth_weights(log_ratio: FloatArray) -> Weights:
    """Pareto-smooth the importance weights of independent log ratios, shape (s,)."""
    if not np.ptp(log_ratio) > ROUNDING:  # the same prior: nothing to smooth
        return Weights(np.full(log_ratio.shape, 1.0 / log_ratio.size), -np.inf)
    # ArviZ takes the log likelihood of a left-out observation, which is minus the log ratio.
    log_weights, pareto_k = array_stats.psislw(-log_ratio)
    values = np.exp(log_weights - np.max(log_weights))
    return Weights(values / values.sum(), float(pareto_k))


def effective_size(log_ratio: FloatArray) -> float:
    """Kish's effective number of draws under raw weights, (sum w)^2 / sum w^2."""
    weights = np.exp(log_ratio - np.max(log_ratio))
    return float(weights.sum() ** 2 / np.sum(weights**2))


def weighted_quantiles(values: FloatArray, weights: FloatArray, probabilities: FloatArray) -> FloatArray:
    """Quantiles of weighted draws, interpolated between the midpoints of the weights' steps.

    Parameters
    ----------
    values, weights : ndarray, shape (s,)
        Weights sum to one.
    probabilities : ndarray, shape (m,)
    """
    order = np.argsort(values)
    cumulative = np.cumsum(weights[order]) - 0.5 * weights[order]
    return np.interp(probabilities, cumulative, values[order])
