"""Every error that a user can act on.

::

    ReanalysisError
    ├── UsageError        the command line
    ├── StudyError        the study file
    ├── FormulaError      the model formula
    ├── DataError         the data file
    ├── DesignError       data and formula together
    ├── FitError          one of the two analyses
    └── ReportError       writing the report

Each carries a tuple of `Problem`, so that a stage can report everything it
found at once. A `Problem` says which input, what was found, what is allowed and
what to do about it.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class Problem:
    """One thing that is wrong with an input.

    Attributes
    ----------
    where : str
        The input: ``"firmness.toml, line 12, model.family"``.
    found : str
        What was found there, a clause without a full stop.
    allowed : str
        What is allowed there; empty where `found` says it all.
    advice : str
        What to do next, an imperative clause.
    """

    where: str
    found: str
    allowed: str
    advice: str

    def __str__(self) -> str:
        clauses = [f"{self.where}: {self.found}"]
        if self.allowed:
            clauses.append(f"allowed: {self.allowed}")
        clauses.append(f"to do: {self.advice}")
        return "\n    ".join(clauses)


class ReanalysisError(Exception):
    """Base of every error that a user can act on."""

    def __init__(self, problems: Problem | Iterable[Problem]) -> None:
        self.problems = (problems,) if isinstance(problems, Problem) else tuple(problems)
        super().__init__("\n".join(str(problem) for problem in self.problems))

    def __reduce__(self) -> tuple[type[ReanalysisError], tuple[tuple[Problem, ...]]]:
        # The default would hand the joined message to __init__ when a worker sends the error home.
        return type(self), (self.problems,)


class UsageError(ReanalysisError):
    """The command line asks for something that cannot be done."""


class StudyError(ReanalysisError):
    """The study file cannot be read or does not say what it must."""


class FormulaError(ReanalysisError):
    """The formula holds something that is not on the allow-list."""


class DataError(ReanalysisError):
    """The data file cannot be read, or its columns are not what the study says."""


class DesignError(ReanalysisError):
    """Data and formula do not give a model that can be fitted."""


class FitError(ReanalysisError):
    """One of the two analyses cannot be carried out."""


class ReportError(ReanalysisError):
    """The report cannot be written."""
