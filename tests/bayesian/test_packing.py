"""One row of numbers for every prior: the formula of the row against the exact density."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np
import pytensor
import pytensor.tensor as pt
import pytest
from hypothesis import given
from hypothesis import strategies as st
from numpy.typing import NDArray

from reanalysis.bayesian import model
from reanalysis.bayesian.densities import is_positive, log_density
from reanalysis.bayesian.packing import WIDTH, Slot, Support, pack, support_of
from reanalysis.study import distributions as dist

FloatArray = NDArray[np.float64]

numbers = st.floats(-30.0, 30.0)
widths = st.floats(0.05, 40.0)

REAL = st.one_of(
    st.just(dist.Flat()),
    st.builds(dist.Normal, mean=numbers, sd=widths),
    st.builds(dist.StudentT, df=st.floats(0.5, 60.0), location=numbers, scale=widths),
    st.builds(dist.Cauchy, location=numbers, scale=widths),
    st.builds(dist.Laplace, location=numbers, scale=widths),
)
POSITIVE = st.one_of(
    st.just(dist.HalfFlat()),
    st.just(dist.LogFlat()),
    st.builds(dist.LogNormal, meanlog=st.floats(-3.0, 3.0), sdlog=st.floats(0.1, 5.0)),
    st.builds(dist.Gamma, shape=st.floats(0.2, 30.0), rate=widths),
    st.builds(dist.Exponential, rate=widths),
    st.builds(dist.HalfNormal, sd=widths),
    st.builds(dist.HalfCauchy, scale=widths),
    st.builds(dist.HalfStudentT, df=st.floats(0.5, 60.0), scale=widths),
)


def formula(row: FloatArray, x: FloatArray) -> FloatArray:
    """Evaluate the log density that a row stands for, up to its constant."""
    cell = dict(zip(Slot, row, strict=True))
    z = (x - cell[Slot.LOCATION]) / cell[Slot.SCALE]
    total = (
        -cell[Slot.Q] * z**2 / 2 - cell[Slot.H] * np.log1p(z**2 / cell[Slot.DF]) - cell[Slot.L] * np.abs(z)
    )
    if cell[Slot.SUPPORT] == Support.POSITIVE:
        total += cell[Slot.A] * np.log(x) - cell[Slot.B] * x
        total -= cell[Slot.R] * (np.log(x) - cell[Slot.M]) ** 2 / 2
    return total


@pytest.fixture(scope="module")
def in_graph() -> Callable[[str], Callable[[FloatArray, FloatArray], FloatArray]]:
    """Give the sampler's densities as functions of values (m,) and rows (m, 13)."""
    compiled: dict[str, Any] = {}

    def get(name: str) -> Callable[[FloatArray, FloatArray], FloatArray]:
        if name not in compiled:
            value, rows = pt.dvector("value"), pt.dmatrix("rows")
            output = getattr(model, name)(value, rows)
            compiled[name] = pytensor.function([value, rows], output, mode="FAST_COMPILE")
        return compiled[name]

    return get


def differences(values: FloatArray) -> FloatArray:
    """Take a constant out of log densities."""
    return values - values[0]


@given(distribution=REAL, x=st.lists(st.floats(-60.0, 60.0), min_size=3, max_size=3))
def test_rows_of_the_whole_line_differ_from_the_density_by_a_constant(
    in_graph: Any, distribution: dist.Distribution, x: list[float]
) -> None:
    """Formula, sampler's density and the density for bounded models all follow the exact one."""
    points, row = np.array(x), pack(distribution)
    exact = differences(log_density(distribution, points))

    rows = np.tile(row, (3, 1))
    assert row.shape == (WIDTH,)
    assert differences(formula(row, points)) == pytest.approx(exact, rel=1e-9, abs=1e-7)
    for density in ("_real_density", "_any_density"):
        assert differences(in_graph(density)(points, rows)) == pytest.approx(exact, rel=1e-9, abs=1e-7)


@given(distribution=POSITIVE, x=st.lists(st.floats(0.001, 60.0), min_size=3, max_size=3))
def test_rows_of_the_half_line_differ_from_the_density_by_a_constant(
    in_graph: Any, distribution: dist.Distribution, x: list[float]
) -> None:
    """The same on the positive half line, where terms in log x join."""
    points, row = np.array(x), pack(distribution)
    exact = differences(log_density(distribution, points))

    rows = np.tile(row, (3, 1))
    assert differences(formula(row, points)) == pytest.approx(exact, rel=1e-9, abs=1e-7)
    for density in ("_positive_density", "_any_density"):
        assert differences(in_graph(density)(points, rows)) == pytest.approx(exact, rel=1e-9, abs=1e-7)


def test_uniform_rows_are_constant_and_carry_their_bounds(in_graph: Any) -> None:
    """A uniform prior adds nothing but its bounds."""
    row = pack(dist.Uniform(low=-2.0, high=5.0))

    values = in_graph("_any_density")(np.array([-1.9, 0.0, 4.9]), np.tile(row, (3, 1)))

    assert values.tolist() == [0.0, 0.0, 0.0]
    assert row[[list(Slot).index(slot) for slot in (Slot.SUPPORT, Slot.LOW, Slot.HIGH)]].tolist() == [
        2,
        -2,
        5,
    ]


@given(distribution=st.one_of(REAL, POSITIVE))
def test_support_follows_the_distribution(distribution: dist.Distribution) -> None:
    """Positive distributions are packed as positive, the others as real."""
    want = Support.POSITIVE if is_positive(distribution) else Support.REAL

    assert support_of(distribution) is want
    assert pack(distribution)[list(Slot).index(Slot.SUPPORT)] == want


TRANSFORMED = (
    (dist.Normal(mean=3.0, sd=2.0), [-7.0, 0.2, 5.0]),
    (dist.Gamma(shape=2.0, rate=1.0), [0.01, 1.0, 30.0]),
    (dist.Uniform(low=-2.0, high=5.0), [-1.99, 0.7, 4.9]),
)


@pytest.mark.parametrize("distribution, inside", TRANSFORMED)
def test_support_transform_goes_there_and_back(distribution: dist.Distribution, inside: list[float]) -> None:
    """Forward and backward are inverse; the log Jacobian is the logarithm of backward's slope."""
    value, row = pt.dscalar("value"), pt.dvector("row")
    transform = model._SupportTransform()
    mode = "FAST_COMPILE"
    forward = pytensor.function([value, row], transform.forward(value, row), mode=mode)
    backward = pytensor.function([value, row], transform.backward(value, row), mode=mode)
    jacobian = pytensor.function(
        [value, row], transform.log_jac_det(value, row), mode=mode, on_unused_input="ignore"
    )
    packed, step = pack(distribution), 1e-5

    for x in inside:
        u = float(forward(x, packed))
        slope = (backward(u + step, packed) - backward(u - step, packed)) / (2.0 * step)
        assert float(backward(u, packed)) == pytest.approx(x, rel=1e-10)
        assert float(jacobian(u, packed)) == pytest.approx(np.log(slope), abs=1e-7)


def test_support_transform_is_the_one_of_each_support() -> None:
    """Whole line: unchanged; half line: logarithm; interval: logit of the share of the way."""
    value, row = pt.dscalar("value"), pt.dvector("row")
    forward = pytensor.function(
        [value, row], model._SupportTransform().forward(value, row), mode="FAST_COMPILE"
    )

    assert float(forward(-1.3, pack(dist.Flat()))) == -1.3
    assert float(forward(2.0, pack(dist.HalfFlat()))) == pytest.approx(np.log(2.0))
    assert float(forward(1.0, pack(dist.Uniform(low=0.0, high=4.0)))) == pytest.approx(np.log(1.0 / 3.0))
