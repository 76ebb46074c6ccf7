"""From a `Document` to one self-contained HTML file."""

from __future__ import annotations

import base64
from collections.abc import Iterator
from functools import cache

from jinja2 import Environment, FileSystemLoader, StrictUndefined, Template
from markupsafe import Markup

from reanalysis.report.blocks import Answer, Block, Cell, Document, RichText, SpanningCell, Table, plain_text
from reanalysis.report.fonts import Container, font_face_css, templates_folder

RUNNING_LENGTH = 90
"""Characters of the title that fit at the foot of a page."""
SHORT = 12
"""Characters of a cell that are never broken over two lines."""


def render_html(document: Document) -> str:
    """Return the report as HTML that needs nothing else: fonts, pictures and styles are inside.

    All text of the document is escaped. Equal documents give equal text.

    Parameters
    ----------
    document : Document

    Returns
    -------
    str
        A whole HTML page; the same page is laid out as PDF by `reanalysis.report.pdf`.

    Raises
    ------
    ReportError
        When the templates are not installed.
    """
    return render_page(document, "woff2")


def render_page(document: Document, container: Container) -> str:
    """Return the page of `render_html` with its fonts in a chosen container."""
    folder = templates_folder()
    styles = {
        f"{name}_css": Markup((folder / f"{name}.css").read_text(encoding="utf-8"))  # noqa: S704 - our own file
        for name in ("report", "screen", "print")
    }
    answers = sum(isinstance(block, Answer) for section in document.sections[:1] for block in section.blocks)
    return _template().render(
        document=document,
        answers=answers,
        running_title=_shorten(document.title),
        font_css=Markup(font_face_css(container)),  # noqa: S704 - base64 of our own files
        **styles,
    )


@cache
def _template() -> Template:
    environment = Environment(
        loader=FileSystemLoader(templates_folder()), autoescape=True, undefined=StrictUndefined
    )
    environment.globals.update(name_of=_name_of, cells_of=_cells_of, base64_of=_base64_of)
    return environment.get_template("report.html")


def _name_of(block: Block) -> str:
    return type(block).__name__


def _cells_of(table: Table, row: tuple[Cell, ...]) -> Iterator[tuple[RichText, int, str]]:
    """Give text, span and CSS class of each cell of a row."""
    position = 0
    for cell in row:
        if isinstance(cell, SpanningCell):
            yield cell.text, cell.span, "words"
            position += cell.span
        else:
            short = " short" if len(plain_text(cell)) <= SHORT else ""
            yield cell, 1, table.columns[position].align + short
            position += 1


def _base64_of(text: str) -> str:
    return base64.b64encode(text.encode()).decode("ascii")


def _shorten(title: str) -> str:
    if len(title) <= RUNNING_LENGTH:
        return title
    return f"{title[:RUNNING_LENGTH].rsplit(' ', 1)[0]} …"
