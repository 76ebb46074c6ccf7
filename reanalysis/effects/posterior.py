"""The Bayesian answer to a question under one prior set."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from reanalysis.bayesian.result import NoPosterior, PosteriorFit, PosteriorResult
from reanalysis.bayesian.summaries import probability_error
from reanalysis.effects.result import (
    NoPosteriorAnswer,
    PosteriorAnswer,
    PosteriorResultForQuestion,
    Question,
    TailProbability,
)

FloatArray = NDArray[np.float64]
BoolArray = NDArray[np.bool_]


def answer_posterior(question: Question, fit: PosteriorResult) -> PosteriorResultForQuestion:
    """Answer a question from the posterior under one prior set."""
    if isinstance(fit, NoPosterior):
        return NoPosteriorAnswer(fit.prior_set.name, fit.reason)
    marginal = fit.coefficients[question.column]
    draws = effect_draws(question, fit)
    limit = question.matters_beyond
    return PosteriorAnswer(
        prior_set=fit.prior_set.name,
        median=marginal.median,
        low=marginal.low,
        high=marginal.high,
        core_low=marginal.core_low,
        core_high=marginal.core_high,
        mcse_median=marginal.mcse_median,
        mcse_low=marginal.mcse_low,
        mcse_high=marginal.mcse_high,
        direction=_probability(in_direction(question, draws)),
        beyond=None if limit is None else _probability(beyond(question, draws)),
        negligible=None if limit is None else _probability(np.abs(draws) < limit),
    )


def effect_draws(question: Question, fit: PosteriorFit) -> FloatArray:
    """Draws of the questioned effect, shape (chains, draws)."""
    return fit.draws.coefficients[..., question.column]


def in_direction(question: Question, draws: FloatArray) -> BoolArray:
    """Whether each draw has the asked sign; for ``either``, the sign that most draws have."""
    positive, negative = draws > 0.0, draws < 0.0
    if question.direction == "either":
        return negative if np.mean(negative) > np.mean(positive) else positive
    return negative if question.direction == "less" else positive


def beyond(question: Question, draws: FloatArray) -> BoolArray:
    """Whether each draw exceeds the smallest effect that matters, in the asked direction.

    Raises
    ------
    ValueError
        When the question states none.
    """
    limit = question.matters_beyond
    if limit is None:
        raise ValueError(f'"{question.name}" states no smallest effect that matters')
    match question.direction:
        case "greater":
            return draws > limit
        case "less":
            return draws < -limit
        case _:
            return np.abs(draws) > limit


def _probability(indicator: BoolArray) -> TailProbability:
    return TailProbability(float(np.mean(indicator)), probability_error(indicator))
