"""The whole analysis of one study: one design, two analyses, every prior set, every question."""

from __future__ import annotations

from dataclasses import dataclass

from reanalysis.analysis.prepare import Prepared, prepare
from reanalysis.analysis.result import Analysis
from reanalysis.bayesian.densities import is_proper
from reanalysis.bayesian.fit import fit_posterior
from reanalysis.bayesian.log_density import log_likelihood, log_prior
from reanalysis.bayesian.model import ModelStore
from reanalysis.bayesian.result import NoPosterior, PosteriorFit, PosteriorResult, PriorSet
from reanalysis.bayesian.settings import SamplerSettings
from reanalysis.comparison.compare import compare
from reanalysis.comparison.result import Compared
from reanalysis.comparison.status import judge
from reanalysis.design.model import Design
from reanalysis.effects.frequentist import answer_frequentist
from reanalysis.effects.posterior import answer_posterior, effect_draws
from reanalysis.effects.result import Question
from reanalysis.frequentist.fit import fit_frequentist
from reanalysis.frequentist.result import FrequentistFit, NotEstimable
from reanalysis.progress import StageClock, Stages
from reanalysis.sensitivity.power_scaling import power_scaling
from reanalysis.sensitivity.result import PowerScaling
from reanalysis.sensitivity.sweep import sweep_question
from reanalysis.study.spec import Study


def analyse(
    study: Study, *, store: ModelStore | None = None, cores: int = 1, stages: Stages | None = None
) -> Analysis:
    """Carry out the whole analysis of a study.

    Parameters
    ----------
    study : Study
    store : ModelStore, optional
        Compiled models to reuse; hand the same one to every study of a process.
    cores : int
        For the sampler; the results do not depend on it.
    stages : Stages, optional
        Told of each stage.

    Raises
    ------
    ReanalysisError
        When the study's input is not fit for analysis.
    """
    watch = stages or StageClock()
    with watch.stage("data and design"):
        prepared = prepare(study)
    settings = sampler_settings(prepared, cores)
    with watch.stage("frequentist fit"):
        frequentist = fit_frequentist(prepared.design, level=study.spec.model.level, seed=settings.seed)
    fit = _Fitter(prepared, settings, frequentist, store or ModelStore())
    posteriors = []
    for prior_set in prepared.prior_sets:
        with watch.stage(f"posterior, {prior_set.name} priors"):
            posteriors.append(fit(prior_set))
    with watch.stage("prior sensitivity"):
        questions = tuple(
            _compare(question, prepared, frequentist, tuple(posteriors), fit)
            for question in prepared.questions
        )
    main_prior = study.spec.model.main_prior
    status = judge(frequentist, posteriors, main_prior, prepared.findings)
    return Analysis(prepared, settings, frequentist, tuple(posteriors), questions, status)


def sampler_settings(prepared: Prepared, cores: int) -> SamplerSettings:
    """The study's sampler settings; without a stated seed, one that follows from the data's content."""
    computation = prepared.study.spec.computation
    seed = computation.seed
    return SamplerSettings(
        seed=int(prepared.source.sha256[:7], 16) if seed is None else seed,
        draws=computation.draws,
        tune=computation.tune,
        chains=computation.chains,
        target_accept=computation.target_accept,
        low_rank=False,
        cores=cores,
    )


@dataclass(frozen=True, slots=True)
class _Fitter:
    """Fits the posterior of one study under any prior set."""

    prepared: Prepared
    settings: SamplerSettings
    frequentist: FrequentistFit
    store: ModelStore

    def __call__(self, prior_set: PriorSet) -> PosteriorResult:
        if self._perfect():
            return NoPosterior(
                prior_set,
                "the model reproduces the outcome exactly, and no residual variation is left to learn from",
                "check whether the outcome was computed from the predictors",
                None,
            )
        improper = self._improper(prior_set)
        if improper is not None:
            return NoPosterior(
                prior_set,
                f"it would be improper: the prior says nothing about {improper.name} and "
                f"neither do the data ({improper.reason})",
                "state a proper prior for this coefficient",
                None,
            )
        level = self.prepared.study.spec.model.level
        return fit_posterior(self.prepared.design, prior_set, self.settings, level, self.store)

    def _perfect(self) -> bool:
        # The likelihood then grows without limit as the residual standard deviation goes to zero.
        return self.frequentist.method == "OLS" and not self.frequentist.goodness.scale > 0.0

    def _improper(self, prior_set: PriorSet) -> NotEstimable | None:
        pairs = zip(self.frequentist.coefficients, prior_set.coefficients, strict=True)
        for result, prior in pairs:
            if isinstance(result, NotEstimable) and not is_proper(prior.distribution):
                return result
        return None


def _compare(
    question: Question,
    prepared: Prepared,
    frequentist: FrequentistFit,
    posteriors: tuple[PosteriorResult, ...],
    fit: _Fitter,
) -> Compared:
    design, main_prior = prepared.design, prepared.study.spec.model.main_prior
    main = next(result for result in posteriors if result.prior_set.name == main_prior)
    others = tuple(result for result in posteriors if isinstance(result, PosteriorFit) and result is not main)
    sweep = sweep_question(question, main, others, design, fit)
    return compare(
        question,
        answer_frequentist(question, frequentist),
        [answer_posterior(question, result) for result in posteriors],
        main_prior,
        (sweep, _power_scaling(question, main, design)),
    )


def _power_scaling(question: Question, main: PosteriorResult, design: Design) -> PowerScaling | None:
    if isinstance(main, NoPosterior):
        return None
    return power_scaling(
        effect_draws(question, main),
        log_prior(main.draws, main.prior_set, design),
        log_likelihood(main.draws, design),
    )
