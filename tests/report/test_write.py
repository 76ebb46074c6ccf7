"""A study's folder appears whole, replaces only a report, and survives every interruption."""

from __future__ import annotations

import errno
import os
from pathlib import Path

import pytest

from reanalysis.errors import ReportError
from reanalysis.report import write
from reanalysis.report.write import check_place, write_folder, write_report

OLD = {"results.json": b"old", "report.html": b"old page"}
NEW = {"results.json": b"new", "provenance.json": b"{}"}


def tree(folder: Path) -> dict[str, bytes]:
    """Every file below a folder with its content, and every empty folder."""
    return {
        str(path.relative_to(folder)): path.read_bytes() if path.is_file() else b""
        for path in folder.rglob("*")
        if path.is_file() or not any(path.iterdir())
    }


def under(name: str, files: dict[str, bytes]) -> dict[str, bytes]:
    """The same files, inside a folder."""
    return {f"{name}/{file}": content for file, content in files.items()}


def test_folder_holds_exactly_the_files(tmp_path: Path) -> None:
    """A folder that is not there yet is made, with those above it, readable by others."""
    write_folder(tmp_path / "a" / "b" / "pears", NEW)

    assert tree(tmp_path) == under("a/b/pears", NEW)
    assert (tmp_path / "a/b/pears").stat().st_mode & 0o777 == 0o755


def test_folder_is_replaced_as_a_whole(tmp_path: Path) -> None:
    """A file that the new report does not have is gone, and nothing is left beside the folder."""
    write_folder(tmp_path / "pears", OLD)
    write_folder(tmp_path / "pears", NEW)

    assert tree(tmp_path) == under("pears", NEW)


def test_litter_of_a_file_manager_is_no_obstacle(tmp_path: Path) -> None:
    """A report that somebody has looked at with a file manager is replaced all the same."""
    write_folder(tmp_path / "pears", OLD)
    (tmp_path / "pears" / ".DS_Store").touch()

    check_place(tmp_path / "pears")
    write_folder(tmp_path / "pears", NEW)

    assert tree(tmp_path) == under("pears", NEW)


FAILURES = {
    "full disk": OSError(errno.ENOSPC, "No space left on device"),
    "user stops": KeyboardInterrupt(),
}


def stop_at(
    monkeypatch: pytest.MonkeyPatch, owner: object, name: str, call: int, error: BaseException
) -> None:
    """Let the `call`-th call of a function fail."""
    original, calls = getattr(owner, name), iter(range(1, 1000))

    def failing(*arguments: object, **options: object) -> object:
        if next(calls) == call:
            raise error
        return original(*arguments, **options)

    monkeypatch.setattr(owner, name, failing)


@pytest.mark.parametrize("error", FAILURES.values(), ids=FAILURES)
@pytest.mark.parametrize(
    ("owner", "name", "call"),
    [
        pytest.param(write.tempfile, "mkdtemp", 1, id="before the first file"),
        pytest.param(os, "fsync", 1, id="in the first file"),
        pytest.param(os, "fsync", 2, id="in the last file"),
        pytest.param(write.tempfile, "mkdtemp", 2, id="before the old folder moves"),
        pytest.param(Path, "rename", 1, id="as the old folder moves"),
        pytest.param(Path, "rename", 2, id="between old and new"),
    ],
)
def test_interrupted_write_leaves_the_old_folder(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, owner: object, name: str, call: int, error: BaseException
) -> None:
    """Wherever writing stops, the old report is back in its place and nothing lies beside it."""
    write_folder(tmp_path / "pears", OLD)
    stop_at(monkeypatch, owner, name, call, error)

    expected = ReportError if isinstance(error, OSError) else KeyboardInterrupt
    with pytest.raises(expected, match="No space left" if isinstance(error, OSError) else None):
        write_folder(tmp_path / "pears", NEW)

    assert tree(tmp_path) == under("pears", OLD)


def test_failed_first_write_leaves_nothing(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """Without an old report, a failure leaves an empty place and says what to do."""
    stop_at(monkeypatch, os, "fsync", 2, FAILURES["full disk"])

    with pytest.raises(ReportError, match=r"pears: .*No space left(.|\n)*to do: choose another --out"):
        write_folder(tmp_path / "pears", NEW)

    assert tree(tmp_path) == {}


@pytest.mark.parametrize(
    "act", [check_place, lambda folder: write_folder(folder, NEW)], ids=["check", "write"]
)
def test_somebody_elses_files_are_never_replaced(tmp_path: Path, act: object) -> None:
    """A folder of the same name that holds other files is refused and stays as it is."""
    mine = {"results.json": b"old", "notes.txt": b"a year's work"}
    (tmp_path / "pears").mkdir()
    for name, content in mine.items():
        (tmp_path / "pears" / name).write_bytes(content)

    with pytest.raises(ReportError, match=r"which also holds notes\.txt"):
        act(tmp_path / "pears")

    assert tree(tmp_path) == under("pears", mine)


@pytest.mark.parametrize("place", ["pears", "pears/out/pears"])
@pytest.mark.parametrize(
    "act", [check_place, lambda folder: write_folder(folder, NEW)], ids=["check", "write"]
)
def test_a_file_in_the_way_is_refused(tmp_path: Path, place: str, act: object) -> None:
    """A file where the folder, or one above it, should be is named and left alone."""
    (tmp_path / "pears").write_bytes(b"data")

    with pytest.raises(
        ReportError, match=r"pears.*: (?:this is a file, and|.*Not a directory|.*File exists)"
    ):
        act(tmp_path / place)

    assert tree(tmp_path) == {"pears": b"data"}


def test_a_file_above_the_place_is_named(tmp_path: Path) -> None:
    """It is the file in the way that is named, not the folder that cannot be made."""
    (tmp_path / "out").write_bytes(b"data")

    with pytest.raises(ReportError, match="out: this is a file, and a folder is to be made in it"):
        check_place(tmp_path / "out" / "pears")


def test_place_that_may_not_be_written(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """A folder without permission to write is refused before any work; an empty or old one is not."""
    check_place(tmp_path / "new" / "pears")
    write_folder(tmp_path / "pears", OLD)
    check_place(tmp_path / "pears")
    # The superuser may write anywhere, so the answer is made up.
    monkeypatch.setattr(os, "access", lambda *_: False)

    with pytest.raises(ReportError, match="nothing may be written in this folder"):
        check_place(tmp_path / "new" / "pears")


def test_report_has_the_wanted_files(tmp_path: Path, analysed: object) -> None:
    """Pages handed over are written as they are, machine files beside them, and the times go on record."""
    analysis = analysed("tests/studies/pears")

    folder = write_report(
        analysis, tmp_path, formats=("html", "csv"), seconds={"design": 0.12345}, rendered={"html": b"<p>"}
    )

    assert folder == tmp_path / "pears"
    assert {path.name for path in folder.iterdir()} == {"report.html", "estimates.csv", "provenance.json"}
    assert (folder / "report.html").read_bytes() == b"<p>"
    assert b'"design": 0.123\n' in (folder / "provenance.json").read_bytes()


def test_missing_page_is_rendered_here(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, analysed: object
) -> None:
    """Only the page that nobody has handed over is rendered."""
    asked = []
    monkeypatch.setattr(write, "render", lambda _, formats: asked.append(formats) or {"html": b"here"})

    folder = write_report(
        analysed("tests/studies/pears"), tmp_path, formats=("html", "pdf"), rendered={"pdf": b"elsewhere"}
    )

    assert asked == [("html",)]
    assert (folder / "report.html").read_bytes() == b"here"
    assert (folder / "report.pdf").read_bytes() == b"elsewhere"


def test_unknown_format_is_refused(tmp_path: Path, analysed: object) -> None:
    """A format that does not exist is named beside those that do, before anything is written."""
    with pytest.raises(ReportError, match=r"found docx\n    allowed: html, pdf, json, csv"):
        write_report(analysed("tests/studies/pears"), tmp_path, formats=("json", "docx"))

    assert tree(tmp_path) == {}
