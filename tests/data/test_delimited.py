"""Comma- and tab-separated files, and every way in which they can be broken."""

from __future__ import annotations

import gzip
import re
from collections.abc import Callable
from dataclasses import replace

import pytest

from reanalysis.data.limits import DEFAULT_LIMITS
from reanalysis.data.load import load_dataset
from reanalysis.errors import DataError
from reanalysis.study.spec import Study

StudyOf = Callable[..., Study]
X = frozenset({"x"})


def refused(study: Study, words: str, columns: frozenset[str] = X) -> str:
    """Text of the error, which holds these words."""
    with pytest.raises(DataError, match=re.escape(words)) as caught:
        load_dataset(study, columns=columns)
    return str(caught.value)


def test_plain_gzipped_and_tab_separated_files_agree(study_of: StudyOf) -> None:
    """The three kinds of text file give the same columns; rows and cells keep their order."""
    text = "x,g,unused\n3,b,?\n1.5,a,?\n-2e1,b,?\n"
    plain = load_dataset(study_of(text), columns=frozenset({"x", "g"}))
    packed = load_dataset(study_of(gzip.compress(text.encode()), "d.csv.gz"), columns=frozenset({"x", "g"}))
    tabs = load_dataset(study_of(text.replace(",", "\t"), "d.tsv"), columns=frozenset({"x", "g"}))

    for dataset in (plain, packed, tabs):
        assert list(dataset.frame.columns) == ["x", "g"]
        assert dataset.frame["x"].tolist() == [3.0, 1.5, -20.0]
        assert dataset.frame["g"].tolist() == ["b", "a", "b"]
        assert list(dataset.frame["g"].cat.categories) == ["a", "b"]
        assert dataset.frame["g"].cat.ordered
        assert dataset.notes == ("Columns that the model does not use, not read: unused.",)
    assert plain.size == len(text)
    assert plain.rows_read == 3


def test_quoted_cells_hold_commas_quotes_and_line_ends(study_of: StudyOf) -> None:
    """Quoting follows the usual rules, and rows after a long cell keep their line numbers."""
    text = 'g,x\n"a, ""b""\nc",1\nd,inf\n'

    assert "d.csv, line 4, column x" in refused(study_of(text), "inf is not a finite number")
    dataset = load_dataset(study_of(text), columns=frozenset({"g"}))
    assert dataset.frame["g"].tolist() == ['a, "b"\nc', "d"]


def test_one_row_loads(study_of: StudyOf) -> None:
    """Whether one row is enough is not for the reader to say."""
    assert load_dataset(study_of("x\n1\n"), columns=X).frame["x"].tolist() == [1.0]


@pytest.mark.parametrize(
    ("content", "words"),
    [
        ("", "the file is empty"),
        ("\n\n", "the file is empty"),
        ("x,y\n", "a header but no data"),
        ("x,y\n\n\n", "a header but no data"),
        ("x,y\n1,2\n3\n4,5,6\n", "2 rows do not have the header's 2 cells: line 3 has 1; line 4 has 3"),
        ("x,y,x\n1,2,3\n", "`x` is the name of columns 1 and 3"),
        ("x,y\n1,2\n3,\0\n", "d.csv, line 3: the line holds a NUL character"),
        ('x,y\n1,2\n"3,4\n5,6\n', "d.csv, line 3: a quotation mark is opened"),
        ('x,y\n1,2\n"3,4\n' + "5,6\n" * 50_000, "d.csv, line 3: a cell is too long"),
        ('x,y\n"1"2,3\n', "text after a closing quotation mark"),
        ("x;y\n1,5;2\n", "separated by semicolons"),
        ("x\ty\n1\t2\n", "separated by tabs"),
        (b"x\n1\n\xe9\n", "d.csv, line 3: the text is not utf-8"),
        ("x\nä\n".encode("utf-16"), 'set encoding = "utf-16"'),
        (gzip.compress(b"x\n1\n"), "this is a gzip file"),
        (b"PK\x03\x04", "this is a zip or Excel file"),
        ("x\n" + "1" * 10_000_000, "d.csv, line 2: the line has more than 1,000,000 characters"),
        ("x\n" + "1" * 40_000, "d.csv, line 2, column 1: the cell has 40,000 characters"),
        ('x\n"' + "1\n" * 5_000_000 + '"', "d.csv, line 2: a cell is too long"),
    ],
)
def test_broken_files_say_what_is_wrong_and_where(
    study_of: StudyOf, content: str | bytes, words: str
) -> None:
    """Each way of being broken has its message, with the line."""
    refused(study_of(content), words)


def test_missing_columns_are_all_named_with_close_matches(study_of: StudyOf) -> None:
    """Columns of the formula and of `levels` and `units` must exist; all are reported at once."""
    extra = 'levels = { linr = ["a", "b"] }\nunits = { dys = "d" }'
    study = study_of("Firmness,liner,days\n1,a,2\n", extra=extra)

    message = refused(study, "there is no column `firmness`", frozenset({"firmness", "liner"}))

    assert "did you mean `Firmness`?" in message
    assert "there is no column `linr`" in message
    assert "did you mean `days`?" in message
    assert "allowed: Firmness, liner, days" in message


def test_harmless_header_faults_are_notes(study_of: StudyOf) -> None:
    """A nameless row-number column or a repeated name matters only where it is used."""
    dataset = load_dataset(study_of(",x,z,z\n1,2,3,4\n"), columns=X)

    assert dataset.frame["x"].tolist() == [2.0]
    assert "Columns without a name, not read: no. 1." in dataset.notes
    assert "Names that several columns share, not read: z." in dataset.notes


def test_encodings_are_read_as_declared(study_of: StudyOf) -> None:
    """Latin-1, UTF-16 and UTF-8 with a mark are read when the study says so; nothing is guessed."""
    text = "größe,x\nä,1\nö,2\n"
    columns = frozenset({"größe", "x"})
    for encoding in ("latin-1", "utf-16", "utf-8-sig"):
        declared = "utf-8" if encoding == "utf-8-sig" else encoding
        study = study_of(text.encode(encoding), extra=f'encoding = "{declared}"')
        assert load_dataset(study, columns=columns).frame["größe"].tolist() == ["ä", "ö"]

    refused(study_of(text.encode("latin-1")), "not utf-8", columns)
    refused(study_of(text.encode(), extra='encoding = "ascii"'), "the text is not ascii", columns)
    refused(study_of(text.encode(), extra='encoding = "utf-16"'), "the text is not utf-16", columns)


def test_empty_lines_are_skipped_and_counted(study_of: StudyOf) -> None:
    """Lines with nothing on them are no rows; those between data are mentioned."""
    dataset = load_dataset(study_of("x,y\n1,2\n\n3,4\n\n\n"), columns=X)

    assert dataset.frame["x"].tolist() == [1.0, 3.0]
    assert "Empty lines, skipped: 1." in dataset.notes


def test_a_gzip_bomb_is_stopped(study_of: StudyOf) -> None:
    """A small file that unpacks without end is given up, by ratio and by size."""
    study = study_of(gzip.compress(b"x,y\n" + (b"1," + b"0" * 1000 + b"\n") * 30_000), "d.csv.gz")
    assert study.data_path.stat().st_size < 100_000

    refused(study, "unpacks to more than 200 times its size")
    with pytest.raises(DataError, match="unpacks to more than 1,000,000 bytes"):
        load_dataset(study, columns=X, limits=replace(DEFAULT_LIMITS, unpacked_bytes=1_000_000))


def test_broken_gzip_files_are_reported(study_of: StudyOf) -> None:
    """A file that is not gzip, or is cut off, or is damaged cannot be read."""
    packed = gzip.compress(bytes(f"x\n{list(range(2000))}".encode()))

    refused(study_of(b"x\n1\n", "d.csv.gz"), "the file cannot be read (Not a gzipped file")
    refused(study_of(packed[:-20], "d.csv.gz"), "the file cannot be read")
    refused(study_of(packed[:100] + b"\0" * 50 + packed[150:], "d.csv.gz"), "the file cannot be read")


def test_caps_on_rows_columns_and_bytes(study_of: StudyOf) -> None:
    """A file at the cap is read, one above is refused."""
    study = study_of("x,y\n1,2\n3,4\n")

    assert load_dataset(study, columns=X, limits=replace(DEFAULT_LIMITS, rows=2, columns=2)).rows_read == 2
    with pytest.raises(DataError, match="more than 1 rows"):
        load_dataset(study, columns=X, limits=replace(DEFAULT_LIMITS, rows=1))
    with pytest.raises(DataError, match="2 columns"):
        load_dataset(study, columns=X, limits=replace(DEFAULT_LIMITS, columns=1))
    with pytest.raises(DataError, match="the file has 12 bytes"):
        load_dataset(study, columns=X, limits=replace(DEFAULT_LIMITS, file_bytes=11))
