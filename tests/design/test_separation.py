"""Coefficients without finite estimates, against rules that can be checked by eye."""

from __future__ import annotations

import time

import numpy as np
import pandas as pd
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from reanalysis.design.separation import describe_separation, find_separation

pure = settings(max_examples=40, suppress_health_check=[HealthCheck.function_scoped_fixture])


def lost(design):
    """Columns without finite estimate and where they run, by name."""
    return {design.columns[s.column].name: s.direction for s in find_separation(design).columns}


@given(data=st.lists(st.tuples(st.integers(0, 6), st.booleans()), min_size=6, max_size=25))
@pure
def test_one_predictor(design_of, data):
    """With one predictor: separated when the events' range and the others' do not overlap."""
    x, y = np.array([v for v, _ in data], dtype=float), np.array([b for _, b in data], dtype=float)
    if len(set(x)) < 2 or len(set(y)) < 2:
        return
    design = design_of(pd.DataFrame({"y": y, "x": x}), "y ~ x", "bernoulli")
    upward = x[y == 0].max() <= x[y == 1].min()
    downward = x[y == 1].max() <= x[y == 0].min()
    found = lost(design)
    assert ("x" in found) == (upward or downward)
    if found:
        assert found["x"] == (1 if upward else -1)
        meet = x[y == 0].max() if upward else x[y == 0].min()
        edge = bool(np.any(y[x == meet] == 1))
        assert find_separation(design).complete == (not edge)
        # Where both outcomes meet at x = 0, the rows there still tell the intercept.
        assert ("Intercept" in found) == (not (edge and meet == 0.0))


@given(counts=st.lists(st.tuples(st.integers(0, 3), st.integers(0, 3)), min_size=3, max_size=3))
@pure
def test_one_factor(design_of, counts):
    """With one factor: each level with one outcome only has no estimate, and which way is known."""
    if any(a + b == 0 for a, b in counts) or sum(a for a, _ in counts) in (0, sum(a + b for a, b in counts)):
        return
    rows = [("abc"[i], y) for i, (a, b) in enumerate(counts) for y in [1.0] * a + [0.0] * b]
    frame = pd.DataFrame(rows, columns=["g", "y"])
    frame["g"] = pd.Categorical(frame["g"], categories=list("abc"), ordered=True)
    if len(frame) < 4:
        return
    found = lost(design_of(frame, "y ~ 0 + g", "bernoulli"))
    one_sided = {
        f"g[{level}]": 1 if b == 0 else -1 for level, (a, b) in zip("abc", counts, strict=True) if a * b == 0
    }
    assert found == one_sided


def test_endometrial_pattern(design_of):
    """A 0/1 column whose ones are all events runs to plus infinity and takes nothing with it."""
    rng = np.random.default_rng(1)
    frame = pd.DataFrame({"y": (rng.uniform(size=60) < 0.4) * 1.0, "x": rng.normal(size=60), "d": 0.0})
    frame.loc[:7, ["d", "y"]] = 1.0
    design = design_of(frame, "y ~ d + x", "bernoulli")
    separation = find_separation(design)
    assert lost(design) == {"d": 1}
    np.testing.assert_array_equal(separation.rows, frame["d"] == 1.0)
    assert not separation.complete
    assert describe_separation(design, separation.columns[0]) == "separated: all 8 rows with d = 1 have y = 1"


def test_other_event_turns_the_direction(design_of):
    """Modelling the other outcome sends the estimate the other way."""
    frame = pd.DataFrame({"y": list("nnyyyy"), "g": list("aabbab")})
    frame.loc[0, "y"] = "y"
    directions = [lost(design_of(frame, "y ~ g", "bernoulli", event=event)) for event in ("y", "n")]
    assert directions == [{"g[b]": 1}, {"g[b]": -1}]


def test_combination_of_two_predictors(design_of):
    """Neither x nor z separates alone, but x + z does; w has an estimate only where rows are left."""
    rng = np.random.default_rng(3)
    frame = pd.DataFrame(rng.normal(size=(50, 3)), columns=["x", "z", "w"])
    frame["y"] = (frame["x"] + frame["z"] > 0.0) * 1.0
    design = design_of(frame, "y ~ x + z + w", "bernoulli")
    found = lost(design)
    assert set(found) == {"Intercept", "x", "z", "w"}
    assert (found["x"], found["z"]) == (1, 1)
    assert find_separation(design).complete
    assert describe_separation(design, find_separation(design).columns[1]) == (
        "separated: together with the other columns, x tells y = 1 from y = 0 without overlap"
    )
    assert lost(design_of(frame, "y ~ x + w", "bernoulli")) == {}


def test_separation_survives_awkward_units(design_of):
    """Centring, scale and a large mean of a predictor do not hide separation or make it up."""
    rng = np.random.default_rng(3)
    x = rng.normal(size=40)
    y = (x > 0.2) * 1.0
    mixed = np.where(np.arange(40) % 7 == 0, 1.0 - y, y)
    for size, shift in ((1e-6, 0.0), (1e6, 0.0), (1.0, 2000.0), (1.0, 1e6)):
        frame = pd.DataFrame({"y": y, "m": mixed, "x": size * x + shift})
        assert lost(design_of(frame, "y ~ x", "bernoulli"))["x"] == 1
        assert lost(design_of(frame, "m ~ x", "bernoulli")) == {}


@pytest.mark.parametrize("link", ["logit", "probit", "cloglog"])
def test_link_does_not_matter(design_of, link):
    """Whether an estimate exists does not depend on the link."""
    frame = pd.DataFrame({"y": [0.0, 0, 1, 1, 1, 0], "g": list("aabbab")})
    frame.loc[5, "y"] = 1.0
    assert lost(design_of(frame, "y ~ g", "bernoulli", link=link)) == {"g[b]": 1}


def test_reference_level_with_one_outcome(design_of):
    """When the reference level has one outcome only, the intercept and all contrasts go."""
    frame = pd.DataFrame({"y": [0.0, 0, 0, 1, 0, 1, 0, 1], "g": list("aaabbbcc")})
    design = design_of(frame, "y ~ g", "bernoulli")
    assert lost(design) == {"Intercept": -1, "g[b]": 1, "g[c]": 1}
    first = find_separation(design).columns[0]
    assert describe_separation(design, first) == (
        "separated: all 3 rows at the reference (all other columns 0) have y = 0"
    )


def test_poisson_cell_of_zeros(design_of):
    """In a model of counts, a level that has only zeros runs to minus infinity."""
    frame = pd.DataFrame(
        {"n": [2, 0, 3, 0, 0, 0, 1, 4, 0], "g": list("aaabbbccc"), "x": [1.0, 3, 2, 1, 2, 3, 1, 2, 2]}
    )
    design = design_of(frame, "n ~ g + x", "poisson")
    separation = find_separation(design)
    assert lost(design) == {"g[b]": -1}
    np.testing.assert_array_equal(separation.rows, frame["g"] == "b")
    assert describe_separation(design, separation.columns[0]) == "separated: all 3 rows with g[b] have n = 0"


def test_poisson_number_that_is_zero_wherever_there_are_counts(design_of):
    """A number that differs from 0 only in rows with count 0, on one side of it, is separated."""
    frame = pd.DataFrame({"n": [2, 1, 3, 0, 0, 5], "x": [0.0, 0, 0, 1.5, 4, 0], "z": [1.0, 2, 3, 4, 5, 6]})
    assert lost(design_of(frame, "n ~ x", "poisson")) == {"x": -1}
    frame.loc[3, "x"] = -1.5
    assert lost(design_of(frame, "n ~ x", "poisson")) == {}
    assert lost(design_of(frame, "n ~ z", "poisson")) == {}


def test_poisson_combination(design_of):
    """When x - z is 0 in all rows with counts and of one sign elsewhere, neither coefficient exists."""
    frame = pd.DataFrame({"n": [2, 1, 3, 0, 0, 5], "x": [1.0, 2, 3, 4, 5, 6], "z": [1.0, 2, 3, 2, 4, 6]})
    design = design_of(frame, "n ~ x + z", "poisson")
    assert lost(design) == {"x": -1, "z": 1}
    assert "picks out rows whose count is always 0" in describe_separation(
        design, find_separation(design).columns[0]
    )


def test_zeros_that_separate_nothing(design_of):
    """Many zeros alone are no separation."""
    rng = np.random.default_rng(5)
    frame = pd.DataFrame({"n": rng.poisson(0.3, size=80), "x": rng.normal(size=80), "g": list("abcd") * 20})
    assert lost(design_of(frame, "n ~ x * g", "poisson")) == {}


def test_dependent_columns_are_no_separation(design_of):
    """Columns that cannot be told apart are another matter."""
    rng = np.random.default_rng(5)
    x = rng.normal(size=40)
    frame = pd.DataFrame({"y": (rng.uniform(size=40) < 0.5) * 1.0, "x": x, "z": -2.0 * x})
    assert lost(design_of(frame, "y ~ x + z", "bernoulli")) == {}


def test_gaussian_is_never_separated(design_of):
    """Least squares always has finite estimates."""
    frame = pd.DataFrame({"y": [0.0, 0, 0, 1, 1, 1], "x": [1.0, 2, 3, 4, 5, 6]})
    assert lost(design_of(frame, "y ~ x")) == {}


def test_a_thousand_rows_and_twenty_columns_are_quick(design_of):
    """The check on a usual study takes a small part of a second."""
    rng = np.random.default_rng(6)
    frame = pd.DataFrame(rng.normal(size=(1000, 19)), columns=[f"x{i}" for i in range(19)])
    frame["y"] = (rng.uniform(size=1000) < 1 / (1 + np.exp(-frame["x0"]))) * 1.0
    design = design_of(frame, "y ~ " + " + ".join(f"x{i}" for i in range(19)), "bernoulli")
    times = []
    for _ in range(10):
        start = time.process_time()
        assert find_separation(design).columns == ()
        times.append(time.process_time() - start)
    # About 10 ms. Processor time and the best of ten, because the machine may be busy.
    assert min(times) < 0.1


@pytest.mark.parametrize("rest", [0.0, 1.0])
def test_many_rows_hide_nothing(design_of, rest):
    """Among thousands of overlapping rows, one small level with a single outcome is still found."""
    rng = np.random.default_rng(6)
    x = rng.normal(size=5000)
    frame = pd.DataFrame({"y": (rng.uniform(size=5000) < 1 / (1 + np.exp(-x))) * 1.0, "x": x, "d": 0.0})
    frame.loc[2501:2509, ["d", "y"]] = 1.0  # in the middle, where a sample of rows misses them
    frame.loc[2505, "y"] = rest
    expected = {"d": 1} if rest == 1.0 else {}
    assert lost(design_of(frame, "y ~ x + d", "bernoulli")) == expected
