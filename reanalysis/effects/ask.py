"""Tie the study's questions to columns of the design."""

from __future__ import annotations

import difflib

from reanalysis.design.model import Design
from reanalysis.effects.result import Question
from reanalysis.errors import DesignError, Problem
from reanalysis.study.locate import dotted
from reanalysis.study.spec import QuestionSpec


def resolve_questions(specs: tuple[QuestionSpec, ...], design: Design) -> tuple[Question, ...]:
    """Return the questions with their columns and units.

    Raises
    ------
    DesignError
        When a question is about something that is not a coefficient, naming those that there are;
        or about the intercept of a model with predictors.
    """
    names = [column.name for column in design.columns]
    places = {spec: dotted(("question", number, "effect")) for number, spec in enumerate(specs)}
    problems = [_unknown(spec, names, places[spec]) for spec in specs if spec.effect not in names]
    if design.has_intercept and len(names) > 1:
        # The intercept's prior is about the centre of the data: to doubt or to sweep it would be to
        # doubt or sweep something else than the coefficient.
        problems += [_about_intercept(names, places[spec]) for spec in specs if spec.effect == names[0]]
    if problems:
        raise DesignError(problems)
    return tuple(
        Question(
            name=spec.name,
            effect=spec.effect,
            unit=design.columns[names.index(spec.effect)].unit,
            column=names.index(spec.effect),
            direction=spec.direction,
            matters_beyond=spec.matters_beyond,
            act_when=spec.act_when,
        )
        for spec in specs
    )


def _about_intercept(names: list[str], where: str) -> Problem:
    return Problem(
        where=where,
        found="the intercept is the outcome where every predictor is 0, which is no effect",
        allowed=", ".join(names[1:]),
        advice="ask about a coefficient, or fit a model of the intercept alone",
    )


def _unknown(spec: QuestionSpec, names: list[str], where: str) -> Problem:
    close = difflib.get_close_matches(spec.effect, names, n=1)
    return Problem(
        where=where,
        found=f'the model has no coefficient "{spec.effect}"',
        allowed=", ".join(names),
        advice=f'write "{close[0]}"' if close else "use one of these names",
    )
