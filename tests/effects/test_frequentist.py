"""One- and two-sided tests of a question, against closed forms and published identities."""

from __future__ import annotations

import math
from collections.abc import Callable
from typing import Any

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy import stats

from reanalysis.effects.frequentist import answer_frequentist, upper_tail
from reanalysis.effects.result import FrequentistAnswer, NoFrequentistAnswer, Question
from reanalysis.frequentist.fit import fit_frequentist
from reanalysis.frequentist.result import Estimate, NotEstimable


class OneCoefficient:
    """The part of a frequentist fit that answers a question."""

    def __init__(self, result: Estimate | NotEstimable) -> None:
        self.result = result

    def coefficient(self, name: str) -> Estimate | NotEstimable:
        """Return the one there is."""
        assert name == "x"
        return self.result


def estimate(value: float, se: float, df: float = math.inf) -> OneCoefficient:
    """A coefficient with its two-sided p and 95 % interval."""
    t = stats.t(df) if math.isfinite(df) else stats.norm()
    ratio, reach = value / se, se * t.ppf(0.975)
    return OneCoefficient(
        Estimate("x", value, se, ratio, df, 2.0 * t.sf(abs(ratio)), value - reach, value + reach)
    )


def question(direction: str = "either", limit: float | None = None) -> Question:
    """A question about x."""
    return Question("q", "x", "", 0, direction, limit, 0.95)


def answer(direction: str, limit: float | None, value: float, se: float, df: float = math.inf) -> Any:
    """The answer for one coefficient."""
    return answer_frequentist(question(direction, limit), estimate(value, se, df))


def test_equivalence_of_a_small_effect() -> None:
    """Estimate .1, se .08, limit .3: p .0062097 (two one-sided tests, Schuirmann 1987)."""
    size = answer("either", 0.3, 0.1, 0.08).size

    assert size.p_equivalence == pytest.approx(0.0062097, abs=5e-8)
    assert size.p_equivalence == pytest.approx(stats.norm.sf((0.3 - 0.1) / 0.08), rel=1e-12)


@pytest.fixture(scope="module")
def plant_fit(design_of: Callable[..., Any], table_of: Any) -> Any:
    """OLS of Dobson's plant weights."""
    return fit_frequentist(design_of(table_of("dobson_plant_weight"), "weight ~ group"), level=0.95, seed=0)


def test_equivalence_of_the_plants(plant_fit: Any) -> None:
    """Plant weights, limit 1: p .0292791 with 18 df; both tails together .029451, 1 - P(in the band)."""
    asked = Question("q", "group[trt]", "", 1, "either", 1.0, 0.95)

    got = answer_frequentist(asked, plant_fit)

    assert got.size.p_equivalence == pytest.approx(0.0292791, abs=5e-8)
    other = stats.t.sf(4.402205, 18)
    assert other == pytest.approx(0.0001719, abs=5e-8)
    t = stats.t(18, got.estimate, got.se)
    assert got.size.p_equivalence + other == pytest.approx(1.0 - (t.cdf(1.0) - t.cdf(-1.0)), rel=1e-5)
    assert got.size.p_equivalence + other == pytest.approx(0.029451, abs=5e-7)


@pytest.mark.parametrize("direction, sign", [("greater", 1.0), ("less", -1.0)])
def test_minimum_effect_test_is_against_the_limit(direction: str, sign: float) -> None:
    """Estimate 3, se .5, limit 2, 10 df: P(T > 2); zero effect alone gives P(T > 6)."""
    got = answer(direction, 2.0, sign * 3.0, 0.5, 10.0)

    assert got.size.p_beyond == pytest.approx(stats.t.sf(2.0, 10), rel=1e-12)
    assert got.p_direction == pytest.approx(stats.t.sf(6.0, 10), rel=1e-12)
    assert got.p == pytest.approx(2.0 * got.p_direction)
    assert got.size.p_equivalence == pytest.approx(stats.t.sf(-2.0, 10), rel=1e-12)


def test_wrong_direction_is_no_support() -> None:
    """An effect against the asked direction has one-sided p above one half."""
    assert answer("greater", 1.0, -2.0, 1.0).p_direction == pytest.approx(stats.norm.cdf(2.0))
    assert answer("greater", 1.0, -2.0, 1.0).size.p_beyond == pytest.approx(stats.norm.cdf(3.0))
    assert answer("less", 1.0, 2.0, 1.0).p_direction == pytest.approx(stats.norm.cdf(2.0))


def test_either_direction_doubles_the_smaller_side() -> None:
    """Two-sided p for direction; for size twice the smaller tail, and never above 1."""
    got = answer("either", 1.0, -3.0, 0.8)

    assert got.p_direction == got.p
    assert got.size.p_beyond == pytest.approx(2.0 * stats.norm.sf(2.5), rel=1e-12)
    assert answer("either", 1.0, 0.1, 0.1).size.p_beyond == 1.0


@given(
    value=st.floats(-20.0, 20.0),
    se=st.floats(0.1, 10.0),
    df=st.sampled_from([3.0, 18.0, math.inf]),
    limit=st.floats(0.1, 5.0),
)
def test_greater_and_less_mirror(value: float, se: float, df: float, limit: float) -> None:
    """Asking for less of the negative effect is asking for more of the effect; either way mirrors itself."""
    up, down = answer("greater", limit, value, se, df), answer("less", limit, -value, se, df)
    here, there = answer("either", limit, value, se, df), answer("either", limit, -value, se, df)

    assert (up.p_direction, up.size) == (down.p_direction, down.size)
    assert (here.p_direction, here.size) == (there.p_direction, there.size)
    assert here.size.p_equivalence == up.size.p_equivalence
    assert up.p_direction <= up.size.p_beyond + 1e-15  # what matters is the harder claim


def test_a_perfect_fit_is_beyond_doubt() -> None:
    """With standard error 0 every difference from a limit is decisive, and none is undecided."""
    perfect = OneCoefficient(Estimate("x", 2.0, 0.0, math.inf, 15.0, 0.0, 2.0, 2.0))

    sizes = {m: answer_frequentist(question("greater", m), perfect).size for m in (1.0, 2.0, 3.0)}

    assert [sizes[m].p_beyond for m in (1.0, 2.0, 3.0)] == [0.0, 0.5, 1.0]
    assert [sizes[m].p_equivalence for m in (1.0, 2.0, 3.0)] == [1.0, 0.5, 0.0]


def test_numbers_of_the_estimate_come_along() -> None:
    """Estimate, error, interval and p are the fit's; without a limit there is no test of size."""
    got = answer("greater", None, 1.0, 0.5)

    assert isinstance(got, FrequentistAnswer)
    assert (got.estimate, got.se, got.size) == (1.0, 0.5, None)
    assert (got.low, got.high) == pytest.approx((0.0200180, 1.9799820), abs=1e-7)
    assert got.p == pytest.approx(0.0455003, abs=1e-7)


def test_no_estimate_is_passed_on() -> None:
    """Where no estimate exists, reason and advice take its place."""
    got = answer_frequentist(question(), OneCoefficient(NotEstimable("x", "separated", "merge levels")))

    assert got == NoFrequentistAnswer("separated", "merge levels")


def test_tails_are_exact_far_out() -> None:
    """A tail of 1e-300 is not 0."""
    assert upper_tail(37.0, math.inf) == pytest.approx(5.7e-300, rel=0.01)
    assert upper_tail(-np.inf, 5.0) == 1.0
    assert upper_tail(2.019684, 18.0) == pytest.approx(0.0292791, abs=5e-8)
