"""How the answer must change when the data are written down differently."""

from __future__ import annotations

import numpy as np
import pandas as pd
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from reanalysis.frequentist.fit import fit_frequentist

FAMILIES = [("gaussian", "identity"), ("bernoulli", "logit"), ("bernoulli", "probit"), ("poisson", "log")]
# The fixture is a pure function, so that using it in many examples is safe.
pure = settings(max_examples=8, suppress_health_check=[HealthCheck.function_scoped_fixture])


def data(family, seed=11):
    """Sixty rows with a numeric and a three-level predictor."""
    rng = np.random.default_rng(seed)
    x = rng.normal(size=60)
    g = np.tile(["a", "b", "c"], 20)
    eta = 0.3 + 0.6 * x - 0.5 * (g == "b")
    outcomes = {
        "gaussian": eta + rng.normal(size=60),
        "bernoulli": np.where(rng.uniform(size=60) < 1 / (1 + np.exp(-eta)), "yes", "no"),
        "poisson": rng.poisson(np.exp(eta)),
    }
    return pd.DataFrame({"y": outcomes[family], "x": x, "g": g})


def fit(design_of, frame, family, link="identity", formula="y ~ x + g", **keys):
    """Fit with the event "yes" where there is one."""
    if family == "bernoulli":
        keys = {"event": "yes", "link": link, **keys}
    return fit_frequentist(design_of(frame, formula, family, **keys), level=0.95, seed=2)


def values(result):
    """Estimates, errors and p of all coefficients."""
    return np.array([(r.estimate, r.se, r.p) for r in result.coefficients])


@pytest.mark.parametrize(("family", "link"), FAMILIES)
@given(order=st.permutations(range(60)))
@pure
def test_order_of_rows_does_not_matter(design_of, family, link, order):
    """Shuffled rows give the same estimates and the same whole-fit measures."""
    frame = data(family)
    plain, shuffled = (fit(design_of, f, family, link) for f in (frame, frame.iloc[list(order)]))
    np.testing.assert_allclose(values(shuffled), values(plain), rtol=1e-8)
    assert shuffled.goodness.deviance == pytest.approx(plain.goodness.deviance, rel=1e-10)
    np.testing.assert_allclose(shuffled.fitted, plain.fitted[list(order)], rtol=1e-8)


@pytest.mark.parametrize(("family", "link"), FAMILIES)
@given(
    factor=st.floats(0.001, 1000.0).flatmap(lambda size: st.sampled_from([size, -size])),
    shift=st.floats(-100.0, 100.0),
)
@pure
def test_other_unit_of_a_predictor(design_of, family, link, factor, shift):
    """A predictor in another unit changes its own coefficient and the intercept, as arithmetic says."""
    frame = data(family)
    plain = fit(design_of, frame, family, link)
    moved = fit(design_of, frame.assign(x=factor * frame["x"] + shift), family, link)
    old, new = plain.coefficient("x"), moved.coefficient("x")
    assert new.estimate * factor == pytest.approx(old.estimate, rel=1e-6)
    assert new.se * abs(factor) == pytest.approx(old.se, rel=1e-6)
    assert new.p == pytest.approx(old.p, rel=1e-5)
    assert moved.coefficient("g[b]").estimate == pytest.approx(plain.coefficient("g[b]").estimate, rel=1e-6)
    intercept = moved.coefficient("Intercept").estimate + shift * new.estimate
    assert intercept == pytest.approx(plain.coefficient("Intercept").estimate, rel=1e-6, abs=1e-6)


@pytest.mark.parametrize(("family", "link"), FAMILIES)
@pytest.mark.parametrize("name", ["mu", "sigma", "log", "c0", "v0", "rows", "if", "a b", "x[1]", "naïve"])
def test_names_of_columns_do_not_matter(design_of, family, link, name):
    """Names that mean something to a library below give the same numbers under that name."""
    frame = data(family)
    plain = fit(design_of, frame, family, link)
    renamed = fit(design_of, frame.rename(columns={"x": name}), family, link, f"y ~ `{name}` + g")
    assert renamed.coefficient(name) is not None
    np.testing.assert_array_equal(values(renamed), values(plain))


@pytest.mark.parametrize(("family", "link"), FAMILIES)
def test_other_reference_level(design_of, family, link):
    """Against another reference, contrasts are differences of the old ones and the fit is the same."""
    frame = data(family)
    plain = fit(design_of, frame, family, link)
    frame["g"] = pd.Categorical(frame["g"], categories=["b", "a", "c"], ordered=True)
    other = fit(design_of, frame, family, link)
    b, c = plain.coefficient("g[b]").estimate, plain.coefficient("g[c]").estimate
    assert other.coefficient("g[a]").estimate == pytest.approx(-b, rel=1e-7)
    assert other.coefficient("g[c]").estimate == pytest.approx(c - b, rel=1e-7)
    assert other.coefficient("g[a]").p == pytest.approx(plain.coefficient("g[b]").p, rel=1e-6)
    assert other.goodness.deviance == pytest.approx(plain.goodness.deviance)


@pytest.mark.parametrize("link", ["logit", "probit"])
def test_other_event(design_of, link):
    """With a symmetric link the other event turns every sign and nothing else."""
    frame = data("bernoulli")
    plain = values(fit(design_of, frame, "bernoulli", link))
    other = values(fit(design_of, frame, "bernoulli", link, event="no"))
    np.testing.assert_allclose(other, plain * [-1, 1, 1], rtol=1e-7)


@pytest.mark.parametrize(("family", "link"), FAMILIES)
def test_dropped_intercept_is_another_model(design_of, family, link):
    """Without an intercept each level has its own, equal to intercept plus contrast."""
    frame = data(family)
    plain = fit(design_of, frame, family, link)
    free = fit(design_of, frame, family, link, "y ~ 0 + g + x")
    start = plain.coefficient("Intercept").estimate
    assert free.coefficient("g[a]").estimate == pytest.approx(start, rel=1e-7)
    expected = start + plain.coefficient("g[b]").estimate
    assert free.coefficient("g[b]").estimate == pytest.approx(expected, rel=1e-7)
    assert free.goodness.deviance == pytest.approx(plain.goodness.deviance)
    dropped = fit(design_of, frame, family, link, "y ~ 0 + x")
    assert dropped.goodness.deviance > plain.goodness.deviance + 0.1


@pytest.mark.parametrize(("family", "link"), FAMILIES)
def test_level_widens_the_interval_alone(design_of, family, link):
    """A higher level keeps estimate and p and widens the interval around the estimate."""
    design = design_of(
        data(family), "y ~ x", family, **({"event": "yes", "link": link} if family == "bernoulli" else {})
    )
    narrow, wide = (fit_frequentist(design, level=level, seed=2).coefficient("x") for level in (0.5, 0.99))
    assert (narrow.estimate, narrow.p) == (wide.estimate, wide.p)
    assert wide.low < narrow.low < narrow.estimate < narrow.high < wide.high
    assert narrow.high - narrow.estimate == pytest.approx(narrow.estimate - narrow.low)


def test_scaled_response_scales_the_gaussian_fit(design_of):
    """In other units of the response all estimates and errors change alike."""
    frame = data("gaussian")
    plain = values(fit(design_of, frame, "gaussian"))
    scaled = values(fit(design_of, frame.assign(y=frame["y"] * -3.0), "gaussian"))
    np.testing.assert_allclose(scaled, plain * [-3, 3, 1], rtol=1e-9)
