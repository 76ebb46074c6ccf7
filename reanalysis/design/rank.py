"""What the columns of a design matrix can and cannot tell apart."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from scipy import linalg

from reanalysis.design.model import FloatArray

RANK_TOLERANCE = 1e-12
"""A column counts as a combination of others when what they leave of it, as a share of its length,
is below this. Rounding in a sum of columns leaves about 1e-16; the raw powers of NIST's Filip
problem, which do determine their coefficients, about 1e-10."""

WEIGHT_TOLERANCE = 1e-8
"""A column takes part in a combination when its weight there (columns at unit length) exceeds this."""


@dataclass(frozen=True, slots=True)
class Basis:
    """Orthonormal basis of a matrix's column space, and the way back to its coefficients.

    Attributes
    ----------
    q : ndarray, shape (n, r)
        Orthonormal columns; r is the rank.
    back : ndarray, shape (k, r)
        With coefficients ``g`` of `q`, ``back @ g`` are coefficients of the matrix that give the
        same linear predictor; they are unique for the columns marked `estimable`.
    estimable : ndarray of bool, shape (k,)
        Whether a column's coefficient is determined by the linear predictor.
    """

    q: FloatArray
    back: FloatArray
    estimable: np.ndarray[tuple[int], np.dtype[np.bool_]]

    @property
    def rank(self) -> int:
        """Rank of the matrix."""
        return int(self.q.shape[1])


@dataclass(frozen=True, slots=True)
class Dependency:
    """A column that is an exact combination of columns before it.

    Attributes
    ----------
    column : int
    parts : tuple of (int, float)
        Column and weight, in the order of the matrix; empty for a column of zeros.
    """

    column: int
    parts: tuple[tuple[int, float], ...]


def column_lengths(matrix: FloatArray) -> FloatArray:
    """Euclidean length of each column; 1 in place of 0, so that one can divide by it."""
    lengths = np.asarray(np.linalg.norm(matrix, axis=0), dtype=np.float64)
    lengths[lengths == 0.0] = 1.0
    return lengths


def find_basis(matrix: FloatArray) -> Basis:
    """Orthonormal basis by QR with column pivoting, columns first scaled to unit length.

    Parameters
    ----------
    matrix : ndarray, shape (n, k)
        May have no rows.

    Returns
    -------
    Basis

    References
    ----------
    Golub, G. H. and Van Loan, C. F. (2013). Matrix Computations, 4th ed., section 5.4.2.
    """
    n, k = matrix.shape
    if n == 0 or k == 0:
        return Basis(np.zeros((n, 0)), np.zeros((k, 0)), np.zeros(k, dtype=bool))
    lengths = column_lengths(matrix)
    q, r, pivot = linalg.qr(matrix / lengths, mode="economic", pivoting=True)
    rank = int(np.sum(np.abs(np.diag(r)) > RANK_TOLERANCE))
    kept, spare = pivot[:rank], pivot[rank:]
    # General elimination does nothing but back substitution on a triangle; the triangular solver
    # starts threads even for a handful of columns and then waits for them on a busy machine.
    inverse = np.linalg.solve(r[:rank, :rank], np.eye(rank))
    back = np.zeros((k, rank))
    back[kept] = inverse / lengths[kept, None]
    estimable = np.ones(k, dtype=bool)
    estimable[spare] = False
    if spare.size and rank:
        weights = np.abs(inverse @ r[:rank, rank:])
        estimable[kept] = np.max(weights, axis=1) <= WEIGHT_TOLERANCE
    return Basis(np.ascontiguousarray(q[:, :rank]), back, estimable)


def null_space(matrix: FloatArray) -> FloatArray:
    """Orthonormal basis of the vectors that a matrix sends to zero, shape (k, k - r).

    Columns are taken as they are: the caller scales them.
    """
    k = matrix.shape[1]
    if matrix.shape[0] == 0 or k == 0:
        return np.eye(k)
    _, singular, right = linalg.svd(matrix, full_matrices=True)
    largest = max(1.0, float(singular[0]))
    rank = int(np.sum(singular > WEIGHT_TOLERANCE * largest))
    return np.asarray(right[rank:].T, dtype=np.float64)


def find_dependencies(matrix: FloatArray) -> tuple[Dependency, ...]:
    """List the columns that are exact combinations of columns before them.

    Parameters
    ----------
    matrix : ndarray, shape (n, k)

    Returns
    -------
    tuple of Dependency
        Empty when the matrix has full column rank. Going from left to right keeps the first
        columns (intercept, main effects) as the ones that explain the later ones.
    """
    if find_basis(matrix).rank == matrix.shape[1]:
        return ()
    scaled = matrix / column_lengths(matrix)
    q = np.zeros((matrix.shape[0], 0))
    kept: list[int] = []
    found: list[Dependency] = []
    for position in range(matrix.shape[1]):
        rest = scaled[:, position]
        for _ in range(2):  # once more, because the first projection leaves rounding behind
            rest = rest - q @ (q.T @ rest)
        length = float(np.linalg.norm(rest))
        if length > RANK_TOLERANCE:
            kept.append(position)
            q = np.column_stack([q, rest / length])
        else:
            found.append(Dependency(position, _weights(matrix, position, kept)))
    return tuple(found)


def _weights(matrix: FloatArray, position: int, kept: list[int]) -> tuple[tuple[int, float], ...]:
    if not kept or not np.any(matrix[:, position]):
        return ()
    lengths = column_lengths(matrix)
    scaled, *_ = np.linalg.lstsq(
        matrix[:, kept] / lengths[kept], matrix[:, position] / lengths[position], rcond=None
    )
    return tuple(
        (column, float(weight * lengths[position] / lengths[column]))
        for column, weight in zip(kept, scaled, strict=True)
        if abs(weight) > WEIGHT_TOLERANCE
    )


def condition_number(matrix: FloatArray) -> float:
    """Ratio of largest to smallest singular value, columns scaled to unit length.

    Infinite when the columns are exactly dependent.

    References
    ----------
    Belsley, D. A., Kuh, E. and Welsch, R. E. (1980). Regression Diagnostics, section 3.2.
    """
    singular = np.linalg.svd(matrix / column_lengths(matrix), compute_uv=False)
    if len(singular) < matrix.shape[1] or singular[-1] <= RANK_TOLERANCE * singular[0]:
        return float("inf")
    return float(singular[0] / singular[-1])


def variance_inflation(matrix: FloatArray) -> FloatArray:
    """How many times larger a coefficient's variance is than if its column were unrelated to the others.

    Parameters
    ----------
    matrix : ndarray, shape (n, k)
        Columns without the intercept, centred when the model has one; full column rank.

    Returns
    -------
    ndarray, shape (k,)
        ``1 / (1 - R_j^2)``.

    References
    ----------
    Marquardt, D. W. (1970). Generalized inverses, ridge regression, biased linear estimation, and
    nonlinear estimation. Technometrics 12, 591-612.
    """
    basis = find_basis(matrix / column_lengths(matrix))
    return np.asarray(np.sum(basis.back**2, axis=1), dtype=np.float64)
