"""The frequentist analysis of one design: OLS or a GLM, by statsmodels.

statsmodels is given an orthonormal basis of the design matrix in place of the
matrix itself. Its least squares by pseudo-inverse drops singular values below a
cut-off (NIST's Filip and Pontius problems lose most or all digits that way) and
its QR route squares the condition number in the standard errors; on an
orthonormal basis neither matters, and the step back to the coefficients is one
triangular solve.
"""

from __future__ import annotations

from reanalysis.design.model import Design
from reanalysis.frequentist.glm import fit_glm
from reanalysis.frequentist.ols import fit_ols
from reanalysis.frequentist.result import FrequentistFit


def fit_frequentist(design: Design, *, level: float, seed: int) -> FrequentistFit:
    """Fit a design by least squares (gaussian) or maximum likelihood (bernoulli, poisson).

    Parameters
    ----------
    design : Design
    level : float
        Of the confidence intervals, between 0 and 1.
    seed : int
        Of the randomised quantile residuals; the estimates do not depend on it.

    Returns
    -------
    FrequentistFit
        Gaussian: t with n - rank degrees of freedom. Others: z, standard errors from the
        *expected* information at the estimate. For links other than the canonical one (probit,
        cloglog) the observed information gives somewhat different standard errors, so these
        differ from those of programs that use it.

        A coefficient without a finite or unique estimate is a `NotEstimable`; the others are
        those of the limit in which the separated coefficients have run to infinity.
    """
    if design.family.name == "gaussian":
        return fit_ols(design, level)
    return fit_glm(design, level, seed)
