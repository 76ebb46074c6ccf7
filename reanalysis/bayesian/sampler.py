"""One run of the sampler on a bound model, with what it says about itself."""

from __future__ import annotations

import hashlib
from dataclasses import dataclass
from typing import Any

import numpy as np
import nutpie
from numpy.typing import NDArray

from reanalysis.bayesian.model import COEFFICIENTS

FloatArray = NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class SamplerSettings:
    """Settings of one run.

    Attributes
    ----------
    seed : int
    draws, tune, chains : int
        Kept and tuning iterations of each chain; number of chains.
    target_accept : float
    low_rank : bool
        Whether the mass matrix adapts to correlated parameters.
    cores : int
        The draws are the same for any number.
    """

    seed: int
    draws: int
    tune: int
    chains: int
    target_accept: float
    low_rank: bool
    cores: int


@dataclass(frozen=True, slots=True)
class RawDraws:
    """Draws on the sampler's scale.

    Attributes
    ----------
    coefficients : ndarray, shape (chains, draws, k)
    auxiliary : ndarray, shape (chains, draws, a)
    diverging : ndarray of bool, shape (chains, draws)
    energy : ndarray, shape (chains, draws)
    """

    coefficients: FloatArray
    auxiliary: FloatArray
    diverging: NDArray[np.bool_]
    energy: FloatArray


def derive_seed(base: int, label: str) -> int:
    """Derive the seed of one fit from the study's seed and a label such as the prior set's name.

    The same pair gives the same seed whatever the order of the fits and whoever runs them.
    """
    digest = hashlib.sha256(f"{base}/{label}".encode()).digest()
    return int.from_bytes(digest[:4], "big") >> 1


def sample(bound: Any, auxiliary: str | None, settings: SamplerSettings) -> RawDraws | None:
    """Run the sampler.

    Parameters
    ----------
    bound : nutpie model
        Bound to data and priors.
    auxiliary : str or None
        Name of the family's auxiliary parameter.
    settings : SamplerSettings

    Returns
    -------
    RawDraws or None
        None when no chain could be started: the log posterior has no finite value near its start.
    """
    try:
        trace = nutpie.sample(
            bound,
            draws=settings.draws,
            tune=settings.tune,
            chains=settings.chains,
            cores=settings.cores,
            seed=settings.seed,
            target_accept=settings.target_accept,
            adaptation="low_rank" if settings.low_rank else "diag",
            save_warmup=False,
            progress_bar=False,
        )
    except RuntimeError:  # what nutpie raises when every initial point fails
        return None
    posterior, stats = trace["posterior"], trace["sample_stats"]
    coefficients = np.asarray(posterior[COEFFICIENTS].values, dtype=np.float64)
    shape = coefficients.shape[:2]
    extra = (
        np.empty((*shape, 0))
        if auxiliary is None
        else np.asarray(posterior[auxiliary].values, dtype=np.float64).reshape(*shape, 1)
    )
    return RawDraws(
        coefficients,
        extra,
        np.asarray(stats["diverging"].values, dtype=np.bool_),
        np.asarray(stats["energy"].values, dtype=np.float64),
    )
