"""Write a study's folder, whole or not at all."""

from __future__ import annotations

import os
import shutil
import tempfile
from collections.abc import Iterator, Mapping, Sequence
from contextlib import contextmanager
from pathlib import Path

from reanalysis.analysis.result import Analysis
from reanalysis.errors import Problem, ReportError
from reanalysis.report.export import estimates_csv, provenance_json, results_json
from reanalysis.report.renderer import render
from reanalysis.report.results import build_results

NAMES = {"html": "report.html", "pdf": "report.pdf", "json": "results.json", "csv": "estimates.csv"}
"""File of each format; `provenance.json` is always written."""

FORMATS = tuple(NAMES)

PAGES = ("html", "pdf")
"""Formats that are laid out, and may be rendered elsewhere."""


def write_report(
    analysis: Analysis,
    out: Path,
    *,
    formats: Sequence[str] = FORMATS,
    seconds: Mapping[str, float] | None = None,
    rendered: Mapping[str, bytes] | None = None,
) -> Path:
    """Write the folder of one study and return it.

    Parameters
    ----------
    analysis : Analysis
    out : Path
        The study's folder is made in it, named after the study file.
    formats : sequence of str
        Among ``html``, ``pdf``, ``json``, ``csv``; `provenance.json` comes with any of them.
    seconds : mapping, optional
        Times of the stages, for the provenance.
    rendered : mapping, optional
        Pages that another process has rendered; what is missing is rendered here.

    Raises
    ------
    ReportError
        When the files cannot be written; the folder is then as it was before.
    """
    results = build_results(analysis)
    pages = [name for name in PAGES if name in formats]
    contents = dict(rendered) if rendered is not None else render(analysis, tuple(pages))
    contents |= {"json": results_json(results).encode(), "csv": estimates_csv(results).encode()}
    files = {NAMES[name]: contents[name] for name in formats}
    files["provenance.json"] = provenance_json(analysis, seconds or {}).encode()
    folder = out / analysis.prepared.study.name
    write_folder(folder, files)
    return folder


def write_folder(folder: Path, files: Mapping[str, bytes]) -> None:
    """Write files into a folder that appears complete or stays as it was.

    The files are written beside the folder, flushed to the disk, and moved into its place.

    Parameters
    ----------
    folder : Path
        Replaced when it exists.
    files : mapping of str to bytes
        Contents by file name.

    Raises
    ------
    ReportError
        When the files cannot be written; the folder is then as it was before.
    """
    try:
        folder.parent.mkdir(parents=True, exist_ok=True)
        with _beside(folder) as temporary:
            for name, content in files.items():
                _write(temporary / name, content)
            _put_in_place(temporary, folder)
    except OSError as error:
        raise ReportError(
            Problem(
                where=str(folder),
                found=f"the report cannot be written ({error.strerror or error})",
                allowed="a folder that can be written, on a disk with room",
                advice="choose another --out, or free some space",
            )
        ) from error


@contextmanager
def _beside(folder: Path) -> Iterator[Path]:
    temporary = Path(tempfile.mkdtemp(prefix=f".{folder.name}-", dir=folder.parent))
    try:
        temporary.chmod(0o755)
        yield temporary
    finally:
        shutil.rmtree(temporary, ignore_errors=True)


def _write(path: Path, content: bytes) -> None:
    with path.open("wb") as file:
        file.write(content)
        file.flush()
        os.fsync(file.fileno())


def _put_in_place(temporary: Path, folder: Path) -> None:
    if not folder.exists():
        temporary.rename(folder)
        return
    # A folder cannot replace a full one in one step; the old one steps aside for an instant.
    old = Path(tempfile.mkdtemp(prefix=f".{folder.name}-old-", dir=folder.parent))
    folder.rename(old / folder.name)
    temporary.rename(folder)
    shutil.rmtree(old, ignore_errors=True)
