"""The whole tool in processes of its own: the same study gives the same bytes, pages included."""

from __future__ import annotations

import json
import os
import re
import shutil
import subprocess
import sys
from pathlib import Path

import pytest

STUDIES = Path(__file__).resolve().parents[1] / "studies"
FILES = ("estimates.csv", "provenance.json", "report.html", "report.pdf", "results.json")

# Runs the command line and says at the end what this process has loaded.
RUN = (
    "import json, sys\n"
    "from reanalysis.cli import main\n"
    "if __name__ == '__main__':\n"
    "    code = main(sys.argv[1:])\n"
    "    print(json.dumps(sorted(sys.modules)))\n"
    "    sys.exit(code)\n"
)


class Run:
    """One run of the tool on a copy of the study, in a folder and with hash seed and time zone of its own."""

    def __init__(self, folder: Path, seed: int, zone: str) -> None:
        self.folder = folder
        self.studies = folder / "studies"
        shutil.copytree(STUDIES, self.studies)
        (folder / "run.py").write_text(RUN, encoding="utf-8")
        words = ("report", "studies/pears.toml", "--out", "reports", "--cores", str(seed))
        self._process = subprocess.Popen(  # noqa: S603
            [sys.executable, "run.py", *words],
            cwd=folder,
            env=os.environ | {"PYTHONHASHSEED": str(seed), "TZ": zone},
            stdout=subprocess.PIPE,
            stderr=subprocess.PIPE,
            text=True,
        )

    def finish(self) -> None:
        """Wait for the end and keep what was printed."""
        stdout, self.stderr = self._process.communicate(timeout=300)
        self.code = self._process.returncode
        self.stdout, _, self.loaded = stdout.rstrip().rpartition("\n")

    def read(self, file: str) -> bytes:
        """One file of the report."""
        return (self.folder / "reports" / "pears" / file).read_bytes()


@pytest.fixture(scope="module")
def runs(tmp_path_factory: pytest.TempPathFactory) -> tuple[Run, Run]:
    """Two runs side by side, which also stirs their timing."""
    started = (
        Run(tmp_path_factory.mktemp("one"), 1, "Europe/London"),
        Run(tmp_path_factory.mktemp("two"), 2, "Pacific/Auckland"),
    )
    for run in started:
        run.finish()
    return started


@pytest.mark.parametrize("file", [name for name in FILES if name != "provenance.json"])
def test_same_bytes(runs: tuple[Run, Run], file: str) -> None:
    """Numbers, tables and pages are the same to the byte, wherever and however the study is run."""
    one, two = (run.read(file) for run in runs)

    assert len(one) > 1000
    assert one == two


def test_quiet_success(runs: tuple[Run, Run]) -> None:
    """A sound study piped to a file: exit 0, one line, silence on standard error, five files."""
    for run in runs:
        assert (run.code, run.stderr) == (0, "")
        assert run.stdout == f"pears: sound -> {Path('reports/pears')}"
        assert tuple(sorted(path.name for path in (run.folder / "reports/pears").iterdir())) == FILES
        assert [path.name for path in (run.folder / "reports").iterdir()] == ["pears"]


def test_study_folder_is_left_alone(runs: tuple[Run, Run]) -> None:
    """Nothing is added to the folder that the study lies in, and nothing there changes."""
    for run in runs:
        before = {path.name: path.read_bytes() for path in STUDIES.iterdir()}
        assert {path.name: path.read_bytes() for path in run.studies.iterdir()} == before


def test_analysis_never_draws(runs: tuple[Run, Run]) -> None:
    """The process that samples loads nothing of ours that draws or lays out: another process does that.

    Matplotlib itself comes with the sampler, whose own imports lead to it.
    """
    loaded = set(json.loads(runs[0].loaded))

    assert {"bambi", "nutpie", "statsmodels", "reanalysis.report.write"} <= loaded
    drawing = ("reanalysis.report.figures", "reanalysis.report.html", "reanalysis.report.pdf", "weasyprint")
    assert [name for name in loaded if name.startswith((*drawing, "reanalysis.report.document"))] == []


def test_results_hold_nothing_of_the_machine(runs: tuple[Run, Run]) -> None:
    """Neither a folder nor a date nor a time of the run stands in what is the same everywhere."""
    for run in runs:
        for file in ("results.json", "estimates.csv", "report.html"):
            text = run.read(file).decode()
            assert str(run.folder) not in text
            assert sys.prefix not in text
            assert os.uname().nodename not in re.findall(r"[\w.-]+", text)
        assert not re.search(r"\b20\d\d-\d\d-\d\d", run.read("results.json").decode())


def test_provenance_holds_the_machine(runs: tuple[Run, Run]) -> None:
    """Folder and times of each run stand in its own record, the checksums in both alike."""
    one, two = (json.loads(run.read("provenance.json")) for run in runs)

    assert one["study_file"] == str(runs[0].studies / "pears.toml")
    assert two["data_file"] == str(runs[1].studies / "pears.csv")
    assert one["data_sha256"] == two["data_sha256"]
    assert set(one["seconds"]) >= {"data and design", "frequentist fit", "posterior, weak priors"}
    assert all(seconds >= 0.0 for seconds in one["seconds"].values())


def test_page_says_what_was_asked(runs: tuple[Run, Run]) -> None:
    """Title, question and cautions are in the page, and the page loads nothing from elsewhere."""
    page = runs[0].read("report.html").decode()

    assert "Do bags make heavier pears?" in page
    assert "Paper against no bag" in page
    assert "not by itself proof of a cause" in page
    assert re.findall(r"""(?:src|href)=["'](?!data:|#)([^"']*)""", page) == []
    assert runs[0].read("report.pdf").startswith(b"%PDF-1.")
