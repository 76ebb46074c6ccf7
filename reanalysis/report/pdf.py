"""From a `Document` to PDF: the HTML report, laid out on A4."""

from __future__ import annotations

import logging
import os
from collections.abc import Iterator
from contextlib import contextmanager

from weasyprint import HTML
from weasyprint.urls import FatalURLFetchingError, URLFetcher

from reanalysis.errors import Problem, ReportError
from reanalysis.report.blocks import Document
from reanalysis.report.html import render_page

EPOCH = "1767225600"
"""Time stamp written into embedded fonts (1 January 2026), so that equal reports are equal files."""


def render_pdf(document: Document) -> bytes:
    """Return the report as a tagged PDF with bookmarks and embedded fonts.

    Nothing is fetched: the page holds all it needs. Equal documents give equal bytes on
    one installation.

    Raises
    ------
    ReportError
        When the PDF writer reports an error, such as a picture without an alternative text.
    """
    return pdf_from_html(render_page(document, "ttf"), document.title)


def pdf_from_html(html: str, title: str) -> bytes:
    """Lay out a self-contained page; `title` names the report in an error."""
    fetcher = URLFetcher(allowed_protocols=["data"], allow_redirects=False, fail_on_errors=True)
    with _fixed_time(), _errors_of_writer() as errors:
        try:
            content = HTML(string=html, url_fetcher=fetcher).write_pdf(pdf_variant="pdf/ua-1")
        except FatalURLFetchingError as error:
            raise _report_error(title, [str(error)]) from error
    if errors:
        raise _report_error(title, errors)
    return bytes(content)


def _report_error(title: str, findings: list[str]) -> ReportError:
    problems = [
        Problem(
            where=f"PDF of “{title}”",
            found=finding,
            allowed="",
            advice="report this as a fault of reanalysis; the HTML report holds the same content",
        )
        for finding in findings
    ]
    return ReportError(problems)


@contextmanager
def _fixed_time() -> Iterator[None]:
    """Fix the time that font tools write into files, without leaving a trace in the environment."""
    before = os.environ.get("SOURCE_DATE_EPOCH")
    if before is None:
        os.environ["SOURCE_DATE_EPOCH"] = EPOCH
    try:
        yield
    finally:
        if before is None:
            del os.environ["SOURCE_DATE_EPOCH"]


class _Collector(logging.Handler):
    def __init__(self) -> None:
        super().__init__(logging.ERROR)
        self.messages: list[str] = []

    def emit(self, record: logging.LogRecord) -> None:
        # A whole picture can stand in the message as a data URI.
        self.messages.append(record.getMessage()[:300])


@contextmanager
def _errors_of_writer() -> Iterator[list[str]]:
    """Collect what the PDF writer only logs."""
    logger, collector = logging.getLogger("weasyprint"), _Collector()
    logger.addHandler(collector)
    try:
        yield collector.messages
    finally:
        logger.removeHandler(collector)
