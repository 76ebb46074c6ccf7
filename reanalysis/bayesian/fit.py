"""The Bayesian analysis of one design under one prior set."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from reanalysis.bayesian.check import check_computation
from reanalysis.bayesian.densities import is_unbounded
from reanalysis.bayesian.model import Inputs, ModelStore, Structure
from reanalysis.bayesian.packing import pack
from reanalysis.bayesian.result import (
    Marginal,
    NoPosterior,
    PosteriorFit,
    PosteriorResult,
    PriorSet,
)
from reanalysis.bayesian.sampler import RawDraws, sample
from reanalysis.bayesian.scaling import (
    Scaling,
    centred_intercept,
    choose_scaling,
    scaled_matrix,
    scaled_priors,
    scaled_response,
    unscaled_draws,
)
from reanalysis.bayesian.settings import SamplerSettings, derive_seed
from reanalysis.bayesian.summaries import summarise
from reanalysis.design.model import Design

RETRY_TUNE = 4
"""The second attempt tunes this many times longer,"""
RETRY_ACCEPT = 0.98
"""and with at least this target acceptance, and the other kind of mass matrix."""

CORRELATED = 30.0
"""Condition number of the scaled columns from which the mass matrix adapts to correlations at once:
a diagonal one is then ten to fifty times slower, and below it no faster."""


def fit_posterior(
    design: Design, prior_set: PriorSet, settings: SamplerSettings, level: float, store: ModelStore
) -> PosteriorResult:
    """Sample the posterior of a design under one prior set.

    Parameters
    ----------
    design : Design
    prior_set : PriorSet
    settings : SamplerSettings
        Of the study; the fit's own seed is derived from it and the prior set's name.
    level : float
        Of the credible intervals.
    store : ModelStore
        Compiled models; one of this structure is reused.

    Returns
    -------
    PosteriorFit or NoPosterior
        A run that is not sound is repeated once with more tuning, a higher target acceptance and
        the other kind of mass matrix. What has failed then has no numbers.
    """
    scaling = choose_scaling(design, prior_set)
    inputs = bound_inputs(design, prior_set, scaling)
    structure = structure_of(design, prior_set)
    bound = store.get(structure, inputs).bind(inputs)
    correlated = bool(np.linalg.cond(inputs.matrix) > CORRELATED)
    own = replace(settings, seed=derive_seed(settings.seed, prior_set.name), low_rank=correlated)
    again = replace(
        own,
        seed=derive_seed(settings.seed, f"{prior_set.name}, second attempt"),
        tune=settings.tune * RETRY_TUNE,
        target_accept=max(settings.target_accept, RETRY_ACCEPT),
        low_rank=not correlated,
    )
    result = None
    for attempt, run in enumerate((own, again), start=1):
        raw = sample(bound, structure, run)
        if raw is None:
            continue
        result = _posterior(design, prior_set, scaling, raw, (level, attempt))
        if result.check.verdict == "sound":
            return result
    return _judged(result, prior_set)


def structure_of(design: Design, prior_set: PriorSet) -> Structure:
    """The structure whose compiled model serves this design and prior set."""
    bounded = not all(is_unbounded(prior.distribution) for prior in prior_set.coefficients)
    constant = design.has_intercept and len(design.columns) == 1
    return Structure(design.family, len(design.columns), design.offset is not None, bounded, constant)


def bound_inputs(design: Design, prior_set: PriorSet, scaling: Scaling) -> Inputs:
    """Matrix, outcome, offset and packed priors on the sampler's scale."""
    return Inputs(
        matrix=scaled_matrix(design, scaling),
        response=scaled_response(design, scaling),
        offset=design.offset,
        priors=np.vstack([pack(distribution) for distribution in scaled_priors(prior_set, scaling)]),
    )


def _posterior(
    design: Design, prior_set: PriorSet, scaling: Scaling, raw: RawDraws, run: tuple[float, int]
) -> PosteriorFit:
    level, attempt = run
    draws = unscaled_draws(raw.coefficients, raw.auxiliary, scaling)
    marginals = tuple(
        summarise(draws.coefficients[..., position], level) for position in range(len(design.columns))
    )
    auxiliary = tuple(
        summarise(draws.auxiliary[..., position], level) for position in range(draws.auxiliary.shape[-1])
    )
    centred: Marginal | None = None
    if design.has_intercept:
        centred = summarise(centred_intercept(draws.coefficients, design), level)
    judged = (*marginals, *auxiliary) if centred is None else (*marginals, *auxiliary, centred)
    return PosteriorFit(
        prior_set=prior_set,
        level=level,
        draws=draws,
        coefficients=marginals,
        centred_intercept=centred,
        auxiliary=auxiliary,
        check=check_computation(raw, judged, attempt),
    )


def _judged(result: PosteriorFit | None, prior_set: PriorSet) -> PosteriorResult:
    if result is None:
        return NoPosterior(
            prior_set,
            "the sampler found no place to start: the log posterior is not finite",
            "look for extreme values in the data, or state proper priors",
            None,
        )
    if result.check.verdict == "failed":
        return NoPosterior(
            prior_set,
            f"the sampler did not converge ({'; '.join(result.check.findings)})",
            "use more tuning draws, rescale the predictors, or state more informative priors",
            result.check,
        )
    return result
