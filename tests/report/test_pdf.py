"""The report as PDF."""

from __future__ import annotations

import io
import os
from dataclasses import replace

import pytest
from pypdf import PdfReader

from reanalysis.errors import ReportError
from reanalysis.report import blocks as b
from reanalysis.report.pdf import pdf_from_html, render_pdf

pytestmark = pytest.mark.render


@pytest.fixture(scope="module")
def reader(pdf):
    """The demonstration report, opened."""
    return PdfReader(io.BytesIO(pdf))


@pytest.fixture(scope="module")
def texts(reader):
    """The text of each page."""
    return [page.extract_text() for page in reader.pages]


def _tags(node, found):
    """All structure types of a tagged PDF, in order."""
    node = node.get_object() if hasattr(node, "get_object") else node
    if isinstance(node, list):
        for kid in node:
            _tags(kid, found)
    elif isinstance(node, dict):
        if "/S" in node:
            found.append((node["/S"], node.get("/Alt")))
        if "/K" in node:
            _tags(node["/K"], found)
    return found


def test_pages_are_a4_and_few(reader):
    """210 by 297 mm; the demonstration report fits eight pages."""
    sizes = {tuple(round(float(side) / 72 * 25.4) for side in page.mediabox[2:]) for page in reader.pages}
    assert sizes == {(210, 297)}
    assert len(reader.pages) == 8


def test_three_answers_their_cautions_and_the_contents_fit_page_1(texts):
    """Page 1 answers; the rest proves."""
    first, second = texts[:2]
    for words in (
        "Film liner against no liner",
        "Each further day in store",
        "proof of cause",
        "For the record",
    ):
        assert words in first
    assert second.lstrip().startswith("Side by side")


def test_pages_are_numbered_and_name_the_report(texts):
    """Page 1 has its number only; the others have the running title as well."""
    assert all(f"{k} / 8" in text for k, text in enumerate(texts, start=1))
    assert texts[0].count("Do liner bags keep stored apples firm?") == 1
    assert all("Do liner bags keep stored apples firm?" in text for text in texts[1:])


def test_the_contents_know_their_pages(texts):
    """Page numbers of the contents are those where the sections begin."""
    for heading in ("Side by side", "Does the model fit?", "For the record"):
        # From page 2 on: page 1 names all sections itself.
        page = next(k for k, text in enumerate(texts[1:], start=2) if heading in text)
        assert f"{heading} {page}" in texts[0]


def test_the_pdf_is_tagged(reader):
    """Language, title, headings, tables with heads and captions, and a text for every picture."""
    root = reader.trailer["/Root"]
    tags = _tags(root["/StructTreeRoot"]["/K"], [])
    kinds = {kind for kind, _ in tags}
    assert root["/Lang"] == "en-GB"
    assert root["/MarkInfo"]["/Marked"]
    assert reader.metadata.title == "Do liner bags keep stored apples firm?"
    assert {"/H1", "/H2", "/H3", "/Table", "/THead", "/TH", "/TD", "/Caption", "/Figure"} <= kinds
    pictures = [alt for kind, alt in tags if kind == "/Figure" and alt]
    assert len(pictures) == 13


def test_bookmarks_follow_the_sections(reader):
    """The outline holds the title, below it the sections, below them the questions."""
    title, below = reader.outline
    sections = [entry.title for entry in below if not isinstance(entry, list)]
    assert title.title == "Do liner bags keep stored apples firm?"
    assert sections == [
        "The answers", "Side by side", "How sure, how big", "Does the prior matter?", "Does the model fit?",
        "Can the computation be trusted?", "For the record",
    ]  # fmt: skip


def test_all_fonts_are_embedded_and_ours(reader):
    """No page needs a font of the reader's machine."""
    names = set()
    for page in reader.pages:
        for font in page["/Resources"]["/Font"].values():
            descendant = font.get_object()["/DescendantFonts"][0].get_object()
            names.add(str(descendant["/BaseFont"]).partition("+")[2])
            descriptor = descendant["/FontDescriptor"].get_object()
            assert {"/FontFile2", "/FontFile3"} & set(descriptor)
    assert all(name.startswith("Reanalysis") for name in names)


def test_long_tables_repeat_their_heads(texts):
    """Each page of a long table says what its columns are."""
    rows = [text for text in texts if "against orchard 00" in text]
    assert len(rows) >= 2
    assert all("Least squares" in text and "P(above 0)" in text for text in rows)
    assert any("The first 60 of 77 rows; all of them are in estimates.csv." in text for text in rows)


def test_equal_reports_are_equal_files(pdf, document, monkeypatch, caplog):
    """Same bytes again, no word of warning, and the clock setting of the environment is as it was."""
    monkeypatch.delenv("SOURCE_DATE_EPOCH", raising=False)
    with caplog.at_level("WARNING", logger="weasyprint"):
        again = render_pdf(document)
    assert again == pdf
    assert [record.getMessage() for record in caplog.records] == []
    assert "SOURCE_DATE_EPOCH" not in os.environ


def test_a_clock_that_is_set_stays_set(document, monkeypatch):
    """A build that fixes the time itself keeps its own time."""
    monkeypatch.setenv("SOURCE_DATE_EPOCH", "1000000000")
    render_pdf(_tiny(document))
    assert os.environ["SOURCE_DATE_EPOCH"] == "1000000000"


def _tiny(document, *blocks):
    sections = (b.Section("answer", "The answers", ()), b.Section("more", "More", blocks))
    return replace(document, sections=sections)


def test_hostile_text_is_printed_as_text(document):
    """Markup in a title reaches the page as it was written."""
    page = PdfReader(io.BytesIO(render_pdf(replace(_tiny(document), title="<script>x</script>")))).pages[0]
    assert "<script>x</script>" in page.extract_text()


@pytest.mark.parametrize(
    "markup",
    ['<img alt="x" src="file:///etc/hostname">', '<link rel="attachment" href="file:///etc/hostname">'],
)
def test_nothing_is_fetched(markup):
    """A reference to a file of the machine stops the report."""
    with pytest.raises(ReportError, match="file:///etc/hostname"):
        pdf_from_html(f"<html lang=en><title>t</title><body><p>x</p>{markup}</body>", "t")


def test_a_picture_without_words_stops_the_report():
    """What the PDF writer merely logs is an error here."""
    image = '<img src="data:image/svg+xml;base64,PHN2ZyB4bWxucz0iaHR0cDovL3d3dy53My5vcmcvMjAwMC9zdmciLz4=">'
    with pytest.raises(ReportError, match="no required alt description"):
        pdf_from_html(f"<html lang=en><title>t</title><body><p>x</p>{image}</body>", "t")
