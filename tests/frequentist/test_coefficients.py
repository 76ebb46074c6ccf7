"""Wald results and the sentences that go with them."""

from __future__ import annotations

import math
import warnings

import pytest
from scipy import stats

from reanalysis.frequentist.coefficients import conditioning_warning, quietly, wald_estimate


def test_t_interval_and_p():
    """With finite degrees of freedom statistic, p and limits are those of t."""
    result = wald_estimate("x", 2.0, 0.8, 7.0, 0.9)
    reach = stats.t.ppf(0.95, 7) * 0.8
    assert result.statistic == 2.5
    assert result.p == pytest.approx(2 * stats.t.sf(2.5, 7))
    assert (result.low, result.high) == pytest.approx((2.0 - reach, 2.0 + reach))


def test_z_interval_of_a_negative_estimate():
    """Infinite degrees of freedom mean z; a negative estimate has a negative statistic and the same p."""
    result = wald_estimate("x", -1.959963984540054, 1.0, math.inf, 0.95)
    assert result.statistic < 0.0
    assert result.p == pytest.approx(0.05)
    assert result.high == pytest.approx(0.0, abs=1e-12)


def test_tiny_p_does_not_become_zero():
    """The p of a huge statistic keeps its size."""
    assert 0.0 < wald_estimate("x", 30.0, 1.0, math.inf, 0.95).p < 1e-190


def test_error_of_zero():
    """Without error an estimate is certain, and an estimate of zero shows nothing."""
    certain, nothing = (wald_estimate("x", value, 0.0, 5.0, 0.95) for value in (-2.0, 0.0))
    assert (certain.statistic, certain.p, certain.low, certain.high) == (-math.inf, 0.0, -2.0, -2.0)
    assert (nothing.statistic, nothing.p) == (0.0, 1.0)


@pytest.mark.parametrize(("condition", "digits"), [(1e9, 6), (1e12, 3), (1e16, 0)])
def test_conditioning_warning_counts_digits(condition, digits):
    """The sentence says how many digits are left."""
    assert f"about {digits} significant digits" in conditioning_warning(condition)[0]


@pytest.mark.parametrize("condition", [1.0, 4e4, 4e7, math.inf])
def test_no_conditioning_warning(condition):
    """Eight digits and more need no warning; exact dependence is told elsewhere."""
    assert conditioning_warning(condition) == ()


def test_warnings_become_sentences():
    """A library's warnings are returned, each once, and none gets out, even when seen before."""

    def noisy():
        for _ in range(3):
            warnings.warn("the matrix\n is odd", RuntimeWarning, stacklevel=1)
        return 7

    for _ in range(2):
        assert quietly(noisy) == (7, ("statsmodels says: the matrix is odd",))
