"""Read one sheet of an .xlsx file: values only, never formulas, macros or links."""

from __future__ import annotations

import bisect
import datetime
import warnings
import zipfile
import zlib
from array import array
from collections.abc import Iterator, Sequence
from pathlib import Path
from typing import Any, BinaryIO
from xml.etree.ElementTree import ParseError  # openpyxl raises it; nothing is parsed here

import numpy as np
import openpyxl  # type: ignore[import-untyped]

from reanalysis.data.convert import shortest
from reanalysis.data.guards import TooLargeError, check_zip
from reanalysis.data.table import RawColumn, RawTable, Request, check_header, failure, numbers_or_texts
from reanalysis.errors import DataError, Problem

_MAX_SHEET_ROWS = 1_048_576
_BROKEN = (
    OSError,
    EOFError,
    zipfile.BadZipFile,
    zlib.error,
    ParseError,
    NotImplementedError,
    RuntimeError,
    # What openpyxl raises for parts that are missing or say nonsense.
    KeyError,
    IndexError,
    ValueError,
    TypeError,
    AttributeError,
)


def read_excel(path: Path, request: Request) -> RawTable:
    """Read a sheet whose first row that is not empty holds the column names.

    Parameters
    ----------
    path : Path
    request : Request
        `request.sheet` names the sheet; None when the file has only one.

    Returns
    -------
    RawTable
        `places` are the sheet's row numbers.

    Raises
    ------
    DataError
        For a broken or over-large file, a sheet that is not there, and whatever keeps the sheet
        from being a table.
    """
    try:
        check_zip(path, request.limits)
        # Our own file object, so that it is closed whatever happens in the library.
        with path.open("rb") as stream, warnings.catch_warnings():
            # Styles and extensions that openpyxl does not know hold no data.
            warnings.simplefilter("ignore", UserWarning)
            sheet = _sheet(path.name, stream, request.sheet, data_only=True)
            table = _read_sheet(path.name, sheet, request)
            if any(_has_gaps(column) for column in table.columns.values()):
                _check_formulas(path.name, _sheet(path.name, stream, request.sheet, data_only=False), table)
            return table
    except TooLargeError as error:
        raise failure(
            path.name, str(error), error.allowed, "keep only the rows and columns needed"
        ) from error
    except _BROKEN as error:
        raise failure(
            path.name,
            f"this is not a readable .xlsx file ({type(error).__name__}: {error})",
            "an .xlsx workbook without a password",
            "save it again as .xlsx or as CSV",
        ) from error


def _sheet(file: str, stream: BinaryIO, wanted: str | None, *, data_only: bool) -> Any:
    book = openpyxl.load_workbook(stream, read_only=True, data_only=data_only, keep_links=False)
    names = [sheet.title for sheet in book.worksheets]
    listed = ", ".join(f'"{name}"' for name in names)
    if wanted is None and len(names) != 1:
        raise failure(
            file,
            f"the workbook has {len(names)} sheets",
            listed,
            'name one with the key `sheet` of [data], such as sheet = "Sheet1"',
        )
    if wanted is not None and wanted not in names:
        raise failure(file, f'there is no sheet "{wanted}"', listed, "correct the key `sheet` of [data]")
    return next(sheet for sheet in book.worksheets if wanted in (None, sheet.title))


def _read_sheet(file: str, sheet: Any, request: Request) -> RawTable:
    sheet.reset_dimensions()  # the size that a file declares need not be true
    rows = _rows(sheet)
    first = next(rows, None)
    if first is None:
        raise failure(file, "the sheet is empty", "a header row and data rows", "name another sheet or file")
    header = [_text(value).strip() for value in _trimmed(first[1])]
    notes = check_header(file, header, request)
    wanted = [(i, name) for i, name in enumerate(header) if name in request.columns]
    cells: dict[str, list[object]] = {name: [] for _, name in wanted}
    places = array("q")
    beyond: list[str] = []
    for number, row in rows:
        if len(places) >= request.limits.rows:
            raise TooLargeError(
                f"more than {request.limits.rows:,} rows", f"at most {request.limits.rows:,} rows"
            )
        places.append(number)
        if len(_trimmed(row)) > len(header):
            beyond.append(f"row {number}")
        for position, name in wanted:
            cells[name].append(row[position] if position < len(row) else None)
    _check_rows(file, places, beyond)
    columns = {name: _column(file, name, values, places, request) for name, values in cells.items()}
    return RawTable(file, columns, places, "row", notes)


def _has_gaps(column: RawColumn) -> bool:
    if isinstance(column, np.ndarray):
        return bool(np.isnan(column).any())
    return None in column


def _check_formulas(file: str, sheet: Any, table: RawTable) -> None:
    """Refuse cells whose formula has no saved result: they would pass for empty ones."""
    sheet.reset_dimensions()
    rows = _rows(sheet)
    _, first = next(rows)
    header = [_text(value).strip() for value in first]
    problems = {}
    for number, row in rows:
        for name, value in zip(header, row, strict=False):
            formula = isinstance(value, str) and value.startswith("=")
            if formula and name in table.columns and name not in problems and _is_gap(table, name, number):
                problems[name] = Problem(
                    f"{file}, row {number}, column {name}",
                    "the cell holds a formula whose result is not saved in the file",
                    "values, or formulas with their results",
                    "open the file in a spreadsheet program and save it, or save it as CSV",
                )
    if problems:
        raise DataError(problems.values())


def _is_gap(table: RawTable, name: str, number: int) -> bool:
    place = bisect.bisect_left(table.places, number)
    if place == len(table.places) or table.places[place] != number:
        return True  # a row of nothing but such formulas was no row at all
    value = table.columns[name][place]
    return value is None or (not isinstance(value, str) and bool(np.isnan(value)))


def _rows(sheet: Any) -> Iterator[tuple[int, Sequence[object]]]:
    """Yield the rows that hold anything, with their numbers."""
    for number, row in enumerate(sheet.iter_rows(values_only=True), start=1):
        if number > _MAX_SHEET_ROWS:
            raise TooLargeError("row numbers beyond the end of a sheet", f"at most {_MAX_SHEET_ROWS:,} rows")
        if any(value is not None for value in row):
            yield number, row


def _trimmed(row: Sequence[object]) -> Sequence[object]:
    end = len(row)
    while end and row[end - 1] is None:
        end -= 1
    return row[:end]


def _check_rows(file: str, places: Sequence[int], beyond: Sequence[str]) -> None:
    if beyond:
        raise DataError(
            Problem(
                f"{file}, {beyond[0]}",
                f"{len(beyond):,} rows have cells to the right of the last column name",
                "a name above each column",
                "name the column, or clear these cells",
            )
        )
    if not places:
        raise failure(file, "there is a header but no data", "one row or more", "add the data")


def _column(file: str, name: str, values: list[object], places: Sequence[int], request: Request) -> RawColumn:
    limit = request.limits.cell_chars
    for value, row in zip(values, places, strict=True):
        if isinstance(value, str) and len(value) > limit:
            raise failure(
                f"{file}, row {row}, column {name}",
                f"the cell has {len(value):,} characters",
                f"at most {limit:,}",
                "shorten it",
            )
    return numbers_or_texts(values, _text)


def _text(value: object) -> str:
    match value:
        case None:
            return ""
        case str():
            return value
        case bool():
            return str(value).lower()
        case int() | float():
            return shortest(float(value))
        case datetime.datetime() if value.time() == datetime.time():
            return value.date().isoformat()
        case datetime.date() | datetime.time():
            return value.isoformat()
        case _:
            return str(value)
