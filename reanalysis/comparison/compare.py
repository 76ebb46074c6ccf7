"""Pair the two readings of a question, say whether they agree, and find the reason when they do not."""

from __future__ import annotations

from collections.abc import Sequence

from reanalysis.comparison.conclude import conclude_frequentist, conclude_posterior, side_of
from reanalysis.comparison.result import (
    Agreement,
    Compared,
    Conclusion,
    ConclusionResult,
    Dependence,
    NoConclusion,
    PriorReading,
    Reason,
    Side,
    Standing,
)
from reanalysis.effects.result import (
    FrequentistAnswer,
    FrequentistResult,
    PosteriorResultForQuestion,
    Question,
)
from reanalysis.sensitivity.result import PowerScaling, SweepResult

FLAT = "flat"


def compare(
    question: Question,
    frequentist: FrequentistResult,
    answers: Sequence[PosteriorResultForQuestion],
    main_prior: str,
    sensitivity: tuple[SweepResult, PowerScaling | None],
) -> Compared:
    """Compare both analyses of one question.

    Parameters
    ----------
    question : Question
    frequentist : FrequentistAnswer or NoFrequentistAnswer
    answers : sequence of PosteriorAnswer or NoPosteriorAnswer
        One for each prior set.
    main_prior : str
        Name of the main prior set; must be among `answers`.
    sensitivity : tuple
        The sweep and the power-scaling sensitivity.
    """
    readings = tuple(
        PriorReading(answer.prior_set, answer, conclude_posterior(question, answer)) for answer in answers
    )
    by_name = {reading.prior_set: reading for reading in readings}
    main = by_name[main_prior]
    conclusion = conclude_frequentist(question, frequentist)
    sweep, scaling = sensitivity
    return Compared(
        question=question,
        frequentist=frequentist,
        frequentist_conclusion=conclusion,
        readings=readings,
        main=main,
        agreement=agreement(conclusion, main.conclusion),
        reason=reason(question, frequentist, main, by_name.get(FLAT)),
        dependence=dependence(readings),
        sweep=sweep,
        power_scaling=scaling,
    )


def agreement(frequentist: ConclusionResult, bayesian: ConclusionResult) -> Agreement:
    """Classify two conclusions by the claims on which they stand alike."""
    if isinstance(frequentist, NoConclusion) or isinstance(bayesian, NoConclusion):
        return "cannot be compared"
    direction = _direction(frequentist) == _direction(bayesian)
    size = frequentist.size == bayesian.size
    if direction and size:
        return "agree"
    if direction:
        return "differ on size"
    return "differ on direction" if size else "differ on both"


def reason(
    question: Question, frequentist: FrequentistResult, main: PriorReading, flat: PriorReading | None
) -> Reason:
    """Find why the frequentist conclusion and the main reading's differ.

    Notes
    -----
    Tried in this order: one side has no answer; without prior information the Bayesian conclusion
    is the frequentist one, so the prior makes the difference; the frequentist tests at the bar
    that the question sets (one-sided, 1 - act_when) give the Bayesian conclusion, so the bars
    differ; otherwise the normal approximation behind the confidence interval and the likelihood
    itself differ, as they may in small samples.
    """
    conclusion = conclude_frequentist(question, frequentist)
    if isinstance(conclusion, NoConclusion) or not isinstance(frequentist, FrequentistAnswer):
        return "no estimate"
    if isinstance(main.conclusion, NoConclusion):
        return "no posterior"
    if conclusion == main.conclusion:
        return "none"
    if flat is not None and flat.conclusion == conclusion:  # so it is not the main one
        return "prior information"
    if _at_the_same_bar(question, frequentist) == main.conclusion:
        return "different bars"
    return "shape of the likelihood"


def dependence(readings: Sequence[PriorReading]) -> Dependence:
    """Name the conclusions that are not the same under every prior set that gave an answer."""
    conclusions = [reading.conclusion for reading in readings if isinstance(reading.conclusion, Conclusion)]
    direction = len({_direction(conclusion) for conclusion in conclusions}) > 1
    size = len({conclusion.size for conclusion in conclusions}) > 1
    if direction and size:
        return "both"
    return "direction" if direction else "size" if size else "none"


def _direction(conclusion: Conclusion) -> tuple[Standing, Side]:
    return conclusion.direction, conclusion.side


def _at_the_same_bar(question: Question, answer: FrequentistAnswer) -> Conclusion:
    bar = 1.0 - question.act_when
    positive = answer.p / 2.0 if answer.estimate > 0.0 else 1.0 - answer.p / 2.0
    if question.direction == "either":
        size = _size_at_bar(answer, bar)
        if min(positive, 1.0 - positive) <= bar:
            return Conclusion("supported", size, side_of(answer.estimate))
        return Conclusion("open", size)
    tail = positive if question.direction == "greater" else 1.0 - positive
    size = None if answer.size is None else _standing(answer.size.p_beyond, bar)
    return Conclusion(_standing(tail, bar), size)


def _size_at_bar(answer: FrequentistAnswer, bar: float) -> Standing | None:
    if answer.size is None:
        return None
    if answer.size.p_beyond / 2.0 <= bar:
        return "supported"
    return "contradicted" if answer.size.p_equivalence <= bar else "open"


def _standing(tail: float, bar: float) -> Standing:
    return "supported" if tail <= bar else "contradicted" if tail >= 1.0 - bar else "open"
