"""What the pictures show: the numbers behind them."""

from __future__ import annotations

import numpy as np
import pytest
from scipy import stats

from reanalysis.frequentist.result import NotEstimable
from reanalysis.report import numbers as num
from reanalysis.report.figures import density, paired, predictive, priors, ranks, residuals, smooth, sweep
from reanalysis.report.figures.prior_shapes import prior_density, prior_interval
from reanalysis.report.figures.style import Absent, Bar, CoredBar
from reanalysis.study import distributions as dist


def test_a_question_becomes_a_pair(inv):
    """The confidence bar holds the estimate, the credible one the median and its core, both in order."""
    answer = inv.answer(inv.FILM, "weak", 2.5, 1.0)
    row = paired.question_row(inv.FILM, inv.frequentist_answer(2.47, 1.0, 0.03), answer)
    assert row.confidence == Bar(2.47, 2.47 - 1.986, 2.47 + 1.986)
    assert row.credible == CoredBar(answer.median, answer.low, answer.high, answer.core_low, answer.core_high)
    assert (row.label, row.matters_beyond) == ("Film liner against no liner", 2.0)


def test_words_stand_for_a_missing_side(inv):
    """Either side of a pair may be absent."""
    row = paired.question_row(inv.FOAM, inv.NO_ESTIMATE, inv.NO_POSTERIOR)
    assert row.confidence == Absent("no estimate exists")
    assert row.credible == Absent("no posterior")
    coefficient = paired.coefficient_row("foam", NotEstimable("foam", "separated", "merge"), None)
    assert (coefficient.confidence, coefficient.credible) == (row.confidence, row.credible)


def test_the_axis_holds_zero_every_interval_and_near_bands(inv):
    """Zero belongs to the axis even when no interval comes near it."""
    row = paired.PairedRow("x", Bar(5.0, 4.0, 6.0), CoredBar(5.0, 4.1, 5.9, 4.7, 5.3), 1.0)
    low, high = paired.axis_limits(paired.paired_data([row], "x"))
    assert -1.6 < low < -1.0
    assert 6.0 < high < 6.6


def test_an_outlying_interval_does_not_set_the_axis():
    """A row a hundred times as wide as the others leaves their axis alone."""
    usual = [
        paired.PairedRow(str(k), Bar(1.0, 0.0, 2.0), CoredBar(1.0, 0.0, 2.0, 0.7, 1.3), None)
        for k in range(3)
    ]
    wide = paired.PairedRow("w", Bar(9.0, -99.0, 120.0), Absent("no posterior"), None)
    assert paired.axis_limits(paired.paired_data([*usual, wide], "x"))[1] < 2.5


def test_a_smooth_density_is_the_known_one():
    """20,000 normal draws give the normal density back; its area is one."""
    grid = np.linspace(-5.0, 5.0, 201)
    sample = np.random.default_rng(1).normal(0.5, 1.0, 20_000)
    curve = smooth.density(sample, grid)
    assert np.trapezoid(curve, grid) == pytest.approx(1.0, abs=2e-3)
    assert np.max(np.abs(curve - stats.norm.pdf(grid, 0.5, 1.0))) < 0.02


def test_the_bandwidth_is_silvermans():
    """1.06 min(sd, IQR / 1.34) n^(-1/5), by hand for 0 to 99: sd 28.866, IQR 49.5."""
    assert smooth.bandwidth(np.arange(100.0)) == pytest.approx(1.06 * 28.8661 * 100**-0.2, rel=1e-5)


@pytest.mark.parametrize(
    ("direction", "beyond", "shaded", "words"),
    [
        ("greater", 2.0, ((2.0, np.inf),), "lies above 2\u202fN"),
        ("less", 2.0, ((-np.inf, -2.0),), "lies below −2\u202fN"),
        ("either", 2.0, ((-np.inf, -2.0), (2.0, np.inf)), "lies beyond 2\u202fN either way"),
        ("greater", None, ((0.0, np.inf),), "lies above zero"),
        ("less", None, ((-np.inf, 0.0),), "lies below zero"),
    ],
)
def test_what_is_shaded_is_what_was_asked(inv, direction, beyond, shaded, words):
    """The shaded part and its words follow direction and size, and carry that probability."""
    from dataclasses import replace

    question = replace(inv.FILM, direction=direction, matters_beyond=beyond)
    answer = inv.answer(question, "weak", 2.5, 1.0)
    posterior = density.PosteriorOfQuestion(inv.posterior_draws(2.5, 1.0), dist.Normal(sd=28.0), answer, 0.95)
    data = density.density_data(question, posterior, inv.frequentist_answer(2.47, 1.0, 0.03), "N")
    tail = answer.beyond or answer.direction
    assert data.shaded == shaded
    assert data.shaded_words == f"{num.probability(tail.value, tail.mcse)} of the probability\n{words}"
    assert data.confidence_words == "95\u202f% confidence interval, p\u202f=\u202f0.030"
    assert data.grid[0] < 0.0 < data.grid[-1]


def test_a_flat_prior_has_no_density(inv):
    """An improper prior has neither density nor interval, and its picture says so."""
    assert prior_density(dist.Flat(), np.zeros(1)) is None
    assert prior_interval(dist.LogFlat(), 0.95) is None
    data = priors.priors_data(inv.FILM, [(inv.answer(inv.FILM, "flat", 2.5, 1.0), dist.Flat())], 0.95, "N")
    assert (data.rows[0].prior, data.rows[0].prior_words) == (None, "prior flat")


@pytest.mark.parametrize(
    ("prior", "low", "middle", "high"),
    [
        (dist.Normal(mean=3.0, sd=1.5), 3.0 - 2.939946, 3.0, 3.0 + 2.939946),
        (dist.Uniform(low=0.0, high=10.0), 0.25, 5.0, 9.75),
        (dist.Laplace(location=1.0, scale=2.0), 1.0 + 2.0 * np.log(0.05), 1.0, 1.0 - 2.0 * np.log(0.05)),
        (dist.Cauchy(location=0.0, scale=1.0), -12.7062, 0.0, 12.7062),
        (dist.Exponential(rate=2.0), -np.log(0.975) / 2.0, np.log(2.0) / 2.0, -np.log(0.025) / 2.0),
        (dist.HalfCauchy(scale=1.0), np.tan(np.pi * 0.0125), 1.0, np.tan(np.pi * 0.4875)),
        (dist.HalfStudentT(df=1.0, scale=1.0), np.tan(np.pi * 0.0125), 1.0, np.tan(np.pi * 0.4875)),
        (dist.LogNormal(meanlog=1.0, sdlog=0.5), np.exp(1.0 - 0.979982), np.e, np.exp(1.0 + 0.979982)),
        (dist.Gamma(shape=1.0, rate=2.0), -np.log(0.975) / 2.0, np.log(2.0) / 2.0, -np.log(0.025) / 2.0),
        (dist.StudentT(df=1.0, location=2.0, scale=1.0), 2.0 - 12.7062, 2.0, 2.0 + 12.7062),
        (dist.HalfNormal(sd=1.0), 0.0313380, 0.674490, 2.241403),
    ],
)
def test_prior_intervals_are_the_known_ones(prior, low, middle, high):
    """Central 95 % intervals from closed forms."""
    assert prior_interval(prior, 0.95) == pytest.approx((low, middle, high), rel=2e-5, abs=1e-9)


def test_every_proper_density_integrates_to_one():
    """The parameters mean what the study file says (rates are not scales)."""
    x = np.linspace(0.0, 60.0, 600_001)
    for prior in (dist.Gamma(shape=2.0, rate=3.0), dist.Exponential(rate=3.0), dist.HalfNormal(sd=3.0),
                  dist.HalfStudentT(df=4.0, scale=1.0), dist.LogNormal(sdlog=0.5)):  # fmt: skip
        assert np.trapezoid(prior_density(prior, x), x) == pytest.approx(1.0, abs=1e-4)


def test_a_row_without_posterior_keeps_its_prior(inv):
    """The prior's interval is shown although there is no posterior."""
    data = priors.priors_data(inv.FILM, [(inv.NO_POSTERIOR, dist.Normal(sd=28.0))], 0.95, "N")
    assert data.rows[0].posterior == Absent("no posterior")
    assert data.rows[0].prior_words == "prior −55 to 55"


def test_the_sweep_has_both_curves_and_all_marks(inv):
    """Both probabilities, the prior sets with a finite width, and the tipping prior."""
    data = sweep.sweep_data(inv.FILM, inv.sweep(inv.FILM), [("weak", 28.0), ("flat", np.inf)], "N")
    assert [curve.dashed for curve in data.curves] == [True, False]
    assert data.curves[0].words == "probability that the effect is above zero"
    assert data.curves[1].words == "probability that it is above 2\u202fN"
    assert all(np.greater(data.curves[0].probabilities, data.curves[1].probabilities))
    assert [(mark.words, mark.width, mark.tipping) for mark in data.marks] == [
        ("weak", 28.0, False),
        ("tips at 1.27", 1.272, True),
    ]
    assert sum(data.curves[0].refitted) == 4


def test_a_question_without_a_size_has_one_curve(inv):
    """No smallest effect that matters, no second curve."""
    data = sweep.sweep_data(inv.DAYS, inv.sweep(inv.DAYS), [], "N per day")
    assert [curve.words for curve in data.curves] == ["probability that the effect is below zero"]
    assert data.level == 0.9


def test_names_of_marks_never_touch():
    """A name stands above every mark whose line would run through it; far marks share a line."""
    assert sweep.lanes([10.0, 50.0], [12.0, 12.0]) == (0, 0)
    assert sweep.lanes([10.0, 15.0, 20.0], [12.0, 12.0, 12.0]) == (2, 1, 0)
    assert sweep.lanes([20.0, 10.0], [12.0, 12.0]) == (0, 1)
    assert sweep.lanes([], []) == ()


def test_residuals_are_compared_with_order_statistics(inv):
    """The middle of 95 is within the known Beta(48, 48) range; the gross residual lies outside its own."""
    data = residuals.residual_data(inv.fit(95), "fitted")
    expected = stats.norm.ppf(stats.beta.ppf([0.025, 0.975], 48, 48))
    assert (data.band_low[47], data.band_high[47]) == pytest.approx(tuple(expected))
    assert data.normal[47] == pytest.approx(0.0, abs=1e-12)
    assert data.ordered[-1] == 4.5 > data.band_high[-1]
    assert data.outside >= 1
    assert residuals.outside_words(data) == f"{data.outside} of 95"
    assert data.residual_words == "studentised residual"


def test_the_running_mean_follows_a_line():
    """On a straight line the mean of each window is the line itself."""
    x = np.arange(100.0)
    at, mean = residuals.running_mean(x, 3.0 - 2.0 * x)
    assert mean == pytest.approx(3.0 - 2.0 * at)
    assert at[0] == pytest.approx(np.mean(x[:20]))


def test_replicated_gaussian_data_look_like_the_observed(inv):
    """Thirty curves around the observed one; each has an area of one."""
    data = predictive.predictive_data(inv.design("gaussian"), inv.draws("gaussian"), 5)
    areas = np.trapezoid(data.replicated, data.grid, axis=1)
    assert data.replicated.shape == (30, 120)
    assert areas == pytest.approx(np.ones(30), abs=0.02)
    centre = np.trapezoid(data.grid * data.replicated.mean(axis=0), data.grid)
    assert centre == pytest.approx(60.0, abs=0.5)
    assert data.axis_label == "firmness, N"


def test_calibration_groups_cover_the_rows_in_order(inv):
    """The groups' observed shares average to the overall share; predictions increase with the groups."""
    design = inv.design("bernoulli", 200)
    data = predictive.predictive_data(design, inv.draws("bernoulli"), 5)
    assert len(data.places) == 10
    assert np.all(np.diff(data.places) > 0.0)
    assert data.observed.mean() == pytest.approx(design.response.values.mean())
    assert np.all((data.low <= data.middle) & (data.middle <= data.high))
    assert np.corrcoef(data.places, data.middle)[0, 1] > 0.98
    assert data.axis_label == "predicted probability of rotted = yes"


def test_counts_add_up_to_the_rows(inv):
    """Every row is in one group of counts, the last group being open."""
    design = inv.design("poisson", 150)
    data = predictive.predictive_data(design, inv.draws("poisson"), 5)
    assert data.observed.sum() == 150
    assert data.observed[0] == np.sum(design.response.values == 0)
    assert data.names[0] == "0"
    assert data.names[-1].endswith("+")
    assert data.middle.sum() == pytest.approx(150, rel=0.1)


def test_large_counts_are_grouped(inv):
    """Counts up to hundreds make at most seventeen groups of equal width."""
    from dataclasses import replace

    design = inv.design("poisson", 150)
    many = replace(design, response=replace(design.response, values=design.response.values * 40.0))
    data = predictive.predictive_data(many, inv.draws("poisson"), 5)
    assert len(data.names) <= 17
    assert "–" in data.names[0]
    assert data.observed.sum() == 150


def test_the_offset_counts(inv):
    """Ten times the exposure gives ten times the count."""
    from dataclasses import replace

    design = inv.design("poisson", 150)
    exposed = replace(
        design,
        offset=np.full(150, np.log(10.0)),
        response=replace(design.response, values=design.response.values * 10.0),
    )
    data = predictive.predictive_data(exposed, inv.draws("poisson"), 5)
    plain = predictive.predictive_data(replace(exposed, offset=None), inv.draws("poisson"), 5)
    assert data.middle[0] < 0.5 * plain.middle[0]


def test_chains_that_agree_stay_within_their_limit(inv):
    """Independent chains stay inside, a shifted chain does not; differences start and end at zero."""
    good = inv.posterior_draws(0.0, 1.0, 4)
    bad = good + np.array([0.0, 0.0, 0.0, 0.5])[:, None]
    agreeing, shifted = ranks.rank_data([("good", good, 4000.0), ("bad", bad, 4000.0)]).panels
    assert np.abs(agreeing.differences).max() < agreeing.limit
    assert np.abs(shifted.differences).max() > shifted.limit
    assert np.argmax(np.abs(shifted.differences).max(axis=1)) == 3
    assert shifted.differences[3].min() < -0.1
    assert agreeing.differences[:, [0, -1]] == pytest.approx(np.zeros((4, 2)))


def test_the_limit_is_kolmogorovs():
    """Two chains of 100: K(0.005) sqrt(1/2) / 10, with K the Kolmogorov quantile 1.7308."""
    draws = np.random.default_rng(1).normal(size=(2, 100))
    limit = ranks.rank_data([("x", draws, 1e9)]).panels[0].limit
    assert limit == pytest.approx(1.7308 * np.sqrt(0.5) / 10.0, rel=1e-3)
