"""Units of coefficients."""

from __future__ import annotations

import pandas as pd
import pytest

FRAME = pd.DataFrame(
    {
        "firmness": [1.0, 4, 2, 8, 5, 7, 3, 9],
        "days": [1.0, 2, 3, 4, 5, 6, 7, 8],
        "mass": [2.0, 1, 7, 3, 1, 2, 5, 4],
        "plain": [2.0, 1, 0, 3, 1, 2, 5, 5],
        "liner": list("baccabbc"),
        "event": [0, 1, 1, 0, 1, 0, 0, 1],
    }
)
UNITS = {"firmness": "N", "days": "days", "mass": "kg"}


@pytest.mark.parametrize(
    ("term", "unit"),
    [
        ("days", "N per days"),
        ("plain", "N"),
        ("liner", "N"),
        ("liner:days", "N per days"),
        ("days:mass", "N per (days * kg)"),
        ("days:plain", "N per days"),
        ("log(days)", "N per log(days)"),
        ("center(days)", "N per days"),
        ("scale(days)", "N per sd of days"),
        ("standardise(plain)", "N per sd of plain"),
        ("log(plain2)", "N"),
        ("poly(days, 2)", "N"),
        ("C(days)", "N"),
    ],
)
def test_unit_of_a_gaussian_coefficient(design_of, term, unit):
    """The response's unit, per the units of the numbers that the column is made of."""
    frame = FRAME.assign(plain2=FRAME["plain"] + 1)
    if term == "C(days)":
        frame["days"] = [1.0, 2, 3, 4] * 2
    design = design_of(frame, f"firmness ~ {term}", units=UNITS)
    assert {column.unit for column in design.columns[1:]} == {unit}


def test_nothing_is_made_up_without_a_response_unit(design_of):
    """A response without a unit gives coefficients without one."""
    design = design_of(FRAME, "firmness ~ days", units={"days": "days"})
    assert [column.unit for column in design.columns] == ["", ""]


@pytest.mark.parametrize(
    ("family", "link", "unit"),
    [
        ("bernoulli", "logit", "log-odds"),
        ("bernoulli", "probit", "probit units"),
        ("bernoulli", "cloglog", "log hazard"),
        ("poisson", "log", "log rate"),
    ],
)
def test_other_families_have_words_of_their_own(design_of, family, link, unit):
    """On the scale of the linear predictor the response's own unit plays no part."""
    design = design_of(FRAME, "event ~ liner + days", family, link=link, units={**UNITS, "event": "crates"})
    assert [column.unit for column in design.columns] == [unit, unit, unit, f"{unit} per days"]


def test_transformed_response(design_of):
    """The unit follows the response's transformation."""
    design = design_of(FRAME, "log(firmness) ~ days", units=UNITS)
    assert [column.unit for column in design.columns] == ["log(N)", "log(N) per days"]
