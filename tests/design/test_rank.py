"""Rank, dependencies and conditioning."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from reanalysis.design.rank import (
    condition_number,
    find_basis,
    find_dependencies,
    null_space,
    variance_inflation,
)


@pytest.fixture
def base():
    """Thirty rows of an intercept and three unrelated columns."""
    rng = np.random.default_rng(2)
    return np.column_stack([np.ones(30), rng.normal(size=(30, 3))])


def test_basis_leads_back_to_the_coefficients(base):
    """Coefficients in the basis give the same predictor and lead back to those of the matrix."""
    base[:, 2] *= 1e6
    beta = np.array([1.0, -2.0, 3e-6, 4.0])
    basis = find_basis(base)
    assert basis.rank == 4
    assert basis.estimable.all()
    np.testing.assert_allclose(basis.q.T @ basis.q, np.eye(4), atol=1e-14)
    np.testing.assert_allclose(basis.back @ (basis.q.T @ (base @ beta)), beta, rtol=1e-12)


def test_only_columns_of_a_combination_are_lost(base):
    """Of x, z, x - z and w only w (and the intercept) keep their coefficients."""
    matrix = np.column_stack([base, base[:, 1] - base[:, 2]])
    basis = find_basis(matrix)
    assert basis.rank == 4
    assert basis.estimable.tolist() == [True, False, False, True, False]
    beta = np.array([1.0, 0.0, 0.0, -5.0, 0.0])
    back = basis.back @ (basis.q.T @ (matrix @ beta))
    np.testing.assert_allclose(back[[0, 3]], [1.0, -5.0], rtol=1e-12)


@given(size=st.floats(1e-8, 1e8))
def test_rank_does_not_depend_on_units(size):
    """A dependent column stays dependent, and an independent one independent, in any unit."""
    rng = np.random.default_rng(2)
    x, z = rng.normal(size=(2, 30))
    assert find_basis(np.column_stack([x, z, size * (x + z)])).rank == 2
    assert find_basis(np.column_stack([x, size * z, x + 1e-6 * z])).rank == 2
    assert find_basis(np.column_stack([x, size * z, x * z])).rank == 3


def test_nearly_dependent_is_not_dependent(base):
    """A column that differs from another by a billionth still determines its coefficient."""
    matrix = np.column_stack([base, base[:, 1] + 1e-9 * np.sin(np.arange(30.0))])
    assert find_basis(matrix).rank == 5
    assert find_dependencies(matrix) == ()
    assert 1e8 < condition_number(matrix) < 1e11


def test_matrix_without_rows_or_with_zeros():
    """Nothing is estimable without rows; a column of zeros is not, and the others are."""
    assert find_basis(np.zeros((0, 3))).estimable.tolist() == [False, False, False]
    basis = find_basis(np.column_stack([np.ones(4), np.zeros(4)]))
    assert (basis.rank, basis.estimable.tolist()) == (1, [True, False])


def test_dependencies_name_later_columns_by_earlier_ones(base):
    """A full set of dummies is explained by the intercept; each combination comes with its weights."""
    levels = np.eye(3)[np.arange(30) % 3]
    matrix = np.column_stack([base[:, 0], levels, base[:, 1], 2.5 * base[:, 1], np.zeros(30)])
    found = find_dependencies(matrix)
    assert [d.column for d in found] == [3, 5, 6]
    assert [column for column, _ in found[0].parts] == [0, 1, 2]
    np.testing.assert_allclose([weight for _, weight in found[0].parts], [1.0, -1.0, -1.0])
    assert found[1].parts == ((4, pytest.approx(2.5)),)
    assert found[2].parts == ()


def test_null_space():
    """The null space is orthonormal and is sent to zero; without rows it is everything."""
    matrix = np.array([[1.0, 1.0, 0.0], [2.0, 2.0, 0.0]])
    free = null_space(matrix)
    assert free.shape == (3, 2)
    np.testing.assert_allclose(matrix @ free, 0.0, atol=1e-14)
    np.testing.assert_allclose(free.T @ free, np.eye(2), atol=1e-14)
    np.testing.assert_array_equal(null_space(np.zeros((0, 2))), np.eye(2))
    assert null_space(np.eye(3)).shape == (3, 0)


def test_condition_number_by_hand():
    """For two unit columns with cosine c it is the root of (1 + c) / (1 - c), in any unit."""
    matrix = np.array([[1.0, 0.6], [0.0, 0.8]])
    assert condition_number(matrix) == pytest.approx(2.0)
    assert condition_number(matrix * [1e5, 1e-5]) == pytest.approx(2.0)
    assert condition_number(np.eye(3)) == pytest.approx(1.0)
    assert condition_number(np.ones((3, 2))) == np.inf
    assert condition_number(np.ones((1, 2))) == np.inf


def test_variance_inflation_is_one_over_one_minus_r_squared(base):
    """Each column's factor is that of its regression on the others."""
    x = base[:, 1:] - base[:, 1:].mean(axis=0)
    x[:, 2] += 3.0 * x[:, 0]
    for position, factor in enumerate(variance_inflation(x)):
        others = np.delete(x, position, axis=1)
        rest = x[:, position] - others @ np.linalg.lstsq(others, x[:, position], rcond=None)[0]
        assert factor == pytest.approx(np.sum(x[:, position] ** 2) / np.sum(rest**2))
