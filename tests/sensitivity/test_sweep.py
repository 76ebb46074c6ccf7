"""Sweeps of the prior's width against exact posteriors."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from typing import Any

import numpy as np
import pytest
from scipy import stats

from reanalysis.bayesian.priors import flat_priors, weak_priors
from reanalysis.bayesian.result import NoPosterior, ParameterPrior, PosteriorFit, PosteriorResult, PriorSet
from reanalysis.effects.result import Question
from reanalysis.sensitivity.result import NoSweep, NoTipping, Sweep, TippingPrior
from reanalysis.sensitivity.reweight import pareto_k_limit
from reanalysis.sensitivity.sweep import _at_width, _covers, choose_widths, sweep_question
from reanalysis.study.distributions import Distribution, HalfNormal, Normal, StudentT


def question(direction: str = "greater", limit: float | None = 0.5, act_when: float = 0.95) -> Question:
    """A question about the only column."""
    return Question("q", "x", "", 0, direction, limit, act_when)


class Refits:
    """Refits with exact draws and remembers what was asked."""

    def __init__(self, truth: Any) -> None:
        self.truth = truth
        self.asked: list[PriorSet] = []

    def __call__(self, prior_set: PriorSet) -> PosteriorResult:
        """Fit at the width that the prior set says."""
        self.asked.append(prior_set)
        return self.truth.fit(prior_set.coefficients[0].distribution, prior_set.name)


@pytest.fixture(scope="module")
def truth(world: Callable[..., Any]) -> Any:
    """Estimate 1.2 with standard error .5."""
    return world(1.2, 0.5)


@pytest.fixture(scope="module")
def swept(truth: Any, one_column: Any, flat: Any) -> tuple[Sweep, Refits]:
    """A sweep around a weak prior, with the flat fit to help."""
    refits = Refits(truth)
    sweep = sweep_question(
        question(), truth.fit(Normal(sd=3.0)), (truth.fit(flat, "flat"),), one_column, refits
    )
    return sweep, refits


def test_widths_span_two_orders_of_magnitude(truth: Any, swept: tuple[Sweep, Refits]) -> None:
    """At least 25 widths, increasing, over two orders and more, to the main prior's where that is wider."""
    widths = np.array([point.width for point in swept[0].points])

    assert len(widths) >= 25
    assert np.all(np.diff(widths) > 0.0)
    assert widths[-1] / widths[0] >= 100.0
    assert np.diff(np.log(widths)) == pytest.approx(np.log(widths[1] / widths[0]))
    assert choose_widths(question(), truth.fit(Normal(sd=500.0)))[-1] == pytest.approx(500.0)


def test_probabilities_are_those_of_the_exact_posterior(truth: Any, swept: tuple[Sweep, Refits]) -> None:
    """At every width direction, size, median and limits agree with the closed form."""
    for point in swept[0].points:
        exact = truth.posterior(point.width)
        assert point.prob_direction == pytest.approx(exact.sf(0.0), abs=0.02)
        assert point.prob_beyond == pytest.approx(exact.sf(0.5), abs=0.02)
        assert point.median == pytest.approx(exact.median(), abs=0.1 * exact.std())
        assert (point.low, point.high) == pytest.approx(exact.interval(0.95), abs=0.25 * exact.std())


def test_direction_gains_from_wider_priors(swept: tuple[Sweep, Refits]) -> None:
    """A positive estimate: narrow priors pull P(> 0) to one half, wide ones leave it at the data's."""
    first, last = swept[0].points[0], swept[0].points[-1]

    assert first.prob_direction < 0.65
    assert last.prob_direction == pytest.approx(stats.norm.cdf(2.4), abs=0.01)
    assert first.median < 0.1 < 1.1 < last.median


def test_narrow_priors_are_refitted(swept: tuple[Sweep, Refits]) -> None:
    """Where weights cannot be trusted the model is fitted: only where needed, at that width, and counted."""
    sweep, refits = swept
    refitted = [point for point in sweep.points if point.method == "refitted"]

    assert sweep.refits == len(refits.asked) == len(refitted)
    assert 1 <= len(refitted) <= 5
    assert sorted(p.coefficients[0].distribution.sd for p in refits.asked) == [p.width for p in refitted]
    assert {p.coefficients[0].distribution.mean for p in refits.asked} == {0.0}
    assert len({p.name for p in refits.asked}) == len(refits.asked)
    assert all(point.pareto_k == -np.inf for point in refitted)
    limit = pareto_k_limit(8000)
    assert all(point.pareto_k <= limit for point in sweep.points if point.method == "reweighted")


@pytest.mark.parametrize("act_when", [0.9, 0.95, 0.98])
def test_tipping_prior_is_the_closed_forms(truth: Any, one_column: Any, act_when: float) -> None:
    """P(theta > 0) = act_when at width z s^2 / sqrt(y^2 - z^2 s^2), and is reached when wider."""
    z = stats.norm.ppf(act_when)
    want = z * 0.5**2 / np.sqrt(1.2**2 - z**2 * 0.5**2)

    sweep = sweep_question(
        question(act_when=act_when), truth.fit(Normal(sd=3.0)), (), one_column, Refits(truth)
    )

    assert sweep.direction_tipping == TippingPrior("direction", pytest.approx(want, rel=0.06), "wider")


def test_claims_without_a_tipping_prior(truth: Any, one_column: Any, world: Any) -> None:
    """Size is never reached here; a question without a size has no tipping prior of it."""
    sweep = sweep_question(question(limit=1.1), truth.fit(Normal(sd=3.0)), (), one_column, Refits(truth))
    plain = sweep_question(question(limit=None), truth.fit(Normal(sd=3.0)), (), one_column, Refits(truth))
    strong = world(60.0, 0.5)
    sure = sweep_question(question(), strong.fit(Normal(sd=99.0)), (), one_column, Refits(strong))

    assert sweep.beyond_tipping == NoTipping("beyond", "never")
    assert plain.beyond_tipping is None
    assert {point.prob_beyond for point in plain.points} == {None}
    assert sure.direction_tipping == NoTipping("direction", "always")


@pytest.mark.parametrize("direction", ["less", "either"])
def test_sweeps_go_by_the_asked_direction(world: Any, one_column: Any, direction: str) -> None:
    """A negative estimate asked for less, or for either, mirrors a positive one."""
    negative = world(-1.2, 0.5)

    sweep = sweep_question(
        question(direction), negative.fit(Normal(sd=3.0)), (), one_column, Refits(negative)
    )

    for point in sweep.points:
        exact = negative.posterior(point.width)
        beyond = exact.cdf(-0.5) + (exact.sf(0.5) if direction == "either" else 0.0)
        assert point.prob_direction == pytest.approx(exact.cdf(0.0), abs=0.02)
        assert point.prob_beyond == pytest.approx(beyond, abs=0.02)


def test_either_direction_keeps_its_sign_over_the_sweep(truth: Any, one_column: Any) -> None:
    """The sign is that of the main posterior's median, also where narrower or wider priors turn it."""
    leaning = truth.fit(Normal(mean=-0.8, sd=0.4))

    sweep = sweep_question(question("either", None), leaning, (), one_column, Refits(truth))

    assert leaning.coefficients[0].median < 0.0
    assert "reweighted" in {point.method for point in sweep.points}
    for point in sweep.points:
        assert point.prob_direction == pytest.approx(truth.posterior(point.width).cdf(0.0), abs=0.04)


def set_of(effect: Distribution, other: Distribution, at: str = "centre") -> PriorSet:
    """Priors of a questioned effect and of another coefficient."""
    return PriorSet("s", "", at, (ParameterPrior("x", effect, ""), ParameterPrior("z", other, "")), ())


def test_only_draws_that_cover_the_target_serve() -> None:
    """A bounded prior disqualifies for its own effect, and elsewhere unless the main set has the same."""
    normal, half = Normal(sd=1.0), HalfNormal(sd=1.0)
    main, bounded = set_of(normal, normal), set_of(normal, half)

    assert _covers(set_of(Normal(sd=9.0), StudentT(df=3.0, scale=2.0)), main, 0)
    assert not _covers(bounded, main, 0)
    assert _covers(bounded, bounded, 0)
    assert not _covers(bounded, bounded, 1)
    assert not _covers(set_of(normal, HalfNormal(sd=2.0)), bounded, 0)
    assert not _covers(set_of(normal, half, "zero"), bounded, 0)


def test_draws_of_a_positive_prior_serve_no_normal_one(truth: Any, one_column: Any) -> None:
    """Draws that cannot be negative say nothing of P(< 0), whatever their weights."""
    half = truth.posterior(3.0)
    share = stats.uniform(half.cdf(0.0), half.sf(0.0))
    positive = half.ppf(share.ppf((np.arange(8000) + 0.5) / 8000))
    narrow = truth.fit_of(positive.reshape(4, -1), HalfNormal(sd=3.0), "informed")

    helped = sweep_question(question(), truth.fit(Normal(sd=3.0)), (narrow,), one_column, Refits(truth))
    alone = sweep_question(question(), narrow, (), one_column, Refits(truth))

    for sweep in (helped, alone):
        for point in sweep.points:
            assert point.prob_direction == pytest.approx(truth.posterior(point.width).sf(0.0), abs=0.02)
    assert alone.points[-1].method == "refitted"


def test_a_fit_with_few_draws_is_refitted(world: Any, one_column: Any) -> None:
    """Weights that leave fewer than 400 effective draws are not used, however well their tail behaves."""
    small, large = world(1.2, 0.5, 400), world(1.2, 0.5)

    sweep = sweep_question(question(), small.fit(Normal(sd=3.0)), (), one_column, Refits(large))

    assert sweep.points[-1].method == "refitted"
    assert sweep.points[-2].method == "reweighted"  # the refit serves its neighbour


def test_failed_refits_leave_a_gap(truth: Any, one_column: Any) -> None:
    """A width at which the model cannot be fitted is left out; with no width left there is no sweep."""

    def refuse(prior_set: PriorSet) -> PosteriorResult:
        return NoPosterior(prior_set, "no", "", None)

    main = truth.fit(Normal(sd=3.0))
    few = replace(main, draws=replace(main.draws, coefficients=main.draws.coefficients[:, :50]))

    gaps = sweep_question(question(), main, (), one_column, refuse)
    nothing = sweep_question(question(), few, (), one_column, refuse)

    assert isinstance(gaps, Sweep)
    assert 20 <= len(gaps.points) < 33
    assert gaps.refits == 33 - len(gaps.points)
    assert nothing == NoSweep("q", "the model could not be fitted at any width")


def test_no_posterior_gives_no_sweep(truth: Any, one_column: Any) -> None:
    """Without a main posterior there is nothing to sweep, and the reason is passed on."""
    nothing = NoPosterior(truth.fit(Normal(sd=1.0)).prior_set, "it would be improper", "", None)

    got = sweep_question(question(), nothing, (), one_column, Refits(truth))

    assert got == NoSweep("q", "there is no posterior under the main prior set: it would be improper")


@pytest.mark.mcmc
def test_sweep_of_a_model_equals_a_fit_at_that_width(
    design_of: Any, table_of: Any, posterior_of: Any
) -> None:
    """Plant weights: everything but the effect's prior stays as in the main set, sigma's prior included."""
    design = design_of(table_of("dobson_plant_weight"), "weight ~ group")
    weak = weak_priors(design)
    asked = Question("q", "group[trt]", "", 1, "less", 0.2, 0.9)
    main, helper = posterior_of(design, weak), posterior_of(design, flat_priors(design))
    sweep = sweep_question(asked, main, (helper,), design, lambda prior_set: posterior_of(design, prior_set))

    assert isinstance(sweep, Sweep)
    for point in sweep.points[8:33:8]:
        fit = posterior_of(design, _at_width(weak, asked, point.width))
        assert isinstance(fit, PosteriorFit)
        marginal = fit.coefficients[1]
        error = np.hypot(marginal.mcse_prob_positive, 0.5 / np.sqrt(400.0) / 2.0)
        assert point.prob_direction == pytest.approx(1.0 - marginal.prob_positive, abs=4 * error)
        assert point.median == pytest.approx(marginal.median, abs=0.15 * marginal.sd)
        assert (point.low, point.high) == pytest.approx((marginal.low, marginal.high), abs=0.3 * marginal.sd)
