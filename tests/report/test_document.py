"""The whole report as plain data: what stands in it, in which order, and what must never stand in it."""

from __future__ import annotations

import re
from collections.abc import Iterator
from dataclasses import fields, is_dataclass, replace

import pytest

from reanalysis.report.blocks import (
    Answer,
    Block,
    Definitions,
    Document,
    Figure,
    Listing,
    SpanningCell,
    Table,
    plain_text,
)
from reanalysis.report.document import build_document
from reanalysis.report.html import render_html
from reanalysis.report.wording import CAUTIONS

STUDIES = {
    "sample_data/firmness": 2,
    "sample_data/storage_rot": 1,
    "sample_data/spots": 1,
    "tests/studies/pears": 1,
    "tests/studies/separated": 2,
    "tests/studies/improper": 2,
}
"""Studies with the number of their questions."""

SECTIONS = ["answer", "side-by-side", "size", "prior", "fit", "computation", "record"]

_DOCUMENTS: dict[str, Document] = {}


@pytest.fixture
def report(analysed):
    """Return a function that builds a study's report, once a session: its pictures take a second."""

    def build(study: str) -> Document:
        if study not in _DOCUMENTS:
            _DOCUMENTS[study] = build_document(analysed(study))
        return _DOCUMENTS[study]

    return build


def blocks(document: Document) -> Iterator[Block]:
    """Every block, in the reader's order."""
    for section in document.sections:
        yield from section.blocks


def section(document: Document, anchor: str) -> tuple[Block, ...]:
    """The blocks of one section."""
    return next(one.blocks for one in document.sections if one.id == anchor)


def texts(part: object) -> Iterator[str]:
    """Every text of a part of a report; drawings are left out."""
    if isinstance(part, str):
        yield part
    elif (
        isinstance(part, tuple)
        and part
        and all(hasattr(run, "text") and len(fields(run)) == 1 for run in part)
    ):
        yield plain_text(part)
    elif isinstance(part, tuple):
        for one in part:
            yield from texts(one)
    elif is_dataclass(part):
        for one in fields(part):
            if one.name not in {"svg", "align", "analysis", "kind", "style", "id"}:
                yield from texts(getattr(part, one.name))


@pytest.mark.parametrize("study", STUDIES)
def test_sections_in_order(report, study: str) -> None:
    """A study with questions has every section, in the reader's order, and an answer for each question."""
    document = report(study)

    assert [one.id for one in document.sections] == SECTIONS
    answers = [block for block in section(document, "answer") if isinstance(block, Answer)]
    assert len(answers) == STUDIES[study]
    assert all(len(answer.readings) == 4 for answer in answers)
    assert document.cautions == CAUTIONS


@pytest.mark.parametrize("study", STUDIES)
def test_running_numbers(report, study: str) -> None:
    """Tables and figures are numbered from one without a gap, in the order in which they stand."""
    for kind in (Table, Figure):
        found = [block.number for block in blocks(report(study)) if isinstance(block, kind)]
        assert found == list(range(1, len(found) + 1))
        assert len(found) >= 3


@pytest.mark.parametrize("study", STUDIES)
def test_every_picture_is_told(report, study: str) -> None:
    """Each picture, the small ones of page 1 included, has words for a reader who cannot see it."""
    pictures = [block for block in blocks(report(study)) if isinstance(block, Figure)]
    pictures += [block.picture for block in blocks(report(study)) if isinstance(block, Answer)]
    for picture in pictures:
        assert len(picture.alt.split()) >= 6
        assert picture.svg.lstrip().startswith(("<?xml", "<svg"))
        assert (picture.number is None) == (plain_text(picture.caption) == "")


@pytest.mark.parametrize("study", STUDIES)
def test_texts_are_clean(report, study: str) -> None:
    """No text shows an inside of ours, an empty number, two spaces or two full stops in a row."""
    found = list(texts(report(study)))
    faults = (
        r"\bNone\b",
        r"\bnan\b",
        r"\binf\b",
        r"  ",
        r"\.\.",
        r"\{\w*\}",
        r"\(\)",
        r" [.,;:]",
        r"<\w+ object",
    )

    assert len(found) > 150
    assert [text for text in found for fault in faults if re.search(fault, text)] == []


@pytest.mark.parametrize("study", STUDIES)
def test_captions_and_notes_are_sentences(report, study: str) -> None:
    """Each caption of a table or figure ends with a full stop."""
    captions = [
        plain_text(block.caption) for block in blocks(report(study)) if isinstance(block, Table | Figure)
    ]

    assert [caption for caption in captions if not caption.endswith(".")] == []


@pytest.mark.parametrize(
    ("study", "kind", "words", "fragments"),
    [
        ("sample_data/firmness", "sound", "Nothing here should stop you", ["92 of 96 rows", "firmness in 4"]),
        ("sample_data/spots", "sound", "Nothing here should stop you", ["All 240 rows were used."]),
        (
            "tests/studies/separated",
            "doubtful",
            "with care",
            ["No maximum-likelihood estimate exists", "flat prior set"],
        ),
        (
            "tests/studies/improper",
            "failed",
            "Do not rely",
            ["There is no posterior under the flat prior set"],
        ),
    ],
)
def test_status_line(report, study: str, kind: str, words: str, fragments: list[str]) -> None:
    """The line before everything else says whether to rely on the report, and why not."""
    status = report(study).status

    assert status.kind == kind
    assert words in status.words
    assert all(fragment in plain_text(status.text) for fragment in fragments)


@pytest.mark.parametrize("study", ["tests/studies/separated", "tests/studies/improper", "sample_data/spots"])
def test_status_comes_before_any_answer(report, study: str) -> None:
    """On the page, the status line stands above the first answer, and every caution below it."""
    page = re.sub(r"data:[^\"']*", "", render_html(report(study)))

    places = [
        page.index(report(study).status.words),
        page.index(report(study).sections[0].blocks[-1].heading),
    ]
    assert places == sorted(places)
    assert all(page.count(str(caution)) >= 1 for caution in CAUTIONS)


def numbers_in(text: str) -> list[float]:
    """The numbers of a text."""
    plain = text.replace("\u202f", "").replace("\u2212", "-")
    return [float(number) for number in re.findall(r"-?\d+(?:\.\d+)?", plain)]


def test_separated_effect_has_no_giant_number(report) -> None:
    """Where no estimate exists, the words say so and no table or picture holds a runaway number."""
    document = report("tests/studies/separated")
    answer, _ = section(document, "answer")

    assert "The data alone give no estimate" in plain_text(answer.sentence)
    assert plain_text(answer.readings[0].text).startswith("No estimate exists: separated: all 20 rows")
    cells = [
        cell
        for block in blocks(document)
        if isinstance(block, Table)
        for row in block.rows
        for cell in row[1:]
    ]
    shown = [
        number for cell in cells if isinstance(cell, str) and "ESS" not in cell for number in numbers_in(cell)
    ]
    tables = [block for block in section(document, "side-by-side") if isinstance(block, Table)]
    spray = next(row for row in tables[0].rows if "Sulphur" in str(row[0]))
    assert [cell.span for cell in spray if isinstance(cell, SpanningCell)] == [3]
    assert (
        max(
            number
            for row in tables[0].rows
            for cell in row
            if isinstance(cell, str)
            for number in numbers_in(cell)
        )
        < 20.0
    )
    assert len(shown) > 20
    assert "×" not in " ".join(texts(document))


def test_failed_main_prior_shows_no_number_of_its_own(report) -> None:
    """Where the main prior set gave no posterior, every place for its numbers holds the reason instead."""
    document = report("tests/studies/improper")
    answers = [block for block in section(document, "answer") if isinstance(block, Answer)]
    for answer in answers:
        assert (
            plain_text(answer.sentence)
            == "This question cannot be answered here: there is no trustworthy posterior."
        )
        assert plain_text(answer.readings[1].text).startswith("No posterior: it would be improper")
        assert "credible" not in answer.picture.alt
    for anchor in ("side-by-side", "size"):
        (table,) = (block for block in section(document, anchor) if isinstance(block, Table))
        for row in table.rows:
            assert isinstance(row[-1], SpanningCell)
            assert plain_text(row[-1].text).startswith("no posterior")
    flat = [
        row
        for block in section(document, "prior")
        if isinstance(block, Table)
        for row in block.rows
        if row[0] == "flat"
    ]
    assert [plain_text(row[-1].text) for row in flat] == ["no posterior"] * 2
    headings = {plain_text(block.caption) for block in blocks(document) if isinstance(block, Figure)}
    assert not any(
        "posterior under the flat" in heading or "replicated from" in heading for heading in headings
    )


def test_study_without_questions(analysed) -> None:
    """Without a question the sections about questions are absent, and the report says so."""
    whole = analysed("tests/studies/pears")
    document = build_document(replace(whole, questions=(), prepared=replace(whole.prepared, questions=())))

    assert [one.id for one in document.sections] == ["answer", "side-by-side", "fit", "computation", "record"]
    (lead,) = section(document, "answer")
    assert plain_text(lead.text).startswith("The study file asks no question")
    assert document.byline.endswith("28 rows · 0 questions")
    for kind in (Table, Figure):
        found = [block.number for block in blocks(document) if isinstance(block, kind)]
        assert found == list(range(1, len(found) + 1))


def test_record_lists_everything(report, analysed) -> None:
    """Checksums, every prior, versions, references and cautions are there for the record."""
    study = "sample_data/firmness"
    record = section(report(study), "record")
    text = " ".join(texts(record))

    assert analysed(study).prepared.source.sha256 in text
    assert "firmness ~ liner + days" in text
    assert "seed 20251124" in text
    assert "bambi" in text
    assert all(caution in text for caution in CAUTIONS)
    assert any(isinstance(block, Listing) for block in record)
    assert any(isinstance(block, Definitions) for block in record)
    priors = [row for block in record if isinstance(block, Table) for row in block.rows if len(row) == 4]
    weak = [row[1] for row in priors if row[0] == "weak"]
    assert weak == ["Intercept", "liner[film]", "liner[foam]", "days", "sigma"]
    informed = next(row for row in priors if row[:2] == ("informed", "liner[film]"))
    assert numbers_in(informed[2]) == [4.5, 2.4]


def test_headings_name_the_study(report) -> None:
    """Title and byline come from the study file."""
    document = report("sample_data/firmness")

    assert document.title == "Do liner bags keep stored apples firm?"
    assert document.byline == (
        "Prepared for Calder Vale Growers · Quality office, Calder Vale Growers · 2025-11-24"
        " · 92 rows · 2 questions"
    )
    assert document.language == "en-GB"


def test_a_study_without_questions_still_shows_its_coefficients(analysed) -> None:
    """The picture of the side-by-side section then holds every coefficient but the intercept."""
    analysis = replace(analysed("sample_data/firmness"), questions=())
    section = next(one for one in build_document(analysis).sections if one.id == "side-by-side")

    captions = [plain_text(block.caption) for block in section.blocks if isinstance(block, Figure)]

    assert len(captions) == 2  # N, and N per day
    assert "of liner[film], liner[foam]." in captions[0]
    assert "of days." in captions[1]
    assert "Intercept" not in "".join(captions)
