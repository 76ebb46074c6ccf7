"""Responses of each family."""

from __future__ import annotations

import numpy as np
import pandas as pd
import pytest

from reanalysis.errors import DesignError

FRAME = pd.DataFrame(
    {
        "x": [1.0, 2, 3, 4, 5, 6],
        "rotted": ["yes", "no", "no", "yes", "no", "no"],
        "three": ["a", "b", "c", "a", "b", "c"],
        "same": ["a"] * 6,
        "zero_one": [0, 1, 1, 0, 0, 1],
        "count": [0, 2, 1, 4, 0, 3],
        "half": [0.5, 2, 1, 4, 0, 3],
        "minus": [-1, 2, 1, 4, 0, 3],
        "four": [4.0] * 6,
    }
)


def test_event_is_coded_one(design_of):
    """The event is 1 and the other label 0, whichever comes first in the alphabet."""
    yes = design_of(FRAME, "rotted ~ x", "bernoulli", event="yes").response
    assert (yes.event, yes.other) == ("yes", "no")
    np.testing.assert_array_equal(yes.values, [1, 0, 0, 1, 0, 0])
    no = design_of(FRAME, "rotted ~ x", "bernoulli", event="no").response
    assert (no.event, no.other) == ("no", "yes")
    np.testing.assert_array_equal(no.values, [0, 1, 1, 0, 1, 1])


def test_zeros_and_ones_need_no_event(design_of):
    """For 0 and 1 the event is 1 unless the study says otherwise."""
    plain = design_of(FRAME, "zero_one ~ x", "bernoulli").response
    assert (plain.event, plain.other) == ("1", "0")
    np.testing.assert_array_equal(plain.values, FRAME["zero_one"])
    turned = design_of(FRAME, "zero_one ~ x", "bernoulli", event="0").response
    assert (turned.event, turned.other) == ("0", "1")
    np.testing.assert_array_equal(turned.values, 1 - FRAME["zero_one"])


def test_unused_third_level_does_not_count(design_of):
    """A declared label without rows leaves two outcomes."""
    frame = FRAME.assign(
        rotted=pd.Categorical(FRAME["rotted"], categories=["no", "partly", "yes"], ordered=True)
    )
    response = design_of(frame, "rotted ~ x", "bernoulli", event="yes").response
    assert (response.event, response.other) == ("yes", "no")
    assert np.sum(response.values) == 2.0


def test_transformed_response(design_of):
    """A gaussian response may be a function of its column; name and unit say so."""
    response = design_of(FRAME.assign(m=FRAME["x"] * 2), "log(m) ~ x", units={"m": "kg"}).response
    assert (response.name, response.unit, response.event) == ("log(m)", "log(kg)", None)
    np.testing.assert_allclose(response.values, np.log(2 * FRAME["x"]))


@pytest.mark.parametrize(
    ("name", "family", "keys", "words"),
    [
        ("rotted", "bernoulli", {}, "rotted is no or yes"),
        ("rotted", "bernoulli", {"event": "Yes"}, "the event Yes does not occur; rotted is no or yes"),
        ("zero_one", "bernoulli", {"event": "yes"}, "the event yes does not occur; zero_one is 0 or 1"),
        ("three", "bernoulli", {"event": "a"}, "3 different values: a, b, c"),
        ("same", "bernoulli", {"event": "a"}, "the outcome is a in every row used"),
        ("half", "bernoulli", {}, "6 different values: 0, 0.5, 1, 2, 3, 4"),
        ("log(zero_one)", "bernoulli", {}, "a function of a two-outcome response"),
        ("rotted", "gaussian", {}, "rotted holds labels such as yes"),
        ("four", "gaussian", {}, "the outcome is 4 in every row used"),
        ("rotted", "poisson", {}, "numbers, with the family poisson"),
        ("half", "poisson", {}, "1 rows hold no count, such as 0.5"),
        ("minus", "poisson", {}, "1 rows hold no count, such as -1"),
        ("four", "poisson", {}, "the outcome is 4 in every row used"),
        ("log1p(count)", "poisson", {}, "hold no count"),
    ],
)
def test_response_outside_its_family(design_of, name, family, keys, words):
    """A response that its family cannot have is refused with what was found."""
    with pytest.raises(DesignError, match=words):
        design_of(FRAME, f"{name} ~ x", family, **keys)


def test_missing_event_is_offered_ready_to_paste(design_of):
    """The advice holds the line that the study file needs."""
    with pytest.raises(DesignError, match='add event = "yes" to model the probability that rotted is yes'):
        design_of(FRAME, "rotted ~ x", "bernoulli")
