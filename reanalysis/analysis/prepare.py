"""Everything about a study that can be known before fitting; imports neither sampler nor statsmodels."""

from __future__ import annotations

from dataclasses import dataclass, replace

from reanalysis.bayesian.priors import resolve_prior_sets
from reanalysis.bayesian.result import PriorSet
from reanalysis.data.dataset import Dataset
from reanalysis.data.load import load_dataset
from reanalysis.design.build import build_design, columns_used
from reanalysis.design.model import Design
from reanalysis.design.outlook import Finding, outlook
from reanalysis.effects.ask import resolve_questions
from reanalysis.effects.result import Question
from reanalysis.errors import DesignError, Problem, ReanalysisError
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
        With every problem that the stage found, those of the study file at their lines.
    """
    try:
        return _prepare(study)
    except ReanalysisError as error:
        raise type(error)(_placed(study, problem) for problem in error.problems) from error


def _prepare(study: Study) -> Prepared:
    parts = check_formula(study.spec.model.formula)
    dataset = load_dataset(study, columns=frozenset(columns_used(study.spec, parts)))
    design = build_design(study.spec, dataset)
    prior_sets, questions = _resolve(study, design)
    return Prepared(study, _source(study, dataset), design, prior_sets, questions, outlook(design))


def _resolve(study: Study, design: Design) -> tuple[tuple[PriorSet, ...], tuple[Question, ...]]:
    """Resolve priors and questions; when both have problems, report those of both."""
    problems: list[Problem] = []
    prior_sets: tuple[PriorSet, ...] = ()
    questions: tuple[Question, ...] = ()
    try:
        prior_sets = resolve_prior_sets(study.spec, design)
    except DesignError as error:
        problems += error.problems
    try:
        questions = resolve_questions(study.spec.question, design)
    except DesignError as error:
        problems += error.problems
    if problems:
        raise DesignError(problems)
    return prior_sets, questions


def _placed(study: Study, problem: Problem) -> Problem:
    return replace(problem, where=study.places.get(problem.where, problem.where))


def _source(study: Study, dataset: Dataset) -> Source:
    return Source(study.data_path.name, dataset.sha256, dataset.size, dataset.notes)
