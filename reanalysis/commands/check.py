"""`reanalysis check`: validate studies and print their models in words; fits nothing."""

from __future__ import annotations

import sys
from collections.abc import Iterator, Sequence
from pathlib import Path

from reanalysis.analysis.prepare import Prepared, prepare
from reanalysis.commands.errors import print_error
from reanalysis.commands.exit_codes import EXIT_INVALID, EXIT_OK
from reanalysis.errors import ReanalysisError
from reanalysis.report import numbers
from reanalysis.report.priors_in_words import describe
from reanalysis.study.read import load_study


def run_check(paths: Sequence[Path], *, allow_outside: bool) -> int:
    """Check each study; return the exit code."""
    code = EXIT_OK
    for path in paths:
        try:
            prepared = prepare(load_study(path, allow_outside=allow_outside))
        except ReanalysisError as error:
            print_error(path.name, error)
            code = EXIT_INVALID
            continue
        sys.stdout.write("\n".join(describe_prepared(prepared)) + "\n")
    return code


def describe_prepared(prepared: Prepared) -> Iterator[str]:
    """Describe design, priors and questions in lines of text."""
    yield f"{prepared.study.name}: {prepared.study.spec.title}"
    yield from _rows(prepared)
    yield from _model(prepared)
    yield from _columns(prepared)
    yield from _priors(prepared)
    yield from _questions(prepared)
    yield from _findings(prepared)
    yield ""


def _rows(prepared: Prepared) -> Iterator[str]:
    rows = prepared.design.rows
    used, read = numbers.count(rows.used), numbers.count(rows.read)
    yield f"  rows      {used} used of {read} in {prepared.source.name}"
    for name, number in rows.dropped_by:
        yield f"            {numbers.count(number)} without {name}"
    for note in prepared.source.notes:
        yield f"            note: {note}"


def _model(prepared: Prepared) -> Iterator[str]:
    design = prepared.design
    yield f"  model     {design.formula}"
    yield f"            {design.family.name} with {design.family.link} link"
    if design.response.event is not None:
        yield (
            f"            models the probability that {design.response.name} = {design.response.event} "
            f"(not {design.response.other})"
        )
    if design.exposure is not None:
        yield f"            rate per unit of {design.exposure}"
    for factor in design.factors:
        pairs = zip(factor.levels, factor.counts, strict=True)
        counts = ", ".join(f"{level} {numbers.count(number)}" for level, number in pairs)
        yield f"            {factor.name}: reference {factor.reference}; rows: {counts}"


def _columns(prepared: Prepared) -> Iterator[str]:
    yield "  columns"
    width = max(len(column.name) for column in prepared.design.columns)
    for column in prepared.design.columns:
        spread = f"mean {numbers.given(_short(column.mean))}, SD {numbers.given(_short(column.sd))}"
        unit = f", effect in {column.unit}" if column.unit else ""
        yield f"            {column.name:<{width}}  {column.kind}, {spread}{unit}"


def _priors(prepared: Prepared) -> Iterator[str]:
    units = {column.name: column.unit for column in prepared.design.columns}
    units["sigma"] = prepared.design.response.unit
    for prior_set in prepared.prior_sets:
        main = " (main)" if prior_set.name == prepared.study.spec.model.main_prior else ""
        yield f"  priors    {prior_set.name}{main}: {prior_set.source}"
        priors = (*prior_set.coefficients, *prior_set.auxiliary)
        width = max(len(prior.name) for prior in priors)
        for prior in priors:
            words = describe(prior.distribution, units.get(prior.name, ""))
            yield f"            {prior.name:<{width}}  {words} [{prior.origin}]"
        if prepared.design.has_intercept:
            place = _place(prior_set.intercept_at)
            yield f"            the intercept's prior is about the outcome at {place}"


def _questions(prepared: Prepared) -> Iterator[str]:
    for question in prepared.questions:
        asked = {"greater": "above zero", "less": "below zero", "either": "other than zero"}
        limit = (
            "no smallest effect that matters"
            if question.matters_beyond is None
            else f"matters beyond {numbers.quantity(numbers.given(question.matters_beyond), question.unit)}"
        )
        yield (
            f"  question  {question.name}: is {question.effect} {asked[question.direction]}? {limit}; "
            f"probability needed to act {numbers.given(question.act_when)}"
        )


def _findings(prepared: Prepared) -> Iterator[str]:
    if not prepared.findings:
        yield "  ahead     nothing that should trouble the fits"
    for finding in prepared.findings:
        yield f"  ahead     {finding.severity}: {finding.message} {finding.advice}"


def _place(intercept_at: str) -> str:
    return "the centre of the data" if intercept_at == "centre" else "zero predictors"


def _short(value: float) -> float:
    return float(f"{value:.4g}")
