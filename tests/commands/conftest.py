"""A folder with a small study in it, and the command line to try on it."""

from __future__ import annotations

import shutil
from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import pytest

from reanalysis.cli import main

STUDIES = Path(__file__).resolve().parents[1] / "studies"


@dataclass(frozen=True)
class Ran:
    """What a command left: exit code and both streams."""

    code: int
    stdout: str
    stderr: str


@dataclass(frozen=True)
class Desk:
    """A folder that holds the test studies, with the place where reports go.

    Attributes
    ----------
    folder : Path
        With ``pears.toml``, ``pears.csv`` and the others.
    out : Path
        Not there yet.
    run : callable
        Takes the words of a command line and runs it in this process.
    """

    folder: Path
    out: Path
    run: Callable[..., Ran]

    @property
    def study(self) -> Path:
        """The study file that tests spoil."""
        return self.folder / "pears.toml"

    @property
    def data(self) -> Path:
        """Its data file."""
        return self.folder / "pears.csv"

    def edit(self, old: str, new: str, *, file: str = "pears.toml") -> None:
        """Replace a text, which must occur once, in a file."""
        path = self.folder / file
        text = path.read_text(encoding="utf-8")
        assert text.count(old) == 1, (old, text.count(old))
        path.write_text(text.replace(old, new), encoding="utf-8")

    def report(self, *words: object, formats: str = "json,csv") -> Ran:
        """Report studies; without the pages unless they are asked for, as drawing takes seconds."""
        return self.run("report", *(words or (self.study,)), "--out", self.out, "--formats", formats)

    def written(self) -> list[str]:
        """Every file and folder below the place of the reports."""
        return sorted(str(path.relative_to(self.out)) for path in self.out.rglob("*"))


@pytest.fixture
def desk(
    tmp_path: Path, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch, store: Any
) -> Desk:
    """Copy the test studies, and let every command of the session share its compiled models."""
    monkeypatch.setattr("reanalysis.bayesian.model.ModelStore", lambda: store)
    shutil.copytree(STUDIES, tmp_path / "studies")

    def run(*words: object) -> Ran:
        try:
            code = main([str(word) for word in words])
        except SystemExit as stop:  # argparse leaves in this way
            code = int(stop.code or 0)
        return Ran(code, *capsys.readouterr())

    return Desk(tmp_path / "studies", tmp_path / "out", run)
