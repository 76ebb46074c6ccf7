"""The file that a study may read: a local one, beside the study, in a known format."""

from __future__ import annotations

from pathlib import Path
from typing import Literal

from reanalysis.study.findings import Finding, listed, shown

Format = Literal["csv", "tsv", "parquet", "xlsx"]

ENDINGS: dict[str, Format] = {
    ".csv": "csv",
    ".csv.gz": "csv",
    ".tsv": "tsv",
    ".tsv.gz": "tsv",
    ".parquet": "parquet",
    ".xlsx": "xlsx",
}
"""Endings of data files that can be read, in lower case."""

_KEY = ("data", "file")


def format_of(name: str) -> Format | None:
    """Format that a file's ending stands for, or None."""
    lower = name.lower()
    for ending, kind in ENDINGS.items():
        if lower.endswith(ending):
            return kind
    return None


def resolve_data_file(name: str, folder: Path, *, allow_outside: bool) -> Path | Finding:
    """Find the data file of a study.

    Parameters
    ----------
    name : str
        `file` of the study's `[data]`; a relative path starts in `folder`.
    folder : Path
        The study's folder, resolved.
    allow_outside : bool
        Whether a file that lies outside `folder` may be read.

    Returns
    -------
    Path or Finding
        The file with all symbolic links resolved, or why it is not read.
    """
    if "://" in name or name.lower().startswith(("file:", "data:")):
        return Finding(
            _KEY, f"{shown(name)} is an address", "a file on this machine", "download the file first"
        )
    if format_of(name) is None:
        return _unknown_ending(name)
    try:
        path = (folder / name).resolve()
        # Before anything is said about the file: whether it exists outside is nobody's business.
        if not allow_outside and not path.is_relative_to(folder):
            return _outside(name)
        return _readable(name, path)
    except (OSError, RuntimeError, ValueError) as error:  # link loops, over-long names, NUL characters
        return Finding(_KEY, f"{shown(name)} cannot be followed to a file ({error})", "", "correct the path")


def _readable(name: str, path: Path) -> Path | Finding:
    if path.is_dir():
        return Finding(_KEY, f"{shown(name)} is a folder", "a data file", "name the file in this folder")
    if not path.exists():
        return Finding(
            _KEY,
            f"there is no file {shown(name)}",
            "a path from the study file's folder",
            "correct the name, or put the data file beside the study file",
        )
    if not path.is_file():
        return Finding(_KEY, f"{shown(name)} is not an ordinary file", "a data file", "name a data file")
    # A link may carry a known ending and lead to something else.
    return _unknown_ending(path.name) if format_of(path.name) != format_of(name) else path


def _unknown_ending(name: str) -> Finding:
    return Finding(
        _KEY,
        f"the ending of {shown(name)} is not a known data format",
        listed(ENDINGS),
        "save the data in one of these formats and give the file its ending",
    )


def _outside(name: str) -> Finding:
    return Finding(
        _KEY,
        f"{shown(name)} lies outside the study's folder (symbolic links are followed)",
        "files in the study's folder and below",
        "put the data beside the study file, or permit it with the command-line switch --allow-outside",
    )
