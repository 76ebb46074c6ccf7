"""Summaries of draws and their Monte Carlo errors, against an independent program and closed forms."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy import stats

from reanalysis.bayesian.summaries import (
    highest_density,
    probability_error,
    quantile_error,
    summarise,
)

REFERENCE = Path(__file__).resolve().parents[1] / "reference"
CHAINS = ("iid", "ar0p7", "shifted", "scale_only")


@pytest.fixture(scope="module")
def chains() -> Any:
    """Four toy sets of chains."""
    with np.load(REFERENCE / "mcmc_draws.npz") as arrays:
        return {name: arrays[name] for name in CHAINS}


@pytest.fixture(scope="module")
def known() -> dict[str, Any]:
    """What is known of them."""
    return json.loads((REFERENCE / "mcmc.json").read_text(encoding="utf-8"))


@pytest.mark.parametrize("name", CHAINS)
def test_diagnostics_follow_the_paper(chains: Any, known: dict[str, Any], name: str) -> None:
    """R-hat, effective sample sizes and Monte Carlo error equal those of a program written from the paper."""
    summary, want = summarise(chains[name], 0.95), known[name]

    assert summary.mean == pytest.approx(want["mean"], rel=1e-10)
    assert summary.sd == pytest.approx(want["sd"], rel=1e-10)
    assert summary.rhat == pytest.approx(want["rhat"], rel=1e-8)
    assert summary.ess_bulk == pytest.approx(want["ess_bulk"], rel=1e-8)
    assert summary.ess_tail == pytest.approx(want["ess_tail"], rel=1e-8)
    assert summary.mcse_mean == pytest.approx(want["mcse_mean"], rel=1e-8)


def quantile_draws(distribution: Any, size: int = 40_000) -> np.ndarray:
    """Draws without chance: evenly spaced quantiles, shuffled into four chains."""
    values = distribution.ppf((np.arange(size) + 0.5) / size)
    return np.random.default_rng(2).permutation(values).reshape(4, -1)


def test_both_intervals_of_a_skewed_posterior() -> None:
    """Beta(2, 8): equal tails .0281-.4825, highest density .0086-.4334, core and median by scipy."""
    beta = stats.beta(2, 8)
    known = json.loads((REFERENCE / "bayes.json").read_text(encoding="utf-8"))["beta_2_8"]

    summary = summarise(quantile_draws(beta), 0.95)

    assert (summary.low, summary.high) == pytest.approx(known["equal_tailed"], abs=2e-4)
    assert (summary.hdi_low, summary.hdi_high) == pytest.approx(known["highest_density"], abs=2e-3)
    assert (summary.core_low, summary.median, summary.core_high) == pytest.approx(
        beta.ppf([0.25, 0.5, 0.75]), abs=2e-4
    )
    assert summary.mean == pytest.approx(0.2, abs=1e-4)
    assert summary.sd == pytest.approx(beta.std(), rel=1e-3)


@pytest.mark.parametrize("level", [0.5, 0.8, 0.975])
def test_intervals_keep_the_level_that_is_asked(level: float) -> None:
    """Both intervals of a normal posterior are mean plus and minus the level's quantile."""
    summary = summarise(quantile_draws(stats.norm(1.0, 2.0)), level)
    reach = 2.0 * stats.norm.ppf((1.0 + level) / 2.0)

    assert (summary.low, summary.high) == pytest.approx((1.0 - reach, 1.0 + reach), abs=2e-3)
    assert summary.hdi_high - summary.hdi_low == pytest.approx(2.0 * reach, rel=5e-3)
    assert summary.prob_positive == pytest.approx(stats.norm.sf(-0.5), abs=1e-4)


@given(values=st.lists(st.integers(-50, 50), min_size=4, max_size=40), level=st.floats(0.3, 0.99))
def test_highest_density_is_the_shortest(values: list[int], level: float) -> None:
    """No other interval between draws that holds as many of them is shorter."""
    draws = np.array(values, dtype=np.float64)

    low, high = highest_density(draws, level)
    inside = int(np.sum((draws >= low) & (draws <= high)))

    ordered = np.sort(draws)
    assert inside >= level * len(draws)
    others = [ordered[i + inside - 1] - ordered[i] for i in range(len(draws) - inside + 1)]
    assert high - low <= min(others)


@given(values=st.lists(st.floats(-9.0, 9.0), min_size=8, max_size=8), level=st.sampled_from([0.5, 0.75]))
def test_highest_density_mirrors(values: list[float], level: float) -> None:
    """The interval of the draws with their sign changed is as wide."""
    draws = np.array(values)

    low, high = highest_density(draws, level)
    mirrored_low, mirrored_high = highest_density(-draws, level)

    assert mirrored_high - mirrored_low == pytest.approx(high - low, abs=1e-12)


def test_error_of_a_probability_is_binomial_for_independent_draws() -> None:
    """With 40,000 independent draws the error of P = 0.2 is sqrt(.16 / 40,000), within a tenth."""
    indicator = np.random.default_rng(4).random((4, 10_000)) < 0.2

    assert probability_error(indicator) == pytest.approx(np.sqrt(0.16 / 40_000), rel=0.1)


def test_error_of_a_probability_grows_with_autocorrelation() -> None:
    """Each draw repeated ten times has the error of a tenth of the draws."""
    indicator = np.random.default_rng(4).random((4, 1000)) < 0.2

    assert probability_error(np.repeat(indicator, 10, axis=1)) == pytest.approx(
        np.sqrt(0.16 / 4000), rel=0.12
    )


@pytest.mark.parametrize("value", [True, False])
def test_a_probability_of_zero_or_one_is_not_without_error(value: bool) -> None:
    """Where all 8,000 draws agree, the error is that of one draw among them."""
    got = probability_error(np.full((4, 2000), value))

    assert got == pytest.approx(1.0 / 8000, rel=1e-3)


def test_error_of_a_quantile_has_the_textbook_size() -> None:
    """Independent draws: sqrt(p (1 - p) / S) over the density at the quantile."""
    draws = np.random.default_rng(8).normal(size=(4, 5000))

    for probability in (0.025, 0.5, 0.9):
        at = stats.norm.ppf(probability)
        want = np.sqrt(probability * (1.0 - probability) / 20_000) / stats.norm.pdf(at)
        assert quantile_error(draws, probability) == pytest.approx(want, rel=0.2)
    summary = summarise(draws, 0.95)
    assert summary.mcse_low == quantile_error(draws, (1.0 - 0.95) / 2.0)
    assert summary.mcse_high == quantile_error(draws, 1.0 - (1.0 - 0.95) / 2.0)
    assert summary.mcse_median == quantile_error(draws, 0.5)
    assert summary.mcse_prob_positive == probability_error(draws > 0.0)
