"""Everything about a study that can be known before fitting; imports neither sampler nor statsmodels."""

from __future__ import annotations

from dataclasses import dataclass

from reanalysis.bayesian.priors import resolve_prior_sets
from reanalysis.bayesian.result import PriorSet
from reanalysis.data.dataset import Dataset
from reanalysis.data.load import load_dataset
from reanalysis.design.build import build_design, columns_used
from reanalysis.design.model import Design
from reanalysis.design.outlook import Finding, outlook
from reanalysis.effects.ask import resolve_questions
from reanalysis.effects.result import Question
from reanalysis.study.formula import check_formula
from reanalysis.study.spec import Study


@dataclass(frozen=True, slots=True)
class Source:
    """The data file as it was read.

    Attributes
    ----------
    name, sha256 : str
    size : int
        Bytes.
    notes : tuple of str
    """

    name: str
    sha256: str
    size: int
    notes: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class Prepared:
    """A study with everything that can be known before fitting.

    Attributes
    ----------
    study : Study
    source : Source
    design : Design
    prior_sets : tuple of PriorSet
    questions : tuple of Question
    findings : tuple of Finding
    """

    study: Study
    source: Source
    design: Design
    prior_sets: tuple[PriorSet, ...]
    questions: tuple[Question, ...]
    findings: tuple[Finding, ...]


def prepare(study: Study) -> Prepared:
    """Read the data, build the design and resolve priors and questions; fits nothing.

    Raises
    ------
    ReanalysisError
        With every problem that the stage found.
    """
    parts = check_formula(study.spec.model.formula)
    dataset = load_dataset(study, columns=frozenset(columns_used(study.spec, parts)))
    design = build_design(study.spec, dataset)
    return Prepared(
        study=study,
        source=_source(study, dataset),
        design=design,
        prior_sets=resolve_prior_sets(study.spec, design),
        questions=resolve_questions(study.spec.question, design),
        findings=outlook(design),
    )


def _source(study: Study, dataset: Dataset) -> Source:
    return Source(study.data_path.name, dataset.sha256, dataset.size, dataset.notes)
