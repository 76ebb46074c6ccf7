"""What each analysis concludes about a question.

The rules are the conventions of each side and are printed in the report. The
frequentist side goes by the confidence interval at the study's level: a claim is
supported when the whole interval agrees with it, contradicted when the whole
interval speaks against it. The Bayesian side goes by the probability that the
author needs to act: supported from that probability on, contradicted when the
opposite has it.
"""

from __future__ import annotations

from reanalysis.comparison.result import Conclusion, ConclusionResult, NoConclusion, Side, Standing
from reanalysis.effects.result import (
    FrequentistAnswer,
    FrequentistResult,
    NoFrequentistAnswer,
    NoPosteriorAnswer,
    PosteriorResultForQuestion,
    Question,
    TailProbability,
)


def conclude_frequentist(question: Question, answer: FrequentistResult) -> ConclusionResult:
    """Conclude from a confidence interval."""
    if isinstance(answer, NoFrequentistAnswer):
        return NoConclusion(answer.reason)
    low, high = _towards(question, answer)
    size = _size(question, low, high)
    if question.direction != "either":
        return Conclusion(_exceeds(low, high, 0.0), size)
    if low > 0.0 or high < 0.0:
        return Conclusion("supported", size, side_of(low))
    return Conclusion("open", size)


def conclude_posterior(question: Question, answer: PosteriorResultForQuestion) -> ConclusionResult:
    """Conclude from posterior probabilities."""
    if isinstance(answer, NoPosteriorAnswer):
        return NoConclusion(answer.reason)
    direction = _reached(answer.direction, question.act_when)
    size = None if answer.beyond is None else _reached(answer.beyond, question.act_when)
    if question.direction == "either" and direction == "supported":
        return Conclusion(direction, size, side_of(answer.median))
    return Conclusion(direction, size)


def side_of(effect: float) -> Side:
    """The side of zero that an effect is on."""
    return "below" if effect < 0.0 else "above"


def _towards(question: Question, answer: FrequentistAnswer) -> tuple[float, float]:
    if question.direction == "less":
        return -answer.high, -answer.low
    return answer.low, answer.high


def _size(question: Question, low: float, high: float) -> Standing | None:
    limit = question.matters_beyond
    if limit is None:
        return None
    if question.direction != "either":
        return _exceeds(low, high, limit)
    if low > limit or high < -limit:
        return "supported"
    return "contradicted" if -limit < low and high < limit else "open"


def _exceeds(low: float, high: float, limit: float) -> Standing:
    if low > limit:
        return "supported"
    return "contradicted" if high < limit else "open"


def _reached(probability: TailProbability, needed: float) -> Standing:
    if probability.value >= needed:
        return "supported"
    return "contradicted" if 1.0 - probability.value >= needed else "open"
