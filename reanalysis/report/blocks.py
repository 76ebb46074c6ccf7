"""The parts of a report as plain data: every text is final, nothing is left to compute.

A `Document` is rendered by `reanalysis.report.html` and `reanalysis.report.pdf`, which
only arrange it. No block ever holds HTML: a text is a plain string or a tuple of runs.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field
from typing import Literal

Analysis = Literal["frequentist", "bayesian", "none"]
Align = Literal["left", "right", "centre", "whole"]
"""Of a column's cells; ``whole`` is left, and never broken over lines."""

MAX_ROWS = 60
"""Rows that a table of the report may show; layout costs some 6 ms a row in a PDF."""


@dataclass(frozen=True, slots=True)
class Text:
    """A plain run."""

    text: str


@dataclass(frozen=True, slots=True)
class Strong:
    """A run that must not be overlooked (semibold)."""

    text: str


@dataclass(frozen=True, slots=True)
class Emphasis:
    """A run set apart, such as a formula or a term when first used (italic)."""

    text: str


Run = Text | Strong | Emphasis
RichText = str | tuple[Run, ...]
"""A text: a plain string, or runs with light emphasis."""


def plain_text(text: RichText) -> str:
    """Return a text without its emphasis."""
    return text if isinstance(text, str) else "".join(run.text for run in text)


@dataclass(frozen=True, slots=True)
class Lead:
    """The opening words of a section, set larger."""

    text: RichText


@dataclass(frozen=True, slots=True)
class Paragraph:
    """A paragraph of prose."""

    text: RichText


@dataclass(frozen=True, slots=True)
class Subheading:
    """A heading inside a section."""

    text: str


@dataclass(frozen=True, slots=True)
class Aside:
    """A remark beside the argument, marked by a bar: what to tell a sceptic."""

    heading: str
    text: RichText


@dataclass(frozen=True, slots=True)
class Figure:
    """A numbered picture.

    Attributes
    ----------
    number : int or None
        None for the small pictures of page 1, which have no caption either.
    caption : str or tuple of runs
        Begins with what the picture shows, ends with what follows from it; empty without a number.
    alt : str
        What the picture says, for a reader who cannot see it. Never empty.
    svg : str
        The drawing, from `reanalysis.report.figures`.
    """

    number: int | None
    caption: RichText
    alt: str
    svg: str

    def __post_init__(self) -> None:
        if not self.alt.strip():
            raise ValueError("a figure needs an alternative text")


@dataclass(frozen=True, slots=True)
class Reading:
    """What one analysis says about a question: the term in the analysis' colour, then a sentence or two."""

    kind: Literal["frequentist", "bayesian", "prior", "plain"]
    term: str
    text: RichText


@dataclass(frozen=True, slots=True)
class Answer:
    """The answer to one question, on page 1.

    Attributes
    ----------
    heading : str
        The question's name.
    sentence : str or tuple of runs
        The answer in one sentence.
    picture : Figure or None
        The small pair of intervals.
    readings : tuple of Reading
        At most four.
    """

    heading: str
    sentence: RichText
    picture: Figure | None
    readings: tuple[Reading, ...]


@dataclass(frozen=True, slots=True)
class TableColumn:
    """A column of a table; its heading takes the analysis' colour."""

    heading: str
    analysis: Analysis = "none"
    align: Align = "left"


@dataclass(frozen=True, slots=True)
class ColumnGroup:
    """A heading over `span` neighbouring columns; an empty heading leaves them without one."""

    heading: str
    analysis: Analysis
    span: int


@dataclass(frozen=True, slots=True)
class SpanningCell:
    """Words in the place of `span` cells: why there are no numbers."""

    text: RichText
    span: int


Cell = RichText | SpanningCell


@dataclass(frozen=True, slots=True)
class Table:
    """A numbered table; the first cell of each row is the row's heading.

    Attributes
    ----------
    number : int or None
        None leaves the number out.
    caption : str or tuple of runs
    columns : tuple of TableColumn
    rows : tuple of tuple of cells
        At most `MAX_ROWS`; see `cap_rows`.
    groups : tuple of ColumnGroup
        Empty, or covering all columns.
    note : str or tuple of runs
        Small print under the table; may be empty.
    csv_hint : str
        What was left out and where it is; empty when the table is complete.
    """

    number: int | None
    caption: RichText
    columns: tuple[TableColumn, ...]
    rows: tuple[tuple[Cell, ...], ...]
    groups: tuple[ColumnGroup, ...] = ()
    note: RichText = ""
    csv_hint: str = ""

    def __post_init__(self) -> None:
        width = len(self.columns)
        if self.groups and sum(group.span for group in self.groups) != width:
            raise ValueError(f"the groups of a table must cover its {width} columns")
        if len(self.rows) > MAX_ROWS:
            raise ValueError(f"a table shows at most {MAX_ROWS} rows, got {len(self.rows)}: use cap_rows")
        for row in self.rows:
            cells = sum(cell.span if isinstance(cell, SpanningCell) else 1 for cell in row)
            if cells != width:
                raise ValueError(f"a row of {cells} cells in a table of {width} columns")


def cap_rows(rows: Sequence[tuple[Cell, ...]], file: str) -> tuple[tuple[tuple[Cell, ...], ...], str]:
    """Return the rows that a table may show and the sentence about the others (empty when there are none).

    Parameters
    ----------
    rows : sequence of rows
    file : str
        Name of the file that holds all rows, such as ``estimates.csv``.
    """
    if len(rows) <= MAX_ROWS:
        return tuple(rows), ""
    return tuple(rows[:MAX_ROWS]), f"The first {MAX_ROWS} of {len(rows)} rows; all of them are in {file}."


@dataclass(frozen=True, slots=True)
class Definition:
    """A term and what it means."""

    term: str
    text: RichText


@dataclass(frozen=True, slots=True)
class Definitions:
    """Terms and their meanings: a glossary, settings, versions."""

    items: tuple[Definition, ...]


@dataclass(frozen=True, slots=True)
class Listing:
    """A list in small print, such as references."""

    items: tuple[RichText, ...]


@dataclass(frozen=True, slots=True)
class Code:
    """Text to be copied, set as it is: a study file, a call, a methods paragraph.

    Attributes
    ----------
    heading : str
        Short label above the text; may be empty.
    text : str
        May hold line breaks.
    style : str
        ``fixed`` for files and commands, ``prose`` for a paragraph to paste.
    """

    heading: str
    text: str
    style: Literal["fixed", "prose"] = "fixed"


Block = Lead | Paragraph | Subheading | Aside | Answer | Table | Figure | Definitions | Listing | Code
"""Anything that a section can hold."""


@dataclass(frozen=True, slots=True)
class Section:
    """A part of the report.

    Attributes
    ----------
    id : str
        Anchor: lower-case letters, digits and hyphens; unique in the document.
    heading : str
    blocks : tuple of Block
    """

    id: str
    heading: str
    blocks: tuple[Block, ...]


@dataclass(frozen=True, slots=True)
class StatusLine:
    """Whether the reader may rely on the report: the words first, then the explanation."""

    kind: Literal["sound", "doubtful", "failed"]
    words: str
    text: RichText


@dataclass(frozen=True, slots=True)
class Document:
    """A whole report.

    Attributes
    ----------
    title, kicker, byline : str
        The title; the line above it; the line below it (may be empty).
    language : str
        Of the text, such as ``en-GB``.
    status : StatusLine
    sections : tuple of Section
        The first one holds the answers and follows the status line without a heading of its own.
    cautions : tuple of texts
        Printed below the answers.
    """

    title: str
    kicker: str
    byline: str
    language: str
    status: StatusLine
    sections: tuple[Section, ...]
    cautions: tuple[RichText, ...] = field(default=())

    def __post_init__(self) -> None:
        anchors = [section.id for section in self.sections]
        if len(set(anchors)) != len(anchors):
            raise ValueError("the ids of a document's sections must differ")
