"""What can be seen coming in a design before anything is fitted."""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass
from typing import Literal

import numpy as np

from reanalysis.design.model import Design
from reanalysis.design.rank import condition_number, find_dependencies, variance_inflation
from reanalysis.design.separation import describe_separation, find_separation
from reanalysis.design.words import describe_dependency, listed

Kind = Literal[
    "dependent columns",
    "nearly dependent columns",
    "inflated variance",
    "separation",
    "empty combination",
    "level seen once",
    "many levels",
    "few outcomes",
]
Severity = Literal["note", "warning", "stop"]

MANY_LEVELS = 30
"""A factor with more levels is usually a number or an identifier read as labels."""

INFLATED = 10.0
"""Variance inflation from here on is mentioned (Marquardt 1970)."""

ILL_CONDITIONED = 1e7
"""Condition number from here on is a warning: half of the digits of double precision are at stake."""

OUTCOMES_PER_COLUMN = 10.0
"""Fewer events (bernoulli: of the rarer outcome) for each column are mentioned: below about ten,
estimates were biased and intervals missed (Peduzzi et al. 1996, J Clin Epidemiol 49, 1373-1379)."""


@dataclass(frozen=True, slots=True)
class Finding:
    """One thing that the reader should know before trusting a fit.

    Attributes
    ----------
    kind : str
    where : str
        Public name of the column, factor or response; several joined by commas.
    message : str
        What was found, a sentence.
    advice : str
        What to do, an imperative sentence.
    severity : str
        ``note`` for something to know, ``warning`` where part of one analysis is lost or doubtful,
        ``stop`` where the model as written asks something that no data can answer.
    """

    kind: Kind
    where: str
    message: str
    advice: str
    severity: Severity


def outlook(design: Design) -> tuple[Finding, ...]:
    """List what can be seen coming; fits nothing.

    Parameters
    ----------
    design : Design

    Returns
    -------
    tuple of Finding
        The most severe first.
    """
    order: tuple[Severity, ...] = ("stop", "warning", "note")
    findings = [
        *_dependent(design),
        *_nearly_dependent(design),
        *_separated(design),
        *_levels(design),
        *_few_outcomes(design),
    ]
    return tuple(sorted(findings, key=lambda finding: order.index(finding.severity)))


def _dependent(design: Design) -> Iterator[Finding]:
    for dependency in find_dependencies(design.matrix):
        words = describe_dependency(design, dependency)
        name = design.columns[dependency.column].name
        if not dependency.parts:
            yield Finding(
                kind="empty combination",
                where=name,
                message=f"No row has this combination: {words}.",
                advice="Merge levels or take the interaction out: no row bears on this coefficient.",
                severity="warning",
            )
            continue
        parts = tuple(design.columns[column].name for column, _ in dependency.parts)
        yield Finding(
            kind="dependent columns",
            where=", ".join((*parts, name)),
            message=f"These columns cannot be told apart: {words}.",
            advice=f"Take {listed((*parts, name))} down to columns that carry different information.",
            severity="stop",
        )


def _nearly_dependent(design: Design) -> Iterator[Finding]:
    condition = condition_number(design.matrix)
    if math.isinf(condition):
        return
    names = tuple(column.name for column in design.columns)
    if condition >= ILL_CONDITIONED:
        yield Finding(
            kind="nearly dependent columns",
            where=", ".join(_weakest(design)),
            message=f"The condition number is {condition:.2g} with columns at unit length: rounding in the "
            "data is magnified by as much.",
            advice="Centre or rescale the predictors, or use poly() in place of raw powers.",
            severity="warning",
        )
    start = int(design.has_intercept)
    others = design.matrix[:, start:]
    if others.shape[1] < 2:
        return
    centred = others - np.mean(others, axis=0) if design.has_intercept else others
    inflation = variance_inflation(centred)
    high = [position for position in np.argsort(-inflation) if inflation[position] >= INFLATED]
    if high:
        where = tuple(names[start + position] for position in high)
        yield Finding(
            kind="inflated variance",
            where=", ".join(where),
            message=f"These predictors overlap: the variance of {where[0]} is {inflation[high[0]]:.3g} times "
            "what it would be if the column were unrelated to the others.",
            advice="Do not read these coefficients one by one; consider leaving one of them out.",
            severity="note",
        )


def _weakest(design: Design) -> tuple[str, ...]:
    """Columns that make up the direction that the data determine least."""
    lengths = np.linalg.norm(design.matrix, axis=0)
    direction = np.abs(np.linalg.svd(design.matrix / lengths)[2][-1])
    return tuple(
        column.name for column, weight in zip(design.columns, direction, strict=True) if weight >= 0.1
    )


def _separated(design: Design) -> Iterator[Finding]:
    separation = find_separation(design)
    for found in separation.columns:
        ends = {
            1: "it runs to plus infinity",
            -1: "it runs to minus infinity",
            0: "its direction is open too",
        }
        yield Finding(
            kind="separation",
            where=design.columns[found.column].name,
            message=f"No finite maximum-likelihood estimate exists ({ends[found.direction]}); "
            f"{describe_separation(design, found)}.",
            advice="Read the Bayesian answer as driven by its prior; or merge levels, or drop the term.",
            severity="warning",
        )


def _levels(design: Design) -> Iterator[Finding]:
    for factor in design.factors:
        once = tuple(level for level, count in zip(factor.levels, factor.counts, strict=True) if count == 1)
        if len(factor.levels) > MANY_LEVELS:
            yield Finding(
                kind="many levels",
                where=factor.name,
                message=f"{factor.name} has {len(factor.levels)} levels.",
                advice="Check that it is a grouping and not a number or an identifier read as labels.",
                severity="note",
            )
        if once:
            yield Finding(
                kind="level seen once",
                where=factor.name,
                message=f"Only one row has {factor.name} = {listed(once)}.",
                advice="Merge rare levels: such a row fits its own level and tells nothing else.",
                severity="note",
            )


def _few_outcomes(design: Design) -> Iterator[Finding]:
    y = design.response.values
    columns = len(design.columns) - int(design.has_intercept)
    if design.family.name == "gaussian" or columns == 0:
        return
    if design.family.name == "bernoulli":
        count, what = float(min(np.sum(y), len(y) - np.sum(y))), "rows with the rarer outcome"
    else:
        count, what = float(np.sum(y)), "events"
    if count < OUTCOMES_PER_COLUMN * columns:
        yield Finding(
            kind="few outcomes",
            where=design.response.name,
            message=f"There are {count:.0f} {what} for {columns} columns, {count / columns:.2g} for each.",
            advice="Expect wide intervals and z approximations that are rough; keep fewer terms.",
            severity="note",
        )
