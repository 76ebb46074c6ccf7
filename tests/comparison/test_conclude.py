"""What an interval and what a probability conclude: every standing in every direction."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import pytest
from hypothesis import given
from hypothesis import strategies as st

from reanalysis.comparison.conclude import conclude_frequentist, conclude_posterior
from reanalysis.comparison.result import Conclusion, NoConclusion
from reanalysis.effects.result import (
    FrequentistAnswer,
    NoFrequentistAnswer,
    NoPosteriorAnswer,
    PosteriorAnswer,
    Question,
    TailProbability,
)


def interval(low: float, high: float) -> FrequentistAnswer:
    """An answer of which only the interval counts."""
    return FrequentistAnswer((low + high) / 2.0, 1.0, low, high, 0.5, 0.5, None)


def probabilities(direction: float, beyond: float | None) -> PosteriorAnswer:
    """An answer of which only the probabilities count."""
    size = None if beyond is None else TailProbability(beyond, 0.0)
    return PosteriorAnswer("weak", *[0.0] * 8, TailProbability(direction, 0.0), size, size)


# direction, interval, standing of the direction, standing of the size beyond 2
INTERVALS = [
    ("greater", (2.1, 5.0), "supported", "supported"),
    ("greater", (0.1, 1.9), "supported", "contradicted"),
    ("greater", (0.1, 5.0), "supported", "open"),
    ("greater", (-1.0, 1.9), "open", "contradicted"),
    ("greater", (-1.0, 5.0), "open", "open"),
    ("greater", (-5.0, -2.1), "contradicted", "contradicted"),
    ("greater", (0.0, 2.0), "open", "open"),
    ("less", (-5.0, -2.1), "supported", "supported"),
    ("less", (-1.9, -0.1), "supported", "contradicted"),
    ("less", (-5.0, -0.1), "supported", "open"),
    ("less", (-1.9, 1.0), "open", "contradicted"),
    ("less", (-5.0, 1.0), "open", "open"),
    ("less", (2.1, 5.0), "contradicted", "contradicted"),
    ("either", (2.1, 5.0), "supported", "supported"),
    ("either", (-5.0, -2.1), "supported", "supported"),
    ("either", (0.1, 1.9), "supported", "contradicted"),
    ("either", (-1.9, -0.1), "supported", "contradicted"),
    ("either", (0.1, 5.0), "supported", "open"),
    ("either", (-1.9, 1.9), "open", "contradicted"),
    ("either", (-3.0, 1.9), "open", "open"),
    ("either", (-1.9, 3.0), "open", "open"),
    ("either", (-3.0, 3.0), "open", "open"),
]


@pytest.mark.parametrize("direction, limits, towards, size", INTERVALS)
def test_an_interval_concludes(
    ask: Any, direction: str, limits: tuple[float, float], towards: str, size: str
) -> None:
    """The whole interval must agree with a claim to support it, and speak against it to contradict it."""
    answer = interval(*limits)

    found = direction == "either" and towards == "supported"
    side = ("below" if limits[0] < 0.0 else "above") if found else "asked"

    assert conclude_frequentist(ask(direction), answer) == Conclusion(towards, size, side)
    assert conclude_frequentist(ask(direction, None), answer) == Conclusion(towards, None, side)


@pytest.mark.parametrize(
    "probability, standing",
    [(0.9, "supported"), (1.0, "supported"), (0.8999, "open"), (0.1001, "open"), (0.0999, "contradicted")],
)
def test_a_probability_concludes(ask: Any, probability: float, standing: str) -> None:
    """Supported from the needed probability on, contradicted when the opposite has it."""
    question = ask("greater", 2.0, 0.9)

    assert conclude_posterior(question, probabilities(probability, 0.5)) == Conclusion(standing, "open")
    assert conclude_posterior(question, probabilities(0.5, probability)) == Conclusion("open", standing)
    assert conclude_posterior(question, probabilities(probability, None)) == Conclusion(standing, None)


@given(low=st.floats(-9.0, 9.0), width=st.floats(0.01, 9.0))
def test_conclusions_mirror(low: float, width: float) -> None:
    """With every sign changed, less concludes what greater concluded, and either the other side."""

    def concluded(direction: str, limits: tuple[float, float]) -> Any:
        question = Question("q", "x", "N", 0, direction, 2.0, 0.95)
        return conclude_frequentist(question, interval(*limits))

    here, there = (low, low + width), (-low - width, -low)
    assert concluded("greater", here) == concluded("less", there)
    mirrored = concluded("either", there)
    other = {"above": "below", "below": "above", "asked": "asked"}[mirrored.side]
    assert concluded("either", here) == replace(mirrored, side=other)


def test_no_answer_concludes_nothing(ask: Any) -> None:
    """The reason is passed on by both sides."""
    assert conclude_frequentist(ask(), NoFrequentistAnswer("separated", "")) == NoConclusion("separated")
    assert conclude_posterior(ask(), NoPosteriorAnswer("flat", "improper")) == NoConclusion("improper")


def test_acting_needs_the_size_where_one_is_stated() -> None:
    """Size decides on acting, direction only where no size was stated."""
    assert Conclusion("open", "supported").act
    assert not Conclusion("supported", "open").act
    assert Conclusion("supported", None).act
    assert not Conclusion("contradicted", None).act


def test_a_found_difference_is_on_the_side_of_its_median(ask: Any) -> None:
    """A difference found either way has a side, and the side is part of the conclusion."""
    below = replace(probabilities(0.99, 0.5), median=-3.0)
    above = replace(probabilities(0.99, 0.5), median=3.0)

    assert conclude_posterior(ask("either"), below) == Conclusion("supported", "open", "below")
    assert conclude_posterior(ask("either"), above) == Conclusion("supported", "open", "above")
    assert conclude_posterior(ask("greater"), above) == Conclusion("supported", "open", "asked")
