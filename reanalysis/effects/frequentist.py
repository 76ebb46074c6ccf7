"""The frequentist answer to a question: estimate, interval, p, and tests against what matters."""

from __future__ import annotations

import math
from functools import partial

from scipy import stats

from reanalysis.effects.result import (
    FrequentistAnswer,
    FrequentistResult,
    NoFrequentistAnswer,
    Question,
    SizeTests,
)
from reanalysis.frequentist.result import Estimate, FrequentistFit, NotEstimable


def answer_frequentist(question: Question, fit: FrequentistFit) -> FrequentistResult:
    """Answer a question from the frequentist fit."""
    result = fit.coefficient(question.effect)
    if isinstance(result, NotEstimable):
        return NoFrequentistAnswer(result.reason, result.advice)
    return FrequentistAnswer(
        estimate=result.estimate,
        se=result.se,
        low=result.low,
        high=result.high,
        p=result.p,
        p_direction=_direction_p(question, result),
        size=None if question.matters_beyond is None else _size_tests(question, result),
    )


def upper_tail(statistic: float, df: float) -> float:
    """P(T > statistic) for Student's t, or for the standard normal when `df` is infinite."""
    return float(stats.norm.sf(statistic) if math.isinf(df) else stats.t.sf(statistic, df))


def _direction_p(question: Question, result: Estimate) -> float:
    match question.direction:
        case "greater":
            return upper_tail(result.statistic, result.df)
        case "less":
            return upper_tail(-result.statistic, result.df)
        case _:
            return result.p


def _size_tests(question: Question, result: Estimate) -> SizeTests:
    limit = question.matters_beyond or 0.0
    tail = partial(upper_tail, df=result.df)
    beyond_up = tail(_ratio(result.estimate - limit, result.se))
    beyond_down = tail(_ratio(-limit - result.estimate, result.se))
    below_up = tail(_ratio(limit - result.estimate, result.se))
    above_down = tail(_ratio(result.estimate + limit, result.se))
    p_beyond = {
        "greater": beyond_up,
        "less": beyond_down,
        "either": min(1.0, 2.0 * min(beyond_up, beyond_down)),
    }[question.direction]
    return SizeTests(p_beyond=p_beyond, p_equivalence=max(below_up, above_down))


def _ratio(difference: float, se: float) -> float:
    # A perfect fit has standard error 0: any difference at all is then beyond doubt.
    if se > 0.0:
        return difference / se
    return math.copysign(math.inf, difference) if difference != 0.0 else 0.0
