"""The factors of a formula, evaluated on the rows used: numbers, labels or a basis of several columns."""

from __future__ import annotations

import difflib
from collections.abc import Callable
from dataclasses import dataclass
from typing import Literal

import numpy as np
import pandas as pd
from formulae.transforms import BSpline, Polynomial
from numpy.typing import NDArray

from reanalysis.design.model import Factor, FloatArray
from reanalysis.errors import Problem
from reanalysis.study import formula

Domain = Callable[[FloatArray], NDArray[np.bool_]]

_DOMAINS: dict[str, tuple[str, Domain]] = {
    "log": ("numbers above 0", lambda x: x > 0.0),
    "log1p": ("numbers above -1", lambda x: x > -1.0),
    "sqrt": ("numbers from 0 up", lambda x: x >= 0.0),
}


def _standardise(x: FloatArray) -> FloatArray:
    return np.asarray((x - np.mean(x)) / np.std(x), dtype=np.float64)


_SIMPLE: dict[str, Callable[[FloatArray], FloatArray]] = {
    "log": np.log,
    "log1p": np.log1p,
    "exp": np.exp,
    "sqrt": np.sqrt,
    "abs": np.abs,
    "scale": _standardise,
    "standardise": _standardise,
    "center": lambda x: np.asarray(x - np.mean(x), dtype=np.float64),
}


@dataclass(frozen=True, slots=True)
class Variable:
    """One factor of the formula with its values.

    Attributes
    ----------
    factor : formula.Column or formula.Call
    name : str
        Public name: ``days``, ``log(days)``, ``poly(days, 2)``, ``C(dose)``.
    kind : str
        ``numeric``, ``basis`` (several numeric columns) or ``labels``.
    numbers : ndarray, shape (n,) or, for a basis, (n, d)
        Values; the position in `levels` for labels.
    levels : tuple of str
        Of labels, those that occur, the reference first; empty otherwise.
    """

    factor: formula.Factor
    name: str
    kind: Literal["numeric", "basis", "labels"]
    numbers: FloatArray
    levels: tuple[str, ...]

    @property
    def as_categorical(self) -> pd.Categorical[str]:
        """Labels as an ordered categorical, reference first."""
        labels = [self.levels[int(code)] for code in self.numbers]
        return pd.Categorical(labels, categories=list(self.levels), ordered=True)

    @property
    def as_factor(self) -> Factor:
        """Levels with their counts, for the report."""
        counts = np.bincount(self.numbers.astype(np.int64), minlength=len(self.levels))
        return Factor(self.name, self.levels, tuple(int(count) for count in counts))


def public_name(factor: formula.Factor) -> str:
    """How reader and author call a factor: as in the formula, without backticks."""
    return factor.text.replace("`", "")


def evaluate(factor: formula.Factor, frame: pd.DataFrame) -> Variable | Problem:
    """Evaluate a factor of the formula on complete rows.

    Parameters
    ----------
    factor : formula.Column or formula.Call
        Its column is in the frame.
    frame : DataFrame
        Complete rows; ``float64`` and ordered categorical columns.

    Returns
    -------
    Variable, or Problem when the column does not fit the function or does not vary
    """
    name = public_name(factor)
    if isinstance(factor, formula.Column):
        column = frame[factor.name]
        return _labels(factor, column) if is_labels(column) else _varying(factor, _floats(column))
    if factor.function == "C":
        column = frame[factor.columns[0]]
        return _labels(factor, column if is_labels(column) else _as_labels(column))
    inner = _numbers(factor.argument, frame)
    if isinstance(inner, Problem):
        return inner
    if factor.function in _SIMPLE:
        result = _apply(factor, inner)
        return result if isinstance(result, Problem) else _varying(factor, result)
    basis = _basis(factor, inner)
    return basis if isinstance(basis, Problem) else Variable(factor, name, "basis", basis, ())


def transform(factor: formula.Factor, frame: pd.DataFrame) -> FloatArray | Problem:
    """Evaluate a factor that must be a single column of numbers; the response goes this way."""
    return _numbers(factor, frame)


def is_labels(column: pd.Series) -> bool:
    """Whether a column of a dataset holds labels."""
    return isinstance(column.dtype, pd.CategoricalDtype)


def missing_columns(names: tuple[str, ...], frame: pd.DataFrame) -> list[Problem]:
    """List the columns that a study names and the data do not have."""
    problems: list[Problem] = []
    present = [str(name) for name in frame.columns]
    for name in names:
        if name not in present:
            close = difflib.get_close_matches(name, present, n=3)
            problems.append(
                Problem(
                    where=f"column {name}",
                    found="the data have no column of this name",
                    allowed=", ".join(close or present[:20]),
                    advice="correct the name in the study file; capitals count",
                )
            )
    return problems


LARGEST, SMALLEST = 1e100, 1e-100
"""Numbers beyond overflow, and spreads below vanish, as soon as they are squared."""


def not_finite(names: tuple[str, ...], frame: pd.DataFrame) -> list[Problem]:
    """List the columns that hold infinite numbers, or some too large or too alike to compute with."""
    numbers = (name for name in names if not is_labels(frame[name]))
    found = ((name, _range_problem(_floats(frame[name]))) for name in numbers)
    return [Problem(f"column {name}", *problem) for name, problem in found if problem is not None]


def _range_problem(values: FloatArray) -> tuple[str, str, str] | None:
    """What was found, what is allowed and what to do; None when the numbers can be computed with."""
    infinite, huge = int(np.sum(np.isinf(values))), int(np.sum(np.abs(values) > LARGEST))
    rescale = "measure the column in another unit"
    if infinite:
        advice = "correct them in the data, or leave them empty to count as missing"
        return f"{infinite} infinite values", "finite numbers", advice
    if huge:
        return f"{huge} numbers beyond {LARGEST:.0e}", f"numbers up to {LARGEST:.0e}", rescale
    if 0.0 < float(np.ptp(values)) < SMALLEST:
        return f"its numbers differ by less than {SMALLEST:.0e}", "numbers further apart", rescale
    return None


def _floats(column: pd.Series) -> FloatArray:
    return column.to_numpy(dtype=np.float64)


def _numbers(factor: formula.Factor, frame: pd.DataFrame) -> FloatArray | Problem:
    column = frame[factor.columns[0]]
    if is_labels(column):
        return Problem(
            where=public_name(factor),
            found=f"{factor.columns[0]} holds labels such as {column.iloc[0]}",
            allowed="a column of numbers",
            advice="use the column as it is, or correct the entries that are no numbers",
        )
    if isinstance(factor, formula.Column):
        return _floats(column)
    inner = _numbers(factor.argument, frame)
    return inner if isinstance(inner, Problem) else _apply(factor, inner)


def _apply(call: formula.Call, values: FloatArray) -> FloatArray | Problem:
    name = public_name(call)
    if call.function in _DOMAINS:
        words, holds = _DOMAINS[call.function]
        outside = int(np.sum(~holds(values)))
        if outside:
            return Problem(
                where=name,
                found=f"{public_name(call.argument)} lies outside the function's range in {outside} rows",
                allowed=words,
                advice="correct these values, or choose another transformation",
            )
    if call.function in ("scale", "standardise") and np.ptp(values) == 0.0:
        return _constant(name, f"{public_name(call.argument)} is {values[0]:g} in every row used")
    with np.errstate(over="ignore"):
        result = np.asarray(_SIMPLE[call.function](values), dtype=np.float64)
    if not np.all(np.isfinite(result)):
        return Problem(
            where=name,
            found="the result is too large for a number",
            allowed="finite results",
            advice="rescale the column, or choose another transformation",
        )
    return result


def _varying(factor: formula.Factor, values: FloatArray) -> Variable | Problem:
    name = public_name(factor)
    if len(values) > 1 and np.ptp(values) == 0.0:
        return _constant(name, f"the value is {values[0]:g} in every row used")
    return Variable(factor, name, "numeric", values, ())


def _labels(factor: formula.Factor, column: pd.Series) -> Variable | Problem:
    name = public_name(factor)
    used = column.cat.remove_unused_categories()
    levels = tuple(str(level) for level in used.cat.categories)
    if len(levels) < 2 <= len(column):
        lost = len(column.cat.categories) - len(levels)
        also = f"; {lost} other levels have no row left" if lost else ""
        return _constant(name, f"the only level in the rows used is {levels[0]}{also}")
    return Variable(factor, name, "labels", np.asarray(used.cat.codes, dtype=np.float64), levels)


def _constant(name: str, found: str) -> Problem:
    return Problem(
        where=name,
        found=found,
        allowed="a predictor with at least two different values",
        advice="take it out of the formula, or look why other rows were dropped",
    )


def _as_labels(column: pd.Series) -> pd.Series:
    values = _floats(column)
    labels = {
        value: str(int(value)) if value == int(value) else repr(value) for value in np.unique(values).tolist()
    }
    cells = pd.Categorical(
        [labels[value] for value in values.tolist()], categories=list(labels.values()), ordered=True
    )
    return pd.Series(cells, index=column.index)


def _basis(call: formula.Call, values: FloatArray) -> FloatArray | Problem:
    options = dict(call.options)
    distinct = len(np.unique(values))
    name = public_name(call)
    # A polynomial of degree d needs d + 1 places, a spline with d columns as many.
    needed = options.get("degree", 3) if call.function == "poly" else options["df"]
    if distinct <= needed:
        return Problem(
            where=name,
            found=f"{public_name(call.argument)} has only {distinct} different values",
            allowed=f"at least {needed + 1} for {needed} columns",
            advice="lower the degree, or use the column as it is",
        )
    if call.function == "poly":
        return np.asarray(Polynomial()(values, options["degree"]), dtype=np.float64)
    degree = options.get("degree", 3)
    return np.asarray(BSpline()(values, df=options["df"], degree=degree), dtype=np.float64)
