"""The computation check: whether a sampler run is sound, doubtful or failed."""

from __future__ import annotations

import numpy as np
from arviz_stats.base import array_stats

from reanalysis.bayesian.limits import FAILED, SOUND
from reanalysis.bayesian.result import ComputationCheck, Marginal, Verdict
from reanalysis.bayesian.sampler import RawDraws


def check_computation(raw: RawDraws, marginals: tuple[Marginal, ...], attempts: int) -> ComputationCheck:
    """Judge a run by its worst parameter and its worst chain.

    Parameters
    ----------
    raw : RawDraws
    marginals : tuple of Marginal
        Of every coefficient and auxiliary parameter.
    attempts : int
        How many runs it took to get here.
    """
    max_rhat = max(_or_infinity(marginal.rhat) for marginal in marginals)
    min_bulk = min(_or_zero(marginal.ess_bulk) for marginal in marginals)
    min_tail = min(_or_zero(marginal.ess_tail) for marginal in marginals)
    min_bfmi = float(np.min(array_stats.bfmi(raw.energy)))
    divergences = int(raw.diverging.sum())
    share = divergences / raw.diverging.size
    findings = []
    verdict: Verdict = "sound"
    for limits, worse in ((SOUND, "doubtful"), (FAILED, "failed")):
        outside = [
            (max_rhat > limits.rhat, f"R-hat above {limits.rhat:g}: the chains disagree"),
            (min_bulk < limits.ess, f"bulk effective sample size below {limits.ess:g}"),
            (min_tail < limits.ess, f"tail effective sample size below {limits.ess:g}"),
            (share > limits.divergent_share, "divergent transitions"),
            (_or_zero(min_bfmi) < limits.bfmi, f"E-BFMI below {limits.bfmi:g}"),
        ]
        broken = [words for is_outside, words in outside if is_outside]
        if broken:
            verdict = "failed" if worse == "failed" else "doubtful"
            findings = broken
    return ComputationCheck(
        verdict=verdict,
        divergences=divergences,
        draws=int(raw.diverging.size),
        max_rhat=max_rhat,
        min_ess_bulk=min_bulk,
        min_ess_tail=min_tail,
        min_bfmi=min_bfmi,
        attempts=attempts,
        findings=tuple(findings),
    )


def _or_infinity(value: float) -> float:
    return value if np.isfinite(value) else float("inf")


def _or_zero(value: float) -> float:
    return value if np.isfinite(value) else 0.0
