"""Designs as a whole: what goes in, what is counted, and what is refused."""

from __future__ import annotations

import subprocess
import sys

import numpy as np
import pandas as pd
import pytest

from reanalysis.errors import DataError, DesignError

UNITS = {"firmness": "N", "days": "days", "mass": "kg"}


@pytest.fixture
def apples():
    """Twelve crates of apples."""
    return pd.DataFrame(
        {
            "firmness": [60.0, 58, 61, 55, 57, 63, 59, 62, 54, 56, 60, 58],
            "days": [0.0, 3, 1, 9, 7, 2, 5, 0, 8, 6, 4, 3],
            "liner": pd.Categorical(
                ["none", "film", "foam"] * 4, categories=["none", "film", "foam", "other"], ordered=True
            ),
            "rotted": ["no", "yes", "no", "yes"] * 3,
            "spots": [0, 3, 1, 4, 2, 2, 1, 0, 5, 2, 1, 3],
            "mass": [10.0, 12, 11, 9, 10, 13, 12, 11, 10, 9, 12, 10],
        }
    )


def problems_of(call):
    """Return the problems of a DesignError as text by their place."""
    with pytest.raises(DesignError, match=":") as caught:
        call()
    return {problem.where: str(problem) for problem in caught.value.problems}


def test_columns_of_a_plain_model(design_of, apples):
    """Names, terms, internal names, kinds, means and sds of a factor and a number."""
    design = design_of(apples, "firmness ~ liner + days", units=UNITS)
    assert [c.name for c in design.columns] == ["Intercept", "liner[film]", "liner[foam]", "days"]
    assert [c.internal for c in design.columns] == ["c0", "c1", "c2", "c3"]
    assert [c.term for c in design.columns] == ["Intercept", "liner", "liner", "days"]
    assert [c.kind for c in design.columns] == ["intercept", "categorical", "categorical", "numeric"]
    assert [c.unit for c in design.columns] == ["N", "N", "N", "N per days"]
    days = apples["days"].to_numpy()
    assert (design.columns[3].mean, design.columns[3].sd) == pytest.approx((days.mean(), days.std(ddof=0)))
    assert (design.columns[0].mean, design.columns[0].sd) == (1.0, 0.0)
    assert design.columns[1].mean == pytest.approx(1 / 3)
    np.testing.assert_array_equal(design.matrix[:, 3], days)
    np.testing.assert_array_equal(design.response.values, apples["firmness"])


def test_declared_order_gives_the_reference(design_of, apples):
    """The first declared level is the reference; a level without rows is no level of the model."""
    design = design_of(apples, "firmness ~ liner")
    (factor,) = design.factors
    assert (factor.name, factor.reference) == ("liner", "none")
    assert (factor.levels, factor.counts) == (("none", "film", "foam"), (4, 4, 4))
    np.testing.assert_array_equal(design.matrix[:3], [[1, 0, 0], [1, 1, 0], [1, 0, 1]])


def test_rows_are_counted(design_of, apples):
    """Only rows that lack a variable of the model are dropped, and each such variable is counted."""
    apples.loc[[0, 5], "days"] = np.nan
    apples.loc[[5, 7], "liner"] = np.nan
    apples.loc[3, "mass"] = np.nan
    design = design_of(apples, "firmness ~ liner + days")
    assert (design.rows.read, design.rows.used, design.rows.dropped) == (12, 9, 3)
    assert dict(design.rows.dropped_by) == {"days": 2, "liner": 2}
    np.testing.assert_array_equal(design.response.values, apples["firmness"].drop([0, 5, 7]))
    assert design.factors[0].counts == (3, 3, 3)


def test_missing_values_are_refused_when_the_study_says_so(design_of, apples):
    """With missing = refuse an incomplete row is an error that names the variable."""
    apples.loc[0, "days"] = np.nan
    with pytest.raises(DataError, match="days in 1"):
        design_of(apples, "firmness ~ days", missing="refuse")


def test_exposure_becomes_an_offset(design_of, apples):
    """The offset is the natural logarithm of the exposure, and the response stays a count."""
    design = design_of(apples, "spots ~ days", "poisson", exposure="mass", units=UNITS)
    np.testing.assert_allclose(design.offset, np.log(apples["mass"]))
    assert design.exposure == "mass"
    assert [c.unit for c in design.columns] == ["log rate", "log rate per days"]
    assert design_of(apples, "spots ~ days", "poisson").offset is None


def test_missing_exposure_drops_the_row(design_of, apples):
    """An empty exposure counts as a missing value of the model."""
    apples.loc[2, "mass"] = np.nan
    design = design_of(apples, "spots ~ days", "poisson", exposure="mass")
    assert design.rows.dropped_by == (("mass", 1),)
    assert len(design.offset) == 11


def test_family_with_its_link(design_of, apples):
    """The design carries the family with the link that the study names, or the default one."""
    assert design_of(apples, "rotted ~ days", "bernoulli", event="yes").family.link == "logit"
    probit = design_of(apples, "rotted ~ days", "bernoulli", event="yes", link="probit")
    assert probit.family.statsmodels_link == "Probit"


def test_intercept_alone(design_of, apples):
    """A model with nothing but an intercept is a model."""
    design = design_of(apples, "firmness ~ 1")
    assert design.matrix.shape == (12, 1)
    assert design.has_intercept
    assert design.factors == ()


def test_all_problems_are_told_at_once(design_of, apples):
    """A missing column, an infinite value, a constant and a bad response come in one error."""
    apples = apples.assign(one=1.0, big=[np.inf, *range(11)])
    found = problems_of(lambda: design_of(apples, "spots ~ dais + big + one + liner", "bernoulli"))
    assert set(found) == {"column dais", "column big", "one", "response spots"}
    assert "allowed: days" in found["column dais"]
    assert "1 infinite values" in found["column big"]
    assert "the value is 1 in every row used" in found["one"]
    assert "6 different values: 0, 1, 2, 3, 4, 5" in found["response spots"]


def test_no_column_at_all(design_of, apples):
    """When no column of the model exists, each is named."""
    found = problems_of(lambda: design_of(apples, "a ~ b"))
    assert set(found) == {"column a", "column b"}


def test_level_lost_with_incomplete_rows(design_of, apples):
    """A factor left with one level after incomplete rows are gone is refused in the reader's words."""
    apples.loc[apples["liner"] != "film", "days"] = np.nan
    found = problems_of(lambda: design_of(apples, "firmness ~ liner + days"))
    assert "the only level in the rows used is film" in found["liner"]


def test_too_few_rows(design_of, apples):
    """As many columns as rows leave nothing to estimate an error from."""
    found = problems_of(lambda: design_of(apples[:3], "firmness ~ days + mass"))
    assert "at least 4 rows for 3 columns" in found["model.formula"]
    assert design_of(apples[:4], "firmness ~ days + mass").matrix.shape == (4, 3)


def test_one_row(design_of, apples):
    """A single row is refused, whatever the model."""
    found = problems_of(lambda: design_of(apples[:1], "firmness ~ liner + days"))
    assert "complete rows: 1" in found["model.formula"]


def test_more_levels_than_rows_allow(design_of):
    """A factor with a level for each row is refused before its matrix is built."""
    frame = pd.DataFrame({"y": np.arange(500.0), "who": [f"p{i}" for i in range(500)]})
    found = problems_of(lambda: design_of(frame, "y ~ who"))
    assert "the model has 500 columns or more; complete rows: 500" in found["model.formula"]


@pytest.mark.parametrize(
    ("family", "exposure", "words"),
    [
        ("poisson", "spots", "spots is also the response"),
        ("poisson", "days", "2 rows are not above 0, such as 0"),
        ("poisson", "liner", "labels such as none"),
        ("gaussian", "mass", "an exposure with the family gaussian"),
    ],
)
def test_exposure_that_is_none(design_of, apples, family, exposure, words):
    """An exposure must be a column of positive numbers, not the response, in a model of counts."""
    found = problems_of(lambda: design_of(apples, "spots ~ mass", family, exposure=exposure))
    assert any(words in text for text in found.values())


def test_column_called_intercept(design_of, apples):
    """A predictor called Intercept would share its name with the constant, and is refused."""
    found = problems_of(
        lambda: design_of(apples.rename(columns={"days": "Intercept"}), "firmness ~ Intercept")
    )
    assert "2 columns of the model would have this name" in found["column Intercept of the model"]


def test_column_called_intercept_without_constant(design_of, apples):
    """Without a constant such a column is a predictor like any other."""
    design = design_of(apples.rename(columns={"days": "Intercept"}), "firmness ~ 0 + Intercept")
    assert not design.has_intercept
    np.testing.assert_array_equal(design.matrix[:, 0], apples["days"])


def test_combination_without_rows_is_left_to_the_outlook(design_of, apples):
    """A combination of levels without rows gives a column of zeros, not an error."""
    apples["store"] = ["A", "B"] * 6
    apples.loc[apples["liner"] == "foam", "store"] = "A"
    design = design_of(apples, "firmness ~ liner * store")
    assert design.columns[5].name == "liner[foam]:store[B]"
    assert np.all(design.matrix[:, 5] == 0.0)


def test_product_too_large(design_of, apples):
    """An interaction whose products overflow is refused with its name."""
    apples = apples.assign(u=np.linspace(1, 2, 12) * 1e60, w=np.linspace(2, 1, 12) * 1e60)
    found = problems_of(lambda: design_of(apples, "firmness ~ u:w"))
    assert "too large" in found["column u:w of the model"]


def test_design_needs_no_statsmodels():
    """Building and examining a design does not import statsmodels."""
    rooms = "reanalysis.design.build, reanalysis.design.outlook"
    code = f"import sys, {rooms}; sys.exit('statsmodels' in sys.modules)"
    assert subprocess.run([sys.executable, "-c", code], check=False).returncode == 0  # noqa: S603


@pytest.mark.parametrize("factor, words", [(1e300, "12 numbers beyond 1e+100"), (1e-300, "less than 1e-100")])
def test_numbers_that_cannot_be_squared_are_refused(design_of, factor, words):
    """A column whose squares would overflow or vanish is named, with what to do."""
    frame = pd.DataFrame({"y": np.arange(1.0, 13.0) * factor, "x": np.arange(12.0)})

    found = problems_of(lambda: design_of(frame, "y ~ x"))

    assert words in found["column y"]
    assert "another unit" in found["column y"]
