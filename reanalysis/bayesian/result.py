"""What the Bayesian analysis gives under one prior set: draws, summaries, and whether to believe them."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from reanalysis.study.distributions import Distribution

FloatArray = NDArray[np.float64]
Verdict = Literal["sound", "doubtful", "failed"]


@dataclass(frozen=True, slots=True)
class ParameterPrior:
    """The prior of one parameter, resolved to numbers.

    Attributes
    ----------
    name : str
        Public column name (or ``sigma``).
    distribution : Distribution
        In the parameter's own unit. The intercept's is that of the intercept at the centre of
        the data or at zero predictors, as the prior set says.
    origin : str
        Where the numbers come from, a clause: ``"scaled to the data: 2.5 sd(firmness) / sd(days)"``.
    """

    name: str
    distribution: Distribution
    origin: str


@dataclass(frozen=True, slots=True)
class PriorSet:
    """One complete choice of priors.

    Attributes
    ----------
    name : str
        ``flat``, ``weak``, ``sceptical`` or the author's name.
    source : str
        Where the set as a whole comes from.
    intercept_at : str
        Whether the intercept's prior is about the outcome at the ``centre`` of the predictors or at ``zero``.
    coefficients : tuple of ParameterPrior
        One for each design column, in order.
    auxiliary : tuple of ParameterPrior
        One for each auxiliary parameter of the family (none or ``sigma``).
    """

    name: str
    source: str
    intercept_at: Literal["centre", "zero"]
    coefficients: tuple[ParameterPrior, ...]
    auxiliary: tuple[ParameterPrior, ...]


@dataclass(frozen=True, slots=True)
class Draws:
    """Posterior draws on the data's own scale; the intercept is the one at zero predictors.

    Attributes
    ----------
    coefficients : ndarray, shape (chains, draws, k)
    auxiliary : ndarray, shape (chains, draws, a)
        `a` is 0 or 1.
    """

    coefficients: FloatArray
    auxiliary: FloatArray

    @property
    def flat(self) -> FloatArray:
        """Coefficients with the chains joined, shape (chains * draws, k)."""
        return self.coefficients.reshape(-1, self.coefficients.shape[-1])

    @property
    def flat_auxiliary(self) -> FloatArray:
        """Auxiliary parameters with the chains joined, shape (chains * draws, a)."""
        return self.auxiliary.reshape(self.coefficients.shape[0] * self.coefficients.shape[1], -1)


@dataclass(frozen=True, slots=True)
class Marginal:
    """Summary of one scalar's posterior.

    Attributes
    ----------
    mean, median, sd : float
    low, high : float
        Equal-tailed interval at the study's level.
    hdi_low, hdi_high : float
        Highest-density interval at the study's level.
    core_low, core_high : float
        Equal-tailed 50 % interval.
    prob_positive : float
        Share of the draws above zero.
    mcse_mean, mcse_median, mcse_low, mcse_high, mcse_prob_positive : float
        Monte Carlo standard errors.
    rhat, ess_bulk, ess_tail : float
        Vehtari et al. (2021).
    """

    mean: float
    median: float
    sd: float
    low: float
    high: float
    hdi_low: float
    hdi_high: float
    core_low: float
    core_high: float
    prob_positive: float
    mcse_mean: float
    mcse_median: float
    mcse_low: float
    mcse_high: float
    mcse_prob_positive: float
    rhat: float
    ess_bulk: float
    ess_tail: float


@dataclass(frozen=True, slots=True)
class ComputationCheck:
    """Whether a sampler run can be trusted.

    Attributes
    ----------
    verdict : str
    divergences, draws : int
        Divergent transitions among all kept draws.
    max_rhat, min_ess_bulk, min_ess_tail, min_bfmi : float
        Worst over parameters (R-hat, effective sample sizes) and chains (E-BFMI).
    attempts : int
        1, or 2 when the run was repeated with more tuning and a higher target acceptance.
    findings : tuple of str
        What was outside its limit, in words; empty when sound.
    """

    verdict: Verdict
    divergences: int
    draws: int
    max_rhat: float
    min_ess_bulk: float
    min_ess_tail: float
    min_bfmi: float
    attempts: int
    findings: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class PosteriorFit:
    """The posterior under one prior set, sound or doubtful.

    Attributes
    ----------
    prior_set : PriorSet
    level : float
        Of the credible intervals.
    draws : Draws
    coefficients : tuple of Marginal
        In the order of the design's columns; intercept at zero predictors.
    centred_intercept : Marginal or None
        The intercept at the centre of the predictors; None without an intercept.
    auxiliary : tuple of Marginal
    check : ComputationCheck
    """

    prior_set: PriorSet
    level: float
    draws: Draws
    coefficients: tuple[Marginal, ...]
    centred_intercept: Marginal | None
    auxiliary: tuple[Marginal, ...]
    check: ComputationCheck


@dataclass(frozen=True, slots=True)
class NoPosterior:
    """A prior set under which there is nothing to show.

    Attributes
    ----------
    prior_set : PriorSet
    reason : str
        Why, a clause: ``"improper: the data leave liner[film] without an upper limit"``.
    advice : str
        What to do.
    check : ComputationCheck or None
        Of the failed run; None when nothing was sampled.
    """

    prior_set: PriorSet
    reason: str
    advice: str
    check: ComputationCheck | None


PosteriorResult = PosteriorFit | NoPosterior
