"""Coefficients that have no finite maximum-likelihood estimate, found without fitting.

In a Bernoulli model the likelihood keeps rising in a direction ``d`` of the
coefficients when ``x_i'd >= 0`` for all events and ``x_i'd <= 0`` for all other
rows, with at least one inequality strict (Albert and Anderson 1984). In a
Poisson model with log link the same happens when ``x_i'd = 0`` in all rows with
a positive count and ``x_i'd <= 0`` in all rows with a zero count, one of them
strict (Correia, Guimaraes and Zylkin 2019). Both are questions for a linear
program (Konis 2007). The rows whose inequality is strict are predicted
perfectly in the limit and say nothing about the other coefficients: those are
estimated from the remaining rows.

References
----------
Albert, A. and Anderson, J. A. (1984). On the existence of maximum likelihood
estimates in logistic regression models. Biometrika 71, 1-10.

Correia, S., Guimaraes, P. and Zylkin, T. (2019). Verifying the existence of
maximum likelihood estimates for generalized linear models. arXiv:1903.01633.

Konis, K. (2007). Linear programming algorithms for detecting separated data in
binary logistic regression models. DPhil thesis, University of Oxford.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy import optimize

from reanalysis.design.model import Design, FloatArray
from reanalysis.design.rank import find_basis, null_space

BoolArray = NDArray[np.bool_]

STRICT = 1e-6
"""A row's inequality counts as strict above this; rows have length of order 1, and the solver keeps
its constraints to 1e-7."""

MOST_DIRECTIONS = 8
"""Signs are sought when the separated rows leave up to this many directions open; beyond, both signs
are nearly always possible, and two linear programs for each column would take most of a second."""

SAMPLE_PER_COLUMN = 10
"""Rows of each outcome, for each column, that are tried before all rows are."""


@dataclass(frozen=True, slots=True)
class SeparatedColumn:
    """A column whose coefficient has no finite estimate.

    Attributes
    ----------
    column : int
        Position in the design.
    direction : int
        1 when the estimate runs to plus infinity, -1 to minus infinity, 0 when both are possible
        (or not told apart, see `MOST_DIRECTIONS`).
    """

    column: int
    direction: int


@dataclass(frozen=True, slots=True)
class Separation:
    """Which rows and columns are separated.

    Attributes
    ----------
    rows : ndarray of bool, shape (n,)
        Rows that are predicted perfectly in the limit.
    columns : tuple of SeparatedColumn
        In the order of the design; empty without separation.
    """

    rows: BoolArray
    columns: tuple[SeparatedColumn, ...]

    @property
    def complete(self) -> bool:
        """Whether every row is predicted perfectly in the limit."""
        return bool(np.all(self.rows))


def find_separation(design: Design) -> Separation:
    """Find the coefficients without a finite maximum-likelihood estimate.

    Parameters
    ----------
    design : Design
        Any family; a Gaussian model is never separated.

    Returns
    -------
    Separation
        Columns that are exact combinations of others are no part of it.
    """
    n = design.matrix.shape[0]
    nowhere = np.zeros(n, dtype=bool)
    if design.family.name == "gaussian":
        return Separation(nowhere, ())
    basis = find_basis(design.matrix)
    q = basis.q * np.sqrt(n)
    y = design.response.values
    # Written as "toward @ d >= 0", with equality in the rows that may not move at all.
    toward = np.where(y > 0.5, 1.0, -1.0)[:, None] * q
    fixed = y > 0.5 if design.family.name == "poisson" else nowhere
    if design.family.name == "bernoulli" and _sample_overlaps(toward, y):
        return Separation(nowhere, ())
    rows = _separated_rows(toward, fixed)
    if not np.any(rows):
        return Separation(rows, ())
    lost = np.flatnonzero(basis.estimable & ~find_basis(design.matrix[~rows]).estimable)
    free = null_space(q[~rows])
    cone = _distinct(toward[rows] @ free)
    back = basis.back @ free
    return Separation(
        rows, tuple(SeparatedColumn(int(column), _direction(cone, back[column])) for column in lost)
    )


def _sample_overlaps(toward: FloatArray, y: FloatArray) -> bool:
    """Whether some of the rows already rule separation out: further rows only add constraints."""
    size = SAMPLE_PER_COLUMN * toward.shape[1]
    if len(y) <= 4 * size:
        return False
    groups = (np.flatnonzero(y > 0.5), np.flatnonzero(y <= 0.5))
    picks = [group[np.linspace(0, len(group) - 1, min(size, len(group))).astype(int)] for group in groups]
    sample = toward[np.concatenate(picks)]
    if find_basis(sample).rank < toward.shape[1]:
        return False
    return not np.any(_separated_rows(sample, np.zeros(len(sample), dtype=bool)))


def _separated_rows(toward: FloatArray, fixed: BoolArray) -> BoolArray:
    """Rows with ``toward_i'd > 0`` for some ``d`` that violates no row.

    A direction found later is added to a large multiple of those found before, so rows that are
    already separated need no constraint any more; each round gets a fresh, well-scaled basis.
    """
    separated = np.zeros(len(toward), dtype=bool)
    if np.any(fixed):
        toward = toward @ null_space(toward[fixed])
    while True:
        open_rows = np.flatnonzero(~separated & ~fixed)
        basis = find_basis(_without_dust(toward[open_rows]))
        if basis.rank == 0:
            return separated
        rows = basis.q * np.sqrt(len(open_rows))
        strict = rows @ _best_direction(rows) > STRICT
        if not np.any(strict):
            return separated
        separated[open_rows[strict]] = True


def _without_dust(matrix: FloatArray) -> FloatArray:
    # A projection leaves 1e-16 where exact arithmetic leaves 0; scaled up, that would look like a column.
    return np.where(np.abs(matrix) < 1e-10, 0.0, matrix)


def _distinct(rows: FloatArray) -> FloatArray:
    return np.unique(np.round(rows, 12), axis=0)


def _best_direction(rows: FloatArray) -> FloatArray:
    """Maximise ``sum(rows @ d)`` subject to ``rows @ d >= 0`` in the unit box."""
    return _solve(-np.sum(rows, axis=0), _distinct(rows))


def _direction(cone: FloatArray, target: FloatArray) -> int:
    if len(target) > MOST_DIRECTIONS:
        return 0
    scale = float(np.max(np.abs(target)))
    goal = target / scale
    reaches_up = float(goal @ _solve(-goal, cone)) > STRICT
    reaches_down = float(goal @ _solve(goal, cone)) < -STRICT
    return int(reaches_up) - int(reaches_down)


def _solve(cost: FloatArray, rows: FloatArray) -> FloatArray:
    result = optimize.linprog(cost, A_ub=-rows, b_ub=np.zeros(len(rows)), bounds=(-1.0, 1.0), method="highs")
    # No direction is always feasible, and the box bounds the rest: only numerical trouble ends otherwise.
    return np.zeros(len(cost)) if result.x is None else np.asarray(result.x, dtype=np.float64)


def describe_separation(design: Design, separated: SeparatedColumn) -> str:
    """Say in a clause why a coefficient has no finite estimate.

    Returns
    -------
    str
        Such as ``"separated: all 13 rows with NV = 1 have HG = 1"``.
    """
    column = design.columns[separated.column]
    if column.kind == "intercept":
        on = ~np.any(design.matrix[:, 1:] != 0.0, axis=1)
        group = "at the reference (all other columns 0)"
    else:
        on = design.matrix[:, separated.column] != 0.0
        group = f"with {_present(design, separated.column)}"
    outcomes = set((design.response.values[on] > 0.5).tolist())
    if len(outcomes) == 1 and not np.all(on):
        return f"separated: all {int(np.sum(on))} rows {group} have {_outcome(design, outcomes == {True})}"
    name = "the intercept" if column.kind == "intercept" else column.name
    if design.family.name == "poisson":
        return f"separated: together with the other columns, {name} picks out rows whose count is always 0"
    return (
        f"separated: together with the other columns, {name} tells {_outcome(design, True)} from "
        f"{_outcome(design, False)} without overlap"
    )


def _present(design: Design, column: int) -> str:
    name = design.columns[column].name
    if design.columns[column].kind == "categorical":
        return name
    return f"{name} = 1" if set(design.matrix[:, column].tolist()) <= {0.0, 1.0} else f"{name} other than 0"


def _outcome(design: Design, happened: bool, /) -> str:
    response = design.response
    if design.family.name == "poisson":
        return f"{response.name} above 0" if happened else f"{response.name} = 0"
    return f"{response.name} = {response.event if happened else response.other}"
