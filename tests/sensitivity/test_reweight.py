"""Re-weighting of draws against the closed form of another prior."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy import stats

from reanalysis.sensitivity.reweight import (
    effective_size,
    pareto_k_limit,
    smooth_weights,
    weighted_quantiles,
)

# Estimate 1.2 with standard error .5: under N(0, 1) the posterior is N(.96, .4472136).
SIZE = 20_000
OLD = stats.norm(0.96, 0.4472136)
DRAWS = np.random.default_rng(6).permutation(OLD.ppf((np.arange(SIZE) + 0.5) / SIZE))
RATIO = stats.norm.logpdf(DRAWS, 0.0, 0.5) - stats.norm.logpdf(DRAWS, 0.0, 1.0)


def test_draws_move_to_the_narrower_prior() -> None:
    """From N(0, 1) to N(0, .5) the posterior goes to mean .6 and sd .3535534: towards zero, not away."""
    weights = smooth_weights(RATIO)
    values = weights.values

    mean = float(values @ DRAWS)
    assert values.sum() == pytest.approx(1.0, abs=1e-12)
    assert mean == pytest.approx(0.6, abs=0.005)
    assert float(np.sqrt(values @ (DRAWS - mean) ** 2)) == pytest.approx(0.3535534, rel=0.01)
    assert float(values @ (DRAWS > 0.0)) == pytest.approx(stats.norm.sf(0.0, 0.6, 0.3535534), abs=0.003)
    assert weights.pareto_k < 0.5


def test_effective_size_is_kishs() -> None:
    """(sum w)^2 / sum w^2 is .5786557 of the draws here, all of them for equal weights, 1 for one draw."""
    assert effective_size(RATIO) / SIZE == pytest.approx(0.5786557, rel=2e-3)
    assert effective_size(np.full(7, -800.0)) == pytest.approx(7.0)
    assert effective_size(np.array([0.0, -900.0, -900.0])) == pytest.approx(1.0)


def test_equal_priors_need_no_weights() -> None:
    """A constant log ratio gives equal weights and nothing to distrust."""
    weights = smooth_weights(np.full(50, 3.7) + 1e-12 * np.arange(50))

    assert weights.values.tolist() == [0.02] * 50
    assert weights.pareto_k == -np.inf


def test_a_far_prior_is_not_trusted() -> None:
    """From a prior 100 times wider to one far from the data the weights rest on few draws."""
    draws = stats.norm(5.0, 0.5).ppf((np.arange(2000) + 0.5) / 2000)
    ratio = stats.norm.logpdf(draws, 0.0, 0.1)

    assert smooth_weights(ratio).pareto_k > pareto_k_limit(2000)


@pytest.mark.parametrize(
    "draws, limit",
    [
        (100, 0.5),
        (200, 0.565412),
        (500, 0.629488),
        (1000, 0.666667),
        (2000, 0.697064),
        (2200, 0.7),
        (10**6, 0.7),
    ],
)
def test_pareto_limit_depends_on_the_number_of_draws(draws: int, limit: float) -> None:
    """min(1 - 1/log10 S, 0.7) (Vehtari et al. 2024)."""
    assert pareto_k_limit(draws) == pytest.approx(limit, abs=5e-7)


def test_weighted_quantiles_of_equal_weights() -> None:
    """Equal weights give the midpoint quantiles, whatever the order of the draws."""
    values = np.array([30.0, 10.0, 20.0, 40.0])

    got = weighted_quantiles(values, np.full(4, 0.25), np.array([0.125, 0.5, 0.875, 0.25]))

    assert got == pytest.approx([10.0, 25.0, 40.0, 15.0])


@given(
    values=st.lists(st.integers(-30, 30), min_size=3, max_size=8, unique=True),
    counts=st.lists(st.integers(1, 4), min_size=8, max_size=8),
)
def test_weights_count_like_repeated_draws(values: list[int], counts: list[int]) -> None:
    """The median with whole weights lies between the neighbours that repetition gives."""
    draws, times = np.array(values, dtype=np.float64), np.array(counts[: len(values)])
    repeated = np.sort(np.repeat(draws, times))

    (got,) = weighted_quantiles(draws, times / times.sum(), np.array([0.5]))

    share_below = float(np.mean(repeated < got))
    share_above = float(np.mean(repeated > got))
    assert share_below <= 0.5 + times.max() / (2 * times.sum())
    assert share_above <= 0.5 + times.max() / (2 * times.sum())


def test_weighted_quantiles_follow_the_weights() -> None:
    """Re-weighted to N(.6, .3535534), all three reported quantiles are that distribution's."""
    probabilities = np.array([0.025, 0.5, 0.975])

    got = weighted_quantiles(DRAWS, smooth_weights(RATIO).values, probabilities)

    assert got == pytest.approx(stats.norm.ppf(probabilities, 0.6, 0.3535534), abs=0.02)
