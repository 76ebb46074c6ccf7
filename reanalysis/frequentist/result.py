"""What the frequentist analysis gives: plain frozen numbers, no fitted model inside."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class Estimate:
    """One estimated coefficient.

    Attributes
    ----------
    name : str
        Public column name.
    estimate, se, statistic : float
        In the coefficient's own unit; `statistic` is estimate / se.
    df : float
        Of the reference distribution; infinite for z.
    p : float
        Two-sided.
    low, high : float
        Confidence limits at the fit's level.
    """

    name: str
    estimate: float
    se: float
    statistic: float
    df: float
    p: float
    low: float
    high: float


@dataclass(frozen=True, slots=True)
class NotEstimable:
    """A coefficient for which no maximum-likelihood estimate exists (or none that means anything).

    Attributes
    ----------
    name : str
        Public column name.
    reason : str
        Why, a clause for the reader: ``"separated: every crate with film was sound"``.
    advice : str
        What could be done.
    """

    name: str
    reason: str
    advice: str


CoefficientResult = Estimate | NotEstimable


@dataclass(frozen=True, slots=True)
class Goodness:
    """Measures of the whole fit.

    Attributes
    ----------
    n : int
    df_residual, loglik, deviance, null_deviance, aic : float
        `aic` counts the coefficients and, for OLS, not the scale (statsmodels' own definition).
    r_squared : float or None
        Gaussian only.
    r_squared_kind : str
        ``centred`` with an intercept, ``uncentred`` without one, ``none`` for GLM.
    scale : float
        OLS: residual variance with n - k in the denominator; GLM: the dispersion, 1.
    pearson_chi2 : float
        Pearson's chi-squared statistic.
    condition_number : float
        Of the design matrix with columns scaled to unit length.
    """

    n: int
    df_residual: float
    loglik: float
    deviance: float
    null_deviance: float
    aic: float
    r_squared: float | None
    r_squared_kind: Literal["centred", "uncentred", "none"]
    scale: float
    pearson_chi2: float
    condition_number: float


@dataclass(frozen=True, slots=True)
class FrequentistFit:
    """OLS (t) or GLM (z) of one design.

    Attributes
    ----------
    method : str
        ``OLS`` or ``GLM``.
    distribution : str
        ``t`` or ``z``.
    level : float
        Of the confidence intervals.
    coefficients : tuple of Estimate or NotEstimable
        In the order of the design's columns.
    covariance : ndarray, shape (k, k)
        Of the coefficients; NaN in the rows and columns of those not estimable.
    goodness : Goodness
    fitted : ndarray, shape (n,)
        Fitted means on the response scale.
    residuals : ndarray, shape (n,)
        OLS: internally studentised; GLM: randomised quantile residuals (Dunn and Smyth 1996),
        whose randomness comes from the seed handed to the fit.
    converged : bool
    warnings : tuple of str
        What the library said during this fit, and what we found ourselves.
    """

    method: Literal["OLS", "GLM"]
    distribution: Literal["t", "z"]
    level: float
    coefficients: tuple[CoefficientResult, ...]
    covariance: FloatArray
    goodness: Goodness
    fitted: FloatArray
    residuals: FloatArray
    converged: bool
    warnings: tuple[str, ...]

    def coefficient(self, name: str) -> CoefficientResult:
        """The result for one public column name (KeyError when there is none)."""
        for result in self.coefficients:
            if result.name == name:
                return result
        raise KeyError(name)
