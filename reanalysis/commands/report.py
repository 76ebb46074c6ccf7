"""`reanalysis report`: analyse studies and write one folder for each."""

from __future__ import annotations

import json
import sys
from collections.abc import Sequence
from concurrent.futures import Future
from contextlib import AbstractContextManager, nullcontext
from dataclasses import dataclass
from itertools import chain
from pathlib import Path
from typing import TYPE_CHECKING

from reanalysis.commands.errors import print_error
from reanalysis.commands.exit_codes import EXIT_INVALID, EXIT_OK, EXIT_UNSOUND
from reanalysis.commands.watch import TerminalClock
from reanalysis.errors import Problem, ReanalysisError, UsageError
from reanalysis.report.formats import PAGES
from reanalysis.study.read import load_study
from reanalysis.study.spec import Study

if TYPE_CHECKING:
    from reanalysis.analysis.result import Analysis
    from reanalysis.report.renderer import Rendered, Renderer


@dataclass(frozen=True, slots=True)
class ReportOptions:
    """What the command line asked for."""

    out: Path
    formats: tuple[str, ...]
    allow_outside: bool
    cores: int
    machine: bool


@dataclass(frozen=True, slots=True)
class _Analysed:
    """A study whose pages may still be on their way."""

    study: Study
    analysis: Analysis
    pages: Future[Rendered] | None
    clock: TerminalClock


@dataclass(frozen=True, slots=True)
class _Outcome:
    """What became of one study."""

    study: str
    folder: str
    status: str
    code: int


def run_report(paths: Sequence[Path], options: ReportOptions) -> int:
    """Analyse each study and write its folder; return the exit code.

    A study with invalid input is reported and leaves nothing behind; the others are finished.
    """
    studies, outcomes = _load_all(paths, options)
    if studies:
        with _renderer(options) as renderer:
            analysed = _analyse_all(studies, options, renderer)
            outcomes += [one if isinstance(one, _Outcome) else _write(one, options) for one in analysed]
    _summarise(outcomes, options)
    return max((outcome.code for outcome in outcomes), default=EXIT_OK)


def _load_all(paths: Sequence[Path], options: ReportOptions) -> tuple[list[Study], list[_Outcome]]:
    studies: dict[str, Study] = {}
    outcomes = []
    for path in paths:
        try:
            study = load_study(path, allow_outside=options.allow_outside)
            if study.name in studies:
                raise UsageError(_same_name(study, studies[study.name]))
        except ReanalysisError as error:
            outcomes.append(_invalid(path.stem, path.name, error))
            continue
        studies[study.name] = study
    return list(studies.values()), outcomes


def _renderer(options: ReportOptions) -> AbstractContextManager[Renderer | None]:
    if not any(page in options.formats for page in PAGES):
        return nullcontext()
    from reanalysis.report.renderer import Renderer

    return Renderer()


def _analyse_all(
    studies: Sequence[Study], options: ReportOptions, renderer: Renderer | None
) -> list[_Analysed | _Outcome]:
    first = TerminalClock()  # loading counts for the first study
    with first.stage("loading libraries"):
        from reanalysis.analysis.run import analyse
        from reanalysis.bayesian.model import ModelStore
        from reanalysis.report.write import check_place
    store = ModelStore()
    results: list[_Analysed | _Outcome] = []
    for study, clock in zip(studies, chain([first], (TerminalClock() for _ in studies)), strict=False):
        clock.heading(study.path.name)
        try:
            check_place(options.out / study.name)
            analysis = analyse(study, store=store, cores=options.cores, stages=clock)
        except ReanalysisError as error:
            results.append(_invalid(study.name, study.path.name, error))
            continue
        pages = None if renderer is None else renderer.submit(analysis, options.formats)
        results.append(_Analysed(study, analysis, pages, clock))
    return results


def _write(analysed: _Analysed, options: ReportOptions) -> _Outcome:
    from reanalysis.report.renderer import collect
    from reanalysis.report.write import write_report

    study, clock = analysed.study, analysed.clock
    try:
        with clock.stage("pictures and pages"):
            rendered = {} if analysed.pages is None else collect(analysed.pages)
        folder = write_report(
            analysed.analysis, options.out, formats=options.formats, seconds=clock.seconds, rendered=rendered
        )
    except ReanalysisError as error:
        print_error(study.path.name, error)
        return _Outcome(study.name, "", "failed", EXIT_UNSOUND)
    status = analysed.analysis.status.verdict
    return _Outcome(study.name, str(folder), status, EXIT_OK if status == "sound" else EXIT_UNSOUND)


def _invalid(name: str, file: str, error: ReanalysisError) -> _Outcome:
    print_error(file, error)
    return _Outcome(name, "", "invalid input", EXIT_INVALID)


def _same_name(study: Study, other: Study) -> Problem:
    return Problem(
        where=str(study.path),
        found=f"its folder would be called {study.name}, like that of {other.path}",
        allowed="study files of different names in one run",
        advice="rename one of the files, or run them into different --out folders",
    )


def _summarise(outcomes: Sequence[_Outcome], options: ReportOptions) -> None:
    if options.machine:
        rows = [
            {"study": one.study, "folder": one.folder, "status": one.status, "exit": one.code}
            for one in outcomes
        ]
        sys.stdout.write(json.dumps(rows, indent=1) + "\n")
        return
    for one in outcomes:
        place = f" -> {one.folder}" if one.folder else ""
        sys.stdout.write(f"{one.study}: {one.status}{place}\n")
