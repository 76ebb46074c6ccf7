"""Posteriors against exact answers, and what is done when the sampler does not deliver."""

from __future__ import annotations

import json
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path
from types import SimpleNamespace
from typing import Any

import numpy as np
import pandas as pd
import pytest
from arviz_stats.base import array_stats
from scipy import stats

from reanalysis.bayesian import fit as fit_module
from reanalysis.bayesian.fit import fit_posterior
from reanalysis.bayesian.priors import flat_priors, weak_priors
from reanalysis.bayesian.result import NoPosterior, PosteriorFit
from reanalysis.bayesian.sampler import RawDraws
from reanalysis.bayesian.settings import derive_seed
from reanalysis.design.model import Design
from reanalysis.frequentist.fit import fit_frequentist
from reanalysis.study import distributions as dist

REFERENCE = Path(__file__).resolve().parents[1] / "reference"


@pytest.fixture(scope="module")
def known() -> dict[str, Any]:
    """Exact posteriors of published data."""
    return json.loads((REFERENCE / "bayes.json").read_text(encoding="utf-8"))


@pytest.fixture(scope="module")
def norris_fit(norris: Design, posterior_of: Any) -> PosteriorFit:
    """The posterior of NIST's Norris data under the flat prior set."""
    return posterior_of(norris, flat_priors(norris))


@pytest.mark.mcmc
@pytest.mark.parametrize("name", ["plant", "norris"])
def test_flat_posterior_is_the_frequentist_t(
    request: pytest.FixtureRequest, name: str, known: dict[str, Any], exact: Any, agree_column: Any
) -> None:
    """Under p(beta, sigma) ∝ 1/sigma a posterior is t with n - p df: interval, sd, and 1 - one-sided p."""
    design = request.getfixturevalue(name)
    fit = (
        request.getfixturevalue("plant_fits")["flat"]
        if name == "plant"
        else request.getfixturevalue("norris_fit")
    )
    frequentist, want = fit_frequentist(design, level=0.95, seed=0), known[f"jeffreys_{name}"]

    for column, estimate in enumerate(frequentist.coefficients):
        t = stats.t(estimate.df, estimate.estimate, estimate.se)
        assert (estimate.name, t.mean()) == (want["names"][column], pytest.approx(want["mean"][column]))
        assert t.std() == pytest.approx(want["sd"][column], rel=1e-9)
        assert t.std() == pytest.approx(estimate.se * np.sqrt(estimate.df / (estimate.df - 2.0)))
        assert (estimate.low, estimate.high) == pytest.approx(want["interval"][column], rel=1e-9)
        one_sided = estimate.p / 2.0 if estimate.estimate > 0.0 else 1.0 - estimate.p / 2.0
        assert 1.0 - one_sided == pytest.approx(want["positive"][column], abs=1e-9)
        exactly = exact(t.mean(), t.std(), estimate.low, t.median(), estimate.high, 1.0 - one_sided)
        agree_column(fit, column, exactly)


def mixture_over_sigma(
    design: Design, means: np.ndarray, sds: np.ndarray, scale: float
) -> tuple[Any, Any, Any]:
    """Weights, means and SDs of coefficients given each sigma of a grid; the posterior is their mixture.

    Normal priors of the columns given, half t with 4 degrees of freedom for sigma. Given sigma the
    posterior is normal in closed form, so that only sigma needs quadrature.
    """
    X, y = design.matrix, np.asarray(design.response.values)
    centre = X.mean(axis=0)
    to_centre = np.eye(len(centre))
    to_centre[0] = centre  # the prior's intercept is at the centre: a = b0 + mean(x) b1
    precision = to_centre.T @ np.diag(sds**-2.0) @ to_centre
    weighted = to_centre.T @ (means * sds**-2.0)
    centred = X @ np.linalg.inv(to_centre)
    expected, spread = centred @ means, centred @ np.diag(sds**2.0) @ centred.T
    step = 0.01
    weights, centres, spreads = [], [], []
    for sigma in np.exp(np.arange(-3.0, 3.0, step)) * scale:
        covariance = np.linalg.inv(X.T @ X / sigma**2 + precision)
        mean = covariance @ (X.T @ y / sigma**2 + weighted)
        density = stats.multivariate_normal.logpdf(y, expected, spread + sigma**2 * np.eye(len(y)))
        weights.append(density + stats.t.logpdf(sigma, 4.0, 0.0, scale) + np.log(sigma))
        centres.append(mean)
        spreads.append(np.sqrt(np.diag(covariance)))
    share = np.exp(np.array(weights) - max(weights))
    return share / share.sum(), np.array(centres), np.array(spreads)


@pytest.mark.mcmc
def test_weak_posterior_is_the_one_of_quadrature(
    plant: Design, plant_fits: dict[str, PosteriorFit], exact: Any, agree_column: Any
) -> None:
    """Plant weights under the weak set: normal given sigma, with one integral over sigma."""
    weak = weak_priors(plant)
    means = np.array([prior.distribution.mean for prior in weak.coefficients])
    sds = np.array([prior.distribution.sd for prior in weak.coefficients])
    scale = weak.auxiliary[0].distribution.scale

    share, centres, spreads = mixture_over_sigma(plant, means, sds, scale)

    for column, (start, stop) in enumerate(((3.0, 7.0), (-2.5, 2.0))):
        grid = np.linspace(start, stop, 4001)
        density = share @ stats.norm.pdf(grid, centres[:, column, None], spreads[:, column, None])
        agree_column(plant_fits["weak"], column, exact.from_grid(grid, density))


def marginals(log_density: np.ndarray, grids: tuple[np.ndarray, np.ndarray], exact: Any) -> list[Any]:
    """Both marginals of a log density on a grid."""
    density = np.exp(log_density - log_density.max())
    return [exact.from_grid(grid, density.sum(axis=1 - axis)) for axis, grid in enumerate(grids)]


@pytest.fixture(scope="module")
def beetles(design_of: Callable[..., Design], table_of: Any) -> Callable[[float], Design]:
    """Give a function that makes Bliss's beetles one by one, dose in tenths above an origin."""
    table = table_of("bliss_beetle")

    def make(origin: float) -> Design:
        dose = np.repeat((table["log10dose"] - origin) / 0.1, table["n"])
        pairs = zip(table["killed"], table["n"], strict=True)
        dead = np.concatenate([np.arange(n) < killed for killed, n in pairs])
        frame = pd.DataFrame({"dead": dead.astype(float), "dose": dose.to_numpy()})
        return design_of(frame, "dead ~ dose", "bernoulli")

    return make


@pytest.mark.mcmc
def test_beetles_under_priors_at_zero(
    beetles: Any, priors: Any, posterior_of: Any, known: dict[str, Any], exact: Any, agree_column: Any
) -> None:
    """Logit with N(0, 1.5) and N(0, 1) at zero predictors has the posterior of quadrature."""
    design, want = beetles(1.8), known["beetle_logit"]
    prior_set = priors(design, dist.Normal(sd=1.5), dist.Normal(sd=1.0), intercept_at="zero")

    fit = posterior_of(design, prior_set)

    for column in (0, 1):
        low, median, high = want[f"b{column}_q"]
        agree_column(fit, column, exact(want["mean"][column], want["sd"][column], low, median, high, 1.0))


@pytest.mark.mcmc
def test_beetles_under_priors_at_the_centre(
    beetles: Any, table_of: Any, priors: Any, posterior_of: Any, exact: Any, agree: Any, agree_column: Any
) -> None:
    """The intercept's prior is about the mean dose, the reported intercept about dose zero, far from it."""
    design, table = beetles(1.7), table_of("bliss_beetle")
    prior_set = priors(design, dist.Normal(mean=-1.0, sd=0.2), dist.Normal(sd=1.0))
    dose = (table["log10dose"].to_numpy() - 1.7) / 0.1
    centre = float(np.average(dose, weights=table["n"]))
    grids = np.linspace(-5.5, -1.0, 901), np.linspace(1.0, 5.0, 801)
    intercept, slope = np.meshgrid(*grids, indexing="ij")
    total = stats.norm.logpdf(intercept + centre * slope, -1.0, 0.2) + stats.norm.logpdf(slope)
    for x, n, killed in zip(dose, table["n"], table["killed"], strict=True):
        eta = intercept + slope * x
        total += killed * eta - n * np.logaddexp(0.0, eta)

    fit = posterior_of(design, prior_set)

    for column, marginal in enumerate(marginals(total, grids, exact)):
        agree_column(fit, column, marginal)
    means = [marginal.mean for marginal in marginals(total, grids, exact)]
    assert fit.centred_intercept.mean == pytest.approx(
        means[0] + centre * means[1], abs=4 * fit.centred_intercept.mcse_mean
    )
    assert centre > 0.9


@pytest.mark.mcmc
def test_poisson_under_priors_at_zero(
    design_of: Any, table_of: Any, priors: Any, posterior_of: Any, known: Any, exact: Any, agree_column: Any
) -> None:
    """Dobson's counts with N(0, 2.5) and N(0, .5) at zero predictors have the posterior of quadrature."""
    design, want = (
        design_of(table_of("dobson_poisson_regression"), "y ~ x", "poisson"),
        known["dobson_poisson_log"],
    )
    prior_set = priors(design, dist.Normal(sd=2.5), dist.Normal(sd=0.5), intercept_at="zero")

    fit = posterior_of(design, prior_set)

    positive = (1.0, want["P_b1_gt_0"])
    for column in (0, 1):
        low, median, high = want[f"b{column}_q"]
        agree_column(
            fit, column, exact(want["mean"][column], want["sd"][column], low, median, high, positive[column])
        )


@pytest.mark.mcmc
def test_rate_with_exposure_is_a_gamma(
    design_of: Any, priors: Any, posterior_of: Any, exact: Any, agree_column: Any, plant: Design
) -> None:
    """One log rate under a flat prior: the rate is gamma with shape sum(y) and rate sum(exposure)."""
    frame = pd.DataFrame({"y": [0.0, 3.0, 1.0, 4.0, 2.0], "hours": [1.5, 4.0, 2.0, 3.0, 2.5]})
    design = design_of(frame, "y ~ 1", "poisson", exposure="hours")

    fit = posterior_of(design, priors(design, dist.Flat()))

    rate = stats.gamma(10.0, scale=1.0 / 13.0)
    grid = np.linspace(-2.5, 1.5, 8001)
    agree_column(fit, 0, exact.from_grid(grid, rate.pdf(np.exp(grid)) * np.exp(grid)))
    assert fit.centred_intercept == fit.coefficients[0]


@pytest.mark.mcmc
def test_a_positive_prior_keeps_the_effect_positive(
    plant: Design, priors: Any, posterior_of: Any, exact: Any, agree_column: Any
) -> None:
    """A half-normal prior of the slope and a uniform one of the intercept: two-dimensional quadrature."""
    prior_set = priors(
        plant, dist.Uniform(low=4.6, high=5.2), dist.HalfNormal(sd=0.5), auxiliary=dist.LogFlat()
    )
    X, y = plant.matrix, np.asarray(plant.response.values)
    grids = np.linspace(3.5, 5.3, 721), np.linspace(0.0, 1.8, 1441)[1:]
    intercept, slope = np.meshgrid(*grids, indexing="ij")
    squares = np.zeros_like(intercept)
    for x, value in zip(X[:, 1], y, strict=True):
        squares += (value - intercept - slope * x) ** 2
    # The integral over sigma under 1/sigma leaves (sum of squares)^(-n/2).
    inside = np.abs(intercept + slope / 2.0 - 4.9) < 0.3
    total = np.where(inside, -10.0 * np.log(squares) - 0.5 * (slope / 0.5) ** 2, -np.inf)

    fit = posterior_of(plant, prior_set)

    assert fit.draws.coefficients[..., 1].min() > 0.0
    for column, marginal in enumerate(marginals(total, grids, exact)):
        agree_column(fit, column, replace(marginal, positive=1.0))


@pytest.mark.mcmc
def test_draws_do_not_depend_on_cores(
    plant: Design, plant_fits: dict[str, PosteriorFit], sampler: Any, store: Any
) -> None:
    """One core or two give the same draws to the last bit; another study seed gives others."""
    alone = fit_posterior(plant, flat_priors(plant), replace(sampler, cores=1), 0.95, store)
    other = fit_posterior(plant, flat_priors(plant), replace(sampler, seed=1), 0.95, store)

    assert np.array_equal(alone.draws.coefficients, plant_fits["flat"].draws.coefficients)
    assert not np.array_equal(other.draws.coefficients, plant_fits["flat"].draws.coefficients)


@pytest.mark.mcmc
def test_marginals_summarise_their_own_draws(plant_fits: dict[str, PosteriorFit]) -> None:
    """Every summary belongs to its column, sigma and the centred intercept to theirs."""
    fit = plant_fits["weak"]
    draws = fit.draws.coefficients

    assert [m.mean for m in fit.coefficients] == pytest.approx([draws[..., 0].mean(), draws[..., 1].mean()])
    assert fit.centred_intercept.mean == pytest.approx((draws[..., 0] + draws[..., 1] / 2.0).mean())
    assert fit.auxiliary[0].mean == pytest.approx(fit.draws.auxiliary.mean())
    assert (fit.check.verdict, fit.check.attempts, fit.level) == ("sound", 1, 0.95)
    reported = (*fit.coefficients, *fit.auxiliary, fit.centred_intercept)
    assert fit.check.min_ess_bulk == min(marginal.ess_bulk for marginal in reported)
    assert fit.check.max_rhat == max(marginal.rhat for marginal in reported)


def run(divergences: int = 0, apart: float = 0.0) -> RawDraws:
    """Draws of the plant model's shape: so many divergences, and one chain so far from the others."""
    rng = np.random.default_rng(17)
    coefficients, sigma = rng.normal(size=(4, 500, 2)), np.exp(rng.normal(size=(4, 500, 1)))
    coefficients[0] += apart
    diverging = (np.arange(2000) < divergences).reshape(4, 500)
    return RawDraws(coefficients, sigma, diverging, rng.normal(size=(4, 500)))


@pytest.fixture
def fitted(
    plant: Design, sampler: Any, monkeypatch: pytest.MonkeyPatch
) -> Callable[..., tuple[Any, list[Any]]]:
    """Give a function that fits with a sampler whose runs are given; returns the result and the settings."""

    def fit(*runs: RawDraws | None) -> tuple[Any, list[Any]]:
        asked: list[Any] = []
        waiting = list(runs)

        def sample(bound: object, structure: object, settings: Any) -> RawDraws | None:
            asked.append(settings)
            return waiting.pop(0)

        monkeypatch.setattr(fit_module, "sample", sample)
        nothing = SimpleNamespace(get=lambda *_: SimpleNamespace(bind=lambda _: None))
        return fit_posterior(plant, weak_priors(plant), sampler, 0.9, nothing), asked

    return fit


def test_every_reported_number_is_judged(fitted: Any) -> None:
    """The intercept at zero predictors is reported, so its chains must agree as well.

    Here the centred intercept and the slope look well, being nearly the same; their difference does not.
    """
    hidden = run()
    slope, noise = hidden.coefficients[..., 1], hidden.coefficients[..., 0].copy()
    noise[0] += 3.0
    hidden.coefficients[..., 0] = slope + 0.01 * noise

    result, _ = fitted(hidden, hidden)

    assert isinstance(result, NoPosterior)
    assert result.check.max_rhat > 1.3


def test_a_sound_run_is_not_repeated(fitted: Any, sampler: Any) -> None:
    """The first attempt uses the study's settings with a seed of the prior set's own."""
    result, asked = fitted(run())

    assert (result.check.verdict, result.check.attempts, result.level) == ("sound", 1, 0.9)
    assert asked == [replace(sampler, seed=derive_seed(sampler.seed, "weak"))]


def test_a_doubtful_run_is_repeated_harder(fitted: Any, sampler: Any) -> None:
    """The second attempt tunes longer, accepts more, adapts to correlations and has another seed."""
    result, asked = fitted(run(divergences=3), run())

    assert (result.check.verdict, result.check.attempts) == ("sound", 2)
    assert asked[1] == replace(
        sampler,
        seed=derive_seed(sampler.seed, "weak, second attempt"),
        tune=4 * sampler.tune,
        target_accept=0.98,
        low_rank=True,
    )


def test_a_run_that_stays_doubtful_keeps_its_numbers(fitted: Any) -> None:
    """Doubtful twice: the second run is shown with its findings."""
    result, asked = fitted(run(divergences=30), run(divergences=3))

    assert len(asked) == 2
    assert isinstance(result, PosteriorFit)
    assert (result.check.verdict, result.check.divergences) == ("doubtful", 3)
    assert result.check.findings == ("divergent transitions",)


def test_a_run_that_fails_twice_has_no_numbers(fitted: Any) -> None:
    """Failed twice: no posterior, the reason and the check in its place."""
    result, asked = fitted(run(apart=3.0), run(apart=2.0))

    assert len(asked) == 2
    assert isinstance(result, NoPosterior)
    assert result.reason.startswith("the sampler did not converge (R-hat above 1.05: the chains disagree")
    assert (result.check.verdict, result.check.attempts) == ("failed", 2)
    assert "tuning" in result.advice


def test_a_failed_run_may_recover(fitted: Any) -> None:
    """Failed, then sound: the second run counts."""
    result, _ = fitted(run(apart=3.0), run())

    assert isinstance(result, PosteriorFit)
    assert result.check.verdict == "sound"


@pytest.mark.parametrize("runs, verdict", [((None, "run"), "sound"), (("doubtful", None), "doubtful")])
def test_one_start_is_enough(fitted: Any, runs: tuple[Any, Any], verdict: str) -> None:
    """When one of two attempts found no place to start, the other one's draws stand."""
    made = {"run": run(), "doubtful": run(divergences=2), None: None}

    result, asked = fitted(*(made[name] for name in runs))

    assert len(asked) == 2
    assert result.check.verdict == verdict


def test_no_start_gives_no_posterior(fitted: Any) -> None:
    """When neither attempt starts there is nothing to check."""
    result, asked = fitted(None, None)

    assert len(asked) == 2
    assert isinstance(result, NoPosterior)
    assert result.reason.startswith("the sampler found no place to start")
    assert result.check is None


def test_monte_carlo_error_of_a_standard_deviation_is_known() -> None:
    """The error that the comparisons above use for SDs is sd / sqrt(2 S) for independent normal draws."""
    draws = np.random.default_rng(5).normal(size=(4, 2500))

    assert float(array_stats.mcse(draws, method="sd")) == pytest.approx(1.0 / np.sqrt(20_000), rel=0.15)
