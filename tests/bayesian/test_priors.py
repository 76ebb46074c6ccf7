"""Priors resolved to numbers: bambi's own defaults, the sceptic's doubt, and what the author states."""

from __future__ import annotations

import math
import warnings
from collections.abc import Callable
from typing import Any

import bambi as bmb
import numpy as np
import pandas as pd
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy import stats

from reanalysis.bayesian.priors import (
    author_priors,
    flat_priors,
    resolve_prior_sets,
    sceptical_priors,
    weak_priors,
)
from reanalysis.bayesian.result import PriorSet
from reanalysis.design.model import Design
from reanalysis.errors import DesignError
from reanalysis.study.distributions import Flat, HalfNormal, HalfStudentT, LogFlat, Normal
from reanalysis.study.spec import PriorSpec, QuestionSpec, StudySpec


def parameters(prior_set: PriorSet) -> dict[str, tuple[float, float]]:
    """Mean and standard deviation of each coefficient's normal prior."""
    return {
        prior.name: (prior.distribution.mean, prior.distribution.sd)
        for prior in prior_set.coefficients
        if isinstance(prior.distribution, Normal)
    }


def doubt(design: Design, effect: str, **keys: Any) -> Any:
    """The sceptic's prior of one effect."""
    question = QuestionSpec(name="q", effect=effect, **keys)
    prior_set = sceptical_priors(design, weak_priors(design), (question,))
    return prior_set.coefficients[design.index(effect)]


@pytest.fixture(scope="module")
def mixed() -> pd.DataFrame:
    """A table with two factors, a number far from zero, and an outcome for every family."""
    rng = np.random.default_rng(3)
    return pd.DataFrame(
        {
            "x": rng.normal(40.0, 3.0, 60),
            "g": pd.Categorical(np.tile(["a", "b", "c"], 20), ordered=True),
            "h": pd.Categorical(np.tile(["p", "q", "q", "p"], 15), ordered=True),
            "y": rng.normal(7.0, 4.0, 60),
            "z": np.tile([0.0, 1.0, 1.0, 1.0, 0.0], 12),
            "n": rng.poisson(3.0, 60).astype(float),
        }
    )


@pytest.mark.parametrize(
    "formula, family, link",
    [
        ("y ~ x + g", "gaussian", None),
        ("y ~ x + g * h", "gaussian", None),
        ("y ~ 0 + x", "gaussian", None),
        ("y ~ 1", "gaussian", None),
        ("z ~ x + g", "bernoulli", "logit"),
        ("z ~ x + g + h", "bernoulli", "probit"),
        ("z ~ x + h", "bernoulli", "cloglog"),
        ("z ~ h + x:h", "bernoulli", "cloglog"),
        ("n ~ x + g", "poisson", None),
    ],
)
def test_weak_rule_is_bambis(
    design_of: Callable[..., Design], mixed: pd.DataFrame, formula: str, family: str, link: str | None
) -> None:
    """Every number equals the default prior that bambi itself resolves for the same data."""
    theirs = bmb.Model(formula, mixed, family=family, link=link)
    with warnings.catch_warnings():
        warnings.simplefilter("ignore", DeprecationWarning)  # pandas, from within bambi
        theirs.build()
    terms = theirs.parameters["p" if family == "bernoulli" else "mu"]
    common = [
        (np.atleast_1d(t.prior.args["mu"]), np.atleast_1d(t.prior.args["sigma"]))
        for t in terms.common_terms.values()
    ]
    if terms.intercept_term is not None:
        args = terms.intercept_term.prior.args
        common.insert(0, (np.atleast_1d(args["mu"]), np.atleast_1d(args["sigma"])))
    want = list(zip(*(np.concatenate(part) for part in zip(*common, strict=True)), strict=True))

    ours = weak_priors(design_of(mixed, formula, family, **({} if link is None else {"link": link})))

    assert list(parameters(ours).values()) == [pytest.approx(pair, rel=1e-12) for pair in want]
    if family == "gaussian":
        sigma = theirs.marginal_parameters["sigma"].prior.args
        assert ours.auxiliary[0].distribution == HalfStudentT(
            df=float(sigma["nu"]), scale=float(sigma["sigma"])
        )
    else:
        assert ours.auxiliary == ()


def test_weak_priors_of_published_data(
    plant: Design, norris: Design, design_of: Callable[..., Design], table_of: Any
) -> None:
    """Numbers that bambi 0.21 prints for Dobson's plants, NIST's Norris data and Spector's grades."""
    spector = design_of(table_of("spector"), "GRADE ~ GPA + PSI", "bernoulli")

    assert parameters(weak_priors(plant)) == {
        "Intercept": pytest.approx((4.8465, 2.4260893), rel=1e-7),
        "group[trt]": pytest.approx((0.0, 3.4310084), rel=1e-7),
    }
    assert parameters(weak_priors(norris)) == {
        "Intercept": pytest.approx((419.8027778, 1357.1050991), rel=1e-9),
        "x": pytest.approx((0.0, 2.5052999), rel=1e-7),
    }
    assert weak_priors(plant).auxiliary[0].distribution.scale == pytest.approx(0.6862017, rel=1e-6)
    assert weak_priors(norris).auxiliary[0].distribution.scale == pytest.approx(343.8338080, rel=1e-9)
    # The same 0/1 column gets another prior as a number than as a factor, whose slope has SD 1.
    assert parameters(weak_priors(spector))["GPA"] == pytest.approx((0.0, 2.1769297), rel=1e-7)
    assert parameters(weak_priors(spector))["PSI"] == pytest.approx((0.0, 2.0158), abs=5e-5)


def test_a_factors_column_has_prior_sd_one(spector: Design) -> None:
    """In a logit model the slope of a factor's column is N(0, 1) whatever its share."""
    assert parameters(weak_priors(spector))["PSI[yes]"] == (0.0, 1.0)


def test_flat_set_is_the_reference_prior(plant: Design, spector: Design) -> None:
    """Constant for every coefficient, 1/sigma for a residual standard deviation, nothing more."""
    assert [prior.distribution for prior in flat_priors(plant).coefficients] == [Flat(), Flat()]
    assert [prior.distribution for prior in flat_priors(plant).auxiliary] == [LogFlat()]
    assert flat_priors(spector).auxiliary == ()


@pytest.mark.parametrize("direction", ["greater", "less"])
def test_sceptic_leaves_a_twentieth_beyond_what_matters(plant: Design, direction: str) -> None:
    """A smallest effect of ln 2 and 5 % beyond it give SD 0.4214036 (Spiegelhalter et al. 1994)."""
    prior = doubt(plant, "group[trt]", direction=direction, matters_beyond=math.log(2.0))

    assert prior.distribution.mean == 0.0
    assert prior.distribution.sd == pytest.approx(0.4214036, abs=5e-8)
    assert prior.origin == "5 % prior probability beyond the smallest effect that matters"


@given(limit=st.floats(0.01, 100.0))
def test_sceptic_of_either_direction_halves_the_tail(plant: Design, limit: float) -> None:
    """For a two-sided question 5 % lie beyond on both sides together."""
    prior = doubt(plant, "group[trt]", direction="either", matters_beyond=limit)

    assert 2.0 * stats.norm.sf(limit, 0.0, prior.distribution.sd) == pytest.approx(0.05)
    assert prior.origin.endswith("either way")


def test_sceptic_without_a_size_says_what_was_used(plant: Design, spector: Design) -> None:
    """Without a smallest effect: a quarter SD of the outcome per SD of the column, and the origin says so."""
    plants, grades = doubt(plant, "group[trt]"), doubt(spector, "GPA")

    assert plants.distribution.sd == pytest.approx(0.25 * 0.6862017 / 0.5, rel=1e-6)
    assert grades.distribution.sd == pytest.approx(0.25 * math.pi / math.sqrt(3.0) * 2.1769297, rel=1e-6)
    assert plants.origin == (
        "no smallest effect that matters was stated; used instead: 0.25 sd(weight) / sd(group[trt])"
    )
    assert "the outcome's SD on the model's scale / sd(GPA)" in grades.origin


def test_sceptic_of_an_intercept_alone(design_of: Callable[..., Design], mixed: pd.DataFrame) -> None:
    """A question about a mean has no column to scale by: a quarter SD of the outcome."""
    prior = doubt(design_of(mixed, "y ~ 1"), "Intercept")

    assert prior.distribution.sd == pytest.approx(0.25 * np.std(mixed["y"]), rel=1e-12)
    assert prior.origin.endswith("used instead: 0.25 sd(y)")


def test_sceptic_doubts_only_what_is_asked(plant: Design) -> None:
    """All else keeps its weak prior; of two questions about one effect the smaller limit rules."""
    weak = weak_priors(plant)
    questions = tuple(
        QuestionSpec(name=name, effect="group[trt]", direction="greater", matters_beyond=limit)
        for name, limit in (("a", 0.9), ("b", 0.3), ("c", 0.6))
    )

    sceptical = sceptical_priors(plant, weak, questions)

    assert sceptical.coefficients[0] == weak.coefficients[0]
    assert sceptical.auxiliary == weak.auxiliary
    assert sceptical.coefficients[1].distribution.sd == pytest.approx(0.3 / stats.norm.ppf(0.95))
    assert sceptical_priors(plant, weak, ()).coefficients == weak.coefficients


def stated(**keys: Any) -> PriorSpec:
    """A prior set of the author's."""
    return PriorSpec.model_validate({"name": "own", "source": "a pilot", **keys})


def test_author_priors_by_term_and_by_column(design_of: Callable[..., Design], mixed: pd.DataFrame) -> None:
    """A term's prior covers its columns, a column's own prior goes before it, the rest stays weak."""
    design = design_of(mixed, "y ~ x + g")
    weak = weak_priors(design)
    wide, narrow = {"dist": "normal", "sd": 9.0}, {"dist": "normal", "mean": 1.0, "sd": 0.1}

    own = author_priors(
        stated(terms={"g": wide, "g[c]": narrow}, auxiliary={"sigma": {"dist": "half_normal", "sd": 2.0}}),
        design,
        weak,
    )

    assert parameters(own) == {
        **parameters(weak),
        "g[b]": (0.0, 9.0),
        "g[c]": (1.0, 0.1),
    }
    assert own.auxiliary[0].distribution == HalfNormal(sd=2.0)
    assert own.coefficients[2].origin == own.auxiliary[0].origin == "stated: a pilot"
    assert own.coefficients[1] is weak.coefficients[1]
    assert (own.name, own.source, own.intercept_at) == ("own", "a pilot", "centre")


def test_author_may_state_the_intercept_at_zero(plant: Design) -> None:
    """The stated prior of the intercept is about zero predictors when the author says so."""
    own = author_priors(
        stated(intercept_at="zero", terms={"Intercept": {"dist": "cauchy", "scale": 2.0}}),
        plant,
        weak_priors(plant),
    )

    assert own.intercept_at == "zero"
    assert own.coefficients[0].distribution.dist == "cauchy"


def test_an_intercept_that_is_not_stated_stays_at_the_centre(plant: Design) -> None:
    """The weak prior of the intercept is about the centre of the data, whatever else the author states."""
    weak = weak_priors(plant)

    own = author_priors(
        stated(intercept_at="zero", terms={"group": {"dist": "normal", "sd": 1.0}}), plant, weak
    )

    assert own.coefficients[0] == weak.coefficients[0]
    assert own.intercept_at == "centre"


def study(*priors: dict[str, Any], **keys: Any) -> StudySpec:
    """A study of the plant weights."""
    return StudySpec.model_validate(
        {
            "title": "t",
            "data": {"file": "x.csv"},
            "model": {"formula": "weight ~ group", "family": "gaussian"},
            "prior": priors,
            **keys,
        }
    )


def test_prior_sets_come_in_the_reports_order(plant: Design) -> None:
    """Built-in sets first, then the author's as the file has them; questions reach the sceptic."""
    own = [{"name": name, "source": "s"} for name in ("zeta", "alpha")]
    question = {"name": "q", "effect": "group[trt]", "matters_beyond": 0.5, "direction": "less"}

    sets = resolve_prior_sets(study(*own, question=[question]), plant)

    assert [one.name for one in sets] == ["flat", "weak", "sceptical", "zeta", "alpha"]
    assert parameters(sets[2])["group[trt]"] == pytest.approx((0.0, 0.5 / 1.6448536), rel=1e-6)
    assert parameters(sets[1]) == parameters(sets[3]) == parameters(weak_priors(plant))


def test_unknown_names_are_all_refused_with_the_closest(plant: Design, spector: Design) -> None:
    """Each unknown key is a problem of its own that names where, what is allowed and the closest name."""
    normal, half = {"dist": "normal", "sd": 1.0}, {"dist": "half_normal", "sd": 1.0}
    typo = {"name": "one", "source": "s", "terms": {"group[trtt]": normal, "zzz": normal, "group": normal}}
    aux = {"name": "two", "source": "s", "auxiliary": {"sigmma": half}}

    with pytest.raises(DesignError, match=r'the model has nothing called "zzz"') as caught:
        resolve_prior_sets(study(typo, aux), plant)

    assert [problem.where for problem in caught.value.problems] == [
        'prior no. 1, terms."group[trtt]"',
        "prior no. 1, terms.zzz",
        "prior no. 2, auxiliary.sigmma",
    ]
    assert [problem.advice for problem in caught.value.problems] == [
        'write "group[trt]"',
        "use one of these names, or remove the prior",
        'write "sigma"',
    ]
    assert caught.value.problems[0].allowed == "Intercept, group, group[trt]"
    with pytest.raises(DesignError, match="none for this family"):
        resolve_prior_sets(study({"name": "two", "source": "s", "auxiliary": {"sigma": half}}), spector)
