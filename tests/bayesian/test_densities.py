"""Prior densities against scipy and against formulas written out from textbooks."""

from __future__ import annotations

import math
from collections.abc import Callable

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy import integrate

from reanalysis.bayesian.densities import (
    affine,
    is_positive,
    is_proper,
    is_unbounded,
    log_density,
)
from reanalysis.study import distributions as dist

REAL: dict[str, tuple[dist.Distribution, Callable[[float], float]]] = {
    "normal": (
        dist.Normal(mean=1.5, sd=0.7),
        lambda x: -0.5 * ((x - 1.5) / 0.7) ** 2 - math.log(0.7 * math.sqrt(2 * math.pi)),
    ),
    "student_t": (
        dist.StudentT(df=3.0, location=-1.0, scale=2.0),
        lambda x: (
            math.lgamma(2.0)
            - math.lgamma(1.5)
            - 0.5 * math.log(3.0 * math.pi)
            - math.log(2.0)
            - 2.0 * math.log1p(((x + 1.0) / 2.0) ** 2 / 3.0)
        ),
    ),
    "cauchy": (
        dist.Cauchy(location=0.5, scale=2.5),
        lambda x: -math.log(math.pi * 2.5 * (1.0 + ((x - 0.5) / 2.5) ** 2)),
    ),
    "laplace": (
        dist.Laplace(location=0.2, scale=0.6),
        lambda x: -abs(x - 0.2) / 0.6 - math.log(1.2),
    ),
}

POSITIVE: dict[str, tuple[dist.Distribution, Callable[[float], float]]] = {
    "lognormal": (
        dist.LogNormal(meanlog=0.4, sdlog=0.8),
        lambda x: (
            -0.5 * ((math.log(x) - 0.4) / 0.8) ** 2 - math.log(x) - math.log(0.8 * math.sqrt(2 * math.pi))
        ),
    ),
    "gamma": (
        dist.Gamma(shape=2.5, rate=1.7),
        lambda x: 2.5 * math.log(1.7) - math.lgamma(2.5) + 1.5 * math.log(x) - 1.7 * x,
    ),
    "exponential": (dist.Exponential(rate=0.3), lambda x: math.log(0.3) - 0.3 * x),
    "half_normal": (
        dist.HalfNormal(sd=1.3),
        lambda x: 0.5 * math.log(2 / math.pi) - math.log(1.3) - 0.5 * (x / 1.3) ** 2,
    ),
    "half_cauchy": (
        dist.HalfCauchy(scale=0.9),
        lambda x: math.log(2 / (math.pi * 0.9)) - math.log1p((x / 0.9) ** 2),
    ),
    "half_student_t": (
        dist.HalfStudentT(df=4.0, scale=0.6862017),
        lambda x: (
            math.log(2.0)
            + math.lgamma(2.5)
            - math.lgamma(2.0)
            - 0.5 * math.log(4.0 * math.pi)
            - math.log(0.6862017)
            - 2.5 * math.log1p((x / 0.6862017) ** 2 / 4.0)
        ),
    ),
}

UNIFORM = dist.Uniform(low=-1.0, high=3.0)
POINTS = np.array([-4.0, -0.7, 0.3, 1.0, 2.6, 9.0])
UNITS = {
    "normal": dist.Normal(sd=1.0),
    "student_t": dist.StudentT(df=5.0, scale=1.0),
    "cauchy": dist.Cauchy(scale=1.0),
    "laplace": dist.Laplace(scale=1.0),
}


@pytest.mark.parametrize("name", REAL)
def test_densities_on_the_whole_line_follow_their_formula(name: str) -> None:
    """Log densities equal the textbook formula on both sides of the location."""
    distribution, formula = REAL[name]

    got = log_density(distribution, POINTS)

    assert got == pytest.approx([formula(x) for x in POINTS], rel=1e-12)


@pytest.mark.parametrize("name", POSITIVE)
def test_densities_on_the_half_line_follow_their_formula(name: str) -> None:
    """Log densities equal the textbook formula above zero and are minus infinity below it."""
    distribution, formula = POSITIVE[name]

    got = log_density(distribution, POINTS)

    assert got[POINTS > 0.0] == pytest.approx([formula(x) for x in POINTS if x > 0.0], rel=1e-12)
    assert np.all(got[POINTS < 0.0] == -np.inf)


@pytest.mark.parametrize("distribution", [d for d, _ in (*REAL.values(), *POSITIVE.values())] + [UNIFORM])
def test_proper_densities_integrate_to_one(distribution: dist.Distribution) -> None:
    """Every distribution that is called proper has mass one, and no other mass elsewhere."""

    def density(x: float) -> float:
        return float(np.exp(log_density(distribution, np.array([x])))[0])

    below = integrate.quad(density, -np.inf, -1.0, limit=200)[0]
    above = integrate.quad(density, 3.0, np.inf, limit=200)[0]
    middle = sum(integrate.quad(density, a, b)[0] for a, b in ((-1.0, 0.0), (0.0, 0.2), (0.2, 3.0)))

    assert is_proper(distribution)
    assert below + middle + above == pytest.approx(1.0, abs=1e-7)


def test_uniform_is_constant_between_its_bounds() -> None:
    """The log density is -log of the width inside and minus infinity outside."""
    got = log_density(UNIFORM, np.array([-1.1, -0.9, 0.0, 2.9, 3.1]))

    assert got == pytest.approx([-np.inf, -math.log(4.0), -math.log(4.0), -math.log(4.0), -np.inf])
    assert not is_unbounded(UNIFORM)
    assert not is_positive(UNIFORM)


def test_improper_densities_have_their_shape() -> None:
    """Flat is constant, half_flat constant above zero, log_flat falls as 1/x; scipy has none of them."""
    x = np.array([-2.0, 0.5, 4.0])

    assert log_density(dist.Flat(), x).tolist() == [0.0, 0.0, 0.0]
    assert log_density(dist.HalfFlat(), x).tolist() == [-np.inf, 0.0, 0.0]
    assert log_density(dist.LogFlat(), x) == pytest.approx([-np.inf, math.log(2.0), -math.log(4.0)])
    for improper in (dist.Flat(), dist.HalfFlat(), dist.LogFlat()):
        assert not is_proper(improper)


def test_densities_keep_the_shape_of_their_argument() -> None:
    """An array of any shape comes back in that shape."""
    x = np.full((2, 3), 0.4)

    for distribution, _ in (*REAL.values(), *POSITIVE.values()):
        assert log_density(distribution, x).shape == (2, 3)
        assert log_density(distribution, x)[1, 2] == log_density(distribution, np.array([0.4]))[0]


@given(
    name=st.sampled_from(sorted(REAL)),
    shift=st.floats(-50.0, 50.0),
    factor=st.floats(0.01, 100.0),
    x=st.floats(-20.0, 20.0),
)
def test_change_of_origin_and_unit_is_a_change_of_variables(
    name: str, shift: float, factor: float, x: float
) -> None:
    """The density of (x - shift) * factor is that of x divided by the factor."""
    distribution = REAL[name][0]

    moved = log_density(affine(distribution, shift, factor), np.array([(x - shift) * factor]))[0]

    assert moved == pytest.approx(log_density(distribution, np.array([x]))[0] - math.log(factor), abs=1e-6)


@given(
    name=st.sampled_from(sorted(POSITIVE)),
    factor=st.floats(0.01, 100.0),
    x=st.floats(0.01, 20.0),
)
def test_change_of_unit_is_a_change_of_variables(name: str, factor: float, x: float) -> None:
    """The density of x * factor is that of x divided by the factor, on the half line too."""
    distribution = POSITIVE[name][0]

    moved = log_density(affine(distribution, 0.0, factor), np.array([x * factor]))[0]

    assert moved == pytest.approx(log_density(distribution, np.array([x]))[0] - math.log(factor), abs=1e-8)


@given(shift=st.floats(-50.0, 50.0), factor=st.floats(0.01, 100.0))
def test_bounds_move_with_origin_and_unit(shift: float, factor: float) -> None:
    """Both bounds of a uniform distribution are shifted first and scaled then."""
    moved = affine(UNIFORM, shift, factor)

    assert isinstance(moved, dist.Uniform)
    assert (moved.low, moved.high) == pytest.approx(((-1.0 - shift) * factor, (3.0 - shift) * factor))


def test_improper_distributions_keep_their_form_under_a_change_of_unit() -> None:
    """Flat stays flat under any change; half_flat and log_flat under a change of unit."""
    assert affine(dist.Flat(), 7.0, 2.0) == dist.Flat()
    assert affine(dist.HalfFlat(), 0.0, 2.0) == dist.HalfFlat()
    assert affine(dist.LogFlat(), 0.0, 2.0) == dist.LogFlat()


@pytest.mark.parametrize(
    "distribution", [*(d for d, _ in POSITIVE.values()), dist.HalfFlat(), dist.LogFlat()]
)
def test_half_line_cannot_be_shifted(distribution: dist.Distribution) -> None:
    """A distribution on the half line is refused when its origin would move."""
    assert is_positive(distribution)
    with pytest.raises(ValueError, match=rf"^{distribution.dist} lives on the positive half line"):
        affine(distribution, 0.1, 1.0)


@pytest.mark.parametrize("name", REAL)
def test_whole_line_distributions_are_unbounded(name: str) -> None:
    """Each of them is unbounded, and not positive."""
    distribution = REAL[name][0]

    assert is_unbounded(distribution)
    assert not is_positive(distribution)
