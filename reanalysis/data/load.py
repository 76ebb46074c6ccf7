"""Data file -> `Dataset`, or one error that lists what is wrong with it."""

from __future__ import annotations

import pandas as pd

from reanalysis.data.convert import Rules, convert_column
from reanalysis.data.dataset import Dataset
from reanalysis.data.delimited import read_delimited
from reanalysis.data.fingerprint import Fingerprint, fingerprint
from reanalysis.data.limits import DEFAULT_LIMITS, Limits
from reanalysis.data.table import RawTable, Request, failure
from reanalysis.errors import DataError
from reanalysis.study.datafile import ENDINGS, format_of
from reanalysis.study.spec import Study


def load_dataset(study: Study, *, columns: frozenset[str], limits: Limits = DEFAULT_LIMITS) -> Dataset:
    """Read the columns that a model uses.

    Parameters
    ----------
    study : Study
    columns : frozenset of str
        Names of the columns to read; problems in other columns don't matter.
    limits : Limits
        Caps on the file.

    Returns
    -------
    Dataset
        Columns in the file's order, rows in the file's order.

    Raises
    ------
    DataError
        With one problem for each thing that is wrong with the file or, once it is a table, with its
        columns.
    """
    print_of_file = _fingerprint(study, limits)
    data = study.spec.data
    request = Request(
        columns=columns,
        declared=frozenset(data.levels) | frozenset(data.units),
        encoding=data.encoding,
        sheet=data.sheet,
        limits=limits,
    )
    table = _read(study, request)
    rules = Rules(frozenset(text.strip() for text in data.missing_values), dict(data.levels))
    converted = [convert_column(name, table, rules) for name in table.columns]
    problems = [problem for column in converted for problem in column.problems]
    if problems:
        raise DataError(problems)
    series = [column.series for column in converted if column.series is not None]
    frame = pd.concat(series, axis="columns") if series else pd.DataFrame(index=range(len(table.places)))
    notes = table.notes + tuple(note for column in converted for note in column.notes)
    return Dataset(frame, print_of_file.sha256, print_of_file.size, notes)


def _fingerprint(study: Study, limits: Limits) -> Fingerprint:
    path = study.data_path
    try:
        size = path.stat().st_size
        if size > limits.file_bytes:
            raise failure(
                path.name,
                f"the file has {size:,} bytes",
                f"at most {limits.file_bytes:,}",
                "keep only the rows and columns needed",
            )
        if not size:
            raise failure(path.name, "the file is empty", "a header line and data lines", "name another file")
        return fingerprint(path)
    except OSError as error:
        raise failure(
            path.name, f"the file cannot be read ({error.strerror})", "", "check its permissions"
        ) from error


def _read(study: Study, request: Request) -> RawTable:
    path = study.data_path
    match format_of(path.name):
        case "csv":
            return read_delimited(path, ",", request)
        case "tsv":
            return read_delimited(path, "\t", request)
        case "parquet":
            from reanalysis.data.parquet import read_parquet  # its library loads slowly

            return read_parquet(path, request)
        case "xlsx":
            from reanalysis.data.excel import read_excel  # its library loads slowly

            return read_excel(path, request)
        case None:
            raise failure(path.name, "unknown ending", ", ".join(ENDINGS), "save the data in one of these")
