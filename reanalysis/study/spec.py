"""The study file as validated, frozen data: the one place where user input is checked.

What needs the data as well (does the column exist, is the response in the
family's range) is checked by `reanalysis.data` and `reanalysis.design`.
"""

from __future__ import annotations

from pathlib import Path
from typing import Annotated, Literal

from pydantic import BaseModel, ConfigDict, Field

from reanalysis.study.distributions import AuxiliaryDistribution, Distribution, Positive

FamilyName = Literal["gaussian", "bernoulli", "poisson"]
LinkName = Literal["identity", "logit", "probit", "cloglog", "log"]
Direction = Literal["greater", "less", "either"]
Probability = Annotated[float, Field(gt=0.5, lt=1.0)]
Text = Annotated[str, Field(min_length=1, max_length=4000)]

LINKS: dict[FamilyName, tuple[LinkName, ...]] = {
    "gaussian": ("identity",),
    "bernoulli": ("logit", "probit", "cloglog"),
    "poisson": ("log",),
}
"""Links offered for each family, the default one first. Kept here as well as in
`reanalysis.families` because reading a study file must not import scipy."""

BUILT_IN_PRIOR_SETS = ("flat", "weak", "sceptical")
"""Names of the prior sets that every study has, in the order of the report."""


class _Section(BaseModel):
    model_config = ConfigDict(extra="forbid", frozen=True)


class DataSpec(_Section):
    """`[data]`: where the rows come from and how to read them."""

    file: Text
    missing: Literal["complete-cases", "refuse"] = "complete-cases"
    missing_values: tuple[str, ...] = ("",)
    encoding: Text = "utf-8"
    sheet: Text | None = None
    units: dict[str, str] = {}
    levels: dict[str, tuple[str, ...]] = {}


class ModelSpec(_Section):
    """`[model]`: one model, fitted twice."""

    formula: Text
    family: FamilyName
    link: LinkName | None = None
    exposure: Text | None = None
    event: Text | None = None
    level: Annotated[float, Field(ge=0.5, lt=1.0)] = 0.95
    main_prior: Text = "weak"


class QuestionSpec(_Section):
    """`[[question]]`: one effect that the reader cares about."""

    name: Text
    effect: Text
    direction: Direction = "either"
    matters_beyond: Positive | None = None
    act_when: Probability = 0.95


class PriorSpec(_Section):
    """`[[prior]]`: a prior set of the author's own, with its source."""

    name: Annotated[str, Field(pattern=r"^[A-Za-z][A-Za-z0-9 _-]{0,39}$")]
    source: Text
    intercept_at: Literal["centre", "zero"] = "centre"
    terms: dict[str, Distribution] = {}
    auxiliary: dict[str, AuxiliaryDistribution] = {}


class ComputationSpec(_Section):
    """`[computation]`: the sampler's settings."""

    seed: Annotated[int, Field(ge=0, le=2**31 - 1)] | None = None
    draws: Annotated[int, Field(ge=250, le=50_000)] = 2000
    tune: Annotated[int, Field(ge=200, le=50_000)] = 500
    chains: Annotated[int, Field(ge=2, le=16)] = 4
    target_accept: Annotated[float, Field(ge=0.6, le=0.999)] = 0.85


class StudySpec(_Section):
    """A whole study file."""

    title: Text
    client: Text | None = None
    author: Text | None = None
    date: Text | None = None
    context: Text | None = None
    data: DataSpec
    model: ModelSpec
    question: tuple[QuestionSpec, ...] = ()
    prior: tuple[PriorSpec, ...] = ()
    computation: ComputationSpec = ComputationSpec()


class Study(BaseModel):
    """A validated study file together with where it lies.

    Attributes
    ----------
    name : str
        The file's name without its ending; names the study's folder.
    path : Path
        The study file, absolute.
    data_path : Path
        The data file, resolved and checked to be a local file that the study may read.
    sha256 : str
        Of the study file's bytes.
    spec : StudySpec
        What the file says.
    places : dict
        Where each key stands, for messages of later stages: ``"model.event"`` ->
        ``"firmness.toml, line 18, model.event"``.
    """

    model_config = ConfigDict(extra="forbid", frozen=True)

    name: str
    path: Path
    data_path: Path
    sha256: str
    spec: StudySpec
    places: dict[str, str] = {}

    @property
    def prior_sets(self) -> tuple[str, ...]:
        """Names of all prior sets, built-in ones first."""
        return BUILT_IN_PRIOR_SETS + tuple(prior.name for prior in self.spec.prior)
