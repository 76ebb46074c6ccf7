"""The sentences of page 1; each is forced by numbers and conclusions of the analysis."""

from __future__ import annotations

from reanalysis.comparison.result import Compared, Conclusion, NoConclusion, PriorReading
from reanalysis.effects.result import (
    FrequentistAnswer,
    NoFrequentistAnswer,
    NoPosteriorAnswer,
    PosteriorAnswer,
    Question,
    TailProbability,
)
from reanalysis.report import numbers
from reanalysis.report.blocks import RichText, Strong, Text
from reanalysis.report.context import (
    Context,
    asked_words,
    change_words,
    frequentist_decimals,
    limit_words,
    posterior_decimals,
)


def headline(context: Context, compared: Compared) -> str:
    """Answer a question in a sentence or two that need no statistics."""
    main, frequentist = compared.main, compared.frequentist_conclusion
    if isinstance(main.conclusion, NoConclusion) or not isinstance(main.answer, PosteriorAnswer):
        return "This question cannot be answered here: there is no trustworthy posterior."
    size = _about(context, compared, main.answer)
    if isinstance(frequentist, NoConclusion):
        sentence = _without_estimate(compared, main.conclusion, size)
    elif compared.agreement == "agree":
        sentence = _agreed(compared.question, main.conclusion, size)
    else:
        sentence = _parted(compared.question, main.conclusion, frequentist)
    return sentence if compared.dependence == "none" else f"{sentence} The answer depends on the prior."


def _without_estimate(compared: Compared, conclusion: Conclusion, size: str) -> str:
    prior = compared.main.prior_set
    if conclusion.direction == "open":
        return f"The data alone give no estimate, and with the {prior} prior the answer stays open."
    return f"The data alone give no estimate; with the {prior} prior there is {size}."


def _about(context: Context, compared: Compared, answer: PosteriorAnswer) -> str:
    text = numbers.estimate(abs(answer.median), posterior_decimals(answer))
    ratio = context.ratio(answer.median)
    words = f"{change_words(answer.median)} of about "
    words += numbers.quantity(text, compared.question.unit)
    return f"{words} ({ratio})" if ratio else words


def _agreed(question: Question, conclusion: Conclusion, size: str) -> str:
    limit = limit_words(question)
    match (conclusion.direction, conclusion.size):
        case ("supported", "supported"):
            return f"Both analyses find {size}, more than the {limit} that matters."
        case ("supported", "contradicted"):
            return f"Both analyses find {size}, but less than the {limit} that would matter."
        case ("supported", "open"):
            return f"Both analyses find {size}; whether it is more than the {limit} that matters stays open."
        case ("supported", None):
            return f"Both analyses find {size}."
        case ("contradicted", _):
            return f"Both analyses find {size}: the opposite of what was asked about."
        case ("open", "contradicted"):
            return (
                f"Neither analysis establishes {asked_words(question)}, and both speak against "
                f"one of more than the {limit} that would matter."
            )
        case ("open", "supported"):
            return f"The effect is larger than {limit}, but its direction stays open."
        case _:
            return f"These data do not settle whether there is {asked_words(question)}."


_BY_SIDE = {"above": "an increase", "below": "a decrease"}


def _parted(question: Question, bayesian: Conclusion, frequentist: Conclusion) -> str:
    if bayesian.side != frequentist.side and "asked" not in (bayesian.side, frequentist.side):
        ours, theirs = (_BY_SIDE[conclusion.side] for conclusion in (bayesian, frequentist))
        return f"The two analyses part: the Bayesian one supports {ours}, the frequentist one {theirs}."
    if bayesian.direction != frequentist.direction:
        claim, ours, theirs = asked_words(question), bayesian.direction, frequentist.direction
    else:
        claim = f"{asked_words(question)} of more than {limit_words(question)}"
        ours, theirs = bayesian.size or "open", frequentist.size or "open"
    first = {"supported": f"supports {claim}", "contradicted": f"speaks against {claim}"}
    then = {"supported": "supports it", "contradicted": "speaks against it", "open": "leaves it open"}
    if ours == "open":
        return f"The two analyses part: the frequentist one {first[theirs]}, the Bayesian one leaves it open."
    return f"The two analyses part: the Bayesian one {first[ours]}, the frequentist one {then[theirs]}."


def frequentist_reading(context: Context, compared: Compared) -> RichText:
    """Say what the frequentist analysis says about a question."""
    answer = compared.frequentist
    if isinstance(answer, NoFrequentistAnswer):
        return f"No estimate exists: {answer.reason}."
    unit = compared.question.unit
    decimals = frequentist_decimals(answer)
    estimate = numbers.quantity(numbers.estimate(answer.estimate, decimals), unit)
    interval = numbers.quantity(numbers.interval(answer.low, answer.high, decimals), unit)
    text = (
        f"Estimate {estimate}, {context.level} confidence interval {interval}, {numbers.p_equation(answer.p)}"
    )
    ratio = context.ratio(answer.estimate)
    if ratio:
        text += f" ({ratio}, {context.ratio_interval(answer.low, answer.high)})"
    return f"{text}. {_meaning_of_p(compared, answer)}{_interval_and_size(compared)}"


def _meaning_of_p(compared: Compared, answer: FrequentistAnswer) -> str:
    conclusion = compared.frequentist_conclusion
    if isinstance(conclusion, Conclusion) and conclusion.direction == "open":
        return "This neither establishes an effect nor shows that there is none."
    often = "fewer than 1" if answer.p < 0.001 else f"about {numbers.count(1000.0 * answer.p)}"
    return (
        f"Without any effect, data at least this far from it would turn up in {often} of 1,000 such studies."
    )


def _interval_and_size(compared: Compared) -> str:
    conclusion = compared.frequentist_conclusion
    if isinstance(conclusion, NoConclusion) or conclusion.size is None:
        return ""
    limit = limit_words(compared.question)
    return {
        "supported": f" The whole interval lies beyond {limit}.",
        "contradicted": f" The whole interval lies short of the {limit} that would matter.",
        "open": f" The interval does not settle whether the effect {exceeds_words(compared.question)}.",
    }[conclusion.size]


def bayesian_reading(compared: Compared) -> RichText:
    """Say what the Bayesian analysis says about a question under the main prior set."""
    answer, question = compared.main.answer, compared.question
    if isinstance(answer, NoPosteriorAnswer):
        return f"No posterior: {answer.reason}."
    text = f"Probability {_of(answer.direction)} that the effect is {sign_words(question, answer)}"
    if answer.beyond is not None:
        text += f", and {_of(answer.beyond)} that it {exceeds_words(question)}"
    reached = isinstance(compared.main.conclusion, Conclusion) and compared.main.conclusion.act
    needed = numbers.given(question.act_when)
    return (
        Text(f"{text}. {needed} is needed to act: "),
        Strong("reached" if reached else "not reached"),
        Text("."),
    )


def prior_reading(compared: Compared) -> RichText:
    """Say whether the conclusions depend on the prior."""
    given = [reading for reading in compared.readings if isinstance(reading.answer, PosteriorAnswer)]
    if len(given) < 2:
        return "This cannot be told: fewer than two prior sets gave a posterior."
    claim, deciding = _deciding(compared, given)
    low = min(deciding, key=lambda pair: pair[1].value)
    high = max(deciding, key=lambda pair: pair[1].value)
    span = _span(low, high)
    if compared.dependence == "none":
        return (
            f"No: the conclusions are the same under {_all_sets(len(given))}. The probability {claim} {span}."
        )
    about = {"direction": "the direction", "size": "the size", "both": "direction and size"}
    return f"Yes, for {about[compared.dependence]}: the probability {claim} {span}."


def _all_sets(number: int) -> str:
    return "both prior sets" if number == 2 else f"all {numbers.count(number)} prior sets"


def _span(low: tuple[PriorReading, TailProbability], high: tuple[PriorReading, TailProbability]) -> str:
    if _of(low[1]) == _of(high[1]):
        return f"is {_of(low[1])} under each"
    return f"goes from {_of(low[1])} ({low[0].prior_set}) to {_of(high[1])} ({high[0].prior_set})"


def _deciding(
    compared: Compared, given: list[PriorReading]
) -> tuple[str, list[tuple[PriorReading, TailProbability]]]:
    """Return the claim whose probability says most about the prior, and that probability in each set."""
    question = compared.question
    pairs = [(reading, reading.answer) for reading in given]
    if compared.dependence != "direction" and question.matters_beyond is not None:
        beyond = [
            (reading, answer.beyond)
            for reading, answer in pairs
            if isinstance(answer, PosteriorAnswer) and answer.beyond is not None
        ]
        return f"that the effect {exceeds_words(question)}", beyond
    answers = [(reading, answer) for reading, answer in pairs if isinstance(answer, PosteriorAnswer)]
    main = compared.main.answer
    words = sign_words(question, main if isinstance(main, PosteriorAnswer) else answers[0][1])
    return f"that the effect is {words}", [
        (reading, _of_sign(question, answer, words)) for reading, answer in answers
    ]


def _of_sign(question: Question, answer: PosteriorAnswer, words: str) -> TailProbability:
    """The probability of one sign, also where the other one is the more probable."""
    if sign_words(question, answer) == words:
        return answer.direction
    return TailProbability(1.0 - answer.direction.value, answer.direction.mcse)


def agreement_reading(context: Context, compared: Compared) -> str:
    """Say whether the two analyses agree and, when not, why."""
    match compared.agreement:
        case "agree":
            size = " and on its size" if compared.question.matters_beyond is not None else ""
            return f"Yes, on the direction of the effect{size}."
        case "cannot be compared":
            return "They cannot be compared: one of them has no answer."
        case "differ on direction":
            where = "on the direction"
        case "differ on size":
            where = "on the size"
        case _:
            where = "on direction and size"
    return f"Not {where}. {why_they_differ(context, compared)}"


def why_they_differ(context: Context, compared: Compared) -> str:
    """Give the reason that the numbers force, in one sentence."""
    match compared.reason:
        case "prior information":
            return (
                f"The {compared.main.prior_set} prior makes the difference: without prior information "
                "the Bayesian conclusion is the frequentist one."
            )
        case "different bars":
            return _bars_differ(context, compared.question)
        case "no estimate" | "no posterior":
            return "One of the two has no answer."
        case "none":
            return ""
        case _:
            return (
                "The confidence interval rests on a normal approximation, the posterior on the likelihood "
                "itself; in a sample of this size they are not the same."
            )


def _bars_differ(context: Context, question: Question) -> str:
    level = context.analysis.prepared.study.spec.model.level
    spare, asked = 1.0 - question.act_when, (1.0 - level) / 2.0
    more = "less" if spare > asked else "more"
    return (
        f"The bars differ, not the evidence: a probability of {numbers.given(question.act_when)} leaves "
        f"{numbers.percent(spare, 3)} for error and asks {more} than a {context.level} confidence interval "
        f"wholly on one side, which leaves {numbers.percent(asked, 3)}."
    )


def sign_words(question: Question, answer: PosteriorAnswer) -> str:
    """Name the sign that the direction's probability is about."""
    below = question.direction == "less" or (question.direction == "either" and answer.median < 0.0)
    return "below zero" if below else "above zero"


def exceeds_words(question: Question) -> str:
    """Say that an effect is larger than what matters, in the asked direction."""
    limit = limit_words(question)
    match question.direction:
        case "greater":
            return f"is more than {limit}"
        case "less":
            return f"is below {numbers.MINUS}{limit}"
        case _:
            return f"is more than {limit} either way"


def _of(probability: TailProbability) -> str:
    return numbers.probability(probability.value, probability.mcse)
