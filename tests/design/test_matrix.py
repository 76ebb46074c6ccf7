"""Coding of terms, each against a matrix written out by hand."""

from __future__ import annotations

import numpy as np
import pandas as pd
import pytest

from reanalysis.errors import DesignError

FRAME = pd.DataFrame(
    {
        "y": [1.0, 4, 2, 8, 5, 7, 3, 9],
        "x": [1.0, 2, 3, 4, 5, 6, 7, 8],
        "z": [2.0, 1, 0, 3, 1, 2, 5, 4],
        "g": pd.Categorical(list("baccabbc"), categories=["b", "a", "c"], ordered=True),
        "h": pd.Categorical(list("uvuvvuvu"), categories=["v", "u"], ordered=True),
    }
)
X, Z = FRAME["x"].to_numpy(), FRAME["z"].to_numpy()
ONE = np.ones(8)
G = {level: (FRAME["g"] == level).to_numpy(dtype=float) for level in "bac"}
H = {level: (FRAME["h"] == level).to_numpy(dtype=float) for level in "vu"}

BY_HAND = {
    "y ~ x": {"Intercept": ONE, "x": X},
    "y ~ 0 + x": {"x": X},
    "y ~ g": {"Intercept": ONE, "g[a]": G["a"], "g[c]": G["c"]},
    "y ~ 0 + g": {"g[b]": G["b"], "g[a]": G["a"], "g[c]": G["c"]},
    "y ~ 0 + g + h": {"g[b]": G["b"], "g[a]": G["a"], "g[c]": G["c"], "h[u]": H["u"]},
    "y ~ g * x": {
        "Intercept": ONE, "g[a]": G["a"], "g[c]": G["c"], "x": X, "g[a]:x": G["a"] * X, "g[c]:x": G["c"] * X,
    },
    "y ~ x * g": {
        "Intercept": ONE, "x": X, "g[a]": G["a"], "g[c]": G["c"], "x:g[a]": G["a"] * X, "x:g[c]": G["c"] * X,
    },
    "y ~ g:x": {"Intercept": ONE, "g[b]:x": G["b"] * X, "g[a]:x": G["a"] * X, "g[c]:x": G["c"] * X},
    "y ~ x + z:x": {"Intercept": ONE, "x": X, "z:x": Z * X},
    "y ~ x:z + g:z:x": {
        "Intercept": ONE, "x:z": X * Z, "g[a]:z:x": G["a"] * X * Z, "g[c]:z:x": G["c"] * X * Z,
    },
    "y ~ g * h": {
        "Intercept": ONE, "g[a]": G["a"], "g[c]": G["c"], "h[u]": H["u"],
        "g[a]:h[u]": G["a"] * H["u"], "g[c]:h[u]": G["c"] * H["u"],
    },
    "y ~ 0 + g:h": {f"g[{i}]:h[{j}]": G[i] * H[j] for i in "bac" for j in "vu"},
    "y ~ h / x": {"Intercept": ONE, "h[u]": H["u"], "h[v]:x": H["v"] * X, "h[u]:x": H["u"] * X},
    "y ~ log(x) + sqrt(z) + log1p(z)": {
        "Intercept": ONE, "log(x)": np.log(X), "sqrt(z)": np.sqrt(Z), "log1p(z)": np.log1p(Z),
    },
    "y ~ center(x) + abs(center(z))": {
        "Intercept": ONE, "center(x)": X - 4.5, "abs(center(z))": np.abs(Z - Z.mean()),
    },
    "y ~ scale(x) + exp(z)": {"Intercept": ONE, "scale(x)": (X - 4.5) / np.sqrt(5.25), "exp(z)": np.exp(Z)},
    "y ~ standardise(x):h": {
        "Intercept": ONE,
        "standardise(x):h[v]": (X - 4.5) / np.sqrt(5.25) * H["v"],
        "standardise(x):h[u]": (X - 4.5) / np.sqrt(5.25) * H["u"],
    },
    "y ~ C(z)": {"Intercept": ONE, **{f"C(z)[{int(v)}]": (v == Z).astype(float) for v in (1, 2, 3, 4, 5)}},
    "y ~ C(g)": {"Intercept": ONE, "C(g)[a]": G["a"], "C(g)[c]": G["c"]},
    "y ~ 1": {"Intercept": ONE},
}  # fmt: skip


@pytest.mark.parametrize("formula", BY_HAND)
def test_coding(design_of, formula):
    """Names, order and values of all columns are those written out by hand."""
    design = design_of(FRAME, formula)
    assert [column.name for column in design.columns] == list(BY_HAND[formula])
    np.testing.assert_allclose(design.matrix, np.column_stack(list(BY_HAND[formula].values())), rtol=1e-14)


def test_orthogonal_polynomial(design_of):
    """Columns of poly are orthonormal, orthogonal to the constant, of rising degree, counted from 1."""
    design = design_of(FRAME, "y ~ poly(z, 2)")
    assert [c.name for c in design.columns] == ["Intercept", "poly(z, 2)[1]", "poly(z, 2)[2]"]
    assert {c.term for c in design.columns[1:]} == {"poly(z, 2)"}
    basis = design.matrix[:, 1:]
    np.testing.assert_allclose(basis.T @ basis, np.eye(2), atol=1e-12)
    np.testing.assert_allclose(basis.T @ ONE, 0.0, atol=1e-12)
    slope = basis[:, 0] @ (Z - Z.mean())
    np.testing.assert_allclose(basis[:, 0], (Z - Z.mean()) / slope, atol=1e-12)
    assert slope > 0.0
    curve = np.column_stack([ONE, Z, Z**2])
    fitted, residual, *_ = np.linalg.lstsq(curve, basis[:, 1], rcond=None)
    assert float(residual[0]) < 1e-20
    assert fitted[2] > 0.0


@pytest.mark.parametrize("spelling", ["poly(z,2)", "poly( z , degree = 2 )", "poly(`z`, 2)"])
def test_spelling_does_not_reach_the_names(design_of, spelling):
    """Blanks, keywords and backticks in the formula leave the public names as they are."""
    design = design_of(FRAME, f"y ~ {spelling}")
    assert [c.name for c in design.columns] == ["Intercept", "poly(z, 2)[1]", "poly(z, 2)[2]"]


def test_spline(design_of):
    """A spline of df columns, with the constant, reproduces every cubic; names count from 1."""
    design = design_of(FRAME, "y ~ bs(x, df=4)")
    assert [c.name for c in design.columns[1:]] == [f"bs(x, df=4)[{i}]" for i in (1, 2, 3, 4)]
    residual = np.linalg.lstsq(design.matrix, X**3 - 2 * X, rcond=None)[1]
    assert float(residual[0]) < 1e-16
    linear = design_of(FRAME, "y ~ bs(x, df=2, degree=1)")
    assert linear.columns[2].name == "bs(x, df=2, degree=1)[2]"


def test_interaction_of_a_basis_with_a_factor(design_of):
    """Each column of a basis is multiplied with each level, in the order of the names."""
    design = design_of(FRAME, "y ~ poly(x, 2) + h:poly(x, 2)")
    names = [c.name for c in design.columns]
    assert names[3:] == ["h[u]:poly(x, 2)[1]", "h[u]:poly(x, 2)[2]"]
    np.testing.assert_allclose(design.matrix[:, 3], H["u"] * design.matrix[:, 1])
    np.testing.assert_allclose(design.matrix[:, 4], H["u"] * design.matrix[:, 2])
    assert {c.kind for c in design.columns[1:]} == {"numeric"}


def test_labels_may_hold_any_signs(design_of):
    """Labels with commas, brackets and colons come through in the column names."""
    frame = FRAME.assign(g=["a, b", "x:y", "p[q]", "a, b"] * 2)
    names = [c.name for c in design_of(frame, "y ~ g").columns]
    assert names == ["Intercept", "g[p[q]]", "g[x:y]"]


def test_fractional_levels_keep_their_digits(design_of):
    """Numbers read as labels are whole numbers without a point and others in full."""
    frame = FRAME.assign(dose=[0.5, 1.0, 10.0, 0.5] * 2)
    design = design_of(frame, "y ~ C(dose)")
    assert [c.name for c in design.columns] == ["Intercept", "C(dose)[1]", "C(dose)[10]"]
    assert design.factors[0].levels == ("0.5", "1", "10")
    assert design.factors[0].counts == (4, 2, 2)


@pytest.mark.parametrize(
    ("formula", "words"),
    [
        ("y ~ log(z)", "z lies outside the function's range in 1 rows"),
        ("y ~ sqrt(center(z))", "outside the function's range in 5 rows"),
        ("y ~ log(g)", "g holds labels such as b"),
        ("y ~ poly(z, 6)", "only 6 different values"),
        ("y ~ poly(h, 1)", "h holds labels"),
        ("y ~ scale(k)", "k is 3 in every row used"),
        ("y ~ k", "the value is 3 in every row used"),
        ("y ~ C(k)", "the only level in the rows used is 3"),
        ("y ~ exp(huge)", "too large"),
        ("log(y0) ~ x", "y0 lies outside the function's range in 1 rows"),
    ],
)
def test_functions_out_of_their_range(design_of, formula, words):
    """A function that does not fit its column is refused in words."""
    frame = FRAME.assign(k=3.0, huge=FRAME["x"] * 1000, y0=FRAME["y"] - 1.0)
    with pytest.raises(DesignError, match=words):
        design_of(frame, formula)
