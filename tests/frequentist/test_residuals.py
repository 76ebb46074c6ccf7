"""Randomised quantile residuals."""

from __future__ import annotations

import numpy as np
import pytest
from scipy import stats

from reanalysis.frequentist.residuals import quantile_residuals


def test_residuals_lie_within_their_outcomes_probability():
    """Each residual is a normal quantile between F(y - 1) and F(y)."""
    y = np.array([0.0, 1.0, 3.0, 7.0, 0.0])
    mean = np.array([0.5, 2.0, 3.0, 2.5, 4.0])
    u = stats.norm.cdf(quantile_residuals("poisson", y, mean, seed=5))
    assert np.all(u >= stats.poisson.cdf(y - 1, mean))
    assert np.all(u <= stats.poisson.cdf(y, mean))


def test_residuals_of_two_outcomes():
    """An event lies above the probability of none, the other outcome below."""
    y, mean = np.array([1.0, 0.0]), np.array([0.3, 0.3])
    u = stats.norm.cdf(quantile_residuals("bernoulli", y, mean, seed=5))
    assert u[0] > 0.7 > u[1]


@pytest.mark.parametrize("family", ["bernoulli", "poisson"])
def test_residuals_are_standard_normal_when_the_model_is_right(family):
    """On data from the model itself the residuals pass for standard normal."""
    rng = np.random.default_rng(6)
    mean = rng.uniform(0.1, 0.9, size=4000)
    y = (rng.uniform(size=4000) < mean).astype(float) if family == "bernoulli" else rng.poisson(mean * 1.0)
    residuals = quantile_residuals(family, np.asarray(y, dtype=float), mean, seed=7)
    assert stats.kstest(residuals, "norm").pvalue > 0.01
    assert np.std(residuals) == pytest.approx(1.0, abs=0.05)


def test_seed_decides():
    """The same seed gives the same residuals, another seed others."""
    y, mean = np.array([0.0, 1.0, 2.0]), np.array([1.0, 1.0, 1.0])
    first = quantile_residuals("poisson", y, mean, seed=1)
    assert np.array_equal(first, quantile_residuals("poisson", y, mean, seed=1))
    assert not np.array_equal(first, quantile_residuals("poisson", y, mean, seed=2))


def test_extreme_outcomes_stay_finite():
    """Outcomes far out in either tail, or predicted perfectly, have finite residuals of the right sign."""
    counts = quantile_residuals("poisson", np.array([200.0, 0.0]), np.array([1.0, 500.0]), seed=1)
    assert np.all(np.isfinite(counts))
    assert counts[0] > 8.0
    assert counts[1] < -8.0
    certain = quantile_residuals("bernoulli", np.array([1.0, 0.0]), np.array([1.0, 0.0]), seed=1)
    assert np.all(np.abs(certain) < 5.0)
    surprise = quantile_residuals("bernoulli", np.array([1.0]), np.array([1e-20]), seed=1)
    assert 9.0 < surprise[0] < 10.0
