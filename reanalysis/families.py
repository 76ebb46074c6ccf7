"""The table of families: one row for each pair of family and link.

A row holds all that is needed to treat both engines as fitting the same
likelihood: how each of them names it, the inverse link, the log-likelihood, and
what the auxiliary parameter is called.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy import special

from reanalysis.study.spec import LINKS, FamilyName, LinkName

FloatArray = NDArray[np.float64]

LOG_TWO_PI = float(np.log(2.0 * np.pi))

_LARGEST_EXPONENT = 700.0


@dataclass(frozen=True, slots=True)
class Family:
    """A response distribution with its link.

    Attributes
    ----------
    name, link : str
        As in the study file.
    statsmodels_family, statsmodels_link : str
        Class names in ``statsmodels.api.families`` and ``.families.links``.
    bambi_family : str
        Name in bambi.
    auxiliary : str or None
        The extra parameter, ``sigma`` for gaussian.
    scale_words : str
        The unit of a coefficient in words, where it is not the response's own: ``log-odds``.
    latent_sd : float or None
        Standard deviation of the outcome on the linear-predictor scale, used to scale priors;
        None when it is the standard deviation of the observed response.
    inverse_link : callable
        Linear predictor -> mean, vectorised.
    log_likelihood : callable
        ``(y, eta, sigma) -> log p(y | eta, sigma)``, elementwise with broadcasting; families
        without an auxiliary parameter ignore `sigma`.
    """

    name: FamilyName
    link: LinkName
    statsmodels_family: str
    statsmodels_link: str
    bambi_family: str
    auxiliary: str | None
    scale_words: str
    latent_sd: float | None
    inverse_link: Callable[[FloatArray], FloatArray]
    log_likelihood: Callable[[FloatArray, FloatArray, FloatArray], FloatArray]


def _identity(eta: FloatArray) -> FloatArray:
    return eta


def _cloglog_inverse(eta: FloatArray) -> FloatArray:
    return np.asarray(-np.expm1(-np.exp(np.minimum(eta, 30.0))))


def _log_inverse(eta: FloatArray) -> FloatArray:
    # exp overflows just above 709; a sampler's first steps do get there.
    return np.asarray(np.exp(np.minimum(eta, _LARGEST_EXPONENT)))


def _gaussian_log_likelihood(y: FloatArray, eta: FloatArray, sigma: FloatArray) -> FloatArray:
    z = (y - eta) / sigma
    return np.asarray(-0.5 * (z * z + LOG_TWO_PI) - np.log(sigma))


def _logit_log_likelihood(y: FloatArray, eta: FloatArray, _: FloatArray) -> FloatArray:
    # y * eta - log(1 + exp(eta)) would cancel to 0 for a likely event far out.
    return np.asarray(-np.logaddexp(0.0, np.where(y > 0.5, -eta, eta)))


def _probit_log_likelihood(y: FloatArray, eta: FloatArray, _: FloatArray) -> FloatArray:
    # log P(y = 1) = log Phi(eta) and log P(y = 0) = log Phi(-eta), both exact far in the tails.
    return np.asarray(special.log_ndtr(np.where(y > 0.5, eta, -eta)))


def _cloglog_log_likelihood(y: FloatArray, eta: FloatArray, _: FloatArray) -> FloatArray:
    hazard = _log_inverse(eta)
    # log(1 - exp(-h)) for tiny h is log h = eta; log(-expm1) loses nothing else.
    event = np.where(eta < -37.0, eta, np.log(-np.expm1(-np.maximum(hazard, 1e-300))))
    return np.asarray(np.where(y > 0.5, event, -hazard))


def _poisson_log_likelihood(y: FloatArray, eta: FloatArray, _: FloatArray) -> FloatArray:
    return np.asarray(y * eta - _log_inverse(eta) - special.gammaln(y + 1.0))


FAMILIES: tuple[Family, ...] = (
    Family(
        name="gaussian",
        link="identity",
        statsmodels_family="Gaussian",
        statsmodels_link="Identity",
        bambi_family="gaussian",
        auxiliary="sigma",
        scale_words="",
        latent_sd=None,
        inverse_link=_identity,
        log_likelihood=_gaussian_log_likelihood,
    ),
    Family(
        name="bernoulli",
        link="logit",
        statsmodels_family="Binomial",
        statsmodels_link="Logit",
        bambi_family="bernoulli",
        auxiliary=None,
        scale_words="log-odds",
        latent_sd=float(np.pi / np.sqrt(3.0)),
        inverse_link=special.expit,
        log_likelihood=_logit_log_likelihood,
    ),
    Family(
        name="bernoulli",
        link="probit",
        statsmodels_family="Binomial",
        statsmodels_link="Probit",
        bambi_family="bernoulli",
        auxiliary=None,
        scale_words="probit units",
        latent_sd=1.0,
        inverse_link=special.ndtr,
        log_likelihood=_probit_log_likelihood,
    ),
    Family(
        name="bernoulli",
        link="cloglog",
        statsmodels_family="Binomial",
        statsmodels_link="CLogLog",
        bambi_family="bernoulli",
        auxiliary=None,
        scale_words="log hazard",
        latent_sd=float(np.pi / np.sqrt(6.0)),
        inverse_link=_cloglog_inverse,
        log_likelihood=_cloglog_log_likelihood,
    ),
    Family(
        name="poisson",
        link="log",
        statsmodels_family="Poisson",
        statsmodels_link="Log",
        bambi_family="poisson",
        auxiliary=None,
        scale_words="log rate",
        latent_sd=1.0,
        inverse_link=_log_inverse,
        log_likelihood=_poisson_log_likelihood,
    ),
)
"""Every supported pair of family and link."""


def find_family(name: FamilyName, link: LinkName | None) -> Family:
    """Return the table's row for a family and a link (None: the default link).

    Raises
    ------
    KeyError
        When the family is not offered with this link; `LINKS` lists those that are.
    """
    wanted = link or LINKS[name][0]
    for family in FAMILIES:
        if family.name == name and family.link == wanted:
            return family
    raise KeyError((name, link))
