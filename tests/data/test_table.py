"""What the readers share."""

from __future__ import annotations

import numpy as np

from reanalysis.data.table import RawTable, numbers_or_texts, some


def test_typed_cells_are_numbers_only_when_all_are() -> None:
    """Numbers with gaps are numbers; one text, or true and false, makes all of them texts."""
    np.testing.assert_array_equal(numbers_or_texts([1, None, 2.5], str), [1.0, np.nan, 2.5])
    np.testing.assert_array_equal(numbers_or_texts([10**400, 1], str), [np.inf, 1.0])
    assert numbers_or_texts([1, "a", None], str) == ["1", "a", None]
    assert numbers_or_texts([True, None], str) == ["True", None]


def test_long_lists_are_cut() -> None:
    """At most a dozen names are shown, and how many more there are."""
    assert some(["a", "b"]) == "a, b"
    assert some(map(str, range(12))) == "0, 1, 2, 3, 4, 5, 6, 7, 8, 9, 10, 11"
    assert some(map(str, range(14))).endswith("10, 11 and 2 more")


def test_rows_are_named_by_their_place() -> None:
    """A row is named as its file counts."""
    assert RawTable("f", {}, [2, 5], "line", ()).place(1) == "line 5"
