"""Answers and questions in short."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import pytest
from scipy import stats

from reanalysis.effects.frequentist import answer_frequentist
from reanalysis.effects.result import PosteriorAnswer, Question, TailProbability
from reanalysis.frequentist.result import Estimate


@pytest.fixture(scope="session")
def ask() -> Callable[..., Question]:
    """Give a function that makes a question."""
    return lambda direction="greater", limit=2.0, act_when=0.95: Question(
        "q", "x", "N", 0, direction, limit, act_when
    )


@pytest.fixture(scope="session")
def frequentist() -> Callable[..., Any]:
    """Give a function that answers a question for a normal estimate, with its 95 % interval."""

    def make(question: Question, estimate: float, se: float) -> Any:
        z, reach = estimate / se, 1.959963985 * se
        result = Estimate(
            "x",
            estimate,
            se,
            z,
            float("inf"),
            2.0 * stats.norm.sf(abs(z)),
            estimate - reach,
            estimate + reach,
        )

        class Fit:
            def coefficient(self, _: str) -> Estimate:
                return result

        return answer_frequentist(question, Fit())

    return make


@pytest.fixture(scope="session")
def posterior() -> Callable[..., PosteriorAnswer]:
    """Give a function that answers a question for a normal posterior, without Monte Carlo error."""

    def make(question: Question, mean: float, sd: float, name: str = "weak") -> PosteriorAnswer:
        exact, limit = stats.norm(mean, sd), question.matters_beyond
        up, down = exact.sf(0.0), exact.cdf(0.0)
        direction = {"greater": up, "less": down, "either": max(up, down)}[question.direction]
        beyond = None
        if limit is not None:
            above, below = exact.sf(limit), exact.cdf(-limit)
            beyond = {"greater": above, "less": below, "either": above + below}[question.direction]
        low, core_low, median, core_high, high = exact.ppf([0.025, 0.25, 0.5, 0.75, 0.975])
        return PosteriorAnswer(
            name,
            median,
            low,
            high,
            core_low,
            core_high,
            0.0,
            0.0,
            0.0,
            TailProbability(direction, 0.0),
            None if beyond is None else TailProbability(beyond, 0.0),
            None if limit is None else TailProbability(exact.cdf(limit) - exact.cdf(-limit), 0.0),
        )

    return make
