"""The prior at which an answer changes."""

from __future__ import annotations

import numpy as np
import pytest

from reanalysis.sensitivity.result import NoTipping, SweepPoint, TippingPrior
from reanalysis.sensitivity.tipping import find_tipping


def points(*probabilities: float, beyond: tuple[float, ...] | None = None) -> list[SweepPoint]:
    """Points of a sweep at widths 1, 10, 100 and so on."""
    sizes = beyond or (None,) * len(probabilities)
    return [
        SweepPoint(10.0**i, p, size, 0.0, -1.0, 1.0, "reweighted", 0.1)
        for i, (p, size) in enumerate(zip(probabilities, sizes, strict=True))
    ]


@pytest.mark.parametrize(
    "probabilities, reached",
    [((0.99, 0.95, 0.97), "always"), ((0.6, 0.9499, 0.7), "never"), ((0.95,), "always")],
)
def test_an_answer_that_never_changes(probabilities: tuple[float, ...], reached: str) -> None:
    """Always from the needed probability on, never below it."""
    assert find_tipping("direction", points(*probabilities), 0.95) == NoTipping("direction", reached)


def test_a_crossing_is_interpolated_in_the_logarithm() -> None:
    """Half-way between .94 and .96 the width is the geometric mean of the neighbours."""
    got = find_tipping("direction", points(0.5, 0.94, 0.96, 0.99), 0.95)

    assert got == TippingPrior("direction", pytest.approx(10.0**1.5), "wider")
    quarter = find_tipping("direction", points(0.94, 0.98), 0.95)
    assert quarter.width == pytest.approx(10.0**0.25)


def test_an_answer_may_need_narrow_priors() -> None:
    """Where wide priors lose the claim, it is reached when narrower."""
    got = find_tipping("direction", points(0.99, 0.97, 0.93), 0.95)

    assert got == TippingPrior("direction", pytest.approx(10.0**1.5), "narrower")


def test_several_crossings_have_no_tipping_prior() -> None:
    """A claim that comes and goes has no single width."""
    assert find_tipping("direction", points(0.9, 0.96, 0.9), 0.95) == NoTipping("direction", "several")


def test_size_has_its_own_tipping_prior() -> None:
    """The claim about size goes by its own probabilities."""
    swept = points(0.99, 0.99, 0.99, beyond=(0.2, 0.90, 1.0))

    assert find_tipping("direction", swept, 0.95) == NoTipping("direction", "always")
    got = find_tipping("beyond", swept, 0.95)
    assert (got.claim, got.width, got.reached_when) == ("beyond", pytest.approx(10.0**1.5), "wider")
    assert np.isfinite(got.width)
