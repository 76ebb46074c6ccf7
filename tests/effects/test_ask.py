"""Questions tied to the design's columns."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
import pandas as pd
import pytest

from reanalysis.design.model import Design
from reanalysis.effects.ask import resolve_questions
from reanalysis.errors import DesignError
from reanalysis.study.spec import QuestionSpec

FRAME = pd.DataFrame(
    {
        "y": np.sin(np.arange(12.0)),
        "days": np.cos(np.arange(12.0)),
        "liner": pd.Categorical(np.tile(["none", "film", "foam"], 4), ["none", "film", "foam"], ordered=True),
    }
)


@pytest.fixture(scope="module")
def design(design_of: Callable[..., Design]) -> Design:
    """A factor with three levels and a number."""
    return design_of(FRAME, "y ~ liner + days")


def test_questions_find_their_column(design: Design) -> None:
    """Column, unit, direction, limits and order come along."""
    specs = (
        QuestionSpec(name="b", effect="days", direction="less", matters_beyond=0.5, act_when=0.9),
        QuestionSpec(name="a", effect="liner[foam]"),
    )

    first, second = resolve_questions(specs, design)

    assert (first.name, first.column, first.direction) == ("b", 3, "less")
    assert (first.matters_beyond, first.act_when, first.unit) == (0.5, 0.9, design.columns[3].unit)
    assert (second.name, second.column, second.effect) == ("a", 2, "liner[foam]")
    assert (second.direction, second.matters_beyond, second.act_when) == ("either", None, 0.95)


def test_unknown_effects_are_all_named(design: Design) -> None:
    """Each unknown effect is a problem with all that there are, and the closest if there is one."""
    specs = tuple(QuestionSpec(name=name, effect=name) for name in ("liner[fim]", "days", "weight"))

    with pytest.raises(DesignError, match=r'the model has no coefficient "liner\[fim\]"') as caught:
        resolve_questions(specs, design)

    assert [problem.where for problem in caught.value.problems] == [
        "question no. 1, effect",
        "question no. 3, effect",
    ]
    assert caught.value.problems[0].allowed == "Intercept, liner[film], liner[foam], days"
    assert [p.advice for p in caught.value.problems] == ['write "liner[film]"', "use one of these names"]


def test_intercept_is_a_question_only_on_its_own(design: Design, design_of: Callable[..., Design]) -> None:
    """Beside predictors its prior is about their centre, which is not what the coefficient is."""
    spec = (QuestionSpec(name="level", effect="Intercept"),)

    with pytest.raises(
        DesignError, match=r"the intercept is the outcome where every predictor is 0"
    ) as caught:
        resolve_questions(spec, design)

    assert caught.value.problems[0].allowed == "liner[film], liner[foam], days"
    assert resolve_questions(spec, design_of(FRAME, "y ~ 1"))[0].column == 0
