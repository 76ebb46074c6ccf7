"""Cells to numbers and factors."""

from __future__ import annotations

import re
from collections.abc import Callable

import numpy as np
import pandas as pd
import pytest
from hypothesis import given
from hypothesis import strategies as st

from reanalysis.data.convert import Rules, convert_column, shortest
from reanalysis.data.dataset import Dataset
from reanalysis.data.load import load_dataset
from reanalysis.data.table import RawTable
from reanalysis.errors import DataError
from reanalysis.study.spec import Study

StudyOf = Callable[..., Study]


def table(cells: list[str | None] | np.ndarray) -> RawTable:
    """A table of one column, `v`, from a text file."""
    return RawTable("d.csv", {"v": cells}, range(2, 2 + len(cells)), "line", ())


def converted(
    cells: list[str | None] | np.ndarray, missing: tuple[str, ...] = ("",), **levels: tuple[str, ...]
) -> tuple[pd.Series, tuple[str, ...]]:
    """Converted column, which has no problems, and its notes."""
    column = convert_column("v", table(cells), Rules(frozenset(missing), levels))
    assert column.problems == ()
    assert column.series is not None
    return column.series, column.notes


def problem(
    cells: list[str | None] | np.ndarray, missing: tuple[str, ...] = ("",), **levels: tuple[str, ...]
) -> str:
    """Text of the only problem of a column."""
    column = convert_column("v", table(cells), Rules(frozenset(missing), levels))
    assert column.series is None
    assert len(column.problems) == 1
    return str(column.problems[0])


def test_numbers_become_floats() -> None:
    """All ways of writing a decimal number are read; blanks around and empty cells are allowed."""
    series, notes = converted(["1", " -2.50 ", "", "+3e2", ".5", "7."])

    assert series.dtype == np.float64
    np.testing.assert_array_equal(series, [1.0, -2.5, np.nan, 300.0, 0.5, 7.0])
    assert notes == ()


def test_text_becomes_a_factor_with_sorted_labels() -> None:
    """The first of the sorted labels is the reference; missing stays missing."""
    series, _ = converted(["film", "none", None, "foam", ""])

    assert list(series.cat.categories) == ["film", "foam", "none"]
    assert series.cat.ordered
    assert series.cat.codes.tolist() == [0, 2, -1, 1, -1]


def test_declared_levels_keep_their_order() -> None:
    """Declared levels come in the declared order, also when no row has one of them."""
    series, notes = converted(["film", "none", "film"], v=("none", "foam", "film"))

    assert list(series.cat.categories) == ["none", "foam", "film"]
    assert series.cat.codes.tolist() == [2, 0, 2]
    assert notes == ('Column v: no row has the declared level "foam".',)


def test_undeclared_labels_are_named_with_counts_and_rows() -> None:
    """Labels that are not declared are an error with how often and where they stand."""
    message = problem(["a", "c", "b", "c", "A"], v=("a", "b"))

    assert '"c" in 2 rows (first in line 3), "A" in 1 row (first in line 6)' in message
    assert 'allowed: "a", "b"' in message


def test_numbers_declared_as_levels_become_a_factor() -> None:
    """A number is matched by its shortest text, whatever the file's way of writing it."""
    assert converted(np.array([2.0, 1.0, np.nan]), v=("1", "2"))[0].cat.codes.tolist() == [1, 0, -1]
    assert converted(["2.0", "1", ""], v=("1", "2"))[0].cat.codes.tolist() == [1, 0, -1]
    assert converted(["0.50", "1.5"], v=("0.5", "1.5"))[0].cat.codes.tolist() == [0, 1]
    assert converted(["007", "010"], v=("007", "010"))[0].cat.codes.tolist() == [0, 1]


@pytest.mark.parametrize(
    ("cells", "example"),
    [
        (["1", "2", "n.a."], '"n.a." (line 4)'),
        (["1,5", "2,5", "3,0"], '"1,5" (line 2), "2,5" (line 3)'),
        (["1,234.5", "2", "x"], '"1,234.5" (line 2), "x" (line 4)'),
        (["1.234.567", "2.345.678"], '"1.234.567" (line 2)'),
        (["12 kg", "13", "14"], '"12 kg" (line 2)'),
        (["1", "x"], '"x" (line 3)'),
        ([f"{i} kg" for i in range(31)], '"0 kg" (line 2)'),
    ],
)
def test_numbers_stored_as_text_are_refused(cells: list[str | None], example: str) -> None:
    """A column most of whose cells are numbers never becomes a factor by itself."""
    message = problem(cells)

    assert "most cells are numbers, but" in message
    assert example in message
    assert "decimal commas, thousands separators, units" in message
    assert 'missing_values = ["", "NA", "-"]' in message


def test_mostly_labels_stay_labels() -> None:
    """Below half numbers, a column is a factor; so are doses and plot numbers."""
    assert list(converted(["1", "x", "y"])[0].cat.categories) == ["1", "x", "y"]
    assert list(converted(["5 mg", "10 mg"])[0].cat.categories) == ["10 mg", "5 mg"]
    assert len(converted([f"{i} mg" for i in range(30)])[0].cat.categories) == 30
    assert len(converted([f"{i}{end}" for i in range(20) for end in "abc"])[0].cat.categories) == 60


def test_missing_values_are_only_the_named_ones() -> None:
    """Nothing is missing unless the study says so; what is read as missing is noted."""
    assert list(converted(["NA", "None", "null"])[0].cat.categories) == ["NA", "None", "null"]

    series, notes = converted(["1", "NA", " NA", "-999.0"], missing=("", "NA", "-999"))
    np.testing.assert_array_equal(series, [1.0, np.nan, np.nan, np.nan])
    assert 'Column v: "NA" read as missing in 1 row.' in notes
    assert 'Column v: "-999.0" read as missing in 1 row.' in notes

    series, notes = converted(np.array([1.0, -999.0, -999.0]), missing=("", "-999"))
    np.testing.assert_array_equal(series, [1.0, np.nan, np.nan])
    assert notes == ('Column v: "-999" read as missing in 2 rows.',)


def test_empty_cells_that_are_not_missing_are_refused() -> None:
    """Where "" is not among the missing values, an empty label is an error."""
    assert "the cell is empty (in 2 rows)" in problem(["a", "", "b", ""], missing=("NA",))


def test_leading_zeros_are_labels() -> None:
    """Whole numbers with leading zeros are codes, not quantities."""
    series, notes = converted(["007", "010", "100"])

    assert list(series.cat.categories) == ["007", "010", "100"]
    assert notes == ("Column v: numbers with leading zeros (007) are kept as labels of a factor.",)
    assert converted(["0", "0.5", "1"])[0].tolist() == [0.0, 0.5, 1.0]


@pytest.mark.parametrize("text", ["inf", "-Infinity", "nan", "NaN", "1e400"])
def test_numbers_that_are_not_finite_are_refused(text: str) -> None:
    """Infinite and overflowing numbers are named with column and row, as written."""
    message = problem(["1", text, "2", text])

    assert f"d.csv, line 3, column v: {text} is not a finite number (in 2 rows)" in message
    assert "line 3, column v: inf" in problem(np.array([1.0, np.inf]))


def test_stand_ins_for_missing_are_noted_not_changed() -> None:
    """A classic sentinel far outside all other values is mentioned, and only then."""
    series, notes = converted(["3", "4", "-99", "5", "-99", "-9", "-9"])
    assert series.tolist() == [3.0, 4.0, -99.0, 5.0, -99.0, -9.0, -9.0]
    assert [note.split(" occurs")[0] for note in notes] == ["Column v: -99", "Column v: -9"]

    assert converted(["-10", "-9", "-9", "3"])[1] == ()
    assert converted(["3", "4", "-99"])[1] == ()
    assert converted(["90", "50", "99", "99"])[1] == ()
    assert converted(["1", "2", "99", "99"])[1][0].startswith("Column v: 99 occurs in 2 rows")
    assert converted(["-500", "99", "99", "500"])[1] == ()


def test_blanks_around_labels_are_removed_and_noted() -> None:
    """A label with a blank at its end is the same level as the one without."""
    series, notes = converted(["film ", "film", "none"])

    assert series.cat.codes.tolist() == [0, 0, 1]
    assert notes == ('Column v: blanks around labels removed in 1 row, such as "film ".',)


def test_many_labels_are_noted() -> None:
    """Dates and other text with more than thirty labels become a factor, with a note."""
    dates: list[str | None] = [f"2026-{month:02}-{day:02}" for month in range(1, 5) for day in range(1, 10)]

    assert converted(dates[:30])[1] == ()
    assert converted(dates)[1] == ("Column v: text with 36 different labels, read as a factor.",)


def test_a_column_of_nothing_is_all_missing() -> None:
    """All cells missing is not this room's problem: rows are judged later."""
    series, _ = converted(["", None])

    assert series.dtype == np.float64
    assert series.isna().all()
    assert converted([None, ""], v=("a", "b"))[0].isna().all()


def test_problems_of_all_columns_come_at_once(study_of: StudyOf) -> None:
    """One error lists every bad column that is used, and none that is not."""
    study = study_of('x,y,z\n1,"2,5",inf\n?,"3,5",1\n2,4,1\n')

    with pytest.raises(DataError, match="column x") as caught:
        load_dataset(study, columns=frozenset({"x", "y"}))
    assert [p.where for p in caught.value.problems] == ["d.csv, column x", "d.csv, column y"]


@given(st.lists(st.floats(allow_nan=False, allow_infinity=False), min_size=1))
def test_numbers_survive_their_shortest_text(values: list[float]) -> None:
    """Reading the shortest text of a number gives the same number."""
    cells: list[str | None] = [shortest(value) for value in values]

    assert converted(cells)[0].tolist() == values


@given(st.lists(st.sampled_from(["a", "b", " b", "c", "", None, "NA", "é"]), min_size=1))
def test_factors_keep_every_label(cells: list[str | None]) -> None:
    """A factor's values are the cells, stripped, in their order, and missing where named."""
    series, _ = converted(cells, missing=("", "NA"))

    expected = [None if cell in (None, "", "NA") else cell.strip() for cell in cells]
    assert [None if pd.isna(value) else value for value in series] == expected


@given(st.lists(st.one_of(st.none(), st.text(max_size=6))))
def test_any_cells_give_a_column_or_a_problem(cells: list[str | None]) -> None:
    """No text makes the conversion fail, and what comes out has the promised type."""
    column = convert_column("v", table(cells), Rules(frozenset({""}), {}))

    assert (column.series is None) == bool(column.problems)
    if column.series is not None:
        assert len(column.series) == len(cells)
        categorical = isinstance(column.series.dtype, pd.CategoricalDtype)
        assert categorical or column.series.dtype == np.float64


def test_shortest_text_of_a_number() -> None:
    """Whole numbers have no point; others as many digits as they need."""
    assert [shortest(v) for v in (1.0, -0.5, 1e20, 0.1)] == ["1", "-0.5", "1e+20", "0.1"]
    assert re.fullmatch(r"[\w.+-]+", shortest(1 / 3))


def test_dataset_counts_its_rows() -> None:
    """The number of rows read is the frame's."""
    assert Dataset(pd.DataFrame({"x": [1.0, 2.0]}), "", 0, ()).rows_read == 2


@given(
    st.lists(
        st.sampled_from(["1", " 2.5", "-3e2 ", "", " ", None, "1e400", "0", "0.5", ".", "1\n2", "007", "x"])
    )
)
def test_the_fast_way_and_the_long_way_agree(cells: list[str | None]) -> None:
    """A numeric stand-in for missing that never occurs forces the long way; nothing else changes."""
    fast = convert_column("v", table(cells), Rules(frozenset({""}), {}))
    long = convert_column("v", table(cells), Rules(frozenset({"", "-12345"}), {}))

    assert fast.notes == long.notes
    assert fast.problems == long.problems
    if fast.series is not None and long.series is not None:
        pd.testing.assert_series_equal(fast.series, long.series)
