"""Ordinary least squares."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import statsmodels.api as sm

from reanalysis.design.model import Design, FloatArray
from reanalysis.design.rank import Basis, condition_number, find_basis
from reanalysis.design.separation import find_separation
from reanalysis.frequentist.coefficients import (
    collect_coefficients,
    conditioning_warning,
    nan_outside,
    quietly,
    wald_estimate,
)
from reanalysis.frequentist.result import Estimate, FrequentistFit, Goodness

PERFECT = 1e-12
"""Residuals shorter than this share of the response are rounding: the fit is perfect."""


@dataclass(frozen=True, slots=True)
class _Solution:
    coefficients: FloatArray
    fitted: FloatArray
    residuals: FloatArray
    rss: float
    df: float
    notes: tuple[str, ...]


def fit_ols(design: Design, level: float) -> FrequentistFit:
    """Least squares with t intervals on n - rank degrees of freedom.

    Parameters
    ----------
    design : Design
        Gaussian.
    level : float
        Of the confidence intervals.

    Returns
    -------
    FrequentistFit
        Residuals are internally studentised, ``e_i / (s sqrt(1 - h_i))`` (Cook and Weisberg 1982,
        Residuals and Influence in Regression, section 2.2.1); 0 where a row is fitted exactly
        because it alone determines a coefficient.
    """
    basis = find_basis(design.matrix)
    solution = _solve(design, basis)
    scale = solution.rss / solution.df
    covariance = scale * basis.back @ basis.back.T
    goodness = _goodness(design, solution, scale)
    notes = solution.notes + conditioning_warning(goodness.condition_number)
    if scale == 0.0:
        notes += ("The model reproduces the response exactly: standard errors are 0 and tests mean nothing.",)
    return FrequentistFit(
        method="OLS",
        distribution="t",
        level=level,
        coefficients=collect_coefficients(
            design, find_separation(design), _estimates(design, basis, solution, level)
        ),
        covariance=nan_outside(covariance, basis.estimable),
        goodness=goodness,
        fitted=solution.fitted,
        residuals=_studentised(basis, solution.residuals, scale),
        converged=True,
        warnings=notes,
    )


def _solve(design: Design, basis: Basis) -> _Solution:
    y, X = design.response.values, design.matrix
    fit, notes = quietly(lambda: sm.OLS(y, basis.q).fit())
    coefficients = basis.back @ np.asarray(fit.params, dtype=np.float64)
    # One step of iterative refinement (Golub and Van Loan 2013, section 5.3.8) wins back the digits
    # that the way to the basis and back has cost.
    coefficients = coefficients + basis.back @ (basis.q.T @ (y - X @ coefficients))
    fitted = X @ coefficients
    residuals = y - fitted
    if np.linalg.norm(residuals) <= PERFECT * np.linalg.norm(y):
        residuals = np.zeros_like(residuals)
        lengths = np.linalg.norm(X, axis=0)
        coefficients = np.where(
            np.abs(coefficients) * lengths <= PERFECT * np.linalg.norm(y), 0.0, coefficients
        )
    return _Solution(
        coefficients=coefficients,
        fitted=fitted,
        residuals=residuals,
        rss=float(residuals @ residuals),
        df=float(fit.df_resid),
        notes=notes,
    )


def _estimates(design: Design, basis: Basis, solution: _Solution, level: float) -> dict[int, Estimate]:
    spread = np.sqrt(solution.rss / solution.df) * np.linalg.norm(basis.back, axis=1)
    return {
        position: wald_estimate(
            column.name, float(solution.coefficients[position]), float(spread[position]), solution.df, level
        )
        for position, column in enumerate(design.columns)
        if basis.estimable[position]
    }


def _goodness(design: Design, solution: _Solution, scale: float) -> Goodness:
    y, n = design.response.values, len(design.response.values)
    # Without an intercept column the total sum of squares is about zero, not about the mean.
    total = y - np.mean(y) if design.has_intercept else y
    null_deviance = float(total @ total)
    variance = solution.rss / n
    loglik = -0.5 * n * (np.log(2.0 * np.pi * variance) + 1.0) if variance > 0.0 else np.inf
    return Goodness(
        n=n,
        df_residual=solution.df,
        loglik=float(loglik),
        deviance=solution.rss,
        null_deviance=null_deviance,
        aic=float(2.0 * (n - solution.df) - 2.0 * loglik),
        r_squared=1.0 - solution.rss / null_deviance,
        r_squared_kind="centred" if design.has_intercept else "uncentred",
        scale=scale,
        pearson_chi2=solution.rss,
        condition_number=condition_number(design.matrix),
    )


def _studentised(basis: Basis, residuals: FloatArray, scale: float) -> FloatArray:
    room = 1.0 - np.sum(basis.q**2, axis=1)
    free = room > 1e-10
    if scale == 0.0:
        return np.zeros_like(residuals)
    spread = np.sqrt(scale * np.where(free, room, 1.0))
    return np.where(free, residuals / spread, 0.0)
