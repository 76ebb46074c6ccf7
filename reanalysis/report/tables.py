"""The numbered tables of a report, as rows of text."""

from __future__ import annotations

import math

from reanalysis.bayesian.limits import FAILED, SOUND
from reanalysis.bayesian.result import Marginal, NoPosterior, ParameterPrior, PosteriorResult, PriorSet
from reanalysis.comparison.result import Compared
from reanalysis.effects.result import (
    FrequentistAnswer,
    PosteriorAnswer,
    PosteriorResultForQuestion,
    TailProbability,
)
from reanalysis.frequentist.result import Estimate
from reanalysis.report import numbers
from reanalysis.report.blocks import Cell, ColumnGroup, SpanningCell, Table, TableColumn, cap_rows
from reanalysis.report.context import Context, limit_words, posterior_decimals
from reanalysis.report.priors_in_words import describe
from reanalysis.study.distributions import Distribution

CSV = "estimates.csv"


def side_by_side(context: Context) -> Table:
    """Every coefficient, both ways, and the residual standard deviation where there is one."""
    level = context.level
    rows = [
        _coefficient_row(context, column) for column in range(len(context.analysis.prepared.design.columns))
    ]
    rows += [_auxiliary_row(context, position) for position in range(_auxiliaries(context))]
    shown, hint = cap_rows(rows, CSV)
    fit = context.analysis.frequentist
    return Table(
        number=context.numbering.table(),
        caption="Every coefficient, both ways. Credible intervals are equal-tailed.",
        columns=(
            TableColumn(""),
            TableColumn("unit"),
            TableColumn("estimate", "frequentist", "right"),
            TableColumn(f"{level} confidence", "frequentist", "right"),
            TableColumn("p", "frequentist", "right"),
            TableColumn("median", "bayesian", "right"),
            TableColumn(f"{level} credible", "bayesian", "right"),
            TableColumn("P(above 0)", "bayesian", "right"),
        ),
        rows=shown,
        groups=(
            ColumnGroup("", "none", 2),
            ColumnGroup(f"Frequentist, {fit.method} ({fit.distribution})", "frequentist", 3),
            ColumnGroup(f"Bayesian, {context.main_prior} prior", "bayesian", 3),
        ),
        note=_coding_note(context),
        csv_hint=hint,
    )


def tests_and_probabilities(context: Context) -> Table:
    """For each question, the p-values beside the posterior probabilities that answer the same claim."""
    questions = context.analysis.questions
    return Table(
        number=context.numbering.table(),
        caption=(
            "The same claims, tested and weighed. A small p speaks against its null hypothesis; "
            "a large probability speaks for the claim."
        ),
        columns=(
            TableColumn(""),
            TableColumn("zero", "frequentist", "right"),
            TableColumn("not in the direction", "frequentist", "right"),
            TableColumn("not beyond", "frequentist", "right"),
            TableColumn("not negligible", "frequentist", "right"),
            TableColumn("in the direction", "bayesian", "right"),
            TableColumn("beyond", "bayesian", "right"),
            TableColumn("negligible", "bayesian", "right"),
        ),
        rows=tuple(
            (compared.question.name, *_p_cells(compared), *_probability_cells(compared))
            for compared in questions
        ),
        groups=(
            ColumnGroup("", "none", 1),
            ColumnGroup("p, against the hypothesis that it is …", "frequentist", 4),
            ColumnGroup("posterior probability that it is …", "bayesian", 3),
        ),
        note=(
            "Beyond and negligible are measured by the smallest effect that matters. “Not negligible” is "
            "tested by two one-sided tests (Schuirmann 1987): a small p means too small to matter. "
            "No p-value is the probability of its hypothesis."
        ),
    )


def prior_sets(context: Context, compared: Compared) -> Table:
    """One question under every prior set."""
    unit = compared.question.unit
    rows = []
    for reading in compared.readings:
        result = context.analysis.posterior(reading.prior_set)
        prior = result.prior_set.coefficients[compared.question.column]
        head = (
            reading.prior_set,
            describe(prior.distribution, unit),
            _short_origin(compared, result.prior_set, prior),
        )
        rows.append((*head, *_answer_cells(reading.answer)))
    return Table(
        number=context.numbering.table(),
        caption=f"{compared.question.name}, under each prior set{' (' + unit + ')' if unit else ''}.",
        columns=(
            TableColumn("prior set"),
            TableColumn("prior of this effect"),
            TableColumn("where it comes from"),
            TableColumn("median", "bayesian", "right"),
            TableColumn(f"{context.level} credible", "bayesian", "right"),
            TableColumn("P(direction)", "bayesian", "right"),
            TableColumn("P(beyond)", "bayesian", "right"),
        ),
        rows=tuple(rows),
    )


def _short_origin(compared: Compared, prior_set: PriorSet, prior: ParameterPrior) -> str:
    """Where a prior comes from, in few words; the last section gives it in full."""
    if prior.origin.startswith("stated: "):
        return prior.origin.removeprefix("stated: ")
    if prior.origin.startswith(("scaled to the data", "SD 1")):
        own = prior_set.name in ("flat", "weak", "sceptical")
        return "the data’s spread" if own else "not stated; as weak"
    if prior.origin.startswith("5 %"):
        return f"{numbers.percent(0.05)} beyond {limit_words(compared.question)}"
    return prior.origin


def computation(context: Context) -> Table:
    """The computation check of every prior set."""
    return Table(
        number=context.numbering.table(),
        caption="Computation check of each prior set.",
        columns=(
            TableColumn("prior set"),
            TableColumn("verdict"),
            TableColumn("divergences", "none", "right"),
            TableColumn("largest R-hat", "none", "right"),
            TableColumn("least bulk ESS", "none", "right"),
            TableColumn("least tail ESS", "none", "right"),
            TableColumn("least E-BFMI", "none", "right"),
            TableColumn("runs", "none", "right"),
        ),
        rows=tuple(_check_row(result) for result in context.analysis.posteriors),
        note=(
            f"Sound: R-hat at most {numbers.given(SOUND.rhat)}, both effective sample sizes (ESS) at least "
            f"{numbers.count(SOUND.ess)}, no divergent transition, E-BFMI at least "
            f"{numbers.given(SOUND.bfmi)}. Failed: R-hat above {numbers.given(FAILED.rhat)}, an ESS below "
            f"{numbers.count(FAILED.ess)}, more than {numbers.percent(FAILED.divergent_share)} divergent, "
            f"or E-BFMI below {numbers.given(FAILED.bfmi)}. "
            "What is not sound is run again with more tuning and a higher target acceptance."
        ),
    )


def priors_in_full(context: Context) -> Table:
    """Every prior of every parameter, with its origin; what is as in the weak set is said once."""
    rows = [
        row for prior_set in context.analysis.prepared.prior_sets for row in _prior_rows(context, prior_set)
    ]
    shown, hint = cap_rows(rows, "results.json")
    return Table(
        number=context.numbering.table(),
        caption="Every prior, resolved to numbers.",
        columns=(
            TableColumn("prior set"),
            TableColumn("parameter"),
            TableColumn("prior", "none", "whole"),
            TableColumn("origin"),
        ),
        rows=shown,
        note=_intercept_note(context),
        csv_hint=hint,
    )


def _prior_rows(context: Context, prior_set: PriorSet) -> list[tuple[Cell, ...]]:
    design = context.analysis.prepared.design
    units = {column.name: column.unit for column in design.columns} | {"sigma": design.response.unit}
    weak = {} if prior_set.name in ("weak", "flat") else _priors_of(context, "weak")
    alike: dict[tuple[str, str], list[str]] = {}
    same = False
    for prior in (*prior_set.coefficients, *prior_set.auxiliary):
        if weak.get(prior.name) == prior.distribution:
            same = True
            continue
        words = describe(prior.distribution, units.get(prior.name, ""))
        alike.setdefault((words, prior.origin), []).append(prior.name)
    everything = [prior.name for prior in prior_set.coefficients]
    rows: list[tuple[Cell, ...]] = [
        (prior_set.name, "every coefficient" if names == everything else ", ".join(names), words, origin)
        for (words, origin), names in alike.items()
    ]
    if same:
        rows.append((prior_set.name, "all others", SpanningCell("as in the weak prior set", 2)))
    return rows


def _priors_of(context: Context, name: str) -> dict[str, Distribution]:
    prior_set = context.analysis.posterior(name).prior_set
    return {prior.name: prior.distribution for prior in (*prior_set.coefficients, *prior_set.auxiliary)}


def _intercept_note(context: Context) -> str:
    sets = context.analysis.prepared.prior_sets
    at_zero = [prior_set.name for prior_set in sets if prior_set.intercept_at == "zero"]
    if not context.analysis.prepared.design.has_intercept:
        return ""
    note = "The intercept’s prior is about the outcome at the centre of the predictors"
    return f"{note}, in {', '.join(at_zero)} at zero predictors." if at_zero else f"{note}."


def _coefficient_row(context: Context, position: int) -> tuple[Cell, ...]:
    column = context.analysis.prepared.design.columns[position]
    result = context.analysis.frequentist.coefficients[position]
    head = (context.label(position), column.unit or numbers.NONE)
    if isinstance(result, Estimate):
        decimals = numbers.choose_decimals(result.se)
        left: tuple[Cell, ...] = (
            numbers.estimate(result.estimate, decimals),
            numbers.interval(result.low, result.high, decimals),
            numbers.p_value(result.p),
        )
    else:
        left = (SpanningCell(f"no estimate exists: {result.reason}", 3),)
    fit = context.main_fit
    return (*head, *left, *_marginal_cells(context, None if fit is None else fit.coefficients[position]))


def _auxiliary_row(context: Context, position: int) -> tuple[Cell, ...]:
    design, fit = context.analysis.prepared.design, context.main_fit
    measures = context.analysis.frequentist.goodness
    sigma = math.sqrt(measures.scale)
    # The standard error of a residual standard deviation, near enough to choose its digits.
    decimals = numbers.choose_decimals(sigma / math.sqrt(2.0 * max(measures.df_residual, 1.0)))
    head = ("Residual standard deviation", design.response.unit or numbers.NONE)
    left = (numbers.estimate(sigma, decimals), numbers.NONE, numbers.NONE)
    cells = _marginal_cells(context, None if fit is None else fit.auxiliary[position])
    return (*head, *left, *cells) if fit is None else (*head, *left, *cells[:2], numbers.NONE)


def _marginal_cells(context: Context, marginal: Marginal | None) -> tuple[Cell, ...]:
    if marginal is None:
        main = context.analysis.main
        reason = main.reason if isinstance(main, NoPosterior) else ""
        return (SpanningCell(f"no posterior: {reason}", 3),)
    decimals = numbers.choose_decimals(
        marginal.sd, marginal.mcse_median, marginal.mcse_low, marginal.mcse_high
    )
    return (
        numbers.estimate(marginal.median, decimals),
        numbers.interval(marginal.low, marginal.high, decimals),
        numbers.probability(marginal.prob_positive, marginal.mcse_prob_positive),
    )


def _auxiliaries(context: Context) -> int:
    return 0 if context.analysis.prepared.design.family.auxiliary is None else 1


def _coding_note(context: Context) -> str:
    design = context.analysis.prepared.design
    parts = []
    if design.response.event is not None:
        parts.append(f"Models the probability that {design.response.name} = {design.response.event}.")
    for factor in design.factors:
        counts = ", ".join(
            f"{level} {numbers.count(number)}"
            for level, number in zip(factor.levels, factor.counts, strict=True)
        )
        parts.append(f"{factor.name} is compared with {factor.reference} (rows: {counts}).")
    return " ".join(parts)


def _p_cells(compared: Compared) -> tuple[Cell, ...]:
    answer = compared.frequentist
    if not isinstance(answer, FrequentistAnswer):
        return (SpanningCell("no estimate exists", 4),)
    size = answer.size
    sizes = (
        (numbers.NONE,) * 2
        if size is None
        else (
            numbers.p_value(size.p_beyond),
            numbers.p_value(size.p_equivalence),
        )
    )
    return (numbers.p_value(answer.p), numbers.p_value(answer.p_direction), *sizes)


def _probability_cells(compared: Compared) -> tuple[Cell, ...]:
    answer = compared.main.answer
    if not isinstance(answer, PosteriorAnswer):
        return (SpanningCell("no posterior", 3),)
    return (_of(answer.direction), _of(answer.beyond), _of(answer.negligible))


def _answer_cells(answer: PosteriorResultForQuestion) -> tuple[Cell, ...]:
    if not isinstance(answer, PosteriorAnswer):
        return (SpanningCell("no posterior", 4),)
    decimals = posterior_decimals(answer)
    return (
        numbers.estimate(answer.median, decimals),
        numbers.interval(answer.low, answer.high, decimals),
        _of(answer.direction),
        _of(answer.beyond),
    )


def _of(probability: TailProbability | None) -> str:
    return numbers.NONE if probability is None else numbers.probability(probability.value, probability.mcse)


def _check_row(result: PosteriorResult) -> tuple[Cell, ...]:
    check = result.check
    if check is None:
        return (result.prior_set.name, SpanningCell(f"not run: {getattr(result, 'reason', '')}", 7))
    return (
        result.prior_set.name,
        check.verdict,
        numbers.count(check.divergences),
        numbers.rhat(check.max_rhat),
        numbers.count(check.min_ess_bulk),
        numbers.count(check.min_ess_tail),
        numbers.estimate(check.min_bfmi, 2),
        numbers.count(check.attempts),
    )
