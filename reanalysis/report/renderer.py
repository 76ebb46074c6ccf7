"""A process of its own for drawing and laying out, warmed up while the analysis runs.

Pictures and pages need libraries that take seconds to load and memory that they
never give back; the analysis needs others. Side by side, neither waits.
"""

from __future__ import annotations

import signal
import threading
from collections.abc import Iterator, Sequence
from concurrent.futures import Future, ProcessPoolExecutor
from concurrent.futures.process import BrokenProcessPool
from contextlib import contextmanager
from multiprocessing import get_context
from types import TracebackType

from reanalysis.analysis.result import Analysis
from reanalysis.errors import Problem, ReportError

Rendered = dict[str, bytes]


class Renderer:
    """Renders analyses in one separate process, in the order they are handed in."""

    def __init__(self) -> None:
        self._pool = ProcessPoolExecutor(max_workers=1, mp_context=get_context("spawn"))
        with _deaf_to_interrupts():
            self._pool.submit(warm_up)

    def __enter__(self) -> Renderer:
        return self

    def __exit__(
        self, kind: type[BaseException] | None, error: BaseException | None, trace: TracebackType | None
    ) -> None:
        self._pool.shutdown(wait=kind is None, cancel_futures=True)

    def submit(self, analysis: Analysis, formats: Sequence[str]) -> Future[Rendered]:
        """Render an analysis; the future gives the files' contents by format."""
        return self._pool.submit(render, analysis, tuple(formats))


def collect(pages: Future[Rendered]) -> Rendered:
    """Wait for the rendered files.

    Raises
    ------
    ReportError
        When the rendering process is gone.
    """
    try:
        return pages.result()
    except BrokenProcessPool as error:
        raise ReportError(
            Problem(
                where="report.html and report.pdf",
                found="the process that lays out the pages was killed, probably for want of memory",
                allowed="",
                advice="free some memory, report fewer studies at once, or ask for --formats json,csv",
            )
        ) from error


@contextmanager
def _deaf_to_interrupts() -> Iterator[None]:
    """Start a process in here that ignores Ctrl-C: a terminal sends it to all, and one has to answer."""
    if threading.current_thread() is not threading.main_thread():
        yield  # signals can be set in the main thread only
        return
    before = signal.signal(signal.SIGINT, signal.SIG_IGN)
    try:
        yield
    finally:
        signal.signal(signal.SIGINT, before)


def warm_up() -> None:
    """Load what rendering needs, by rendering a page of no consequence."""
    from reanalysis.report import document  # noqa: F401
    from reanalysis.report.blocks import Document, Figure, Section, StatusLine
    from reanalysis.report.figures.paired import PairedRow, draw_small_pair, paired_data
    from reanalysis.report.figures.style import Bar, CoredBar
    from reanalysis.report.pdf import render_pdf

    row = PairedRow("effect", Bar(1.0, 0.0, 2.0), CoredBar(1.0, 0.0, 2.0, 0.5, 1.5), 0.5)
    figure = Figure(None, "", "warm-up", draw_small_pair(paired_data([row], "effect")))
    status = StatusLine("sound", "", "")
    render_pdf(Document("warm-up", "", "", "en-GB", status, (Section("a", "a", (figure,)),)))


def render(analysis: Analysis, formats: tuple[str, ...]) -> Rendered:
    """Render an analysis as ``html`` and ``pdf``, as far as they are among `formats`."""
    wanted = [name for name in ("html", "pdf") if name in formats]
    if not wanted:
        return {}
    from reanalysis.report.document import build_document
    from reanalysis.report.html import render_html
    from reanalysis.report.pdf import pdf_from_html

    document = build_document(analysis)
    page = render_html(document)
    rendered = {"html": page.encode()}
    if "pdf" in formats:
        rendered["pdf"] = pdf_from_html(page, document.title)
    return {name: rendered[name] for name in wanted}
