"""From an analysis to the plain numbers of `results.json`."""

from __future__ import annotations

import math
from dataclasses import asdict
from importlib.metadata import version

from reanalysis.analysis.result import Analysis
from reanalysis.bayesian.result import Marginal, NoPosterior, PosteriorResult, PriorSet
from reanalysis.comparison.conclude import conclude_frequentist, conclude_posterior
from reanalysis.comparison.result import Compared, Conclusion, ConclusionResult
from reanalysis.effects.result import (
    FrequentistAnswer,
    NoFrequentistAnswer,
    PosteriorAnswer,
    PosteriorResultForQuestion,
    Question,
)
from reanalysis.frequentist.result import Estimate, NotEstimable
from reanalysis.report import schema
from reanalysis.sensitivity.result import NoSweep, NoTipping, TippingResult

LIBRARIES = ("statsmodels", "bambi", "pymc", "nutpie", "arviz-stats", "numpy", "scipy", "pandas")
"""Libraries whose versions can move a number."""


def library_versions() -> dict[str, str]:
    """Versions of the tool and of every library that can move a number."""
    return {name: version(name) for name in ("reanalysis", *LIBRARIES)}


def build_results(analysis: Analysis) -> schema.Results:
    """Collect all numbers of an analysis; nothing of the clock or the machine."""
    return schema.Results(
        study=_study(analysis),
        data=_data(analysis),
        design=_design(analysis),
        status=analysis.status.verdict,
        coefficients=tuple(_coefficient(analysis, k) for k in range(len(analysis.prepared.design.columns))),
        centred_intercept=_centred_intercept(analysis),
        auxiliary=_auxiliary(analysis),
        questions=tuple(_question(compared) for compared in analysis.questions),
        prior_sets=tuple(_prior_set(prior_set) for prior_set in analysis.prepared.prior_sets),
        computation={result.prior_set.name: _check(result) for result in analysis.posteriors},
        fit=_fit(analysis),
        sampler=_sampler(analysis),
        notes=_notes(analysis),
        versions=library_versions(),
    )


def _study(analysis: Analysis) -> schema.StudyPart:
    study = analysis.prepared.study
    spec = study.spec
    return schema.StudyPart(
        name=study.name,
        title=spec.title,
        client=spec.client,
        author=spec.author,
        date=spec.date,
        context=spec.context,
        sha256=study.sha256,
        level=spec.model.level,
        main_prior=spec.model.main_prior,
    )


def _data(analysis: Analysis) -> schema.DataPart:
    source, rows = analysis.prepared.source, analysis.prepared.design.rows
    return schema.DataPart(
        file=source.name,
        sha256=source.sha256,
        rows_read=rows.read,
        rows_used=rows.used,
        dropped=dict(rows.dropped_by),
    )


def _design(analysis: Analysis) -> schema.DesignPart:
    design = analysis.prepared.design
    columns = tuple(
        schema.ColumnPart(name=c.name, term=c.term, unit=c.unit, kind=c.kind, mean=c.mean, sd=c.sd)
        for c in design.columns
    )
    return schema.DesignPart(
        formula=design.formula,
        family=design.family.name,
        link=design.family.link,
        response=design.response.name,
        event=design.response.event,
        exposure=design.exposure,
        columns=columns,
        factors=tuple(
            schema.FactorPart(name=f.name, levels=f.levels, counts=f.counts) for f in design.factors
        ),
    )


def _coefficient(analysis: Analysis, position: int) -> schema.CoefficientPart:
    column = analysis.prepared.design.columns[position]
    result = analysis.frequentist.coefficients[position]
    return schema.CoefficientPart(
        term=column.name,
        unit=column.unit,
        frequentist=_estimate(result, analysis.frequentist.level),
        posterior={
            posterior.prior_set.name: _absent(posterior)
            if isinstance(posterior, NoPosterior)
            else _marginal(posterior.coefficients[position], posterior.level)
            for posterior in analysis.posteriors
        },
    )


def _estimate(result: Estimate | NotEstimable, level: float) -> schema.EstimatePart | schema.AbsentPart:
    if isinstance(result, NotEstimable):
        return schema.AbsentPart(reason=result.reason, advice=result.advice)
    values = {key: value for key, value in asdict(result).items() if key != "name"}
    finite = {"df": _finite(result.df), "statistic": _finite(result.statistic)}
    return schema.EstimatePart(**(values | finite | {"level": level}))


def _marginal(marginal: Marginal, level: float) -> schema.MarginalPart:
    return schema.MarginalPart(**asdict(marginal), level=level)


def _absent(result: NoPosterior) -> schema.AbsentPart:
    return schema.AbsentPart(reason=result.reason, advice=result.advice)


def _centred_intercept(analysis: Analysis) -> dict[str, schema.MarginalPart | schema.AbsentPart]:
    parts: dict[str, schema.MarginalPart | schema.AbsentPart] = {}
    if analysis.prepared.design.has_intercept:
        for posterior in analysis.posteriors:
            if isinstance(posterior, NoPosterior):
                parts[posterior.prior_set.name] = _absent(posterior)
            elif posterior.centred_intercept is not None:
                parts[posterior.prior_set.name] = _marginal(posterior.centred_intercept, posterior.level)
    return parts


def _auxiliary(analysis: Analysis) -> dict[str, schema.AuxiliaryPart]:
    name = analysis.prepared.design.family.auxiliary
    if name is None:
        return {}
    return {
        name: schema.AuxiliaryPart(
            frequentist=math.sqrt(analysis.frequentist.goodness.scale),
            posterior={
                posterior.prior_set.name: _absent(posterior)
                if isinstance(posterior, NoPosterior)
                else _marginal(posterior.auxiliary[0], posterior.level)
                for posterior in analysis.posteriors
            },
        )
    }


def _question(compared: Compared) -> schema.QuestionPart:
    question = compared.question
    return schema.QuestionPart(
        name=question.name,
        effect=question.effect,
        unit=question.unit,
        direction=question.direction,
        matters_beyond=question.matters_beyond,
        act_when=question.act_when,
        frequentist=_frequentist_answer(question, compared.frequentist),
        posterior={
            reading.prior_set: _posterior_answer(question, reading.answer) for reading in compared.readings
        },
        agreement=compared.agreement,
        reason=compared.reason,
        sensitivity=_sensitivity(compared),
    )


def _frequentist_answer(
    question: Question, answer: FrequentistAnswer | NoFrequentistAnswer
) -> schema.FrequentistAnswerPart | schema.AbsentPart:
    if isinstance(answer, NoFrequentistAnswer):
        return schema.AbsentPart(reason=answer.reason, advice=answer.advice)
    return schema.FrequentistAnswerPart(
        estimate=answer.estimate,
        se=answer.se,
        low=answer.low,
        high=answer.high,
        p=answer.p,
        p_direction=answer.p_direction,
        p_beyond=None if answer.size is None else answer.size.p_beyond,
        p_equivalence=None if answer.size is None else answer.size.p_equivalence,
        conclusion=_conclusion(conclude_frequentist(question, answer)),
    )


def _posterior_answer(
    question: Question, answer: PosteriorResultForQuestion
) -> schema.PosteriorAnswerPart | schema.AbsentPart:
    if not isinstance(answer, PosteriorAnswer):
        return schema.AbsentPart(reason=answer.reason, advice="")
    beyond, negligible = answer.beyond, answer.negligible
    return schema.PosteriorAnswerPart(
        median=answer.median,
        low=answer.low,
        high=answer.high,
        core_low=answer.core_low,
        core_high=answer.core_high,
        prob_direction=answer.direction.value,
        prob_beyond=None if beyond is None else beyond.value,
        prob_negligible=None if negligible is None else negligible.value,
        mcse_prob_direction=answer.direction.mcse,
        mcse_prob_beyond=None if beyond is None else beyond.mcse,
        conclusion=_conclusion(conclude_posterior(question, answer)),
    )


def _conclusion(conclusion: ConclusionResult) -> schema.ConclusionPart:
    if isinstance(conclusion, Conclusion):
        return schema.ConclusionPart(
            direction=conclusion.direction, size=conclusion.size, side=conclusion.side
        )
    return schema.ConclusionPart(direction="open", size=None, side="asked")


def _sensitivity(compared: Compared) -> schema.SensitivityPart:
    scaling, sweep = compared.power_scaling, compared.sweep
    points: tuple[schema.SweepPointPart, ...] = ()
    tipping: tuple[schema.TippingPart, ...] = ()
    if not isinstance(sweep, NoSweep):
        points = tuple(
            schema.SweepPointPart(**(asdict(point) | {"pareto_k": _finite(point.pareto_k)}))
            for point in sweep.points
        )
        found = (sweep.direction_tipping, sweep.beyond_tipping)
        tipping = tuple(_tipping(one) for one in found if one is not None)
    return schema.SensitivityPart(
        dependence=compared.dependence,
        power_scaling_prior=None if scaling is None else scaling.prior,
        power_scaling_likelihood=None if scaling is None else scaling.likelihood,
        power_scaling_diagnosis=None if scaling is None else scaling.diagnosis,
        sweep=points,
        refits=0 if isinstance(sweep, NoSweep) else sweep.refits,
        tipping=tipping,
    )


def _tipping(tipping: TippingResult) -> schema.TippingPart:
    if isinstance(tipping, NoTipping):
        return schema.TippingPart(claim=tipping.claim, width=None, reached=tipping.reached)
    return schema.TippingPart(claim=tipping.claim, width=tipping.width, reached=tipping.reached_when)


def _prior_set(prior_set: PriorSet) -> schema.PriorSetPart:
    return schema.PriorSetPart(
        name=prior_set.name,
        source=prior_set.source,
        intercept_at=prior_set.intercept_at,
        priors=tuple(
            schema.PriorPart(
                parameter=prior.name, distribution=prior.distribution.model_dump(), origin=prior.origin
            )
            for prior in (*prior_set.coefficients, *prior_set.auxiliary)
        ),
    )


def _check(result: PosteriorResult) -> schema.CheckPart:
    check = result.check
    if check is None:
        reason = (result.reason,) if isinstance(result, NoPosterior) else ()
        empty = dict.fromkeys(("divergences", "max_rhat", "min_ess_bulk", "min_ess_tail", "min_bfmi"))
        return schema.CheckPart(verdict="failed", attempts=0, findings=reason, **empty)
    return schema.CheckPart(
        verdict=check.verdict,
        divergences=check.divergences,
        max_rhat=_finite(check.max_rhat),
        min_ess_bulk=check.min_ess_bulk,
        min_ess_tail=check.min_ess_tail,
        min_bfmi=_finite(check.min_bfmi),
        attempts=check.attempts,
        findings=check.findings,
    )


def _fit(analysis: Analysis) -> schema.FitPart:
    fit = analysis.frequentist
    measures = fit.goodness
    values = asdict(measures) | {
        name: _finite(getattr(measures, name)) for name in ("loglik", "aic", "condition_number")
    }
    return schema.FitPart(method=fit.method, distribution=fit.distribution, converged=fit.converged, **values)


def _sampler(analysis: Analysis) -> schema.SamplerPart:
    settings = analysis.settings
    return schema.SamplerPart(
        seed=settings.seed,
        draws=settings.draws,
        tune=settings.tune,
        chains=settings.chains,
        target_accept=settings.target_accept,
    )


def _notes(analysis: Analysis) -> tuple[schema.NotePart, ...]:
    prepared = analysis.prepared
    pairs = [("status", caveat.message) for caveat in analysis.status.caveats]
    pairs += [("data", note) for note in prepared.source.notes]
    pairs += [(f"design, {finding.severity}", finding.message) for finding in prepared.findings]
    pairs += [("frequentist fit", warning) for warning in dict.fromkeys(analysis.frequentist.warnings)]
    return tuple(schema.NotePart(kind=kind, message=message) for kind, message in pairs)


def _finite(value: float) -> float | None:
    return value if math.isfinite(value) else None
