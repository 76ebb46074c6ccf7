"""Generalised linear models by iteratively reweighted least squares."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Any

import numpy as np
import statsmodels.api as sm
from scipy import special

from reanalysis.design.model import Design, FloatArray
from reanalysis.design.rank import Basis, condition_number, find_basis
from reanalysis.design.separation import Separation, find_separation
from reanalysis.families import Family
from reanalysis.frequentist.coefficients import (
    collect_coefficients,
    conditioning_warning,
    nan_outside,
    quietly,
    wald_estimate,
)
from reanalysis.frequentist.residuals import quantile_residuals
from reanalysis.frequentist.result import FrequentistFit, Goodness

STEP_TOLERANCE = 1e-10
"""Iterations end when no coefficient of the orthonormal basis moves by more than this, relatively."""

SCORE_TOLERANCE = 1e-6
"""The score that is left must be worth less than this many standard errors in every direction."""


@dataclass(frozen=True, slots=True)
class _Solution:
    basis: Basis
    coefficients: FloatArray
    covariance: FloatArray
    eta: FloatArray
    converged: bool
    notes: tuple[str, ...]


def fit_glm(design: Design, level: float, seed: int) -> FrequentistFit:
    """Maximum likelihood with z intervals; standard errors from the expected information.

    Parameters
    ----------
    design : Design
        Bernoulli or Poisson.
    level : float
        Of the confidence intervals.
    seed : int
        Of the randomised quantile residuals.

    Returns
    -------
    FrequentistFit
        With separation: the limit in which the separated rows are predicted perfectly, so that
        they add nothing to log-likelihood and deviance, and the rest is estimated from the
        other rows.
    """
    separation = find_separation(design)
    solution = _solve(design, separation)
    goodness = _goodness(design, separation, solution)
    fitted = design.response.values.copy()  # where separated: the limit is the outcome itself
    fitted[~separation.rows] = design.family.inverse_link(solution.eta)
    estimates = {
        position: wald_estimate(
            column.name,
            float(solution.coefficients[position]),
            math.sqrt(solution.covariance[position, position]),
            math.inf,
            level,
        )
        for position, column in enumerate(design.columns)
        if solution.basis.estimable[position]
    }
    return FrequentistFit(
        method="GLM",
        distribution="z",
        level=level,
        coefficients=collect_coefficients(design, separation, estimates),
        covariance=nan_outside(solution.covariance, solution.basis.estimable),
        goodness=goodness,
        fitted=fitted,
        residuals=quantile_residuals(design.family.name, design.response.values, fitted, seed),
        converged=solution.converged,
        warnings=solution.notes + _own_notes(separation, solution, goodness),
    )


def statsmodels_family(family: Family) -> Any:
    """Build the statsmodels family with its link."""
    link = getattr(sm.families.links, family.statsmodels_link)()
    return getattr(sm.families, family.statsmodels_family)(link)


def _solve(design: Design, separation: Separation) -> _Solution:
    """Fit the rows that are not separated; `eta` is theirs alone."""
    rows = ~separation.rows
    basis = find_basis(design.matrix[rows])
    k = design.matrix.shape[1]
    if basis.rank == 0:
        return _Solution(basis, np.zeros(k), np.zeros((k, k)), np.zeros(0), converged=False, notes=())
    # Columns of length sqrt(n) make the linear predictor and its coefficients of one size.
    stretch = math.sqrt(int(np.sum(rows)))
    offset = None if design.offset is None else design.offset[rows]
    regressors = basis.q * stretch
    model = sm.GLM(
        design.response.values[rows], regressors, family=statsmodels_family(design.family), offset=offset
    )
    fit, notes = quietly(
        lambda: model.fit(tol=STEP_TOLERANCE, rtol=STEP_TOLERANCE, tol_criterion="params", maxiter=200)
    )
    back = basis.back * stretch
    information = np.asarray(fit.cov_params(), dtype=np.float64)
    score = np.asarray(model.score(fit.params), dtype=np.float64)
    left = math.sqrt(max(float(score @ information @ score), 0.0))
    params = np.asarray(fit.params, dtype=np.float64)
    return _Solution(
        basis=basis,
        coefficients=back @ params,
        covariance=back @ information @ back.T,
        eta=regressors @ params + (0.0 if offset is None else offset),
        converged=bool(fit.converged) and left <= SCORE_TOLERANCE,
        notes=notes,
    )


def _goodness(design: Design, separation: Separation, solution: _Solution) -> Goodness:
    family, y, rows = design.family, design.response.values, ~separation.rows
    rank = find_basis(design.matrix).rank
    loglik = float(np.sum(family.log_likelihood(y[rows], solution.eta, np.ones(1))))
    return Goodness(
        n=len(y),
        df_residual=float(len(y) - rank),
        loglik=loglik,
        deviance=2.0 * (_saturated_loglik(family, y[rows]) - loglik),
        null_deviance=2.0 * (_saturated_loglik(family, y) - _null_loglik(design)),
        aic=2.0 * rank - 2.0 * loglik,
        r_squared=None,
        r_squared_kind="none",
        scale=1.0,
        pearson_chi2=_pearson(family, y[rows], family.inverse_link(solution.eta)),
        condition_number=condition_number(design.matrix),
    )


def _saturated_loglik(family: Family, y: FloatArray) -> float:
    """Log-likelihood when every row has its own mean."""
    if family.name == "bernoulli":
        return 0.0
    return float(np.sum(special.xlogy(y, y) - y - special.gammaln(y + 1.0)))


def _null_loglik(design: Design) -> float:
    """Log-likelihood of the model with an intercept alone, or with nothing where there is none.

    The offset stays in: with it, the fitted rate is the sum of counts over the sum of exposures.
    """
    y, n = design.response.values, len(design.response.values)
    offset = np.zeros(n) if design.offset is None else design.offset
    if design.has_intercept and design.family.name == "bernoulli":
        share = float(np.mean(y))
        return float(n * (special.xlogy(share, share) + special.xlogy(1.0 - share, 1.0 - share)))
    eta = offset + np.log(np.sum(y) / np.sum(np.exp(offset))) if design.has_intercept else offset
    return float(np.sum(design.family.log_likelihood(y, eta, np.ones(1))))


def _pearson(family: Family, y: FloatArray, mean: FloatArray) -> float:
    """Pearson's chi-squared, sum of (y - mean)^2 / variance."""
    if family.name == "bernoulli":
        # (1 - mean) / mean for an event: the same ratio, without 0 / 0 where the mean rounds to 1.
        return float(np.sum(np.where(y > 0.5, (1.0 - mean), mean) / np.where(y > 0.5, mean, 1.0 - mean)))
    return float(np.sum((y - mean) ** 2 / mean))


def _own_notes(separation: Separation, solution: _Solution, goodness: Goodness) -> tuple[str, ...]:
    notes: tuple[str, ...] = conditioning_warning(goodness.condition_number)
    if separation.complete:
        notes += ("Every row is predicted perfectly in the limit, so that no coefficient has an estimate.",)
    elif separation.columns:
        lost, left = int(np.sum(separation.rows)), int(np.sum(~separation.rows))
        sentence = (
            f"{lost} rows are predicted perfectly in the limit; finite estimates rest on the other {left}."
        )
        notes += (sentence,)
    if not separation.complete and not solution.converged:
        notes += ("The iterations did not settle: the estimates are not those of maximum likelihood.",)
    return notes
