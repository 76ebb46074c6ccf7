"""The answer to a question as its prior is made narrower or wider around no effect.

Everything but the width of the questioned effect's prior stays as in the main
prior set. Each width re-weights the draws of the fit that serves it best; where
the weights cannot be trusted, the model is fitted at that width, and that fit
serves its neighbours in turn.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from reanalysis.bayesian.densities import is_unbounded, log_density
from reanalysis.bayesian.log_density import log_prior
from reanalysis.bayesian.result import (
    NoPosterior,
    ParameterPrior,
    PosteriorFit,
    PosteriorResult,
    PriorSet,
)
from reanalysis.design.model import Design
from reanalysis.effects.posterior import beyond, in_direction
from reanalysis.effects.result import Question
from reanalysis.sensitivity.result import NoSweep, Sweep, SweepPoint, SweepResult
from reanalysis.sensitivity.reweight import (
    Weights,
    effective_size,
    pareto_k_limit,
    smooth_weights,
    weighted_quantiles,
)
from reanalysis.sensitivity.tipping import find_tipping
from reanalysis.study.distributions import Flat, Normal

FloatArray = NDArray[np.float64]
Refit = Callable[[PriorSet], PosteriorResult]

WIDTHS = 33
"""Widths in a sweep."""

NARROWEST, WIDEST = 0.1, 20.0
"""In posterior standard deviations: from "hardly anything may happen" to "anything may"."""

EFFECTIVE = 400.0
"""Effective draws that re-weighting must leave: a probability is then known to about 0.025."""


@dataclass(frozen=True, slots=True)
class _Base:
    """Draws that can be re-weighted.

    Attributes
    ----------
    effect : ndarray, shape (s,)
        Of the questioned effect.
    rest : ndarray, shape (s,)
        Log prior of everything but the effect under the main prior set, less the whole log prior
        that the draws were made under.
    """

    effect: FloatArray
    rest: FloatArray


def sweep_question(
    question: Question, main: PosteriorResult, others: tuple[PosteriorFit, ...], design: Design, refit: Refit
) -> SweepResult:
    """Sweep the width of one question's prior.

    Parameters
    ----------
    question : Question
    main : PosteriorFit or NoPosterior
        Under the main prior set.
    others : tuple of PosteriorFit
        Fits under other prior sets whose draws may serve as well.
    design : Design
    refit : callable
        Fits the model under a prior set; called where re-weighting cannot be trusted.
    """
    if isinstance(main, NoPosterior):
        return NoSweep(question.name, f"there is no posterior under the main prior set: {main.reason}")
    fits = [fit for fit in (main, *others) if _covers(fit.prior_set, main.prior_set, question.column)]
    bases = [_base(fit, main.prior_set, question, design) for fit in fits]
    sided = _sided(question, main)
    points: list[SweepPoint] = []
    refits = 0
    for width in reversed(choose_widths(question, main)):
        served: tuple[_Base, Weights | None] | None = _best_weights(bases, width)
        if served is None:
            fit = refit(_at_width(main.prior_set, question, width))
            refits += 1
            if isinstance(fit, NoPosterior):
                continue
            base = _base(fit, main.prior_set, question, design)
            bases.append(base)
            served = (base, None)
        points.append(_point(question, sided, main.level, width, served))
    if not points:
        return NoSweep(question.name, "the model could not be fitted at any width")
    points.reverse()
    return Sweep(
        question=question.name,
        points=tuple(points),
        direction_tipping=find_tipping("direction", points, question.act_when),
        beyond_tipping=(
            None if question.matters_beyond is None else find_tipping("beyond", points, question.act_when)
        ),
        refits=refits,
    )


def _trustworthy(weights: Weights) -> bool:
    return weights.pareto_k <= pareto_k_limit(weights.values.size) and (
        1.0 / float(np.sum(weights.values**2)) >= EFFECTIVE
    )


def choose_widths(question: Question, main: PosteriorFit) -> FloatArray:
    """Choose the widths of a sweep, increasing and evenly spaced in the logarithm, shape (33,).

    They span at least two orders of magnitude around the posterior's own spread and reach the main
    prior's width where that is wider.
    """
    spread = main.coefficients[question.column].sd
    prior = main.prior_set.coefficients[question.column].distribution
    widest = max(WIDEST * spread, prior.sd if isinstance(prior, Normal) else 0.0)
    return np.geomspace(NARROWEST * spread, widest, WIDTHS)


def _covers(own: PriorSet, main: PriorSet, column: int) -> bool:
    # Draws under a prior on a half line or an interval lack values that no weight can bring back.
    for position, (mine, wanted) in enumerate(zip(own.coefficients, main.coefficients, strict=True)):
        same = mine.distribution == wanted.distribution and own.intercept_at == main.intercept_at
        if not is_unbounded(mine.distribution) and (position == column or not same):
            return False
    return True


def _base(fit: PosteriorFit, main: PriorSet, question: Question, design: Design) -> _Base:
    silent = ParameterPrior(question.effect, Flat(), "left out here, added for each width")
    without = _replace_prior(main, question.column, silent)
    rest = log_prior(fit.draws, without, design) - log_prior(fit.draws, fit.prior_set, design)
    return _Base(fit.draws.flat[:, question.column], rest)


def _replace_prior(prior_set: PriorSet, column: int, prior: ParameterPrior) -> PriorSet:
    coefficients = list(prior_set.coefficients)
    coefficients[column] = prior
    return replace(prior_set, coefficients=tuple(coefficients))


def _at_width(main: PriorSet, question: Question, width: float) -> PriorSet:
    prior = ParameterPrior(question.effect, Normal(sd=float(width)), "one width of the sweep")
    changed = _replace_prior(main, question.column, prior)
    return replace(changed, name=f"{main.name}, {question.effect} with SD {width:.6g}")


def _best_weights(bases: list[_Base], width: float) -> tuple[_Base, Weights] | None:
    if not bases:
        return None
    normal = Normal(sd=float(width))
    ratios = [base.rest + log_density(normal, base.effect) for base in bases]
    best = int(np.argmax([effective_size(ratio) for ratio in ratios]))
    weights = smooth_weights(ratios[best])
    return (bases[best], weights) if _trustworthy(weights) else None


def _sided(question: Question, main: PosteriorFit) -> Question:
    """Give a question about either sign the one that the main posterior's median has, at every width."""
    if question.direction != "either":
        return question
    median = main.coefficients[question.column].median
    return replace(question, direction="less" if median < 0.0 else "greater")


def _point(
    question: Question, sided: Question, level: float, width: float, source: tuple[_Base, Weights | None]
) -> SweepPoint:
    base, weights = source
    draws = base.effect
    shares = np.full(draws.size, 1.0 / draws.size) if weights is None else weights.values
    tail = (1.0 - level) / 2.0
    low, median, high = weighted_quantiles(draws, shares, np.array([tail, 0.5, 1.0 - tail]))
    return SweepPoint(
        width=float(width),
        prob_direction=float(shares @ in_direction(sided, draws)),
        prob_beyond=None if question.matters_beyond is None else float(shares @ beyond(question, draws)),
        median=float(median),
        low=float(low),
        high=float(high),
        method="refitted" if weights is None else "reweighted",
        pareto_k=float("-inf") if weights is None else weights.pareto_k,
    )
