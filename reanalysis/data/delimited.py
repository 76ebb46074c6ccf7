"""Read comma- and tab-separated text, plain or gzipped, line by line."""

from __future__ import annotations

import codecs
import csv
import gzip
import io
import zlib
from array import array
from collections.abc import Iterator
from pathlib import Path
from typing import IO

from reanalysis.data.guards import CappedReader, TooLargeError
from reanalysis.data.table import Cell, RawTable, Request, check_header, failure
from reanalysis.errors import DataError, Problem

_SHOWN = 5
_UTF16_MARKS = (codecs.BOM_UTF16_LE, codecs.BOM_UTF16_BE)


def read_delimited(path: Path, delimiter: str, request: Request) -> RawTable:
    """Read a CSV or TSV file.

    Parameters
    ----------
    path : Path
        The file; gzipped when it ends in ``.gz``. Nothing else about it is guessed.
    delimiter : str
        ``","`` or a tab.
    request : Request

    Returns
    -------
    RawTable
        All cells as text; `places` are line numbers.

    Raises
    ------
    DataError
        For anything that keeps the file from being a table: see the messages.
    """
    try:
        with path.open("rb") as packed, _unpacked(path, packed, request) as stream:
            return _Reading(path.name, delimiter, request).read(stream)
    except UnicodeError as error:
        raise _wrong_encoding(path, request.encoding) from error
    except TooLargeError as error:
        raise failure(
            path.name, str(error), error.allowed, "keep only the rows and columns needed"
        ) from error
    except (OSError, EOFError, zlib.error) as error:
        raise failure(
            path.name, f"the file cannot be read ({error})", "", "check that it is complete"
        ) from error


def _unpacked(path: Path, packed: IO[bytes], request: Request) -> io.BufferedReader:
    if path.name.lower().endswith(".gz"):
        source = gzip.GzipFile(fileobj=packed)
        return io.BufferedReader(CappedReader(source, path.stat().st_size, request.limits))
    return io.BufferedReader(CappedReader(packed, None, request.limits))


def _wrong_encoding(path: Path, encoding: str) -> DataError:
    with path.open("rb") as file:
        start = file.read(4)
    likely = "utf-16" if start.startswith(_UTF16_MARKS) else None
    line = None if likely or path.name.lower().endswith(".gz") else _first_bad_line(path, encoding)
    where = f"{path.name}, line {line}" if line else path.name
    advice = f'set encoding = "{likely}"' if likely else 'set it, such as encoding = "cp1252" (or "latin-1")'
    return failure(
        where,
        f"the text is not {encoding}",
        "the encoding that the key `encoding` of [data] names",
        f"{advice}, or save the file as UTF-8",
    )


def _first_bad_line(path: Path, encoding: str) -> int | None:
    if codecs.lookup(encoding).name != "utf-8":
        return None
    with path.open("rb") as file:
        for number, line in enumerate(file, start=1):
            try:
                line.decode("utf-8")
            except UnicodeDecodeError:
                return number
    return None


class _Reading:
    """One pass over one file."""

    def __init__(self, file: str, delimiter: str, request: Request) -> None:
        self.file = file
        self.delimiter = delimiter
        self.request = request
        self.limits = request.limits
        self.ragged: list[tuple[int, int]] = []
        self.ragged_count = 0
        self.blank = 0

    def read(self, stream: io.BufferedReader) -> RawTable:
        self._check_magic(stream)
        encoding = self.request.encoding
        if codecs.lookup(encoding).name == "utf-8":
            encoding = "utf-8-sig"
        text = io.TextIOWrapper(stream, encoding=encoding, errors="strict", newline="")
        records = self._records(text)
        _, first = next(records, (1, None))
        if first is None:
            raise failure(self.file, "the file is empty", "a header line and data lines", "name another file")
        header = [name.strip().removeprefix("\ufeff").strip() for name in first]
        self._check_delimiter(header)
        notes = check_header(self.file, header, self.request)
        columns, places = self._columns(records, header)
        self._check_rows(places, len(header))
        if self.blank:
            notes = (*notes, f"Empty lines, skipped: {self.blank:,}.")
        return RawTable(self.file, columns, places, "line", notes)

    def _columns(
        self, records: Iterator[tuple[int, list[str]]], header: list[str]
    ) -> tuple[dict[str, list[Cell]], array[int]]:
        wanted = [(i, name) for i, name in enumerate(header) if name in self.request.columns]
        columns: dict[str, list[Cell]] = {name: [] for _, name in wanted}
        targets = [(i, columns[name]) for i, name in wanted]
        places = array("q")
        for line, record in records:
            if len(record) != len(header):
                self.ragged_count += 1
                if len(self.ragged) < _SHOWN:
                    self.ragged.append((line, len(record)))
                continue
            if len(places) >= self.limits.rows:
                raise TooLargeError(
                    f"more than {self.limits.rows:,} rows", f"at most {self.limits.rows:,} rows"
                )
            places.append(line)
            for position, cells in targets:
                cells.append(record[position])
        return columns, places

    def _records(self, text: io.TextIOWrapper) -> Iterator[tuple[int, list[str]]]:
        """Yield each record that is not blank with the line on which it begins."""
        reader = csv.reader(self._lines(text), delimiter=self.delimiter, strict=True)
        pending_blank = 0
        while True:
            line = reader.line_num + 1
            try:
                record = next(reader)
            except StopIteration:
                return
            except csv.Error as error:
                raise self._broken_record(line, error) from error
            if not record or (len(record) == 1 and not record[0].strip()):
                pending_blank += 1
                continue
            self.blank += pending_blank
            pending_blank = 0
            self._check_cells(line, record)
            yield line, record

    def _lines(self, text: io.TextIOWrapper) -> Iterator[str]:
        limit = self.limits.line_chars
        number = 0
        while line := text.readline(limit + 1):
            number += 1
            if len(line) > limit:
                raise failure(
                    f"{self.file}, line {number}",
                    f"the line has more than {limit:,} characters",
                    f"at most {limit:,} characters",
                    "check that the file is a table with one row in a line",
                )
            if "\0" in line:
                raise failure(
                    f"{self.file}, line {number}",
                    "the line holds a NUL character",
                    "text",
                    'save the file as text; for UTF-16, set encoding = "utf-16"',
                )
            yield line

    def _check_cells(self, line: int, record: list[str]) -> None:
        limit = self.limits.cell_chars
        if sum(map(len, record)) <= limit:
            return
        longest = max(record, key=len)
        if len(longest) > limit:
            raise failure(
                f"{self.file}, line {line}, column {record.index(longest) + 1}",
                f"the cell has {len(longest):,} characters",
                f"at most {limit:,} characters",
                "shorten it; a quotation mark that is never closed also makes a cell this long",
            )

    def _broken_record(self, line: int, error: csv.Error) -> DataError:
        text = str(error)
        found = f"the record cannot be read ({text})"
        if "unexpected end" in text:
            found = "a quotation mark is opened in the record that begins here and never closed"
        elif "field larger" in text:
            found = "a cell is too long; perhaps a quotation mark is opened here and never closed"
        elif "expected after" in text:
            found = "there is text after a closing quotation mark"
        return failure(
            f"{self.file}, line {line}",
            found,
            'cells in double quotes, with "" for a quotation mark inside',
            "correct the quotation marks",
        )

    def _check_magic(self, stream: io.BufferedReader) -> None:
        kinds = {b"\x1f\x8b": "a gzip file", b"PK\x03\x04": "a zip or Excel file", b"PAR1": "a Parquet file"}
        start = stream.peek(4)[:4]
        for magic, kind in kinds.items():
            if start.startswith(magic):
                raise failure(
                    self.file,
                    f"this is {kind}, whatever its ending says",
                    "text",
                    "correct the file's ending",
                )

    def _check_delimiter(self, header: list[str]) -> None:
        others = {",": "commas", ";": "semicolons", "\t": "tabs", "|": "vertical bars"}
        own = others.pop(self.delimiter)
        for sign, name in others.items():
            if len(header) == 1 and sign in header[0] and header[0] not in self.request.columns:
                raise failure(
                    f"{self.file}, header",
                    f"the names seem to be separated by {name}",
                    f"{own} for this ending (.csv: commas, .tsv: tabs), with decimal points",
                    f"save the file with {own}, and numbers with a decimal point",
                )

    def _check_rows(self, places: array[int], width: int) -> None:
        if self.ragged_count:
            shown = "; ".join(f"line {line} has {count}" for line, count in self.ragged)
            more = self.ragged_count - len(self.ragged)
            raise DataError(
                Problem(
                    f"{self.file}, line {self.ragged[0][0]}",
                    f"{self.ragged_count:,} rows do not have the header's {width} cells: {shown}"
                    + (f"; and {more:,} more" if more else ""),
                    "as many cells in each row as in the header",
                    "put cells that hold a comma or a line end in double quotes",
                )
            )
        if not places:
            raise failure(self.file, "there is a header but no data", "one row or more", "add the data")
