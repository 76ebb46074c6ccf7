"""The bambi model behind the sampler: the right log density, checked before sampling, compiled once."""

from __future__ import annotations

import warnings
from collections.abc import Callable
from dataclasses import replace
from typing import Any

import bambi as bmb
import numpy as np
import pandas as pd
import pytensor
import pytest
from arviz_stats.base import array_stats
from pytensor.graph.traversal import graph_inputs

from reanalysis.bayesian import model
from reanalysis.bayesian.fit import bound_inputs, fit_posterior, structure_of
from reanalysis.bayesian.log_density import log_likelihood, log_prior
from reanalysis.bayesian.model import Inputs, ModelStore, build_model, check_model
from reanalysis.bayesian.priors import author_priors, flat_priors, sceptical_priors, weak_priors
from reanalysis.bayesian.result import PosteriorFit, PriorSet
from reanalysis.bayesian.scaling import choose_scaling, unscaled_draws
from reanalysis.design.model import Design
from reanalysis.errors import FitError
from reanalysis.study import distributions as dist
from reanalysis.study.spec import PriorSpec, QuestionSpec

SIGMA = dist.HalfStudentT(df=4.0, scale=3.0)

SLOPES: dict[str, tuple[dist.Distribution, dist.Distribution, dist.Distribution]] = {
    "whole line": (
        dist.Normal(mean=0.4, sd=2.0),
        dist.StudentT(df=4.0, location=0.5, scale=0.3),
        dist.Laplace(scale=0.7),
    ),
    "bounded": (
        dist.Cauchy(location=-0.2, scale=2.0),
        dist.LogNormal(meanlog=-1.0, sdlog=0.5),
        dist.Uniform(low=-3.0, high=1.5),
    ),
}

CASES = [
    ("gaussian", "identity", False, "whole line", "centre"),
    ("gaussian", "identity", False, "bounded", "zero"),
    ("bernoulli", "logit", False, "whole line", "centre"),
    ("bernoulli", "probit", False, "whole line", "zero"),
    ("bernoulli", "cloglog", False, "bounded", "centre"),
    ("poisson", "log", True, "whole line", "centre"),
    ("poisson", "log", False, "bounded", "zero"),
]

ALONE = [
    ("gaussian", "1", dist.StudentT(df=5.0, location=90.0, scale=30.0)),
    ("gaussian", "1", dist.Gamma(shape=4.0, rate=0.03)),
    ("poisson", "1", dist.Uniform(low=-1.0, high=4.0)),
    ("gaussian", "0 + x", dist.Laplace(location=3.0, scale=1.0)),
    ("bernoulli", "0 + x", dist.LogNormal(meanlog=-4.0, sdlog=0.7)),
]
"""Models of one column, with its prior."""


@pytest.fixture(scope="module")
def mixed(design_of: Callable[..., Design]) -> Callable[..., Design]:
    """Give a function that makes a design with a numeric column far from zero and a factor."""
    rng = np.random.default_rng(5)
    x = rng.normal(30.0, 6.0, 24)
    frame = pd.DataFrame(
        {
            "x": x,
            "g": np.tile(["a", "b"], 12),
            "gaussian": 100.0 + 2.0 * x + rng.normal(size=24),
            "bernoulli": np.tile([0.0, 1.0, 1.0], 8),
            "poisson": rng.poisson(4.0, 24).astype(float),
            "hours": rng.uniform(1.0, 9.0, 24),
        }
    )

    def make(family: str, right: str = "x + g", **keys: Any) -> Design:
        return design_of(frame, f"{family} ~ {right}", family, **keys)

    return make


@pytest.mark.parametrize("family, link, exposed, slopes, at", CASES)
def test_bambis_log_density_is_ours(
    mixed: Any, priors: Any, family: str, link: str, exposed: bool, slopes: str, at: str
) -> None:
    """Along points of the sampler's space, bambi's log posterior differs from ours by one constant.

    Ours is evaluated on the data's scale, so scaling of data and priors, un-centring, offset and
    Jacobian-free transforms are all in the comparison.
    """
    design = mixed(family, link=link, **({"exposure": "hours"} if exposed else {}))
    auxiliary = SIGMA if family == "gaussian" else None
    prior_set = priors(design, *SLOPES[slopes], auxiliary=auxiliary, intercept_at=at)

    assert_same_density(design, prior_set)


@pytest.mark.parametrize("family, right, prior", ALONE)
def test_one_column_has_the_same_density_too(
    mixed: Any, priors: Any, family: str, right: str, prior: dist.Distribution
) -> None:
    """So it is for an intercept alone and for a predictor without one, bounded or not."""
    design = mixed(family, right)

    assert_same_density(design, priors(design, prior, auxiliary=SIGMA if family == "gaussian" else None))


def assert_same_density(design: Design, prior_set: PriorSet) -> None:
    """Compare both log densities at five points."""
    scaling = choose_scaling(design, prior_set)
    inputs = bound_inputs(design, prior_set, scaling)
    structure = structure_of(design, prior_set)
    graph = build_model(structure, inputs, pytensor.shared(inputs.priors.ravel())).backend.model
    density = graph.compile_logp(jacobian=False, mode="FAST_COMPILE")
    rng = np.random.default_rng(6)
    # Not far out: bambi keeps a probability within (eps, 1 - eps), and takes its logarithm afterwards.
    points = [
        {name: rng.normal(0.0, 0.3, np.shape(value)) for name, value in graph.initial_point().items()}
        for _ in range(5)
    ]

    backward = graph.compile_fn(
        graph.unobserved_value_vars, inputs=graph.value_vars, mode="FAST_COMPILE", on_unused_input="ignore"
    )
    names = [variable.name for variable in graph.unobserved_value_vars]
    values = [dict(zip(names, backward(point), strict=True)) for point in points]
    coefficients = np.array([np.atleast_1d(value[structure.term]) for value in values])[None]
    sigma = np.array([[value["sigma"]] for value in values] if prior_set.auxiliary else [[]] * 5)[None]
    draws = unscaled_draws(coefficients, sigma, scaling)
    ours = log_prior(draws, prior_set, design) + log_likelihood(draws, design)

    bambis = np.array([float(density(point)) for point in points])
    assert np.ptp(ours) > 1.0
    assert bambis - bambis[0] == pytest.approx(ours - ours[0], rel=1e-6, abs=1e-6)


@pytest.fixture(scope="module")
def built(plant: Design) -> tuple[Any, Any, Inputs, Any]:
    """Bambi's model of the plant weights under the weak prior set, not compiled."""
    prior_set = weak_priors(plant)
    inputs = bound_inputs(plant, prior_set, choose_scaling(plant, prior_set))
    shared = pytensor.shared(inputs.priors.ravel(), name="priors")
    structure = structure_of(plant, prior_set)
    return build_model(structure, inputs, shared), structure, inputs, shared


def test_what_was_asked_passes_the_check(built: tuple[Any, Any, Inputs, Any]) -> None:
    """The untouched model has one free variable for all columns and one for sigma."""
    bambis, structure, inputs, shared = built

    check_model(bambis, structure, inputs, shared)

    assert {rv.name for rv in bambis.backend.model.free_RVs} == {"columns(c0)", "sigma"}


@pytest.mark.parametrize(
    "field, cell, words",
    [
        ("matrix", (3, 1), "matrix"),
        ("response", (7,), "outcome"),
        ("priors", (1, 1), r"prior of columns\(c0\)"),
        ("priors", (2, 4), "prior of sigma"),
    ],
)
def test_a_number_of_another_model_is_found(
    built: tuple[Any, Any, Inputs, Any], field: str, cell: tuple[int, ...], words: str
) -> None:
    """One differing number of matrix, outcome or priors stops the fit, and is named."""
    bambis, structure, inputs, shared = built
    tampered = getattr(inputs, field).copy()
    tampered[cell] += 1e-6

    with pytest.raises(FitError, match=rf"another model than the one asked for \({words}\)"):
        check_model(bambis, structure, replace(inputs, **{field: tampered}), shared)


def test_a_parameter_that_nobody_asked_for_is_found(
    plant: Design, built: tuple[Any, Any, Inputs, Any]
) -> None:
    """A model with a variable more than its structure says is refused."""
    bambis, structure, inputs, shared = built
    poisson = replace(structure, family=replace(structure.family, auxiliary=None))

    with pytest.raises(FitError, match=r"parameters \['columns\(c0\)', 'sigma'\]"):
        check_model(bambis, poisson, inputs, shared)


class CountingCompiler:
    """Serves models of the session's store, and counts how often it is asked."""

    def __init__(self, store: ModelStore) -> None:
        self.store = store
        self.calls = 0

    def __call__(self, structure: Any, inputs: Inputs) -> Any:
        """Count and serve."""
        self.calls += 1
        return self.store.get(structure, inputs)


@pytest.mark.mcmc
def test_one_compilation_serves_every_prior_set_and_another_study(
    plant: Design, norris: Design, store: ModelStore, sampler: Any, agree_column: Any, exact: Any
) -> None:
    """Flat, weak, sceptical and stated priors, and a study with other rows, need one compilation."""
    compiler = CountingCompiler(store)
    own = ModelStore(compiler)
    weak = weak_priors(plant)
    question = QuestionSpec(name="q", effect="group[trt]", direction="less", matters_beyond=0.2)
    stated = PriorSpec.model_validate(
        {
            "name": "stated",
            "source": "s",
            "terms": {"group": {"dist": "normal", "mean": 3.0, "sd": 0.01}},
            "auxiliary": {"sigma": {"dist": "half_cauchy", "scale": 1.0}},
        }
    )
    sets: tuple[PriorSet, ...] = (
        flat_priors(plant),
        weak,
        sceptical_priors(plant, weak, (question,)),
        author_priors(stated, plant, weak),
    )

    means = [fit_posterior(plant, one, sampler, 0.95, own).coefficients[1].mean for one in sets]
    other = fit_posterior(norris, flat_priors(norris), sampler, 0.95, own)

    assert compiler.calls == 1
    # N(0, (0.2 / 1.645)^2) against -0.371 (0.31): a seventh of it is left.
    assert means[2] == pytest.approx(-0.371 / (1.0 + (0.311 * 1.645 / 0.2) ** 2), abs=0.02)
    assert means[3] == pytest.approx(3.0, abs=0.01)  # hardly anything but the prior
    assert isinstance(other, PosteriorFit)
    # The reference prior's posterior is the frequentist t: NIST's certified slope and error, 34 df.
    assert other.coefficients[1].mean == pytest.approx(
        1.00211681802045, abs=4 * other.coefficients[1].mcse_mean
    )


def test_structures_differ_by_what_the_graph_depends_on(plant: Design, norris: Design, priors: Any) -> None:
    """Prior family and data don't make a structure, a bounded prior does."""
    normal = priors(plant, dist.Flat(), dist.Normal(sd=1.0), auxiliary=dist.LogFlat())
    student = priors(norris, dist.Cauchy(scale=1.0), dist.Flat(), auxiliary=dist.HalfNormal(sd=1.0))
    bounded = priors(plant, dist.Flat(), dist.HalfNormal(sd=1.0), auxiliary=dist.LogFlat())

    assert structure_of(plant, normal) == structure_of(norris, student)
    assert structure_of(plant, bounded) == replace(structure_of(plant, normal), bounded=True)


@pytest.mark.parametrize("family, exposure", [("gaussian", None), ("poisson", None), ("poisson", "e")])
def test_an_intercept_alone_is_a_model(
    design_of: Any, priors: Any, family: str, exposure: str | None
) -> None:
    """Bambi refuses a constant column that is not its own intercept: it gets its own.

    The counts equal the logarithm of their exposure, which must not confuse the two.
    """
    frame = pd.DataFrame({"y": [0.0, 1.0, 2.0, 1.0], "e": np.exp([0.0, 1.0, 2.0, 1.0])})
    keys = {} if exposure is None else {"exposure": exposure}
    design = design_of(frame, "y ~ 1", family, **keys)
    auxiliary = dist.LogFlat() if family == "gaussian" else None
    prior_set = priors(design, dist.Normal(mean=0.3, sd=1.0), auxiliary=auxiliary)
    inputs = bound_inputs(design, prior_set, choose_scaling(design, prior_set))
    structure = structure_of(design, prior_set)
    shared = pytensor.shared(inputs.priors.ravel(), name="priors")

    bambis = build_model(structure, inputs, shared)
    check_model(bambis, structure, inputs, shared)
    graph = model._share_data(bambis.backend.model, structure, inputs)

    assert structure.constant
    names = {variable.name for variable in graph_inputs([graph.logp()]) if hasattr(variable, "get_value")}
    assert names - {"__obs__"} == {"priors", "response", *(() if exposure is None else ("offset",))}


@pytest.mark.mcmc
def test_bambis_own_fit_agrees(spector: Design, posterior_of: Any, table_of: Any) -> None:
    """Bambi's own model of the same data, its own matrix, centring and priors given by name, agrees.

    Means and standard deviations are compared within four combined Monte Carlo errors.
    """
    prior_set = weak_priors(spector)
    sds = [prior.distribution.sd for prior in prior_set.coefficients]
    frame = table_of("spector")
    frame["PSI"] = pd.Categorical(np.where(frame["PSI"] > 0.5, "yes", "no"), ordered=True)
    named = dict(zip(["Intercept", "GPA", "PSI"], sds, strict=True))
    bambis = bmb.Model(
        "GRADE ~ GPA + PSI",
        frame,
        family="bernoulli",
        priors={name: bmb.Prior("Normal", mu=0.0, sigma=sd) for name, sd in named.items()},
        center_predictors=True,
    )

    with warnings.catch_warnings():
        warnings.simplefilter("ignore")
        trace = bambis.fit(
            draws=2000, tune=500, chains=4, random_seed=9, inference_method="nutpie", progressbar=False
        )
    ours = posterior_of(spector, prior_set)

    posterior = trace["posterior"]
    for column, name in enumerate(named):
        theirs = np.asarray(posterior[name].values).reshape(4, 2000)
        mine = ours.draws.coefficients[..., column]
        for method, statistic in (("mean", np.mean), ("sd", np.std)):
            error = np.hypot(*(float(array_stats.mcse(d, method=method)) for d in (theirs, mine)))
            assert abs(statistic(theirs) - statistic(mine)) < 4.0 * error, (name, method)
            assert error < 0.06 * np.std(mine)
