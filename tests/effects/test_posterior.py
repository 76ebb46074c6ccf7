"""Posterior probabilities of a question, against closed forms."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy import stats

from reanalysis.bayesian.priors import flat_priors
from reanalysis.bayesian.result import NoPosterior, PriorSet
from reanalysis.bayesian.summaries import probability_error
from reanalysis.effects.frequentist import answer_frequentist
from reanalysis.effects.posterior import answer_posterior, beyond, effect_draws, in_direction
from reanalysis.effects.result import NoPosteriorAnswer, Question
from reanalysis.frequentist.fit import fit_frequentist


def question(direction: str, limit: float | None = None, column: int = 0) -> Question:
    """A question about one column."""
    return Question("q", "x", "", column, direction, limit, 0.95)


draws_of_floats = st.lists(st.floats(-5.0, 5.0), min_size=6, max_size=6).map(
    lambda values: np.array(values).reshape(2, 3)
)


@given(draws=draws_of_floats, limit=st.floats(0.1, 4.0))
def test_a_change_of_sign_swaps_greater_and_less(draws: np.ndarray, limit: float) -> None:
    """Both claims about the negative draws are the mirrored claims about the draws, draw by draw."""
    greater, less, either = (question(name, limit) for name in ("greater", "less", "either"))

    assert in_direction(greater, draws).tolist() == in_direction(less, -draws).tolist()
    assert beyond(greater, draws).tolist() == beyond(less, -draws).tolist()
    assert beyond(either, draws).tolist() == beyond(either, -draws).tolist()
    assert not (in_direction(greater, draws) & in_direction(less, draws)).any()


@given(draws=draws_of_floats)
def test_either_takes_the_commoner_sign(draws: np.ndarray) -> None:
    """For either direction the share is the larger of both signs' shares."""
    share = in_direction(question("either"), draws).mean()

    assert share == max((draws > 0.0).mean(), (draws < 0.0).mean())


def test_claims_have_their_sides() -> None:
    """Greater means above the limit, less below its negative, either outside the band."""
    draws = np.array([[-3.0, -1.0, 0.5, 1.5]])

    assert in_direction(question("greater"), draws).tolist() == [[False, False, True, True]]
    assert in_direction(question("less"), draws).tolist() == [[True, True, False, False]]
    assert beyond(question("greater", 1.2), draws).tolist() == [[False, False, False, True]]
    assert beyond(question("less", 1.2), draws).tolist() == [[True, False, False, False]]
    assert beyond(question("either", 1.2), draws).tolist() == [[True, False, False, True]]


def test_beyond_needs_a_limit() -> None:
    """A question without a smallest effect cannot be asked for it."""
    with pytest.raises(ValueError, match='"q" states no smallest effect that matters'):
        beyond(question("greater"), np.zeros((1, 2)))


@pytest.fixture(scope="module")
def plant(design_of: Any, table_of: Any) -> Any:
    """Dobson's plant weights."""
    return design_of(table_of("dobson_plant_weight"), "weight ~ group")


@pytest.fixture(scope="module")
def plant_fit(plant: Any, posterior_of: Any) -> Any:
    """Their posterior under the flat prior set."""
    return posterior_of(plant, flat_priors(plant))


@pytest.mark.mcmc
@pytest.mark.parametrize("direction", ["greater", "less", "either"])
def test_flat_probabilities_are_one_sided_ps(plant: Any, plant_fit: Any, direction: str) -> None:
    """Under the reference prior P(direction) = 1 - one-sided p, and P(beyond) = 1 - minimum-effect p."""
    asked = question(direction, 0.5, column=1)
    asked = Question(asked.name, "group[trt]", "", 1, direction, 0.5, 0.95)
    frequentist = answer_frequentist(asked, fit_frequentist(plant, level=0.95, seed=0))
    t = stats.t(18, frequentist.estimate, frequentist.se)

    got = answer_posterior(asked, plant_fit)

    one_sided = frequentist.p / 2.0 if direction == "either" else frequentist.p_direction
    assert got.direction.value == pytest.approx(1.0 - one_sided, abs=4 * got.direction.mcse)
    tails = {"greater": t.sf(0.5), "less": t.cdf(-0.5), "either": t.sf(0.5) + t.cdf(-0.5)}
    assert got.beyond.value == pytest.approx(tails[direction], abs=4 * got.beyond.mcse)
    if direction != "either":
        assert tails[direction] == pytest.approx(1.0 - frequentist.size.p_beyond, rel=1e-9)
    assert got.negligible.value == pytest.approx(t.cdf(0.5) - t.cdf(-0.5), abs=4 * got.negligible.mcse)
    assert 0.0 < got.direction.mcse < 0.01


@pytest.mark.mcmc
def test_band_and_both_tails_make_one(plant_fit: Any) -> None:
    """Plant weights, limit 1: P(in the band) is .970549, one less both one-sided equivalence tails."""
    got = answer_posterior(question("either", 1.0, column=1), plant_fit)

    assert got.negligible.value + got.beyond.value == pytest.approx(1.0, abs=1e-12)
    assert got.negligible.value == pytest.approx(1.0 - 0.0292791 - 0.0001719, abs=4 * got.negligible.mcse)


@pytest.mark.mcmc
def test_summary_is_the_questioned_columns(plant_fit: Any) -> None:
    """Median, limits and their errors are those of the question's column; without a limit no size."""
    got, marginal = answer_posterior(question("less", column=1), plant_fit), plant_fit.coefficients[1]

    assert (got.median, got.low, got.high) == (marginal.median, marginal.low, marginal.high)
    assert (got.core_low, got.core_high) == (marginal.core_low, marginal.core_high)
    assert (got.mcse_median, got.mcse_low, got.mcse_high) == (
        marginal.mcse_median,
        marginal.mcse_low,
        marginal.mcse_high,
    )
    assert (got.prior_set, got.beyond, got.negligible) == ("flat", None, None)
    draws = effect_draws(question("less", column=1), plant_fit)
    assert draws.shape == (4, 2000)
    assert got.direction.value == pytest.approx(1.0 - marginal.prob_positive)
    assert got.direction.mcse == pytest.approx(probability_error(draws < 0.0))


def test_no_posterior_has_no_answer() -> None:
    """The reason takes the answer's place."""
    nothing = NoPosterior(PriorSet("flat", "", "centre", (), ()), "it would be improper", "", None)

    assert answer_posterior(question("less"), nothing) == NoPosteriorAnswer("flat", "it would be improper")
