"""Whole commands from a cold process: the help, a check, a report up to its PDF.

::

    python -m benchmarks.commands [RUNS]

Each command runs once to warm the disk, then RUNS times (5 unless said
otherwise); printed are the least, the median and the largest of the wall times,
and the stages of the last report as its provenance tells them.
"""

from __future__ import annotations

import json
import subprocess
import sys
import tempfile
from collections.abc import Sequence
from pathlib import Path
from statistics import median
from time import perf_counter

STUDY = Path(__file__).resolve().parents[1] / "sample_data" / "storage_rot.toml"


def seconds_of(arguments: Sequence[str]) -> float:
    """Run the command line in a process of its own; return the wall time."""
    command = [sys.executable, "-m", "reanalysis.cli", *arguments]
    start = perf_counter()
    subprocess.run(command, check=True, stdout=subprocess.DEVNULL)
    return perf_counter() - start


def time_command(name: str, arguments: Sequence[str], runs: int) -> None:
    """Print the wall times of one command."""
    seconds_of(arguments)
    seconds = [seconds_of(arguments) for _ in range(runs)]
    figures = f"{min(seconds):6.2f}  {median(seconds):6.2f}  {max(seconds):6.2f}"
    print(f"{name:<24}{figures} s", flush=True)


def main(runs: int) -> None:
    """Time the three commands and print the stages of the report."""
    print(f"{'':<24} least  median  largest, of {runs} runs")
    time_command("reanalysis --help", ["--help"], runs)
    time_command("reanalysis check", ["check", str(STUDY)], runs)
    with tempfile.TemporaryDirectory() as out:
        time_command("reanalysis report", ["report", str(STUDY), "--out", out], runs)
        record = json.loads((Path(out) / STUDY.stem / "provenance.json").read_text(encoding="utf-8"))
    for name, seconds in record["seconds"].items():
        print(f"  {name:<32} {seconds:7.3f} s")


if __name__ == "__main__":
    main(int(sys.argv[1]) if len(sys.argv) > 1 else 5)
