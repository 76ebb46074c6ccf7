"""How large a data file may be."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class Limits:
    """Caps on a data file; each stops a read before memory is spent on it.

    Attributes
    ----------
    file_bytes : int
        Size of the file on disk.
    unpacked_bytes : int
        Size once decompressed (gzip, xlsx, Parquet).
    ratio : int
        Decompressed over compressed size, judged once `ratio_from` bytes have come out.
    ratio_from : int
        Decompressed bytes below which no ratio is suspicious.
    rows, columns : int
        Of the table, the header not counted.
    line_chars, cell_chars : int
        Characters in one line of a text file and in one cell.
    """

    file_bytes: int = 200_000_000
    unpacked_bytes: int = 500_000_000
    ratio: int = 200
    ratio_from: int = 20_000_000
    rows: int = 1_000_000
    columns: int = 2_000
    line_chars: int = 1_000_000
    cell_chars: int = 32_767


DEFAULT_LIMITS = Limits()
