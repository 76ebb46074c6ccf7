"""Summaries of posterior draws, with Monte Carlo errors.

R-hat, effective sample sizes and Monte Carlo standard errors follow Vehtari,
Gelman, Simpson, Carpenter and Buerkner (2021), Bayesian Analysis 16:667-718, as
implemented in ArviZ; level and kind of every interval are arguments here and
never ArviZ's own settings.
"""

from __future__ import annotations

import numpy as np
from arviz_stats.base import array_stats
from numpy.typing import NDArray

from reanalysis.bayesian.result import Marginal

FloatArray = NDArray[np.float64]

CORE = 0.5
"""Mass of the inner interval that pictures draw thick."""


def summarise(draws: FloatArray, level: float) -> Marginal:
    """Summarise one scalar's draws.

    Parameters
    ----------
    draws : ndarray, shape (chains, draws)
    level : float
        Mass of the equal-tailed and of the highest-density interval.
    """
    tail = (1.0 - level) / 2.0
    low, core_low, median, core_high, high = np.quantile(
        draws, [tail, (1.0 - CORE) / 2.0, 0.5, (1.0 + CORE) / 2.0, 1.0 - tail]
    )
    hdi_low, hdi_high = highest_density(draws.ravel(), level)
    prob_positive = float(np.mean(draws > 0.0))
    return Marginal(
        mean=float(np.mean(draws)),
        median=float(median),
        sd=float(np.std(draws, ddof=1)),
        low=float(low),
        high=float(high),
        hdi_low=hdi_low,
        hdi_high=hdi_high,
        core_low=float(core_low),
        core_high=float(core_high),
        prob_positive=prob_positive,
        mcse_mean=float(array_stats.mcse(draws, method="mean")),
        mcse_median=quantile_error(draws, 0.5),
        mcse_low=quantile_error(draws, tail),
        mcse_high=quantile_error(draws, 1.0 - tail),
        mcse_prob_positive=probability_error(draws > 0.0),
        rhat=float(array_stats.rhat(draws, method="rank")),
        ess_bulk=float(array_stats.ess(draws, method="bulk")),
        ess_tail=float(array_stats.ess(draws, method="tail", prob=(0.05, 0.95))),
    )


def highest_density(draws: FloatArray, level: float) -> tuple[float, float]:
    """The shortest interval that holds `level` of the draws (Chen and Shao 1999).

    Parameters
    ----------
    draws : ndarray, shape (s,)
    level : float

    Returns
    -------
    low, high : float
    """
    ordered = np.sort(draws)
    inside = min(max(int(np.floor(level * len(ordered))), 1), len(ordered) - 1)
    widths = ordered[inside:] - ordered[: len(ordered) - inside]
    start = int(np.argmin(widths))
    return float(ordered[start]), float(ordered[start + inside])


def quantile_error(draws: FloatArray, probability: float) -> float:
    """Monte Carlo standard error of a quantile; `draws` has shape (chains, draws)."""
    return float(array_stats.mcse(draws, method="quantile", prob=probability))


def probability_error(indicator: NDArray[np.bool_]) -> float:
    """Monte Carlo standard error of a probability, sqrt(p (1 - p) / ESS).

    Parameters
    ----------
    indicator : ndarray of bool, shape (chains, draws)
        Whether each draw has the property.

    Notes
    -----
    Where all draws agree the sample says nothing about its own error; with p = 1 - 1/S or 1/S in
    its place, the error is of the order of one draw among S.
    """
    size = indicator.size
    share = min(max(float(np.mean(indicator)), 1.0 / size), 1.0 - 1.0 / size)
    varies = bool(np.any(indicator)) and not bool(np.all(indicator))
    effective = float(array_stats.ess(indicator.astype(np.float64), method="mean")) if varies else float(size)
    return float(np.sqrt(share * (1.0 - share) / max(effective, 1.0)))
