"""One run of the sampler on a bound model, with what it says about itself."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import Any

import numpy as np
import nutpie
import pyarrow  # type: ignore[import-untyped]
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
    # One chain first: when no start is found, nutpie leaves the threads of further chains running on
    # memory that Python frees, and the process dies of it, now or when it ends.
    if _run(bound, replace(settings, draws=1, tune=1, chains=1, cores=1)) is None:
        return None
    trace = _run(bound, settings)
    if trace is None:
        return None
    # The labelled data sets that nutpie would build of twenty statistics cost more than the sampling.
    draws, stats = trace.get_arrow_trace()
    coefficients = _kept(draws, structure.term, settings.draws)
    shape = (settings.chains, settings.draws)
    auxiliary = structure.family.auxiliary
    return RawDraws(
        coefficients.reshape(*shape, structure.columns),
        np.empty((*shape, 0)) if auxiliary is None else _kept(draws, auxiliary, settings.draws),
        _kept(stats, "diverging", settings.draws)[..., 0].astype(np.bool_),
        _kept(stats, "energy", settings.draws)[..., 0],
    )


def _run(bound: Any, settings: SamplerSettings) -> Any:
    try:
        return nutpie.sample(
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
            return_raw_trace=True,
        )
    except RuntimeError as error:
        # nutpie says alike that the density is nowhere finite, which is the study's, and that it
        # could not be computed at all (code 1), which is a defect of ours.
        if "initialization points failed" not in str(error) or "ErrorCode(1)" in str(error):
            raise
        return None


def _kept(batches: Sequence[Any], name: str, count: int) -> FloatArray:
    """Read the last `count` rows of a column in the Arrow table of each chain, shape (chains, count, m)."""
    arrays = []
    for batch in batches:
        column = pyarrow.array(batch.column(name))
        values = column.flatten() if pyarrow.types.is_large_list(column.type) else column
        arrays.append(values.to_numpy(zero_copy_only=False).reshape(batch.num_rows, -1)[-count:])
    return np.stack(arrays).astype(np.float64)
