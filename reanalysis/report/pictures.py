"""Numbered figures of a report: data, drawing, caption and alternative text together."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from reanalysis.bayesian.result import PosteriorFit
from reanalysis.comparison.result import Compared
from reanalysis.effects.result import FrequentistAnswer, PosteriorAnswer
from reanalysis.report import numbers
from reanalysis.report.blocks import Figure
from reanalysis.report.context import Context, frequentist_decimals, limit_words, posterior_decimals
from reanalysis.report.figures import density, paired, predictive, priors, ranks, residuals, sweep
from reanalysis.report.sentences import exceeds_words, sign_words
from reanalysis.sensitivity.result import NoTipping, Sweep, TippingPrior, TippingResult
from reanalysis.study.distributions import Distribution, Normal

MOST_ROWS = 12
"""Coefficients in one picture; the table has them all."""


def small_pair(context: Context, compared: Compared) -> Figure:
    """The unnumbered pair of intervals beside an answer on page 1."""
    data = _paired(context, [compared])
    return Figure(None, "", _alt_of_pair(compared), paired.draw_small_pair(data))


def side_by_side(context: Context, compared: Sequence[Compared]) -> Figure:
    """All questions of one unit on one axis."""
    words = "" if len(compared) == 1 else "s"
    caption = (
        f"Confidence interval{words} (square, capped line) above credible interval{words} (circle, thick "
        f"50{numbers.THIN}% core), each at {context.level}. {_overlap(compared)}"
    )
    alt = " ".join(_alt_of_pair(one) for one in compared)
    svg = paired.draw_paired(_paired(context, compared))
    return Figure(context.numbering.figure(), caption, alt, svg)


def all_coefficients(context: Context) -> list[Figure]:
    """Every coefficient but the intercept, one picture a unit: for a study that asks no question."""
    groups: dict[str, list[int]] = {}
    for position, column in enumerate(context.analysis.prepared.design.columns):
        if column.kind != "intercept":
            groups.setdefault(column.unit, []).append(position)
    return [_coefficients(context, unit, positions[:MOST_ROWS]) for unit, positions in groups.items()]


def _coefficients(context: Context, unit: str, positions: Sequence[int]) -> Figure:
    fit, frequentist = context.main_fit, context.analysis.frequentist
    rows = [
        paired.coefficient_row(
            context.label(position),
            frequentist.coefficients[position],
            None if fit is None else fit.coefficients[position],
        )
        for position in positions
    ]
    names = ", ".join(row.label for row in rows)
    caption = (
        f"Confidence interval (square, capped line) above credible interval (circle, thick "
        f"50{numbers.THIN}% core), each at {context.level}, of {names}. The table has the numbers."
    )
    svg = paired.draw_paired(paired.paired_data(rows, _axis_words(context, unit)))
    return Figure(context.numbering.figure(), caption, caption, svg)


def posterior_density(context: Context, compared: Compared, fit: PosteriorFit) -> Figure | None:
    """The posterior of one question, its prior, and the confidence interval beneath."""
    answer, question = compared.main.answer, compared.question
    if not isinstance(answer, PosteriorAnswer):
        return None
    posterior = density.PosteriorOfQuestion(
        fit.draws.coefficients[..., question.column], _prior_of(compared, fit), answer, fit.level
    )
    data = density.density_data(question, posterior, compared.frequentist, _axis(context, compared))
    probability = answer.direction if answer.beyond is None else answer.beyond
    dark = (
        f"effects {sign_words(question, answer)}" if answer.beyond is None else "effects beyond what matters"
    )
    beneath = (
        f"; the square and line beneath are the frequentist estimate and its {context.level} "
        "confidence interval"
        if isinstance(compared.frequentist, FrequentistAnswer)
        else "; there is no frequentist estimate to set beneath it"
    )
    share = numbers.probability(probability.value, probability.mcse)
    caption = (
        f"{question.name}: posterior under the {answer.prior_set} prior set. The dark part, {share} of the "
        f"whole, is {dark}{beneath}."
    )
    return Figure(context.numbering.figure(), caption, caption, density.draw_density(data))


def prior_to_posterior(context: Context, compared: Compared) -> Figure:
    """The posterior interval of a question under each prior set, with each prior's own interval."""
    question = compared.question
    pairs = [
        (reading.answer, _distribution(context, compared, reading.prior_set)) for reading in compared.readings
    ]
    level = context.analysis.prepared.study.spec.model.level
    data = priors.priors_data(question, pairs, level, _axis(context, compared))
    given = [reading.answer for reading in compared.readings if isinstance(reading.answer, PosteriorAnswer)]
    medians = [answer.median for answer in given]
    decimals = min((posterior_decimals(answer) for answer in given), default=2)
    caption = (
        f"{question.name}: from each prior (dashed, {context.level}) to its posterior. "
        f"{_spread_of_medians(medians, decimals, question.unit)}"
    )
    return Figure(context.numbering.figure(), caption, caption, priors.draw_priors(data))


def width_sweep(context: Context, compared: Compared, result: Sweep) -> Figure:
    """The probabilities of a question as its prior is made narrower or wider."""
    question = compared.question
    widths = [
        (reading.prior_set, prior.sd)
        for reading in compared.readings
        if isinstance(prior := _distribution(context, compared, reading.prior_set), Normal)
        and prior.mean == 0.0
    ]
    axis = f"prior standard deviation of the effect{', ' + question.unit if question.unit else ''}"
    data = sweep.sweep_data(question, result, widths, axis)
    caption = (
        f"{question.name}: the answer as the prior is made narrower or wider around no effect. "
        f"{tipping_words(compared, result)}"
    )
    return Figure(context.numbering.figure(), caption, caption, sweep.draw_sweep(data))


def tipping_words(compared: Compared, result: Sweep) -> str:
    """Say where the answers of a sweep change."""
    sentences = [_tipping(compared, result.direction_tipping)]
    if result.beyond_tipping is not None:
        sentences.append(_tipping(compared, result.beyond_tipping))
    return " ".join(sentences)


def residual_picture(context: Context) -> Figure:
    """Residuals of the frequentist fit."""
    fit, response = context.analysis.frequentist, context.analysis.prepared.design.response
    words = "fitted probability" if response.event is not None else f"fitted {response.name}"
    if response.unit and response.event is None:
        words += f", {response.unit}"
    data = residuals.residual_data(fit, words)
    kind = "studentised" if fit.method == "OLS" else "randomised quantile"
    caption = (
        f"Residuals ({kind}) against fitted values with their running mean, and against normal quantiles "
        f"with the range that 95{numbers.THIN}% of each would keep to. {residuals.outside_words(data)} lie "
        "outside it; a model that fits leaves about one in twenty there, and no trend on the left."
    )
    return Figure(context.numbering.figure(), caption, caption, residuals.draw_residuals(data))


def predictive_picture(context: Context, fit: PosteriorFit) -> Figure:
    """One posterior predictive check, as suits the family."""
    design = context.analysis.prepared.design
    data = predictive.predictive_data(design, fit.draws, context.analysis.settings.seed)
    if isinstance(data, predictive.PredictiveCurves):
        caption = (
            f"Observed {design.response.name} (dark) and outcomes replicated from the posterior (light). "
            "Where the dark line leaves the bundle, the model does not reproduce the data."
        )
    else:
        inside = int(np.sum((data.observed >= data.low) & (data.observed <= data.high)))
        caption = (
            f"Observed amounts beside the range that holds 95{numbers.THIN}% of those replicated from the "
            f"posterior. {numbers.count(inside)} of {numbers.count(len(data.observed))} lie inside."
        )
    return Figure(context.numbering.figure(), caption, caption, predictive.draw_predictive(data))


def rank_picture(context: Context, fit: PosteriorFit) -> Figure:
    """Whether the chains tell the same story about each questioned effect."""
    columns = [compared.question.column for compared in context.analysis.questions] or list(
        range(len(fit.coefficients))
    )
    shown = list(dict.fromkeys(columns))[:6]
    data = ranks.rank_data(
        [
            (context.label(column), fit.draws.coefficients[..., column], fit.coefficients[column].ess_bulk)
            for column in shown
        ]
    )
    caption = (
        f"How the ranks of each chain's draws differ from those of all chains ({fit.prior_set.name} priors). "
        "Chains that explore the same posterior stay inside the band."
    )
    return Figure(context.numbering.figure(), caption, caption, ranks.draw_ranks(data))


def _paired(context: Context, compared: Sequence[Compared]) -> paired.PairedData:
    rows = [paired.question_row(one.question, one.frequentist, one.main.answer) for one in compared]
    return paired.paired_data(rows, _axis(context, compared[0]))


def _axis(context: Context, compared: Compared) -> str:
    return _axis_words(context, compared.question.unit)


def _axis_words(context: Context, unit: str) -> str:
    response = context.analysis.prepared.design.response
    about = f"{response.name} = {response.event}" if response.event is not None else response.name
    return f"effect on {about}{', ' + unit if unit else ''}"


def _alt_of_pair(compared: Compared) -> str:
    parts = [f"{compared.question.name}:"]
    frequentist, main = compared.frequentist, compared.main.answer
    if isinstance(frequentist, FrequentistAnswer):
        limits = numbers.interval(frequentist.low, frequentist.high, frequentist_decimals(frequentist))
        parts.append(f"confidence interval {limits};")
    else:
        parts.append("no estimate exists;")
    if isinstance(main, PosteriorAnswer):
        parts.append(f"credible interval {numbers.interval(main.low, main.high, posterior_decimals(main))};")
    limit = limit_words(compared.question)
    parts.append(
        f"effects up to {limit} are too small to matter." if limit else "no smallest effect was stated."
    )
    return " ".join(parts)


def _overlap(compared: Sequence[Compared]) -> str:
    apart = [one.question.name for one in compared if one.agreement.startswith("differ")]
    silent = [one.question.name for one in compared if one.agreement == "cannot be compared"]
    sentences = []
    if apart:
        sentences.append(f"They do not come to the same conclusion on: {', '.join(apart)}.")
    if silent:
        sentences.append(f"They cannot be compared on: {', '.join(silent)}.")
    if not sentences:
        plural = "s" if len(compared) > 1 else ""
        sentences.append(f"The two analyses come to the same conclusion{plural}.")
    return " ".join(sentences)


def _prior_of(compared: Compared, fit: PosteriorFit) -> Distribution:
    return fit.prior_set.coefficients[compared.question.column].distribution


def _distribution(context: Context, compared: Compared, prior_set: str) -> Distribution:
    result = context.analysis.posterior(prior_set)
    return result.prior_set.coefficients[compared.question.column].distribution


def _spread_of_medians(medians: Sequence[float], decimals: int, unit: str) -> str:
    if len(medians) < 2:
        return "Only one prior set gave a posterior."
    low, high = min(medians), max(medians)
    if numbers.estimate(low, decimals) == numbers.estimate(high, decimals):
        return "To the digits printed, the posterior median is the same under all of them."
    limits = numbers.quantity(numbers.interval(low, high, decimals), unit)
    return f"The posterior median moves between them, {limits}."


def _tipping(compared: Compared, tipping: TippingResult) -> str:
    question, main = compared.question, compared.main.answer
    if tipping.claim == "direction":
        sign = sign_words(question, main) if isinstance(main, PosteriorAnswer) else "of the asked sign"
        claim = f"The probability that the effect is {sign}"
    else:
        claim = f"The probability that it {exceeds_words(question)}"
    needed = numbers.given(question.act_when)
    if isinstance(tipping, TippingPrior):
        width = numbers.quantity(numbers.given(float(f"{tipping.width:.3g}")), question.unit)
        return f"{claim} reaches {needed} only with a prior {tipping.reached_when} than SD {width}."
    return {
        "always": f"{claim} stays at or above {needed} at every width.",
        "never": f"{claim} stays below {needed} at every width.",
        "several": f"{claim} crosses {needed} more than once.",
    }[tipping.reached if isinstance(tipping, NoTipping) else "several"]
