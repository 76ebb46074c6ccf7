"""Parquet files."""

from __future__ import annotations

import datetime
import re
from collections.abc import Callable
from dataclasses import replace
from decimal import Decimal
from pathlib import Path

import numpy as np
import pyarrow as pa
import pyarrow.parquet as pq
import pytest

from reanalysis.data.limits import DEFAULT_LIMITS
from reanalysis.data.load import load_dataset
from reanalysis.errors import DataError
from reanalysis.study.spec import Study

StudyOf = Callable[..., Study]
X = frozenset({"x"})


def saved(columns: dict[str, object]) -> Callable[[Path], None]:
    """A writer of a Parquet file with these columns."""
    return lambda path: pq.write_table(pa.table(columns), path)


def refused(study: Study, words: str, columns: frozenset[str] = X) -> None:
    """Loading fails with these words."""
    with pytest.raises(DataError, match=re.escape(words)):
        load_dataset(study, columns=columns)


def test_plain_columns_are_read(study_of: StudyOf) -> None:
    """Numbers of all kinds become floats, everything else factors; nulls and NaN are missing."""
    columns = {
        "i": [1, None, 3],
        "f": [1.5, float("nan"), None],
        "d": [Decimal("1.25"), None, Decimal(2)],
        "s": ["b", None, "a"],
        "c": pa.array(["z", "y", None]).dictionary_encode(),
        "b": [True, False, None],
        "t": pa.array([0, 1, None], pa.timestamp("ns")),
        "day": [datetime.date(2026, 11, 4), None, None],
        "unused": [[1], [2], [3]],
        "a.b": [1.0, 2.0, 3.0],
    }
    used = frozenset(columns) - {"unused"}

    frame = load_dataset(study_of(saved(columns), "d.parquet"), columns=used).frame

    np.testing.assert_array_equal(frame["i"], [1.0, np.nan, 3.0])
    np.testing.assert_array_equal(frame["f"], [1.5, np.nan, np.nan])
    np.testing.assert_array_equal(frame["d"], [1.25, np.nan, 2.0])
    assert frame["s"].cat.codes.tolist() == [1, -1, 0]
    assert list(frame["c"].cat.categories) == ["y", "z"]
    assert frame["c"].cat.codes.tolist() == [1, 0, -1]
    assert list(frame["b"].cat.categories) == ["false", "true"]
    assert frame["t"][0] == "1970-01-01"
    assert frame["day"][0] == "2026-11-04"
    assert frame["a.b"].tolist() == [1.0, 2.0, 3.0]


def test_nested_columns_are_refused_only_when_used(study_of: StudyOf) -> None:
    """A list column is a problem of whoever uses it."""
    study = study_of(saved({"x": [1.0], "l": [[1]], "r": [b"x"]}), "d.parquet")

    assert load_dataset(study, columns=X).frame["x"].tolist() == [1.0]
    with pytest.raises(DataError, match="column l: it holds list") as caught:
        load_dataset(study, columns=frozenset({"l", "r"}))
    assert len(caught.value.problems) == 2


def test_problems_name_the_row(study_of: StudyOf) -> None:
    """Rows count from one."""
    refused(study_of(saved({"x": [1.0, float("inf")]}), "d.parquet"), "d.parquet, row 2, column x: inf")


@pytest.mark.parametrize(
    ("content", "words"),
    [
        (b"x\n1\n", "not a readable Parquet file"),
        (b"PAR1" + b"\0" * 100 + b"PAR1", "not a readable Parquet file"),
        (saved({"x": pa.array([], pa.float64())}), "a header but no data"),
        (saved({"y": [1.0]}), "there is no column `x`"),
        (saved({"x": ["a" * 40_000]}), "a cell has 40,000 characters"),
    ],
)
def test_files_that_cannot_be_read(
    study_of: StudyOf, content: bytes | Callable[[Path], None], words: str
) -> None:
    """Each way of being unusable has its message."""
    refused(study_of(content, "d.parquet"), words)


def test_caps(study_of: StudyOf) -> None:
    """Rows and unpacked bytes are judged before anything is read."""
    study = study_of(saved({"x": np.arange(1000.0)}), "d.parquet")

    assert load_dataset(study, columns=X, limits=replace(DEFAULT_LIMITS, rows=1000)).rows_read == 1000
    with pytest.raises(DataError, match="1,000 rows"):
        load_dataset(study, columns=X, limits=replace(DEFAULT_LIMITS, rows=999))
    with pytest.raises(DataError, match="unpacks to more than 100 bytes"):
        load_dataset(study, columns=X, limits=replace(DEFAULT_LIMITS, unpacked_bytes=100))


def test_a_long_text_in_every_row_costs_no_memory(study_of: StudyOf) -> None:
    """A dictionary of one long text and a million rows is judged by the dictionary."""
    text = pa.DictionaryArray.from_arrays(
        pa.array(np.zeros(500_000, dtype=np.int32)), pa.array(["a" * 100_000])
    )

    refused(study_of(saved({"x": text}), "d.parquet"), "a cell has 100,000 characters")
