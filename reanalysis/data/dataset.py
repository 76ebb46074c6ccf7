"""What loading a data file gives."""

from __future__ import annotations

from dataclasses import dataclass

import pandas as pd


@dataclass(frozen=True, slots=True)
class Dataset:
    """A data file as a plain table.

    Attributes
    ----------
    frame : DataFrame
        All rows read. Every column is ``float64`` (numbers; missing is NaN) or
        an *ordered* categorical of strings (factors: declared levels in the
        declared order, otherwise sorted labels; missing is NaN).
    sha256 : str
        Of the file's bytes.
    size : int
        Of the file, in bytes.
    notes : tuple of str
        What the reader should know about the file: values read as missing, classic
        stand-ins for missing (-999), columns left out.
    """

    frame: pd.DataFrame
    sha256: str
    size: int
    notes: tuple[str, ...]

    @property
    def rows_read(self) -> int:
        """Number of data rows in the file."""
        return len(self.frame)
