"""Numbers only, many small studies of one structure in one warm process, beside the plain loop.

::

    python -m benchmarks.throughput [STUDIES [STUDIES_OF_THE_LOOP]]

Both run in this process, one after the other, on the same studies; imports are
not counted, compilation is. Each study of this package is read from its files,
analysed under three prior sets with one question, its sweep and power-scaling,
and written as `results.json`: more than the loop does.
"""

from __future__ import annotations

import sys
import tempfile
from collections import Counter
from collections.abc import Sequence
from pathlib import Path
from time import perf_counter

from benchmarks.baseline import CORES, FORMULA, SmallStudy, make_studies
from benchmarks.baseline import run as run_plain_loop
from reanalysis.analysis.run import analyse
from reanalysis.bayesian.model import ModelStore
from reanalysis.progress import StageClock
from reanalysis.report.write import write_report
from reanalysis.study.read import load_study

STUDY = f"""
title = "Benchmark"
[data]
file = "{{name}}.csv"
[model]
formula = "{FORMULA}"
family = "gaussian"
[[question]]
name = "First predictor"
effect = "x1"
direction = "greater"
matters_beyond = 0.2
"""


def write_studies(studies: Sequence[SmallStudy], folder: Path) -> list[Path]:
    """Write each study's data and study file; return the study files."""
    paths = []
    for study in studies:
        study.table.to_csv(folder / f"{study.name}.csv", index=False)
        path = folder / f"{study.name}.toml"
        path.write_text(STUDY.format(name=study.name), encoding="utf-8")
        paths.append(path)
    return paths


def run_package(paths: Sequence[Path], out: Path) -> tuple[list[float], Counter[str]]:
    """Analyse and write each study; return the seconds of each and the time of each stage."""
    store = ModelStore()
    seconds, stages = [], Counter[str]()
    for path in paths:
        clock = StageClock()
        start = perf_counter()
        with clock.stage("study file"):
            study = load_study(path)
        analysis = analyse(study, store=store, cores=CORES, stages=clock)
        with clock.stage("results.json"):
            write_report(analysis, out, formats=("json",))
        seconds.append(perf_counter() - start)
        stages.update(clock.seconds)
    return seconds, stages


def main(count: int, loop_count: int) -> None:
    """Print both figures, their ratio, and where the time goes."""
    studies = make_studies(count)
    with tempfile.TemporaryDirectory() as name:
        folder = Path(name)
        seconds, stages = run_package(write_studies(studies, folder), folder / "out")
    ours = sum(seconds) / count
    print(f"this package: {ours:.2f} s a study, {count} studies (first {seconds[0]:.1f} s,", end=" ")
    print(f"then {sum(seconds[1:]) / max(count - 1, 1):.2f} s)")
    for stage, total in stages.most_common():
        print(f"  {stage:<32} {total / count:7.3f} s a study")
    loop = run_plain_loop(studies[:loop_count])
    print(f"plain loop:   {loop:.2f} s a study, {loop_count} studies")
    print(f"throughput:   {loop / ours:.1f} times the plain loop's")


if __name__ == "__main__":
    wanted = [int(text) for text in sys.argv[1:]]
    main(wanted[0] if wanted else 30, wanted[1] if len(wanted) > 1 else 5)
