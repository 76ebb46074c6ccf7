"""From terms and variables to named columns of numbers."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from itertools import product
from typing import Any

import numpy as np
import pandas as pd
from formulae import design_matrices
from formulae.environment import Environment

from reanalysis.design.model import FloatArray
from reanalysis.design.variables import Variable
from reanalysis.study import formula


@dataclass(frozen=True, slots=True)
class Expanded:
    """One column of the matrix before it has a unit.

    Attributes
    ----------
    name, term : str
        Public names.
    variables : tuple of Variable
        Those that the column is a product of; empty for the intercept.
    numbers : ndarray, shape (n,)
    """

    name: str
    term: str
    variables: tuple[Variable, ...]
    numbers: FloatArray


def expand(
    parts: formula.FormulaParts, variables: Mapping[formula.Factor, Variable], rows: int
) -> tuple[Expanded, ...]:
    """Build the columns of the right-hand side, coded by formulae.

    Parameters
    ----------
    parts : FormulaParts
    variables : mapping of factor to Variable
        Every factor of the terms.
    rows : int
        Number of rows used.

    Returns
    -------
    tuple of Expanded
        The intercept first, if any, then the terms in formulae's order. Categorical variables are
        coded against their first level where the model already has the lower-order terms, and by
        all their levels where it has not.
    """
    # The parser sees v0, v1, ... only: a column called mu or Intercept, or a comma in a term's
    # name, means something to the libraries below.
    safe = {factor: f"v{position}" for position, factor in enumerate(variables)}
    frame: dict[str, Any] = {"rows": np.zeros(rows)}
    functions: dict[str, Any] = {}
    by_spelling: dict[str, Variable] = {}
    for factor, variable in variables.items():
        name = safe[factor]
        frame[name] = variable.numbers
        by_spelling[_spelling(variable, name)] = variable
        if variable.kind == "labels":
            frame[name] = variable.as_categorical
        elif variable.kind == "basis":
            frame[name] = np.zeros(rows)
            functions[f"basis_{name}"] = _giving(variable.numbers)
    terms = [_render(term, variables, safe) for term in parts.terms]
    text = " + ".join(["1" if parts.intercept else "0", *terms])
    with np.errstate(over="ignore"):  # products that are too large are reported by the caller
        matrices = design_matrices(text, pd.DataFrame(frame), na_action="error", env=Environment([functions]))
    written = {term.key: term.factors for term in parts.terms}
    columns: list[Expanded] = []
    for term in matrices.common.terms.values():
        columns += _columns_of(term, by_spelling, written)
    return tuple(columns)


def _giving(values: FloatArray) -> Any:
    return lambda _: values


def _spelling(variable: Variable, safe: str) -> str:
    return f"basis_{safe}({safe})" if variable.kind == "basis" else safe


def _render(
    term: formula.Term, variables: Mapping[formula.Factor, Variable], safe: Mapping[formula.Factor, str]
) -> str:
    """Write a term in safe names, its numeric variables in one order.

    formulae compares the numeric part of ``g:x:z`` with other terms as text, so that after
    ``x:z`` it would code ``g:z:x`` by all levels of g.
    """
    numeric = iter(
        sorted(
            (factor for factor in term.factors if variables[factor].kind != "labels"),
            key=list(variables).index,
        )
    )
    ordered = [factor if variables[factor].kind == "labels" else next(numeric) for factor in term.factors]
    return ":".join(_spelling(variables[factor], safe[factor]) for factor in ordered)


def _columns_of(
    term: Any,
    by_spelling: Mapping[str, Variable],
    written: Mapping[frozenset[formula.Factor], tuple[formula.Factor, ...]],
) -> list[Expanded]:
    data = np.asarray(term.data, dtype=np.float64)
    data = data.reshape(len(data), -1)
    if term.name == "Intercept":
        return [Expanded("Intercept", "Intercept", (), data[:, 0])]
    used = tuple(by_spelling[component.name] for component in term.components)
    # Names keep the author's order; a term that formulae has added for full rank has none.
    factors = tuple(variable.factor for variable in used)
    order = [factors.index(factor) for factor in written.get(frozenset(factors), factors)]
    labels = [
        _labels_of(component, variable) for component, variable in zip(term.components, used, strict=True)
    ]
    names = [":".join(parts[position] for position in order) for parts in product(*labels)]
    public = ":".join(used[position].name for position in order)
    return [
        Expanded(name, public, used, data[:, position])
        for position, name in zip(range(data.shape[1]), names, strict=True)
    ]


def _labels_of(component: Any, variable: Variable) -> Sequence[str]:
    if variable.kind == "labels":
        return [f"{variable.name}[{level}]" for level in component.contrast_matrix.labels]
    if variable.kind == "basis":
        return [f"{variable.name}[{position + 1}]" for position in range(variable.numbers.shape[1])]
    return [variable.name]
