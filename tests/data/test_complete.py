"""Rows with missing values."""

from __future__ import annotations

import numpy as np
import pandas as pd
import pytest

from reanalysis.data.complete import complete_cases
from reanalysis.errors import DataError


@pytest.fixture
def frame() -> pd.DataFrame:
    """Four rows, of which the first and the last are complete."""
    labels = pd.Categorical(["c", "b", None, "a"], categories=["c", "b", "a"], ordered=True)
    return pd.DataFrame({"y": [1.0, np.nan, np.nan, 4.0], "g": labels, "x": [1.0, 2.0, 3.0, 4.0]})


def test_incomplete_rows_are_dropped_and_counted(frame: pd.DataFrame) -> None:
    """A row with two missing values counts for both variables."""
    cases = complete_cases(frame, "complete-cases")

    assert cases.frame["y"].tolist() == [1.0, 4.0]
    assert cases.frame.index.tolist() == [0, 3]
    assert cases.rows_read == 4
    assert cases.dropped_by == (("y", 2), ("g", 1))


def test_unused_levels_go_and_the_order_stays(frame: pd.DataFrame) -> None:
    """A level that lost all its rows is gone; the others keep their declared order."""
    factor = complete_cases(frame, "complete-cases").frame["g"]

    assert list(factor.cat.categories) == ["c", "a"]
    assert factor.cat.ordered
    assert factor.tolist() == ["c", "a"]


def test_complete_data_pass_either_way(frame: pd.DataFrame) -> None:
    """Without missing values nothing is dropped, and refusing has nothing to refuse."""
    full = frame.iloc[[0, 3]]

    for policy in ("complete-cases", "refuse"):
        cases = complete_cases(full, policy)
        assert len(cases.frame) == cases.rows_read == 2
        assert cases.dropped_by == ()


def test_refusing_lists_the_counts(frame: pd.DataFrame) -> None:
    """With missing = "refuse" every variable with missing values is named."""
    with pytest.raises(DataError, match="2 of 4 rows") as caught:
        complete_cases(frame, "refuse")
    assert "y in 2, g in 1" in str(caught.value)


def test_no_complete_row_is_an_error(frame: pd.DataFrame) -> None:
    """When every row misses something, the counts say where."""
    with pytest.raises(DataError, match="none of the 4 rows is complete; missing: z in 4"):
        complete_cases(frame[["x"]].assign(z=np.nan), "complete-cases")
    with pytest.raises(DataError, match="no rows at all"):
        complete_cases(frame.iloc[:0], "complete-cases")
