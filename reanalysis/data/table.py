"""What every reader gives: the header, and the cells of the columns asked for."""

from __future__ import annotations

import difflib
from collections import Counter
from collections.abc import Callable, Iterable, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from reanalysis.data.limits import Limits
from reanalysis.errors import DataError, Problem

Cell = str | None
RawColumn = Sequence[Cell] | NDArray[np.float64]
"""Texts (None: an empty cell), or numbers (NaN: an empty cell)."""

_NAMED = 12


@dataclass(frozen=True, slots=True)
class Request:
    """What a reader is asked for.

    Attributes
    ----------
    columns : frozenset of str
        Columns that the model uses; only these are read.
    declared : frozenset of str
        Columns that the study's `levels` and `units` name; they must exist.
    encoding : str
        Of text files.
    sheet : str or None
        Of Excel files.
    limits : Limits
    """

    columns: frozenset[str]
    declared: frozenset[str]
    encoding: str
    sheet: str | None
    limits: Limits


@dataclass(frozen=True, slots=True)
class RawTable:
    """Cells as they stand in the file.

    Attributes
    ----------
    file : str
        Name of the file, for messages.
    columns : mapping of str to RawColumn, each of length n
        The columns asked for, in the file's order.
    places : sequence of int, length n
        Where each row stands: line of a text file, row of a sheet, number of a record.
    place_word : str
        ``line`` or ``row``.
    notes : tuple of str
    """

    file: str
    columns: Mapping[str, RawColumn]
    places: Sequence[int]
    place_word: str
    notes: tuple[str, ...]

    def place(self, row: int) -> str:
        """Name the place of a row in the file: ``line 14``."""
        return f"{self.place_word} {self.places[row]}"


def numbers_or_texts(values: Sequence[object], text: Callable[[object], str]) -> RawColumn:
    """Turn typed cells into numbers when all of them are numbers, else into texts.

    Parameters
    ----------
    values : sequence of object
        None is an empty cell.
    text : callable
        Writes one cell as text.
    """
    present = [value for value in values if value is not None]
    if all(isinstance(value, int | float) and not isinstance(value, bool) for value in present):
        return np.array([np.nan if value is None else _as_float(value) for value in values], dtype=np.float64)
    return [None if value is None else text(value) for value in values]


def _as_float(value: Any) -> float:
    try:
        return float(value)
    except OverflowError:  # a whole number of more than 308 digits; reported as not finite later
        return np.inf


def some(names: Iterable[str]) -> str:
    """Join at most a dozen names with commas and say how many more there are."""
    every = list(names)
    more = f" and {len(every) - _NAMED:,} more" if len(every) > _NAMED else ""
    return ", ".join(every[:_NAMED]) + more


def failure(where: str, found: str, allowed: str, advice: str) -> DataError:
    """Make the error for one problem."""
    return DataError(Problem(where, found, allowed, advice))


def check_header(file: str, header: Sequence[str], request: Request) -> tuple[str, ...]:
    """Check that the columns needed are there, each once.

    Parameters
    ----------
    file : str
        Name of the file.
    header : sequence of str
        Column names of the file, without blanks around them.
    request : Request

    Returns
    -------
    tuple of str
        Notes about names that do no harm here: blank ones, repeated ones, columns not used.

    Raises
    ------
    DataError
        For columns that are missing or not unique, and for too many columns.
    """
    if len(header) > request.limits.columns:
        raise failure(
            file,
            f"{len(header):,} columns",
            f"at most {request.limits.columns:,}",
            "keep the columns needed",
        )
    positions = {name: [i + 1 for i, other in enumerate(header) if other == name] for name in request.columns}
    problems = [
        _missing(file, name, header)
        for name in sorted(request.columns | request.declared)
        if name not in header
    ]
    problems += [
        Problem(
            f"{file}, header",
            f"`{name}` is the name of columns {' and '.join(map(str, places))}",
            "a different name for each column",
            "rename or remove one of them",
        )
        for name, places in sorted(positions.items())
        if len(places) > 1
    ]
    if problems:
        raise DataError(problems)
    return _header_notes(header, request)


def _header_notes(header: Sequence[str], request: Request) -> tuple[str, ...]:
    notes = []
    blank = [str(position + 1) for position, name in enumerate(header) if not name]
    if blank:
        notes.append(f"Columns without a name, not read: no. {some(blank)}.")
    twice = [name for name, count in Counter(header).items() if name and count > 1]
    if twice:
        notes.append(f"Names that several columns share, not read: {some(twice)}.")
    unused = [name for name in dict.fromkeys(header) if name and name not in request.columns | set(twice)]
    if unused:
        notes.append(f"Columns that the model does not use, not read: {some(unused)}.")
    return tuple(notes)


def _missing(file: str, name: str, header: Sequence[str]) -> Problem:
    by_fold = {other.casefold(): other for other in header if other}
    close = difflib.get_close_matches(name.casefold(), list(by_fold), n=3)
    advice = "correct the name in the study file or in the data file"
    if close:
        advice = f"did you mean {' or '.join(f'`{by_fold[other]}`' for other in close)}?"
    return Problem(f"{file}, header", f"there is no column `{name}`", some(filter(None, header)), advice)
