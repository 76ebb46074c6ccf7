"""Write a study's folder, whole or not at all."""

from __future__ import annotations

import os
import shutil
import tempfile
from collections.abc import Collection, Iterator, Mapping, Sequence
from contextlib import contextmanager
from pathlib import Path

from reanalysis.analysis.result import Analysis
from reanalysis.errors import Problem, ReportError
from reanalysis.report.export import estimates_csv, provenance_json, results_json
from reanalysis.report.formats import FORMATS, NAMES, PAGES
from reanalysis.report.renderer import render
from reanalysis.report.results import build_results

PROVENANCE = "provenance.json"

LITTER = frozenset({".DS_Store", "Thumbs.db", "desktop.ini"})
"""What file managers leave in a folder that somebody has looked at."""


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
        When a format is unknown or the files cannot be written; the folder is then as it was before.
    """
    _check_formats(formats)
    folder = out / analysis.prepared.study.name
    check_place(folder)
    results = build_results(analysis)
    contents = dict(rendered or {})
    contents |= render(analysis, tuple(name for name in PAGES if name in formats and name not in contents))
    contents |= {"json": results_json(results).encode(), "csv": estimates_csv(results).encode()}
    files = {NAMES[name]: contents[name] for name in formats}
    files[PROVENANCE] = provenance_json(analysis, seconds or {}).encode()
    write_folder(folder, files)
    return folder


def check_place(folder: Path) -> None:
    """Refuse a place where a study's folder cannot be written, or would replace something else.

    Parameters
    ----------
    folder : Path
        Of the study; need not exist.

    Raises
    ------
    ReportError
        When it, or what it is to be made in, is not a folder that can be written, or when it
        holds files that no report has.
    """
    _refuse_strangers(folder, {*NAMES.values(), PROVENANCE})
    ground = next(place for place in folder.absolute().parents if place.exists())
    if not ground.is_dir():
        raise _refusal(ground, "this is a file, and a folder is to be made in it")
    if not os.access(ground, os.W_OK | os.X_OK):
        raise _refusal(ground, "nothing may be written in this folder")


def write_folder(folder: Path, files: Mapping[str, bytes]) -> None:
    """Write files into a folder that appears complete or stays as it was.

    The files are written beside the folder, flushed to the disk, and moved into its place.

    Parameters
    ----------
    folder : Path
        Replaced when it exists and holds nothing but earlier versions of `files` or of a report's.
    files : mapping of str to bytes
        Contents by file name.

    Raises
    ------
    ReportError
        When the files cannot be written; the folder is then as it was before.
    """
    _refuse_strangers(folder, {*NAMES.values(), PROVENANCE, *files})
    try:
        folder.parent.mkdir(parents=True, exist_ok=True)
        with _beside(folder) as temporary:
            for name, content in files.items():
                _write(temporary / name, content)
            _put_in_place(temporary, folder)
    except OSError as error:
        raise _refusal(folder, f"the report cannot be written ({error.strerror or error})") from error


def _check_formats(formats: Sequence[str]) -> None:
    unknown = [name for name in formats if name not in NAMES]
    if unknown:
        raise ReportError(
            Problem("formats", f"found {', '.join(unknown)}", ", ".join(NAMES), "name some of these")
        )


def _refuse_strangers(folder: Path, own: Collection[str]) -> None:
    """Replacing a folder deletes what it holds; nobody's own files may go that way."""
    if not folder.is_dir():
        if folder.exists():
            raise _refusal(folder, "this is a file, and the study's folder would take its place")
        return
    strangers = sorted(path.name for path in folder.iterdir() if path.name not in LITTER.union(own))
    if strangers:
        shown = ", ".join(strangers[:3]) + (" and others" if len(strangers) > 3 else "")
        raise _refusal(folder, f"the report would replace this folder, which also holds {shown}")


def _refusal(place: Path, found: str) -> ReportError:
    return ReportError(
        Problem(
            where=str(place),
            found=found,
            allowed="a folder that can be written, on a disk with room, and holds nothing but reports",
            advice="choose another --out, move what is in the way, or free some space",
        )
    )


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
    try:
        folder.rename(old / folder.name)
        temporary.rename(folder)
    finally:
        if not folder.exists():
            (old / folder.name).rename(folder)
        shutil.rmtree(old, ignore_errors=True)
