"""One run of the sampler on a bound model, with what it says about itself."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np
import nutpie
from numpy.typing import NDArray

from reanalysis.bayesian.model import Structure
from reanalysis.bayesian.settings import SamplerSettings

FloatArray = NDArray[np.float64]


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


def sample(bound: Any, structure: Structure, settings: SamplerSettings) -> RawDraws | None:
    """Run the sampler.

    Parameters
    ----------
    bound : nutpie model
        Bound to data and priors.
    structure : Structure
        Of the model; names its parameters.
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
    except RuntimeError as error:
        # nutpie says alike that the density is nowhere finite, which is the study's, and that it
        # could not be computed at all (code 1), which is a defect of ours.
        if "initialization points failed" not in str(error) or "ErrorCode(1)" in str(error):
            raise
        return None
    posterior, stats = trace["posterior"], trace["sample_stats"]
    coefficients = np.asarray(posterior[structure.term].values, dtype=np.float64)
    shape = coefficients.shape[:2]
    auxiliary = structure.family.auxiliary
    extra = (
        np.empty((*shape, 0))
        if auxiliary is None
        else np.asarray(posterior[auxiliary].values, dtype=np.float64).reshape(*shape, 1)
    )
    return RawDraws(
        coefficients.reshape(*shape, structure.columns),
        extra,
        np.asarray(stats["diverging"].values, dtype=np.bool_),
        np.asarray(stats["energy"].values, dtype=np.float64),
    )
