"""Read the columns asked for of a Parquet file."""

from __future__ import annotations

import datetime
from collections.abc import Sequence
from pathlib import Path

import numpy as np
import pyarrow as pa  # type: ignore[import-untyped]
import pyarrow.parquet as pq  # type: ignore[import-untyped]

from reanalysis.data.guards import TooLargeError, check_unpacked
from reanalysis.data.table import Cell, RawColumn, RawTable, Request, check_header, failure
from reanalysis.errors import DataError, Problem

_BATCH = 1 << 16


def read_parquet(path: Path, request: Request) -> RawTable:
    """Read a Parquet file of plain columns.

    Parameters
    ----------
    path : Path
    request : Request

    Returns
    -------
    RawTable
        Numbers as numbers, everything else as text; `places` count the rows from 1.

    Raises
    ------
    DataError
        For a broken or over-large file and for columns that hold lists, tables or bytes.
    """
    try:
        # Texts stay dictionary-encoded: one long text repeated in every row is small in the file
        # and would be huge in memory.
        texts = [field.name for field in pq.read_schema(path) if _is_text(field.type)]
        with pq.ParquetFile(path, read_dictionary=texts) as file:
            return _read(path, file, request)
    except TooLargeError as error:
        raise failure(
            path.name, str(error), error.allowed, "keep only the rows and columns needed"
        ) from error
    except (pa.ArrowException, OSError, ValueError) as error:
        reason = str(error).splitlines()[0] if str(error) else type(error).__name__
        raise failure(
            path.name, f"this is not a readable Parquet file ({reason})", "", "write the file again"
        ) from error


def _read(path: Path, file: pq.ParquetFile, request: Request) -> RawTable:
    metadata, schema = file.metadata, file.schema_arrow
    limits = request.limits
    if metadata.num_rows > limits.rows:
        raise TooLargeError(f"{metadata.num_rows:,} rows", f"at most {limits.rows:,} rows")
    notes = check_header(path.name, schema.names, request)
    names = [name for name in schema.names if name in request.columns]
    _check_types(path.name, schema, names)
    packed = path.stat().st_size
    declared = sum(metadata.row_group(i).total_byte_size for i in range(metadata.num_row_groups))
    check_unpacked(declared, packed, limits)
    if not metadata.num_rows:
        raise failure(path.name, "there is a header but no data", "one row or more", "add the data")
    batches = []
    unpacked = 0
    for batch in file.iter_batches(batch_size=_BATCH, columns=names):
        # Metadata can lie, so count what really comes out.
        unpacked += batch.nbytes
        if unpacked > limits.unpacked_bytes:
            check_unpacked(unpacked, packed, limits)
        batches.append(batch)
    table = pa.Table.from_batches(batches)
    columns = {name: _column(path.name, name, table.column(name), limits.cell_chars) for name in names}
    return RawTable(path.name, columns, range(1, table.num_rows + 1), "row", notes)


def _check_types(file: str, schema: pa.Schema, names: Sequence[str]) -> None:
    problems = [
        Problem(
            f"{file}, column {name}",
            f"it holds {kind}",
            "numbers, texts, true/false, dates and times",
            "turn it into a plain column",
        )
        for name in names
        if not _is_plain(kind := schema.field(name).type)
    ]
    if problems:
        raise DataError(problems)


def _is_plain(kind: pa.DataType) -> bool:
    if pa.types.is_dictionary(kind):
        return _is_plain(kind.value_type)
    return bool(
        _is_number(kind)
        or _is_text(kind)
        or pa.types.is_boolean(kind)
        or pa.types.is_date(kind)
        or pa.types.is_time(kind)
        or pa.types.is_timestamp(kind)
        or pa.types.is_null(kind)
    )


def _is_text(kind: pa.DataType) -> bool:
    return bool(pa.types.is_string(kind) or pa.types.is_large_string(kind) or pa.types.is_string_view(kind))


def _is_number(kind: pa.DataType) -> bool:
    return bool(pa.types.is_integer(kind) or pa.types.is_floating(kind) or pa.types.is_decimal(kind))


def _column(file: str, name: str, column: pa.ChunkedArray, cell_chars: int) -> RawColumn:
    kind = column.type.value_type if pa.types.is_dictionary(column.type) else column.type
    if _is_number(kind):
        return np.asarray(column.cast(pa.float64(), safe=False).to_numpy(), dtype=np.float64)
    cells: list[Cell] = []
    for chunk in column.chunks:
        encoded = chunk if pa.types.is_dictionary(chunk.type) else chunk.dictionary_encode()
        texts = [_text(value) for value in _values(encoded.dictionary)]
        longest = max((len(text) for text in texts if text is not None), default=0)
        if longest > cell_chars:
            raise failure(
                f"{file}, column {name}",
                f"a cell has {longest:,} characters",
                f"at most {cell_chars:,}",
                "shorten it",
            )
        cells += [None if index is None else texts[index] for index in encoded.indices.to_pylist()]
    return cells


def _values(array: pa.Array) -> list[object]:
    if pa.types.is_timestamp(array.type):
        # Whole microseconds are the finest that Python's datetime holds.
        array = array.cast(pa.timestamp("us", tz=array.type.tz), safe=False)
    values: list[object] = array.to_pylist()
    return values


def _text(value: object) -> Cell:
    match value:
        case None:
            return None
        case bool():
            return str(value).lower()
        case datetime.datetime() if value.time() == datetime.time():
            return value.date().isoformat()
        case datetime.date() | datetime.time():
            return value.isoformat()
        case _:
            return str(value)
