"""The report as HTML."""

from __future__ import annotations

import base64
import re
from dataclasses import replace
from html.parser import HTMLParser
from itertools import pairwise

import pytest

from reanalysis.report import blocks as b
from reanalysis.report.fonts import templates_folder
from reanalysis.report.html import render_html

pytestmark = pytest.mark.render

ATTACK = "<script>alert(1)</script>\"'><img src=x onerror=alert(2)> & </style>"
VOID = {"meta", "img", "br", "link"}


class _Reader(HTMLParser):
    """Collects tags and checks that they nest."""

    def __init__(self):
        super().__init__()
        self.open, self.tags, self.crossed = [], [], []

    def handle_starttag(self, tag, attrs):
        self.tags.append((tag, dict(attrs)))
        if tag not in VOID:
            self.open.append(tag)

    def handle_endtag(self, tag):
        if not self.open or self.open.pop() != tag:
            self.crossed.append(tag)


def _read(html):
    reader = _Reader()
    reader.feed(html)
    return reader


def _tiny(document, *blocks, **changes):
    sections = (b.Section("answer", "The answers", ()), b.Section("more", "More", blocks))
    return replace(document, sections=sections, **changes)


def test_html_nests_and_needs_nothing_else(html):
    """Well-formed, one file, every resource a data URI, no script, no address."""
    reader = _read(html)
    assert reader.crossed == []
    assert reader.open == []
    assert not {tag for tag, _ in reader.tags} & {"script", "link", "iframe", "object"}
    assert {attrs["src"][:5] for tag, attrs in reader.tags if tag == "img"} == {"data:"}
    assert {attrs["href"][0] for tag, attrs in reader.tags if tag == "a"} == {"#"}
    assert set(re.findall(r"url\(([a-z]+:)", html)) == {"data:"}
    assert "//" not in re.sub(r"base64,[A-Za-z0-9+/=]+", "", html)
    assert len(html) < 1_500_000


def test_html_is_the_same_each_time(html, document):
    """Equal documents give equal bytes."""
    assert render_html(document) == html


def test_a_policy_forbids_everything_but_data(html):
    """The page tells the browser to load nothing."""
    policy = re.search(r'Content-Security-Policy" content="([^"]+)"', html)[1]
    assert policy.startswith("default-src 'none'; img-src data:; font-src data:; style-src 'unsafe-inline'")


def test_the_page_has_a_language_a_title_and_a_way_past_the_contents(html):
    """What a screen reader needs first."""
    reader = _read(html)
    assert ("html", {"lang": "en-GB"}) in reader.tags
    assert "<title>Do liner bags keep stored apples firm?</title>" in html
    assert ("a", {"class": "skip", "href": "#answers"}) in reader.tags
    assert len([tag for tag, _ in reader.tags if tag == "h1"]) == 1


def test_headings_descend_one_level_at_a_time(html):
    """h1, h2, h3 without a gap."""
    levels = [int(tag[1]) for tag, _ in _read(html).tags if re.fullmatch(r"h[1-6]", tag)]
    assert levels[0] == 1
    assert all(after - before <= 1 for before, after in pairwise(levels))


def test_every_link_of_the_contents_has_its_section(html):
    """The contents name all sections but the first, and lead to them."""
    reader = _read(html)
    ids = [attrs["id"] for _, attrs in reader.tags if "id" in attrs]
    links = [attrs["href"][1:] for tag, attrs in reader.tags if tag == "a"]
    assert links == ["answers", "side-by-side", "how-sure", "prior", "fit", "computation", "record"]
    assert set(links) <= set(ids)
    assert len(ids) == len(set(ids))


def test_every_picture_has_words(html):
    """No image without an alternative text."""
    images = [attrs for tag, attrs in _read(html).tags if tag == "img"]
    assert len(images) == 13
    assert all(len(attrs["alt"]) > 20 for attrs in images)


def test_text_is_escaped_everywhere(document):
    """Markup in any text of the document stays text."""
    columns = (b.TableColumn(ATTACK), b.TableColumn(ATTACK, "bayesian", "right"))
    hostile = _tiny(
        document,
        b.Lead(ATTACK), b.Paragraph((b.Text(ATTACK), b.Strong(ATTACK), b.Emphasis(ATTACK))),
        b.Subheading(ATTACK),
        b.Aside(ATTACK, ATTACK), b.Answer(ATTACK, ATTACK, None, (b.Reading("prior", ATTACK, ATTACK),)),
        b.Table(1, ATTACK, columns, ((ATTACK, ATTACK),), (b.ColumnGroup(ATTACK, "none", 2),), ATTACK, ATTACK),
        b.Figure(1, ATTACK, ATTACK, "<svg/>"), b.Definitions((b.Definition(ATTACK, ATTACK),)),
        b.Listing((ATTACK,)), b.Code(ATTACK, ATTACK), b.Code(ATTACK, ATTACK, "prose"),
        title=ATTACK, kicker=ATTACK, byline=ATTACK, cautions=(ATTACK,),
        status=b.StatusLine("failed", ATTACK, ATTACK),
    )  # fmt: skip
    html = render_html(hostile)
    reader = _read(html)
    assert "<script" not in html
    assert "<img src=x" not in html
    assert html.count("&lt;script&gt;alert(1)") == 36
    assert reader.crossed == []
    assert all(set(attrs) <= {"class", "src", "alt"} for tag, attrs in reader.tags if tag == "img")


def test_a_table_carries_the_analysis_and_the_scope(document):
    """Column heads are coloured by analysis; spanning words replace cells; heads have scopes."""
    columns = (
        b.TableColumn("effect"),
        b.TableColumn("p", "frequentist", "right"),
        b.TableColumn("P", "bayesian", "right"),
    )
    groups = (b.ColumnGroup("", "none", 1), b.ColumnGroup("Both", "frequentist", 2))
    table = b.Table(
        7,
        "Caption.",
        columns,
        (("film", b.SpanningCell("nothing", 2)), ("foam", "0.1", "0.9")),
        groups,
        "Note.",
        "Hint.",
    )
    html = render_html(_tiny(document, table))
    assert "<caption><strong>Table 7.</strong> Caption.</caption>" in html
    assert '<th scope="colgroup" colspan="2" class="frequentist"><span>Both</span></th>' in html
    assert '<th scope="col" class="right frequentist short">p</th>' in html
    assert '<th scope="row" class="left short">film</th>' in html
    assert '<td class="words" colspan="2">nothing</td>' in html
    assert '<td class="right short">0.9</td>' in html
    assert '<p class="note">Note. Hint.</p>' in html


def test_readings_are_a_definition_list(document):
    """Term and sentence belong together, the term in the analysis' colour."""
    answer = b.Answer("Q", "Yes.", None, (b.Reading("bayesian", "Bayesian reading", "0.66."),))
    html = render_html(_tiny(document, answer))
    assert '<div><dt class="bayesian">Bayesian reading</dt><dd>0.66.</dd></div>' in html


def test_pictures_are_embedded_unchanged(document):
    """The SVG is carried as it was drawn."""
    html = render_html(_tiny(document, b.Figure(3, "Shows.", "Words.", "<svg>é</svg>")))
    encoded = re.search(r'class="wide" src="data:image/svg\+xml;base64,([^"]+)" alt="Words\."', html)[1]
    assert base64.b64decode(encoded).decode() == "<svg>é</svg>"
    assert "<figcaption><strong>Figure 3.</strong> Shows.</figcaption>" in html


def test_a_long_title_is_shortened_at_the_foot_of_the_page(document):
    """The running title keeps whole words and ends in an ellipsis."""
    html = render_html(_tiny(document, title="word " * 40 + "end"))
    running = re.search(r'data-running="([^"]+)"', html)[1]
    assert len(running) <= 92
    assert running.endswith("word …")


def _luminance(colour):
    parts = [int(colour[k : k + 2], 16) / 255.0 for k in (1, 3, 5)]
    linear = [part / 12.92 if part <= 0.04045 else ((part + 0.055) / 1.055) ** 2.4 for part in parts]
    return 0.2126 * linear[0] + 0.7152 * linear[1] + 0.0722 * linear[2]


def _contrast(first, second):
    high, low = sorted((_luminance(first), _luminance(second)), reverse=True)
    return (high + 0.05) / (low + 0.05)


@pytest.mark.parametrize("sheet", ["report.css", "screen.css"])
def test_text_has_enough_contrast_in_both_themes(sheet):
    """At least 4.5 to 1 (WCAG 2.2, 1.4.3), on the paper and on the tinted lines."""
    css = (templates_folder() / sheet).read_text(encoding="utf-8")
    colour = dict(re.findall(r"--([a-z-]+): (#[0-9a-f]{6})", css))
    pairs = [(name, "paper") for name in ("ink", "soft", "frequentist", "bayesian")]
    pairs += [(name, f"{name}-tint") for name in ("sound", "doubtful", "failed")]
    pairs += [("ink", f"{name}-tint") for name in ("sound", "doubtful", "failed")] + [("ink", "tint")]
    assert {pair: _contrast(colour[pair[0]], colour[pair[1]]) >= 4.5 for pair in pairs} == dict.fromkeys(
        pairs, True
    )
