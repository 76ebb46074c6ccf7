"""How far the answers depend on the prior."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

POWER_SCALING_THRESHOLD = 0.05
"""Sensitivity from which a quantity is flagged (Kallioinen et al. 2024)."""


@dataclass(frozen=True, slots=True)
class SweepPoint:
    """The answer to one question at one prior width.

    Attributes
    ----------
    width : float
        Standard deviation of the normal prior of the effect, centred at no effect, in its unit.
    prob_direction : float
        Of the asked sign; for ``either``, of the sign that the main posterior's median has.
    prob_beyond : float or None
        None when no smallest effect that matters was stated.
    median, low, high : float
        Posterior median and equal-tailed limits at the study's level.
    method : str
        ``reweighted`` draws of another fit, or ``refitted`` at this width.
    pareto_k : float
        Of the re-weighting; the limit decides on a refit. Minus infinity for a refit.
    """

    width: float
    prob_direction: float
    prob_beyond: float | None
    median: float
    low: float
    high: float
    method: Literal["reweighted", "refitted"]
    pareto_k: float


@dataclass(frozen=True, slots=True)
class TippingPrior:
    """The prior at which an answer changes.

    Attributes
    ----------
    claim : str
        ``direction`` or ``beyond``.
    width : float
        Prior standard deviation at which the probability crosses the one needed to act.
    reached_when : str
        ``wider``: the claim is supported by every prior in the sweep wider than this; ``narrower``.
    """

    claim: Literal["direction", "beyond"]
    width: float
    reached_when: Literal["wider", "narrower"]


@dataclass(frozen=True, slots=True)
class NoTipping:
    """No single tipping prior.

    Attributes
    ----------
    claim : str
        ``direction`` or ``beyond``.
    reached : str
        Over the sweep the claim is ``always`` or ``never`` supported, or changes ``several`` times.
    """

    claim: Literal["direction", "beyond"]
    reached: Literal["always", "never", "several"]


TippingResult = TippingPrior | NoTipping


@dataclass(frozen=True, slots=True)
class PowerScaling:
    """Power-scaling sensitivity of one question (Kallioinen et al. 2024).

    Attributes
    ----------
    prior, likelihood : float
        Sensitivity to raising the prior (all coefficients' and auxiliary priors together) or the
        likelihood to a power near one.
    diagnosis : str
        ``none``, ``prior and data both matter`` or ``prior dominates``.
    """

    prior: float
    likelihood: float
    diagnosis: Literal["none", "prior and data both matter", "prior dominates"]


@dataclass(frozen=True, slots=True)
class Sweep:
    """The posterior answer to one question as a function of the prior's width.

    Attributes
    ----------
    question : str
    points : tuple of SweepPoint
        In increasing width.
    direction_tipping : TippingPrior or NoTipping
    beyond_tipping : TippingPrior, NoTipping or None
        None when no smallest effect that matters was stated.
    refits : int
        How many widths needed a fit of their own.
    """

    question: str
    points: tuple[SweepPoint, ...]
    direction_tipping: TippingResult
    beyond_tipping: TippingResult | None
    refits: int


@dataclass(frozen=True, slots=True)
class NoSweep:
    """No sweep could be made; `reason` is a clause for the reader."""

    question: str
    reason: str


SweepResult = Sweep | NoSweep
