"""Equations between columns, and lists."""

from __future__ import annotations

import numpy as np
import pandas as pd
import pytest

from reanalysis.design.rank import find_dependencies
from reanalysis.design.words import describe_dependency, listed


@pytest.mark.parametrize(
    ("column", "words"),
    [
        (lambda x, z: x + z, "s = x + z"),
        (lambda x, z: -x + 0.5 * z, "s = -x + 0.5 * z"),
        (lambda x, _: 2.54 * x, "s = 2.54 * x"),
        (lambda x, _: 3.0 - x, "s = 3 * Intercept - x"),
    ],
)
def test_equation(design_of, column, words):
    """A dependency is an equation with signs and weights."""
    x, z = np.random.default_rng(1).normal(size=(2, 20))
    frame = pd.DataFrame({"y": np.arange(20.0), "x": x, "z": z, "s": column(x, z)})
    design = design_of(frame, "y ~ x + z + s")
    (dependency,) = find_dependencies(design.matrix)
    assert describe_dependency(design, dependency) == words


@pytest.mark.parametrize(
    ("names", "words"),
    [
        ((), ""),
        (("a",), "a"),
        (("a", "b"), "a and b"),
        (("a", "b", "c"), "a, b and c"),
        (tuple("abcdefgh"), "a, b, c, d, e, f and 2 more"),
    ],
)
def test_lists(names, words):
    """Names are joined as one would say them, long lists cut."""
    assert listed(names) == words
