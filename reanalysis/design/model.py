"""One `Design`: the numbers that both analyses get."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from reanalysis.families import Family

FloatArray = NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class Column:
    """One column of the design matrix.

    Attributes
    ----------
    internal : str
        Safe name, ``c0`` ... ``cK``, the only one that the engines ever see.
    name : str
        Public name: ``Intercept``, ``days``, ``liner[film]``, ``liner[film]:days``.
    term : str
        The term of the formula that the column belongs to: ``liner``.
    unit : str
        Unit of the coefficient on the linear-predictor scale, such as ``N``,
        ``N per days``, ``log-odds``, ``log rate per days``; empty when nothing is known.
    kind : str
        ``categorical`` when every variable of the term is a factor (0/1 columns),
        else ``numeric``.
    mean, sd : float
        Of the column over the rows used, ``ddof=0``.
    """

    internal: str
    name: str
    term: str
    unit: str
    kind: Literal["intercept", "numeric", "categorical"]
    mean: float
    sd: float


@dataclass(frozen=True, slots=True)
class Factor:
    """A factor of the model: levels in order, the first is the reference; counts over the rows used."""

    name: str
    levels: tuple[str, ...]
    counts: tuple[int, ...]

    @property
    def reference(self) -> str:
        """The level that the others are compared with."""
        return self.levels[0]


@dataclass(frozen=True, slots=True)
class Response:
    """The outcome.

    Attributes
    ----------
    name, unit : str
        Column name and unit (may be empty).
    event : str or None
        Bernoulli only: the level coded 1.
    other : str or None
        Bernoulli only: the level coded 0.
    values : ndarray, shape (n,)
        Outcome as numbers.
    """

    name: str
    unit: str
    event: str | None
    other: str | None
    values: FloatArray


@dataclass(frozen=True, slots=True)
class RowAccount:
    """Rows read, used, and dropped.

    `dropped_by` counts for each variable the rows in which it is missing (a row with two missing
    variables counts for both).
    """

    read: int
    used: int
    dropped_by: tuple[tuple[str, int], ...]

    @property
    def dropped(self) -> int:
        """Rows that were not used."""
        return self.read - self.used


@dataclass(frozen=True, slots=True)
class Design:
    """Response, matrix and what their numbers mean.

    Attributes
    ----------
    formula : str
        As the author wrote it.
    family : Family
        Family with its link.
    response : Response
    matrix : ndarray, shape (n, k)
        All columns, the intercept's ones included when the formula has one (then first).
    columns : tuple of Column, length k
    factors : tuple of Factor
    offset : ndarray, shape (n,), or None
        ``log(exposure)``, already on the linear-predictor scale.
    exposure : str or None
        Name of the exposure column.
    rows : RowAccount
    """

    formula: str
    family: Family
    response: Response
    matrix: FloatArray
    columns: tuple[Column, ...]
    factors: tuple[Factor, ...]
    offset: FloatArray | None
    exposure: str | None
    rows: RowAccount

    @property
    def has_intercept(self) -> bool:
        """Whether the first column is the intercept."""
        return bool(self.columns) and self.columns[0].kind == "intercept"

    def index(self, name: str) -> int:
        """Position of the column with this public name (KeyError when there is none)."""
        for position, column in enumerate(self.columns):
            if column.name == name:
                return position
        raise KeyError(name)
