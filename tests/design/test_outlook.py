"""What is seen coming."""

from __future__ import annotations

import numpy as np
import pandas as pd
import pytest

from reanalysis.design.outlook import outlook


@pytest.fixture
def frame():
    """Sixty rows, two numbers, a factor, three responses."""
    rng = np.random.default_rng(7)
    table = pd.DataFrame(rng.normal(size=(60, 3)), columns=["y", "x", "z"])
    return table.assign(
        g=list("abc") * 20, event=(rng.uniform(size=60) < 0.5) * 1.0, n=rng.poisson(3.0, size=60)
    )


def by_kind(design):
    """Findings by kind."""
    return {finding.kind: finding for finding in outlook(design)}


def test_nothing_to_report(design_of, frame):
    """A well-behaved design has no findings."""
    assert outlook(design_of(frame, "y ~ x + z + g")) == ()
    assert outlook(design_of(frame, "n ~ x + g", "poisson")) == ()
    assert outlook(design_of(frame, "event ~ x", "bernoulli")) == ()


def test_dependent_columns(design_of, frame):
    """An exact combination is named with its weights and stops the reader."""
    frame["s"] = 2.0 * frame["x"] - frame["z"]
    finding = by_kind(design_of(frame, "y ~ x + z + s + g"))["dependent columns"]
    assert finding.severity == "stop"
    assert finding.where == "x, z, s"
    assert finding.message == "These columns cannot be told apart: s = 2 * x - z."


def test_nested_factors(design_of, frame):
    """A factor that is a coarser version of another is found through the dummies."""
    frame["big"] = np.where(frame["g"] == "c", "yes", "no")
    finding = by_kind(design_of(frame, "y ~ g + big"))["dependent columns"]
    assert "big[yes] = g[c]" in finding.message


def test_empty_combination(design_of, frame):
    """A combination of levels without rows is a warning in those words."""
    frame["h"] = ["u", "v"] * 30
    frame.loc[frame["g"] == "c", "h"] = "u"
    findings = by_kind(design_of(frame, "y ~ g * h"))
    assert set(findings) == {"empty combination"}
    assert findings["empty combination"].where == "g[c]:h[v]"
    assert findings["empty combination"].severity == "warning"
    assert "g[c]:h[v] is 0 in every row" in findings["empty combination"].message


def test_nearly_dependent_columns(design_of, frame):
    """Columns that differ by a billionth are a warning, with the columns that are to blame."""
    frame["near"] = frame["x"] + 1e-9 * frame["y"]
    finding = by_kind(design_of(frame, "y ~ x + z + near"))["nearly dependent columns"]
    assert (finding.severity, finding.where) == ("warning", "x, near")


def test_inflated_variance(design_of, frame):
    """Overlapping predictors are a note, the worst first."""
    frame["near"] = frame["x"] + 0.1 * frame["z"] + 0.2 * frame["y"]
    findings = by_kind(design_of(frame, "event ~ x + z + near", "bernoulli"))
    assert findings["inflated variance"].severity == "note"
    assert set(findings["inflated variance"].where.split(", ")) == {"x", "near"}
    assert "inflated variance" not in by_kind(design_of(frame, "event ~ x + z", "bernoulli"))


def test_large_mean_is_no_overlap(design_of, frame):
    """Numbers far from zero are nearly proportional to the intercept, which is no reason to worry."""
    frame["year"], frame["height"] = 2000.0 + np.arange(60) % 10, 1000.0 + frame["z"]
    assert outlook(design_of(frame, "y ~ year + height")) == ()
    inflated = by_kind(design_of(frame, "y ~ 0 + year + height"))
    assert set(inflated) == {"inflated variance"}


@pytest.mark.parametrize(("event", "end"), [(1.0, "plus"), (0.0, "minus")])
def test_separation(design_of, frame, event, end):
    """A separated column is a warning that says which rows, which way, and what the posterior rests on."""
    frame.loc[frame["g"] == "b", "event"] = event
    finding = by_kind(design_of(frame, "event ~ g + x", "bernoulli"))["separation"]
    assert (finding.where, finding.severity) == ("g[b]", "warning")
    assert f"it runs to {end} infinity" in finding.message
    assert f"all 20 rows with g[b] have event = {event:.0f}" in finding.message
    assert "driven by its prior" in finding.advice


def test_level_seen_once(design_of, frame):
    """A level with one row is a note; with two it is not."""
    frame.loc[0, "g"] = "rare"
    assert by_kind(design_of(frame, "y ~ g"))["level seen once"].message == "Only one row has g = rare."
    frame.loc[1, "g"] = "rare"
    assert outlook(design_of(frame, "y ~ g")) == ()


@pytest.mark.parametrize(("levels", "told"), [(30, False), (31, True)])
def test_many_levels(design_of, levels, told):
    """More than thirty levels are a note."""
    y = np.sin(np.arange(levels * 2.0))
    frame = pd.DataFrame({"y": y, "who": [f"p{i:02}" for i in range(levels)] * 2})
    assert ("many levels" in by_kind(design_of(frame, "y ~ who"))) == told


def test_few_outcomes(design_of, frame):
    """Fewer than ten of the rarer outcome for each column are a note with the numbers."""
    frame["event"] = (np.arange(60) % 7 == 0) * 1.0
    finding = by_kind(design_of(frame, "event ~ x + z", "bernoulli"))["few outcomes"]
    assert finding.message == "There are 9 rows with the rarer outcome for 2 columns, 4.5 for each."
    assert outlook(design_of(frame, "event ~ 1", "bernoulli")) == ()
    frame["n"] = (np.arange(60) % 7 == 0) * 2
    counted = by_kind(design_of(frame, "n ~ x + z", "poisson"))["few outcomes"]
    assert counted.message.startswith("There are 18 events for 2 columns")


def test_most_severe_first(design_of, frame):
    """Findings come with the most severe first."""
    frame["s"] = frame["x"] + frame["z"]
    frame.loc[0, "g"] = "rare"
    frame.loc[frame["g"] == "b", "event"] = 1.0
    severities = [f.severity for f in outlook(design_of(frame, "event ~ g + x + z + s", "bernoulli"))]
    assert severities == sorted(severities, key=["stop", "warning", "note"].index)
    assert set(severities) == {"stop", "warning", "note"}
