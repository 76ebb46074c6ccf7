"""The family table against scipy, far into the tails."""

from __future__ import annotations

import math

import numpy as np
import pytest
from scipy import special, stats

from reanalysis.families import FAMILIES, find_family
from reanalysis.study.spec import LINKS

ONE = np.ones(1)
EXTREME = np.array([-1e4, -800.0, -60.0, -38.0, -36.0, -3.0, -0.2, 0.0, 0.7, 4.0, 36.0, 60.0, 800.0, 1e4])
BERNOULLI = [family for family in FAMILIES if family.name == "bernoulli"]


def test_links_agree_with_the_study_file():
    """Every pair that the study file offers has its one row, and no other has."""
    offered = [(name, link) for name, links in LINKS.items() for link in links]
    assert sorted((family.name, family.link) for family in FAMILIES) == sorted(offered)


@pytest.mark.parametrize("name", LINKS)
def test_first_link_is_the_default(name):
    """Naming no link gives the first one that the study file offers."""
    assert find_family(name, None).link == LINKS[name][0]


def test_unknown_pair_is_refused():
    """A link that a family is not offered with is a KeyError with the pair."""
    with pytest.raises(KeyError, match=r"poisson.*logit"):
        find_family("poisson", "logit")


def test_gaussian_log_likelihood():
    """Gaussian: the normal log density, for draws by rows."""
    y = np.array([-3.0, 0.0, 250.0])
    eta = np.array([[0.0, 1.0, -2.0], [4.0, 0.0, 1.0]])
    sigma = np.array([[0.5], [30.0]])
    np.testing.assert_allclose(
        find_family("gaussian", None).log_likelihood(y, eta, sigma),
        stats.norm.logpdf(y, eta, sigma),
        rtol=1e-13,
    )


@pytest.mark.parametrize("family", BERNOULLI, ids=lambda family: family.link)
def test_bernoulli_log_likelihood_in_the_middle(family):
    """Bernoulli: the log of the outcome's probability."""
    eta = np.linspace(-5.0, 2.0, 29)
    for y in (0.0, 1.0):
        expected = stats.bernoulli.logpmf(y, family.inverse_link(eta))
        np.testing.assert_allclose(family.log_likelihood(np.full(29, y), eta, ONE), expected, rtol=1e-12)


def test_logit_tails():
    """Logit: both outcomes keep full relative accuracy however likely they are."""
    family = find_family("bernoulli", "logit")
    np.testing.assert_allclose(
        family.log_likelihood(ONE, EXTREME, ONE), special.log_expit(EXTREME), rtol=1e-14
    )
    np.testing.assert_allclose(
        family.log_likelihood(0 * ONE, EXTREME, ONE), special.log_expit(-EXTREME), rtol=1e-14
    )
    assert family.log_likelihood(ONE, np.array([60.0]), ONE)[0] == pytest.approx(-math.exp(-60.0))


def test_probit_tails():
    """Probit: the log of the normal tail, also where the tail itself is 0 in double precision."""
    family = find_family("bernoulli", "probit")
    np.testing.assert_allclose(
        family.log_likelihood(ONE, EXTREME, ONE), stats.norm.logcdf(EXTREME), rtol=1e-12
    )
    np.testing.assert_allclose(
        family.log_likelihood(0 * ONE, EXTREME, ONE), stats.norm.logsf(EXTREME), rtol=1e-12
    )


def test_cloglog_tails():
    """Complementary log-log: rare events have log probability eta, survival minus exp(eta)."""
    family = find_family("bernoulli", "cloglog")
    rare = np.array([-1e4, -800.0, -60.0, -38.0, -37.0, -36.9, -30.0])
    event = family.log_likelihood(ONE, rare, ONE)
    np.testing.assert_allclose(event, rare - 0.5 * np.exp(rare), rtol=1e-14)
    np.testing.assert_allclose(family.log_likelihood(0 * ONE, rare, ONE), -np.exp(rare), rtol=1e-14)
    sure = np.array([4.0, 60.0, 800.0])
    assert np.all(family.log_likelihood(ONE, sure, ONE) > -1e-20)
    none = family.log_likelihood(0 * ONE, sure, ONE)
    np.testing.assert_allclose(none[:2], -np.exp(sure[:2]))
    assert -np.inf < none[2] < -1e300


@pytest.mark.parametrize("count", [0.0, 1.0, 17.0, 4e5])
def test_poisson_log_likelihood(count):
    """Poisson: scipy's log mass for means from 1e-300 to 1e15."""
    eta = np.array([-690.0, -40.0, -1.0, 0.0, 2.8, 12.9, 34.0])
    family = find_family("poisson", None)
    values = family.log_likelihood(np.array([count]), eta, ONE)
    np.testing.assert_allclose(values, stats.poisson.logpmf(count, np.exp(eta)), rtol=1e-9, atol=1e-12)


def test_poisson_never_overflows():
    """A wild step of a sampler gives a hugely negative number, not infinity or a warning."""
    family = find_family("poisson", None)
    assert -np.inf < family.log_likelihood(ONE, np.array([5e3]), ONE)[0] < -1e300
    assert family.inverse_link(np.array([5e3]))[0] < np.inf


@pytest.mark.parametrize("family", BERNOULLI, ids=lambda family: family.link)
def test_means_are_probabilities(family):
    """However extreme, the mean of a Bernoulli outcome lies in [0, 1] and rises with eta."""
    mean = family.inverse_link(EXTREME)
    assert np.all((mean >= 0.0) & (mean <= 1.0))
    assert np.all(np.diff(mean) >= 0.0)
    assert (mean[0], mean[-1]) == (0.0, 1.0)


@pytest.mark.parametrize(
    ("link", "distribution"),
    [("logit", stats.logistic), ("probit", stats.norm), ("cloglog", stats.gumbel_l)],
)
def test_latent_scale(link, distribution):
    """Each link is the distribution function of a latent variable; its sd scales priors."""
    family = find_family("bernoulli", link)
    eta = np.linspace(-4.0, 2.0, 13)
    np.testing.assert_allclose(family.inverse_link(eta), distribution.cdf(eta), rtol=1e-12)
    assert family.latent_sd == pytest.approx(distribution.std())
