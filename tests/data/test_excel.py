"""Excel workbooks."""

from __future__ import annotations

import datetime
import re
import zipfile
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

import numpy as np
import openpyxl
import pytest

from reanalysis.data.limits import DEFAULT_LIMITS
from reanalysis.data.load import load_dataset
from reanalysis.errors import DataError
from reanalysis.study.spec import Study

StudyOf = Callable[..., Study]
Rows = list[list[object]]
X = frozenset({"x"})


def workbook(**sheets: Rows) -> Callable[[Path], None]:
    """A writer of a workbook with these sheets."""

    def save(path: Path) -> None:
        book = openpyxl.Workbook()
        book.remove(book.worksheets[0])
        for name, rows in sheets.items():
            sheet = book.create_sheet(name)
            for row in rows:
                sheet.append(row)
        book.save(path)

    return save


def refused(study: Study, words: str, columns: frozenset[str] = X) -> None:
    """Loading fails with these words."""
    with pytest.raises(DataError, match=re.escape(words)):
        load_dataset(study, columns=columns)


def test_numbers_and_texts_are_read(study_of: StudyOf) -> None:
    """Numbers become floats, texts factors; empty cells are missing and empty rows no rows."""
    rows: Rows = [[], ["x", " g ", "d", "b"], [1, "u", datetime.date(2026, 11, 4), True], []]
    rows += [[2.5, None, datetime.datetime(2026, 11, 4, 9), False], [None, "t", None, None]]
    columns = frozenset("xgdb")

    frame = load_dataset(study_of(workbook(A=rows), "d.xlsx"), columns=columns).frame

    np.testing.assert_array_equal(frame["x"], [1.0, 2.5, np.nan])
    assert frame["g"].cat.codes.tolist() == [1, -1, 0]
    assert frame["d"].tolist()[:2] == ["2026-11-04", "2026-11-04T09:00:00"]
    assert list(frame["b"].cat.categories) == ["false", "true"]


def test_problems_name_the_row_of_the_sheet(study_of: StudyOf) -> None:
    """Rows count as the sheet numbers them, empty ones included."""
    rows: Rows = [["x"], [1], [], ["n.a."], [3], [4]]

    refused(study_of(workbook(A=rows), "d.xlsx"), '"n.a." (row 4)')


def test_numbers_typed_as_text_are_numbers(study_of: StudyOf) -> None:
    """A column of texts that all are numbers is read as in a text file."""
    rows: Rows = [["x"], ["1.5"], ["2"], [3]]

    assert load_dataset(study_of(workbook(A=rows), "d.xlsx"), columns=X).frame["x"].tolist() == [
        1.5,
        2.0,
        3.0,
    ]


def test_formulas_without_results_are_refused(study_of: StudyOf) -> None:
    """A formula that no program has computed yet is not mistaken for an empty cell."""
    rows: Rows = [["x", "z"], [1, 5], ["=A2+1", 6], [None, "=A2"]]
    study = study_of(workbook(A=rows), "d.xlsx")

    refused(study, "d.xlsx, row 3, column x: the cell holds a formula")
    with pytest.raises(DataError, match="row 4, column z") as caught:
        load_dataset(study, columns=frozenset("xz"))
    assert len(caught.value.problems) == 2


def test_row_numbers_can_lie(study_of: StudyOf) -> None:
    """A sheet with a row number beyond the last possible one is given up early."""

    def save(path: Path) -> None:
        workbook(A=[["x"], [1], [2]])(path)
        with zipfile.ZipFile(path) as archive:
            parts = {name: archive.read(name) for name in archive.namelist()}
        name = "xl/worksheets/sheet1.xml"
        parts[name] = parts[name].replace(b'r="3"', b'r="99999999999"').replace(b"A3", b"A99999999999")
        with zipfile.ZipFile(path, "w") as archive:
            for part, content in parts.items():
                archive.writestr(part, content)

    refused(study_of(save, "d.xlsx"), "row numbers beyond the end of a sheet")


def test_the_sheet_must_be_clear(study_of: StudyOf) -> None:
    """One sheet needs no name; of several the study names one, and it must exist."""
    save = workbook(First=[["x"], [1]], Second=[["x"], [2]])

    refused(study_of(save, "d.xlsx"), '2 sheets\n    allowed: "First", "Second"')
    refused(study_of(save, "d.xlsx", 'sheet = "second"'), 'there is no sheet "second"')
    dataset = load_dataset(study_of(save, "d.xlsx", 'sheet = "Second"'), columns=X)
    assert dataset.frame["x"].tolist() == [2.0]


@pytest.mark.parametrize(
    ("rows", "words"),
    [
        ([], "the sheet is empty"),
        ([["x", "y"]], "a header but no data"),
        ([["x"], [1], [2, 3]], "d.xlsx, row 3: 1 rows have cells to the right"),
        ([["x", "x"], [1, 2]], "`x` is the name of columns 1 and 2"),
        ([["y"], [1]], "there is no column `x`"),
        ([["x"], ["1" * 32_767], [2]], "is not a finite number"),
        ([["x"], [1], [2], ["#DIV/0!"]], '"#DIV/0!" (row 4)'),
    ],
)
def test_sheets_that_are_no_tables(study_of: StudyOf, rows: Rows, words: str) -> None:
    """Each way of not being a table has its message."""
    refused(study_of(workbook(A=rows), "d.xlsx"), words)


def test_caps_on_rows_and_columns(study_of: StudyOf) -> None:
    """A sheet above a cap is refused."""
    study = study_of(workbook(A=[["x", "y"], [1, 2], [3, 4]]), "d.xlsx")

    assert load_dataset(study, columns=X, limits=replace(DEFAULT_LIMITS, rows=2)).rows_read == 2
    with pytest.raises(DataError, match="more than 1 rows"):
        load_dataset(study, columns=X, limits=replace(DEFAULT_LIMITS, rows=1))
    with pytest.raises(DataError, match="2 columns"):
        load_dataset(study, columns=X, limits=replace(DEFAULT_LIMITS, columns=1))
    with pytest.raises(DataError, match="unpacks to more than 1,000 bytes"):
        load_dataset(study, columns=X, limits=replace(DEFAULT_LIMITS, unpacked_bytes=1000))


def bomb(path: Path) -> None:
    """A workbook whose sheet unpacks to 30 MB of zeros."""
    workbook(A=[["x"], [1]])(path)
    with zipfile.ZipFile(path, "a", zipfile.ZIP_DEFLATED) as archive:
        archive.writestr("xl/more.xml", b"0" * 30_000_000)


def lying_bomb(path: Path) -> None:
    """The same, with a directory that declares one byte."""
    bomb(path)
    content = path.read_bytes()
    path.write_bytes(content.replace((30_000_000).to_bytes(4, "little"), (1).to_bytes(4, "little")))


def entities(path: Path) -> None:
    """A workbook that declares XML entities."""
    workbook(A=[["x"], [1]])(path)
    with zipfile.ZipFile(path, "a") as archive:
        archive.writestr("xl/more.xml", '<!DOCTYPE x [<!ENTITY a "aaaa">]><x>&a;</x>')


@pytest.mark.parametrize(
    ("save", "words"),
    [
        (bomb, "unpacks to more than 200 times its size"),
        (lying_bomb, "not a readable .xlsx file"),
        (entities, "it declares XML entities"),
        (b"x,y\n1,2\n", "not a readable .xlsx file"),
        (b"\xd0\xcf\x11\xe0 old", "not a readable .xlsx file"),
    ],
)
def test_hostile_and_broken_workbooks(
    study_of: StudyOf, save: bytes | Callable[[Path], None], words: str
) -> None:
    """Nothing that is not a workbook gets as far as the library that reads workbooks."""
    refused(study_of(save, "d.xlsx"), words)


def test_a_zip_that_is_no_workbook(study_of: StudyOf) -> None:
    """Parts that are missing are reported, not raised."""

    def save(path: Path) -> None:
        with zipfile.ZipFile(path, "w") as archive:
            archive.writestr("a.txt", "x")

    refused(study_of(save, "d.xlsx"), "not a readable .xlsx file")


def test_too_many_parts(study_of: StudyOf) -> None:
    """A workbook of thousands of parts is refused."""

    def save(path: Path) -> None:
        with zipfile.ZipFile(path, "w") as archive:
            for number in range(2001):
                archive.writestr(str(number), "")

    refused(study_of(save, "d.xlsx"), "2,001 parts in the file")
