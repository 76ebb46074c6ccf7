"""From study and data to the one `Design` that both analyses get."""

from __future__ import annotations

from collections import Counter
from dataclasses import dataclass

import numpy as np
import pandas as pd

from reanalysis.data.complete import CompleteCases, complete_cases
from reanalysis.data.dataset import Dataset
from reanalysis.design.matrix import Expanded, expand
from reanalysis.design.model import Column, Design, FloatArray, Response, RowAccount
from reanalysis.design.outcome import read_response
from reanalysis.design.units import coefficient_unit
from reanalysis.design.variables import (
    LARGEST,
    Variable,
    evaluate,
    is_labels,
    missing_columns,
    not_finite,
)
from reanalysis.errors import DesignError, Problem
from reanalysis.families import Family, find_family
from reanalysis.study import formula
from reanalysis.study.spec import StudySpec


@dataclass(frozen=True, slots=True)
class _Pieces:
    response: Response
    variables: dict[formula.Factor, Variable]
    offset: FloatArray | None


def build_design(spec: StudySpec, dataset: Dataset) -> Design:
    """Build response and design matrix.

    Parameters
    ----------
    spec : StudySpec
        What the study file says (``Study.spec``).
    dataset : Dataset
        Columns are ``float64`` or ordered categoricals.

    Returns
    -------
    Design
        From the rows that are complete in all variables of the model.

    Raises
    ------
    FormulaError
        When the formula holds something that is not offered.
    DataError
        When no row is complete, or rows are incomplete and the study refuses that.
    DesignError
        When data and formula do not give a model that can be fitted; holds every problem found.
    """
    parts = formula.check_formula(spec.model.formula)
    names = columns_used(spec, parts)
    problems = _roles(spec, parts) + missing_columns(names, dataset.frame)
    present = [name for name in names if name in dataset.frame.columns]
    if not present:
        raise DesignError(problems)
    cases = complete_cases(dataset.frame[present], spec.data.missing)
    problems += not_finite(tuple(present), cases.frame)
    if problems:
        problems += _problems_of_present(spec, parts, cases.frame)
        raise DesignError(dict.fromkeys(problems))
    pieces = _evaluate(spec, parts, cases.frame)
    return _assemble(spec, parts, cases, pieces)


def columns_used(spec: StudySpec, parts: formula.FormulaParts) -> tuple[str, ...]:
    """Name the columns that the model needs: response, predictors, exposure."""
    exposure = (spec.model.exposure,) if spec.model.exposure else ()
    return tuple(dict.fromkeys((*parts.columns, *exposure)))


def _roles(spec: StudySpec, parts: formula.FormulaParts) -> list[Problem]:
    """Problems that the names alone show."""
    problems: list[Problem] = []
    response, exposure = parts.response_name, spec.model.exposure
    if exposure == response:
        problems.append(
            Problem(
                where="model.exposure",
                found=f"{exposure} is also the response",
                allowed="another column",
                advice="name the column that holds each row's exposure",
            )
        )
    if exposure and spec.model.family != "poisson":
        problems.append(
            Problem(
                where="model.exposure",
                found=f"an exposure with the family {spec.model.family}",
                allowed="the family poisson",
                advice="remove exposure, or correct the family",
            )
        )
    return problems


def _factors(parts: formula.FormulaParts) -> tuple[formula.Factor, ...]:
    return tuple(dict.fromkeys(factor for term in parts.terms for factor in term.factors))


def _problems_of_present(spec: StudySpec, parts: formula.FormulaParts, frame: pd.DataFrame) -> list[Problem]:
    """What else is wrong with those columns that are there and hold finite values."""
    ok = {name for name in frame.columns if not not_finite((name,), frame)}
    found = [evaluate(factor, frame) for factor in _factors(parts) if set(factor.columns) <= ok]
    problems = [item for item in found if isinstance(item, Problem)]
    if parts.response_name in ok:
        response = read_response(spec, parts.response, frame)
        problems += [response] if isinstance(response, Problem) else []
    if spec.model.exposure in ok:
        offset = _offset(spec.model.exposure, frame)
        problems += [offset] if isinstance(offset, Problem) else []
    return problems


def _evaluate(spec: StudySpec, parts: formula.FormulaParts, frame: pd.DataFrame) -> _Pieces:
    response = read_response(spec, parts.response, frame)
    evaluated = {factor: evaluate(factor, frame) for factor in _factors(parts)}
    offset = _offset(spec.model.exposure, frame)
    problems = [item for item in (response, *evaluated.values(), offset) if isinstance(item, Problem)]
    if isinstance(response, Problem) or isinstance(offset, Problem) or problems:
        raise DesignError(dict.fromkeys(problems))
    variables = {factor: item for factor, item in evaluated.items() if isinstance(item, Variable)}
    return _Pieces(response, variables, offset)


def _offset(exposure: str | None, frame: pd.DataFrame) -> FloatArray | Problem | None:
    if exposure is None:
        return None
    column = frame[exposure]
    if is_labels(column):
        found = f"labels such as {column.iloc[0]}"
    else:
        values = column.to_numpy(dtype=np.float64)
        wrong = values <= 0.0
        if not np.any(wrong):
            return np.log(values)
        found = f"{int(np.sum(wrong))} rows are not above 0, such as {values[wrong][0]:g}"
    return Problem(
        where=f"exposure {exposure}",
        found=found,
        allowed="numbers above 0: person-years, area, hours",
        advice="correct these values, or leave them empty to drop the rows",
    )


def _assemble(spec: StudySpec, parts: formula.FormulaParts, cases: CompleteCases, pieces: _Pieces) -> Design:
    family = find_family(spec.model.family, spec.model.link)
    used = len(cases.frame)
    _refuse_too_many(_least_columns(parts, pieces.variables), used)
    expanded = expand(parts, pieces.variables, used)
    problems = _shape_problems(expanded, used)
    if problems:
        raise DesignError(problems)
    return Design(
        formula=spec.model.formula,
        family=family,
        response=pieces.response,
        matrix=np.column_stack([column.numbers for column in expanded]),
        columns=tuple(
            _column(position, column, family, pieces.response.unit, spec.data.units)
            for position, column in enumerate(expanded)
        ),
        factors=tuple(item.as_factor for item in pieces.variables.values() if item.kind == "labels"),
        offset=pieces.offset,
        exposure=spec.model.exposure,
        rows=RowAccount(read=cases.rows_read, used=used, dropped_by=cases.dropped_by),
    )


def _least_columns(parts: formula.FormulaParts, variables: dict[formula.Factor, Variable]) -> int:
    """Fewest columns that the terms can take, to refuse a huge matrix before it is built."""
    count = int(parts.intercept)
    for term in parts.terms:
        widths = [_width(variables[factor]) for factor in term.factors]
        count += int(np.prod(widths))
    return count


def _width(variable: Variable) -> int:
    if variable.kind == "labels":
        return len(variable.levels) - 1
    return int(variable.numbers.shape[1]) if variable.kind == "basis" else 1


def _refuse_too_many(columns: int, rows: int) -> None:
    if rows < columns + 1:
        raise DesignError(
            Problem(
                where="model.formula",
                found=f"the model has {columns} columns or more; complete rows: {rows}",
                allowed=f"at least {columns + 1} rows for {columns} columns",
                advice="take terms out, or merge the levels of a factor that has many",
            )
        )


def _shape_problems(expanded: tuple[Expanded, ...], rows: int) -> list[Problem]:
    _refuse_too_many(len(expanded), rows)
    problems: list[Problem] = []
    for column in expanded:
        values = column.numbers
        if not np.all(np.abs(values) <= LARGEST):
            problems.append(
                Problem(
                    where=f"column {column.name} of the model",
                    found="a product is too large to compute with",
                    allowed=f"numbers up to {LARGEST:.0e}",
                    advice="rescale the columns of this interaction",
                )
            )
        # A column of zeros comes from a combination of levels without rows; the outlook reports it.
        elif column.variables and np.ptp(values) == 0.0 and values[0] != 0.0:
            problems.append(
                Problem(
                    where=f"column {column.name} of the model",
                    found=f"it is {values[0]:g} in every row used",
                    allowed="a column that varies",
                    advice="take the term out of the formula",
                )
            )
    for name, count in Counter(column.name for column in expanded).items():
        if count > 1:
            problems.append(
                Problem(
                    where=f"column {name} of the model",
                    found=f"{count} columns of the model would have this name",
                    allowed="one",
                    advice="rename the column of the data; Intercept is the name of the model's constant",
                )
            )
    return problems


def _column(
    position: int, column: Expanded, family: Family, response_unit: str, units: dict[str, str]
) -> Column:
    labels = all(variable.kind == "labels" for variable in column.variables)
    return Column(
        internal=f"c{position}",
        name=column.name,
        term=column.term,
        unit=coefficient_unit(family, response_unit, column.variables, units),
        kind="intercept" if not column.variables else "categorical" if labels else "numeric",
        mean=float(np.mean(column.numbers)),
        sd=float(np.std(column.numbers)),
    )
