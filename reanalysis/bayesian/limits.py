"""The limits of the computation check."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class Limits:
    """What a run must keep to.

    Attributes
    ----------
    rhat : float
        Above it the chains disagree (Vehtari et al. 2021 recommend 1.01).
    ess : float
        Bulk and tail effective sample sizes below it leave R-hat and interval limits unreliable
        (Vehtari et al. 2021: 400, that is 100 for each of four chains).
    divergent_share : float
        Share of divergent transitions above it; each of them is a place that the sampler could
        not explore (Betancourt 2017).
    bfmi : float
        E-BFMI below it in any chain: the tails are hardly explored (Betancourt 2016).
    """

    rhat: float
    ess: float
    divergent_share: float
    bfmi: float


SOUND = Limits(rhat=1.01, ess=400.0, divergent_share=0.0, bfmi=0.3)
"""Within these a run is sound."""

FAILED = Limits(rhat=1.05, ess=100.0, divergent_share=0.02, bfmi=0.1)
"""Outside any of these a run has failed and its numbers are not results."""
