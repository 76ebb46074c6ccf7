"""A process of its own for drawing and laying out, warmed up while the analysis runs.

Pictures and pages need libraries that take seconds to load and memory that they
never give back; the analysis needs others. Side by side, neither waits.
"""

from __future__ import annotations

from collections.abc import Sequence
from concurrent.futures import Future, ProcessPoolExecutor
from multiprocessing import get_context
from types import TracebackType

from reanalysis.analysis.result import Analysis

Rendered = dict[str, bytes]


class Renderer:
    """Renders analyses in one separate process, in the order they are handed in."""

    def __init__(self) -> None:
        self._pool = ProcessPoolExecutor(max_workers=1, mp_context=get_context("spawn"))
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


def warm_up() -> None:
    """Load what rendering needs."""
    from reanalysis.report import document, html, pdf  # noqa: F401, PLC0415


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
