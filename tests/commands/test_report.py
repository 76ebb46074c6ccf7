"""`reanalysis report`: what is written, what is said, and which exit code is returned."""

from __future__ import annotations

import json
import os
from concurrent.futures import Future
from concurrent.futures.process import BrokenProcessPool
from pathlib import Path
from typing import Any

import pytest

from reanalysis.report import renderer

MACHINE_FILES = ["pears", "pears/estimates.csv", "pears/provenance.json", "pears/results.json"]


class PagesElsewhere:
    """Stands for the rendering process: remembers what it was asked for and hands back small pages."""

    asked: tuple[str, ...] = ()

    def __enter__(self) -> PagesElsewhere:
        return self

    def __exit__(self, *_: object) -> None:
        pass

    def submit(self, _: object, formats: tuple[str, ...]) -> Future[dict[str, bytes]]:
        """Give the pages at once."""
        type(self).asked = tuple(formats)
        pages: Future[dict[str, bytes]] = Future()
        pages.set_result({name: b"page" for name in ("html", "pdf") if name in formats})
        return pages


class KilledProcess(PagesElsewhere):
    """Stands for a rendering process that the system has killed."""

    def submit(self, *_: object) -> Future[dict[str, bytes]]:
        """Fail as a pool does whose process is gone."""
        pages: Future[dict[str, bytes]] = Future()
        pages.set_exception(BrokenProcessPool("A process in the process pool was terminated abruptly"))
        return pages


def no_renderer() -> None:
    """Stand for a process that must not be started."""
    pytest.fail("a process for pages was started, and no page is wanted")


def test_sound_study(desk: Any, monkeypatch: pytest.MonkeyPatch) -> None:
    """A sound study gives its folder, one line on standard output, nothing on standard error, exit 0."""
    monkeypatch.setattr(renderer, "Renderer", no_renderer)

    ran = desk.report()

    assert ran == type(ran)(0, f"pears: sound -> {desk.out / 'pears'}\n", "")
    assert desk.written() == MACHINE_FILES
    assert sorted(path.name for path in desk.out.iterdir()) == ["pears"]


@pytest.mark.parametrize(
    ("formats", "files"),
    [
        ("json", {"results.json"}),
        ("csv", {"estimates.csv"}),
        ("html", {"report.html"}),
        (" pdf , json ,", {"report.pdf", "results.json"}),
        ("html,pdf,json,csv", {"report.html", "report.pdf", "results.json", "estimates.csv"}),
    ],
)
def test_formats(desk: Any, monkeypatch: pytest.MonkeyPatch, formats: str, files: set[str]) -> None:
    """Exactly the wanted files are there, beside the record of where they come from."""
    monkeypatch.setattr(renderer, "Renderer", PagesElsewhere)

    assert desk.report(formats=formats).code == 0

    assert {path.name for path in (desk.out / "pears").iterdir()} == files | {"provenance.json"}


def test_all_formats_are_the_default(desk: Any, monkeypatch: pytest.MonkeyPatch) -> None:
    """Without a word about formats, all four files and the record are written."""
    monkeypatch.setattr(renderer, "Renderer", PagesElsewhere)

    assert desk.run("report", desk.study, "--out", desk.out).code == 0

    assert PagesElsewhere.asked == ("html", "pdf", "json", "csv")
    assert len(list((desk.out / "pears").iterdir())) == 5


def test_separated_study(desk: Any) -> None:
    """Separated data end in a report that says what cannot be estimated: exit 1, no giant number anywhere."""
    ran = desk.report(desk.folder / "separated.toml", formats="json,csv")

    assert ran == type(ran)(1, f"separated: doubtful -> {desk.out / 'separated'}\n", "")
    results = json.loads((desk.out / "separated/results.json").read_text(encoding="utf-8"))
    spray = results["coefficients"][1]
    assert spray["frequentist"] == {
        "kind": "absent",
        "reason": "separated: all 20 rows with spray[sulphur] have scab = no",
        "advice": spray["frequentist"]["advice"],
    }
    assert spray["frequentist"]["advice"]
    assert spray["posterior"]["flat"]["kind"] == "absent"
    assert -4.0 < spray["posterior"]["weak"]["median"] < -1.0
    assert results["status"] == "doubtful"
    assert largest(results["coefficients"]) < 100.0 < largest(results["computation"])


def largest(part: object) -> float:
    """The largest magnitude of any number in a piece of JSON, effective sample sizes left out."""
    if isinstance(part, dict):
        return max((largest(value) for key, value in part.items() if not key.startswith("ess_")), default=0.0)
    if isinstance(part, list):
        return max(map(largest, part), default=0.0)
    return abs(part) if isinstance(part, int | float) else 0.0


def test_dependent_columns(desk: Any) -> None:
    """Columns that cannot be told apart give a report without estimates of them: exit 1."""
    rows = [line.split(",") for line in desk.data.read_text().splitlines()[1:]]
    lines = [f"{g},{w},{2 * float(w)},{k % 3}" for k, (g, _, w) in enumerate(rows) if g and w]
    desk.data.write_text("\n".join(["grams,weeks,fortnights,row", *lines]) + "\n")
    desk.edit('levels = { bag = ["none", "paper", "net"] }', "")
    desk.edit("grams ~ bag + weeks", "grams ~ weeks + fortnights + row")
    desk.edit('"bag[paper]"', '"row"')

    ran = desk.report()

    assert (ran.code, ran.stderr) == (1, "")
    results = json.loads((desk.out / "pears/results.json").read_text(encoding="utf-8"))
    kinds = {one["term"]: one["frequentist"]["kind"] for one in results["coefficients"]}
    assert kinds == {"Intercept": "estimate", "weeks": "absent", "fortnights": "absent", "row": "estimate"}
    assert largest(results["coefficients"]) < 1000.0
    assert results["status"] in {"doubtful", "failed"}


def test_failed_main_prior(desk: Any) -> None:
    """A main prior set without a posterior fails the study, which is reported all the same: exit 1."""
    ran = desk.report(desk.folder / "improper.toml")

    assert ran == type(ran)(1, f"improper: failed -> {desk.out / 'improper'}\n", "")


def test_worst_exit_code_wins(desk: Any) -> None:
    """Sound, doubtful and invalid studies of one run: all have their line, and the exit code is 2."""
    studies = [desk.study, desk.folder / "separated.toml"]
    assert desk.report(*studies).code == 1

    ran = desk.report(*studies, desk.folder / "none.toml")

    assert ran.code == 2
    assert [line.split(" -> ")[0] for line in ran.stdout.splitlines()] == [
        "none: invalid input",
        "pears: sound",
        "separated: doubtful",
    ]


def test_summary_for_machines(desk: Any) -> None:
    """With --json, standard output is one JSON list with a row for each study."""
    ran = desk.report(desk.study, desk.folder / "none.toml", "--json")

    assert json.loads(ran.stdout) == [
        {"study": "none", "folder": "", "status": "invalid input", "exit": 2},
        {"study": "pears", "folder": str(desk.out / "pears"), "status": "sound", "exit": 0},
    ]


def content(folder: Path) -> dict[str, bytes]:
    """Every file of a folder."""
    return {path.name: path.read_bytes() for path in folder.iterdir()}


def test_report_is_replaced(desk: Any) -> None:
    """Reported again in another format, the folder holds the new files only."""
    desk.report(formats="json,csv")
    desk.report(formats="json")

    assert desk.written() == ["pears", "pears/provenance.json", "pears/results.json"]


def test_cores_move_no_number(desk: Any) -> None:
    """One sampling core or two: results.json and estimates.csv are the same bytes."""
    desk.report(desk.study, "--cores", "1")
    one = content(desk.out / "pears")
    desk.report(desk.study, "--cores", "2")
    two = content(desk.out / "pears")

    assert len(one["results.json"]) > 10_000
    assert one["results.json"] == two["results.json"]
    assert one["estimates.csv"] == two["estimates.csv"]


def test_full_disk(desk: Any, monkeypatch: pytest.MonkeyPatch) -> None:
    """When the disk fills up, the old report stays, the study failed, and no trace is left: exit 1."""
    desk.report()
    before = content(desk.out / "pears")

    def full(_: int) -> None:
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(os, "fsync", full)
    ran = desk.report(formats="json")

    assert (ran.code, ran.stdout) == (1, "pears: failed\n")
    assert "No space left on device" in ran.stderr
    assert "to do: choose another --out" in ran.stderr
    assert content(desk.out / "pears") == before
    assert desk.written() == MACHINE_FILES


@pytest.mark.parametrize("place", ["reanalysis.analysis.run.prepare", "os.fsync"])
def test_user_stops(desk: Any, monkeypatch: pytest.MonkeyPatch, place: str) -> None:
    """Stopped by the user while it computes or writes: exit 130, one line, nothing half-written."""

    def stop(*_: object, **__: object) -> None:
        raise KeyboardInterrupt

    monkeypatch.setattr(place, stop)
    ran = desk.report()

    assert ran == type(ran)(130, "", "stopped; nothing was left half-written\n")
    assert desk.written() == []


def test_killed_renderer(desk: Any, monkeypatch: pytest.MonkeyPatch) -> None:
    """A rendering process that the system kills fails the study in words, and nothing is written."""
    monkeypatch.setattr(renderer, "Renderer", KilledProcess)

    ran = desk.report(formats="html,json")

    assert (ran.code, ran.stdout) == (1, "pears: failed\n")
    assert "the process that lays out the pages was killed" in ran.stderr
    assert "to do: free some memory" in ran.stderr
    assert "Traceback" not in ran.stderr
    assert desk.written() == []


def test_version(desk: Any) -> None:
    """The version is printed, and nothing is run."""
    ran = desk.run("--version")

    assert (ran.code, ran.stderr) == (0, "")
    assert ran.stdout.startswith("reanalysis 0.")


def test_help_names_commands_and_exit_codes(desk: Any) -> None:
    """The help says what there is and what the exit codes mean."""
    out = desk.run("--help").stdout

    assert "check" in out
    assert "report" in out
    assert "0 all sound; 1 a study failed or is not sound; 2 wrong usage or invalid input" in " ".join(
        out.split()
    )
