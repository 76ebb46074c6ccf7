"""The shape of `results.json`: versioned pydantic models, from which the JSON Schema is generated.

Nothing in it depends on the clock or the machine; those go to `provenance.json`.
"""

from __future__ import annotations

from typing import Literal

from pydantic import BaseModel, ConfigDict, Field

SCHEMA_VERSION = 1


class _Part(BaseModel):
    # Infinite degrees of freedom (z) and Pareto k of a refit have no JSON number: they become null.
    model_config = ConfigDict(extra="forbid", frozen=True, ser_json_inf_nan="null")


class StudyPart(_Part):
    """What the study file says about itself."""

    name: str
    title: str
    client: str | None
    author: str | None
    date: str | None
    context: str | None
    sha256: str
    level: float
    main_prior: str


class DataPart(_Part):
    """The rows."""

    file: str
    sha256: str
    rows_read: int
    rows_used: int
    dropped: dict[str, int] = Field(description="rows in which each variable is missing")


class ColumnPart(_Part):
    """One column of the design matrix."""

    name: str
    term: str
    unit: str
    kind: str
    mean: float
    sd: float


class FactorPart(_Part):
    """A factor; the first level is the reference."""

    name: str
    levels: tuple[str, ...]
    counts: tuple[int, ...]


class DesignPart(_Part):
    """The one design that both analyses used."""

    formula: str
    family: str
    link: str
    response: str
    event: str | None
    exposure: str | None
    columns: tuple[ColumnPart, ...]
    factors: tuple[FactorPart, ...]


class EstimatePart(_Part):
    """A frequentist estimate; `df` is null for z, `statistic` where the standard error is 0."""

    kind: Literal["estimate"] = "estimate"
    estimate: float
    se: float
    statistic: float | None
    df: float | None
    p: float
    low: float
    high: float
    level: float


class AbsentPart(_Part):
    """Why there is no number."""

    kind: Literal["absent"] = "absent"
    reason: str
    advice: str


class MarginalPart(_Part):
    """A posterior summary."""

    kind: Literal["posterior"] = "posterior"
    mean: float
    median: float
    sd: float
    low: float
    high: float
    level: float
    hdi_low: float
    hdi_high: float
    core_low: float
    core_high: float
    prob_positive: float
    mcse_mean: float
    mcse_median: float
    mcse_low: float
    mcse_high: float
    mcse_prob_positive: float
    rhat: float
    ess_bulk: float
    ess_tail: float


class CoefficientPart(_Part):
    """One coefficient, both ways."""

    term: str
    unit: str
    frequentist: EstimatePart | AbsentPart
    posterior: dict[str, MarginalPart | AbsentPart]


class AuxiliaryPart(_Part):
    """An auxiliary parameter: the frequentist point estimate and each posterior."""

    frequentist: float
    posterior: dict[str, MarginalPart | AbsentPart]


class ConclusionPart(_Part):
    """Standing of both claims: supported, contradicted or open."""

    direction: str
    size: str | None
    side: str


class FrequentistAnswerPart(_Part):
    """A question's frequentist answer."""

    kind: Literal["estimate"] = "estimate"
    estimate: float
    se: float
    low: float
    high: float
    p: float
    p_direction: float
    p_beyond: float | None
    p_equivalence: float | None
    conclusion: ConclusionPart


class PosteriorAnswerPart(_Part):
    """A question's answer under one prior set."""

    kind: Literal["posterior"] = "posterior"
    median: float
    low: float
    high: float
    core_low: float
    core_high: float
    prob_direction: float
    prob_beyond: float | None
    prob_negligible: float | None
    mcse_prob_direction: float
    mcse_prob_beyond: float | None
    conclusion: ConclusionPart


class SweepPointPart(_Part):
    """One prior width; `pareto_k` is null for a refit."""

    width: float
    prob_direction: float
    prob_beyond: float | None
    median: float
    low: float
    high: float
    method: str
    pareto_k: float | None


class TippingPart(_Part):
    """Where an answer changes; `width` is null when it does not, once and for all."""

    claim: str
    width: float | None
    reached: str


class SensitivityPart(_Part):
    """How far a question's answer depends on the prior."""

    dependence: str
    power_scaling_prior: float | None
    power_scaling_likelihood: float | None
    power_scaling_diagnosis: str | None
    sweep: tuple[SweepPointPart, ...]
    refits: int
    tipping: tuple[TippingPart, ...]


class QuestionPart(_Part):
    """One question, both ways."""

    name: str
    kind: Literal["coefficient"] = "coefficient"
    effect: str
    unit: str
    direction: str
    matters_beyond: float | None
    act_when: float
    frequentist: FrequentistAnswerPart | AbsentPart
    posterior: dict[str, PosteriorAnswerPart | AbsentPart]
    agreement: str
    reason: str
    sensitivity: SensitivityPart


class PriorPart(_Part):
    """One parameter's prior, resolved to numbers."""

    parameter: str
    distribution: dict[str, float | str]
    origin: str


class PriorSetPart(_Part):
    """One prior set."""

    name: str
    source: str
    intercept_at: str
    priors: tuple[PriorPart, ...]


class CheckPart(_Part):
    """The computation check of one prior set; numbers are null when nothing was sampled."""

    verdict: str
    divergences: int | None
    max_rhat: float | None
    min_ess_bulk: float | None
    min_ess_tail: float | None
    min_bfmi: float | None
    attempts: int
    findings: tuple[str, ...]


class FitPart(_Part):
    """The frequentist fit as a whole; `loglik` and `aic` are null for a perfect fit."""

    method: str
    distribution: str
    n: int
    df_residual: float
    loglik: float | None
    deviance: float
    null_deviance: float
    aic: float | None
    r_squared: float | None
    r_squared_kind: str
    scale: float
    pearson_chi2: float
    condition_number: float | None
    converged: bool


class NotePart(_Part):
    """Something to know: about the data, the design, a fit, or the report as a whole."""

    kind: str
    message: str


class SamplerPart(_Part):
    """The sampler's settings."""

    seed: int
    draws: int
    tune: int
    chains: int
    target_accept: float


class Results(_Part):
    """The whole of `results.json`."""

    schema_version: int = SCHEMA_VERSION
    study: StudyPart
    data: DataPart
    design: DesignPart
    status: str
    coefficients: tuple[CoefficientPart, ...]
    centred_intercept: dict[str, MarginalPart | AbsentPart]
    auxiliary: dict[str, AuxiliaryPart]
    questions: tuple[QuestionPart, ...]
    prior_sets: tuple[PriorSetPart, ...]
    computation: dict[str, CheckPart]
    fit: FitPart
    sampler: SamplerPart
    notes: tuple[NotePart, ...]
    versions: dict[str, str]
