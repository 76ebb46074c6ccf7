"""Invented results: cold stores of an apple growers' cooperative, with and without liner bags."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from reanalysis.bayesian.result import Draws
from reanalysis.design.model import Column, Design, Response, RowAccount
from reanalysis.effects.result import (
    FrequentistAnswer,
    NoFrequentistAnswer,
    NoPosteriorAnswer,
    PosteriorAnswer,
    Question,
    TailProbability,
)
from reanalysis.families import find_family
from reanalysis.frequentist.result import Estimate, FrequentistFit, Goodness
from reanalysis.sensitivity.result import NoTipping, Sweep, SweepPoint, TippingPrior
from reanalysis.study.distributions import Distribution, Flat, Normal

FILM = Question("Film liner against no liner", "liner[film]", "N", 1, "greater", 2.0, 0.95)
FOAM = Question(
    "Foam liner against no liner, in the stores whose fans were replaced before the season",
    "liner[foam]", "N", 2, "either", 1.0, 0.95,
)  # fmt: skip
DAYS = Question("Each further day in store", "days", "N per day", 3, "less", None, 0.9)

PRIORS: tuple[tuple[str, Distribution], ...] = (
    ("flat", Flat()),
    ("weak", Normal(sd=28.0)),
    ("sceptical", Normal(sd=1.02)),
    ("informed", Normal(mean=3.0, sd=1.5)),
)


def posterior_draws(mean: float, sd: float, seed: int = 1) -> np.ndarray:
    """Four chains of a thousand independent normal draws."""
    return np.random.default_rng(seed).normal(mean, sd, size=(4, 1000))


def answer(question: Question, prior_set: str, mean: float, sd: float, seed: int = 1) -> PosteriorAnswer:
    """The answer that belongs to `posterior_draws`."""
    draws = posterior_draws(mean, sd, seed)
    median, low, high, core_low, core_high = (
        float(value) for value in np.quantile(draws, [0.5, 0.025, 0.975, 0.25, 0.75])
    )
    edge = question.matters_beyond
    above, below = float((draws > 0).mean()), float((draws < 0).mean())
    direction = {"greater": above, "less": below, "either": max(above, below)}[question.direction]
    beyond = None if edge is None else TailProbability(float((draws > edge).mean()), 0.007)
    return PosteriorAnswer(
        prior_set, median, low, high, core_low, core_high, 0.02, 0.04, 0.04,
        TailProbability(direction, 0.002), beyond, None,
    )  # fmt: skip


def frequentist_answer(estimate: float, se: float, p: float) -> FrequentistAnswer:
    """A least-squares answer with its 95 % interval."""
    return FrequentistAnswer(estimate, se, estimate - 1.986 * se, estimate + 1.986 * se, p, p / 2.0, None)


NO_ESTIMATE = NoFrequentistAnswer("separated: every crate with foam was sound", "merge the levels")
NO_POSTERIOR = NoPosteriorAnswer("flat", "improper: the data leave the effect without an upper limit")


def sweep(question: Question) -> Sweep:
    """The exact conjugate answer to an estimate of 2.47 with standard error 1.12 over prior widths."""
    from scipy import stats

    points = []
    for k, width in enumerate(np.geomspace(0.2, 40.0, 25)):
        shrink = width**2 / (width**2 + 1.12**2)
        mean, sd = 2.47 * shrink, 1.12 * np.sqrt(shrink)
        beyond = (
            None
            if question.matters_beyond is None
            else float(stats.norm.sf(question.matters_beyond, mean, sd))
        )
        points.append(
            SweepPoint(
                float(width), float(stats.norm.sf(0.0, mean, sd)), beyond, mean, mean - 1.96 * sd,
                mean + 1.96 * sd, "refitted" if k % 8 == 0 else "reweighted", 0.2,
            )
        )  # fmt: skip
    beyond_tipping = None if question.matters_beyond is None else NoTipping("beyond", "never")
    return Sweep(question.name, tuple(points), TippingPrior("direction", 1.272, "wider"), beyond_tipping, 4)


def design(family: str, n: int = 96) -> Design:
    """An intercept and one numeric predictor, with an outcome from the family."""
    rng = np.random.default_rng(7)
    days = np.sort(rng.uniform(-1.0, 1.0, n))
    matrix = np.column_stack([np.ones(n), days])
    eta = {"gaussian": 60.0 - 3.0 * days, "bernoulli": -0.4 + 1.5 * days, "poisson": 1.2 + 0.6 * days}[family]
    values = {
        "gaussian": lambda: rng.normal(eta, 4.0),
        "bernoulli": lambda: (rng.random(n) < 1.0 / (1.0 + np.exp(-eta))).astype(float),
        "poisson": lambda: rng.poisson(np.exp(eta)).astype(float),
    }[family]()
    event = ("yes", "no") if family == "bernoulli" else (None, None)
    names = {
        "gaussian": ("firmness", "N"),
        "bernoulli": ("rotted", ""),
        "poisson": ("rotten apples", "per crate"),
    }
    columns = (
        Column("c0", "Intercept", "Intercept", "", "intercept", 1.0, 0.0),
        Column("c1", "days", "days", "", "numeric", 0.0, 1.0),
    )
    return Design(
        formula="firmness ~ days", family=find_family(family, None),
        response=Response(*names[family], *event, values), matrix=matrix, columns=columns, factors=(),
        offset=None, exposure=None, rows=RowAccount(n, n, ()),
    )  # fmt: skip


def draws(family: str) -> Draws:
    """Posterior draws near the truth of `design`."""
    rng = np.random.default_rng(11)
    centre = {"gaussian": (60.0, -3.0), "bernoulli": (-0.4, 1.5), "poisson": (1.2, 0.6)}[family]
    coefficients = rng.normal(centre, 0.1, size=(4, 250, 2))
    auxiliary = rng.normal(4.0, 0.1, size=(4, 250, 1)) if family == "gaussian" else np.empty((4, 250, 0))
    return Draws(coefficients, auxiliary)


def fit(n: int = 96) -> FrequentistFit:
    """A least-squares fit with standard normal residuals, one of them far out."""
    rng = np.random.default_rng(3)
    residuals = rng.normal(size=n)
    residuals[5] = 4.5
    goodness = Goodness(n, n - 2.0, -200.0, 90.0, 120.0, 404.0, 0.3, "centred", 16.0, 90.0, 1.2)
    coefficient = Estimate("days", -3.0, 0.6, -5.0, n - 2.0, 0.0001, -4.2, -1.8)
    return FrequentistFit(
        "OLS", "t", 0.95, (coefficient,), np.eye(1), goodness, rng.normal(60.0, 3.0, n), residuals, True, ()
    )


def far(answer_: PosteriorAnswer, factor: float) -> PosteriorAnswer:
    """The same answer with limits many times as far out."""
    return replace(answer_, low=answer_.low * factor, high=answer_.high * factor)
