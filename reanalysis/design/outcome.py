"""The response as numbers in its family's range."""

from __future__ import annotations

import numpy as np
import pandas as pd

from reanalysis.design.model import FloatArray, Response
from reanalysis.design.units import response_unit
from reanalysis.design.variables import is_labels, public_name, transform
from reanalysis.errors import Problem
from reanalysis.study import formula
from reanalysis.study.spec import ModelSpec, StudySpec


def read_response(spec: StudySpec, factor: formula.Factor, frame: pd.DataFrame) -> Response | Problem:
    """Turn the response column into numbers, the event of a two-level response into 1.

    Parameters
    ----------
    spec : StudySpec
    factor : formula.Column or formula.Call
        Left-hand side of the formula.
    frame : DataFrame
        Complete rows, at least one.

    Returns
    -------
    Response, or Problem when the column is outside the family's range or does not vary
    """
    unit = response_unit(factor, spec.data.units)
    if spec.model.family == "bernoulli":
        return _two_outcomes(spec.model, factor, frame, unit)
    name = public_name(factor)
    values = transform(factor, frame)
    if isinstance(values, Problem):
        return Problem(
            where=f"response {name}",
            found=values.found,
            allowed=f"numbers, with the family {spec.model.family}",
            advice='correct the column, or use family = "bernoulli" with an event if it has two outcomes',
        )
    problem = _counts(name, values) if spec.model.family == "poisson" else None
    if problem is None and len(values) > 1 and np.ptp(values) == 0.0:
        problem = _same(name, f"{values[0]:g}")
    return problem or Response(name=name, unit=unit, event=None, other=None, values=values)


def _counts(name: str, values: FloatArray) -> Problem | None:
    wrong = (values < 0.0) | (values != np.floor(values))
    if not np.any(wrong):
        return None
    return Problem(
        where=f"response {name}",
        found=f"{int(np.sum(wrong))} rows hold no count, such as {values[wrong][0]:g}",
        allowed="whole numbers from 0 up, with the family poisson",
        advice="correct the values, or use another family; a rate is a count with an exposure",
    )


def _same(name: str, value: str) -> Problem:
    return Problem(
        where=f"response {name}",
        found=f"the outcome is {value} in every row used",
        allowed="an outcome that varies",
        advice="look why the other rows were dropped, or choose another response",
    )


def _two_outcomes(
    model: ModelSpec, factor: formula.Factor, frame: pd.DataFrame, unit: str
) -> Response | Problem:
    name = public_name(factor)
    if isinstance(factor, formula.Call):
        return Problem(
            where=f"response {name}",
            found="a function of a two-outcome response",
            allowed=f"the column {factor.columns[0]} itself",
            advice=f"write {factor.columns[0]} on the left-hand side",
        )
    column = frame[factor.name]
    if is_labels(column):
        used = column.cat.remove_unused_categories()
        levels = tuple(str(level) for level in used.cat.categories)
        outcomes = column.astype(str).to_numpy(dtype=str)
    else:
        numbers = column.to_numpy(dtype=np.float64)
        if not np.all(np.isin(numbers, (0.0, 1.0))):
            return _not_two(name, tuple(f"{value:g}" for value in np.unique(numbers)))
        outcomes = np.where(numbers == 1.0, "1", "0")
        levels = tuple(str(level) for level in np.unique(outcomes))
    if len(levels) == 1:
        return _same(name, levels[0])
    if len(levels) > 2:
        return _not_two(name, levels)
    event = "1" if model.event is None and not is_labels(column) else model.event
    if event not in levels:
        return _event(name, event, levels)
    other = levels[0] if event == levels[1] else levels[1]
    values = (outcomes == event).astype(np.float64)
    return Response(name=name, unit=unit, event=event, other=other, values=values)


def _not_two(name: str, values: tuple[str, ...]) -> Problem:
    shown = ", ".join(values[:6]) + (", ..." if len(values) > 6 else "")
    return Problem(
        where=f"response {name}",
        found=f"{len(values)} different values: {shown}",
        allowed="two labels, or the numbers 0 and 1, with the family bernoulli",
        advice="make a column with two outcomes, or use another family",
    )


def _event(name: str, event: str | None, levels: tuple[str, ...]) -> Problem:
    found = (
        "the outcome to be modelled is not named" if event is None else f"the event {event} does not occur"
    )
    first, second = levels
    return Problem(
        where="model.event",
        found=f"{found}; {name} is {first} or {second}",
        allowed=f'"{first}" or "{second}"',
        advice=f'add event = "{second}" to model the probability that {name} is {second}',
    )
