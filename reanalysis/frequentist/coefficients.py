"""From estimates and their covariance to one result for each coefficient."""

from __future__ import annotations

import math
import warnings
from collections.abc import Callable

import numpy as np
from scipy import stats

from reanalysis.design.model import Design, FloatArray
from reanalysis.design.rank import find_dependencies
from reanalysis.design.separation import Separation, describe_separation
from reanalysis.design.words import describe_dependency
from reanalysis.frequentist.result import CoefficientResult, Estimate, NotEstimable

FEWEST_DIGITS = 8
"""Below this many trustworthy significant digits, the fit carries a warning."""


def wald_estimate(name: str, estimate: float, se: float, df: float, level: float) -> Estimate:
    """Estimate with its Wald statistic, two-sided p and confidence limits.

    Parameters
    ----------
    name : str
    estimate, se : float
        `se` may be 0 (the model reproduces the data exactly): the statistic is then infinite and
        the interval a point; for an estimate of 0 the statistic is 0 and p is 1.
    df : float
        Degrees of freedom of t; infinite for the normal distribution.
    level : float
    """
    normal = math.isinf(df)
    without_error = math.copysign(math.inf, estimate) if estimate else 0.0
    statistic = estimate / se if se > 0.0 else without_error
    tail = stats.norm.sf(abs(statistic)) if normal else stats.t.sf(abs(statistic), df)
    reach = stats.norm.isf((1.0 - level) / 2.0) if normal else stats.t.isf((1.0 - level) / 2.0, df)
    return Estimate(
        name=name,
        estimate=estimate,
        se=se,
        statistic=statistic,
        df=df,
        p=float(2.0 * tail),
        low=float(estimate - reach * se),
        high=float(estimate + reach * se),
    )


def collect_coefficients(
    design: Design, separation: Separation, estimates: dict[int, Estimate]
) -> tuple[CoefficientResult, ...]:
    """One result for each column: its estimate, or why there is none.

    Parameters
    ----------
    design : Design
    separation : Separation
    estimates : dict of int to Estimate
        Of the columns that have one.
    """
    separated = {found.column: found for found in separation.columns}
    collinear = (
        _reasons_of_collinearity(design) if len(estimates) + len(separated) < len(design.columns) else {}
    )
    results: list[CoefficientResult] = []
    for position, column in enumerate(design.columns):
        if position in estimates:
            results.append(estimates[position])
        elif position in separated:
            results.append(
                NotEstimable(
                    name=column.name,
                    reason=describe_separation(design, separated[position]),
                    advice="read the Bayesian answer as driven by its prior, merge levels, or drop the term",
                )
            )
        else:
            results.append(
                NotEstimable(
                    name=column.name,
                    reason=collinear[position],
                    advice="take one of the columns named out of the formula",
                )
            )
    return tuple(results)


def _reasons_of_collinearity(design: Design) -> dict[int, str]:
    reasons: dict[int, str] = {}
    for dependency in find_dependencies(design.matrix):
        words = describe_dependency(design, dependency)
        for position in (dependency.column, *(column for column, _ in dependency.parts)):
            reasons.setdefault(position, f"not identified: {words}")
    return reasons


def nan_outside(covariance: FloatArray, estimable: np.ndarray[tuple[int], np.dtype[np.bool_]]) -> FloatArray:
    """Covariance with NaN in the rows and columns of coefficients that have no estimate."""
    covariance = covariance.copy()
    covariance[~estimable, :] = np.nan
    covariance[:, ~estimable] = np.nan
    return covariance


def conditioning_warning(condition: float) -> tuple[str, ...]:
    """A sentence when the design matrix leaves fewer than `FEWEST_DIGITS` trustworthy digits.

    Rounding in the data's last binary digit moves the estimates by about the condition number
    times 2.2e-16, relatively (Golub and Van Loan 2013, section 5.3.8).
    """
    if math.isinf(condition):
        return ()
    digits = math.floor(-math.log10(condition * float(np.finfo(float).eps)))
    if digits >= FEWEST_DIGITS:
        return ()
    sentence = (
        f"The columns are so nearly dependent (condition number {condition:.2g} at unit length) that only "
        f"about {max(digits, 0)} significant digits of the estimates can be trusted; centre or rescale "
        "the predictors, or use poly() in place of raw powers."
    )
    return (sentence,)


def quietly[T](compute: Callable[[], T]) -> tuple[T, tuple[str, ...]]:
    """Run a library call; return its result and, in place of warnings, sentences.

    Without "always" a warning that this process has seen before would be lost.
    """
    with warnings.catch_warnings(record=True) as caught:
        warnings.simplefilter("always")
        result = compute()
    sentences = dict.fromkeys(" ".join(str(warning.message).split()) for warning in caught)
    return result, tuple(f"statsmodels says: {sentence}" for sentence in sentences)
