"""Drawings: same bytes each time, nothing outside, nothing left behind."""

from __future__ import annotations

import hashlib
import logging
import re

import matplotlib as mpl
import numpy as np
import pytest

from reanalysis.report.figures import paired, ranks, residuals, style
from reanalysis.report.figures.compact import compact
from reanalysis.report.figures.style import Absent, Bar, CoredBar

pytestmark = pytest.mark.render


def test_every_picture_is_svg_without_outside_references(drawn):
    """Plain SVG: no document type, no script, no link but to itself, no text of the user's in a comment."""
    assert len(drawn) == 13
    for svg in drawn.values():
        assert svg.startswith("<svg ")
        assert set(re.findall(r'href="(.)', svg)) <= {"#"}
        assert not re.search(r"<!|<script|<text|<metadata|<image", svg)


def test_pictures_are_equal_byte_for_byte(drawn, inv, demo):
    """Drawing twice gives the same bytes."""
    again = demo.pictures(inv)
    assert {name: hashlib.sha256(svg.encode()).hexdigest() for name, svg in again.items()} == {
        name: hashlib.sha256(svg.encode()).hexdigest() for name, svg in drawn.items()
    }


def _size(svg):
    width, height = re.search(r'width="([0-9.]+)pt" height="([0-9.]+)pt"', svg).groups()
    return round(float(width) / 72 * 25.4), round(float(height) / 72 * 25.4)


def test_pictures_have_the_agreed_sizes(drawn):
    """170 mm wide and at most 60 mm high; the small ones 70 by 28 mm."""
    for name, svg in drawn.items():
        width, height = _size(svg)
        if name.startswith("small"):
            assert (width, height) == (70, 28)
        else:
            assert width == 170
            assert 30 <= height <= 60


def test_the_paired_picture_grows_with_its_rows():
    """Each row adds its height; many rows are set tighter."""
    row = paired.PairedRow("x", Bar(1.0, 0.0, 2.0), Absent("no posterior"), 1.0)
    heights = [_size(paired.draw_paired(paired.paired_data([row] * n, "x")))[1] for n in (1, 3, 20)]
    assert heights == [27, 49, 166]


def test_both_analyses_have_their_own_colours_and_places():
    """The confidence interval is petrol and above, the credible one ochre and below."""
    row = paired.PairedRow("x", Bar(1.0, 0.5, 1.5), CoredBar(1.0, 0.5, 1.5, 0.8, 1.2), None)
    svg = paired.draw_small_pair(paired.paired_data([row], "x"))
    places = {}
    for colour in (style.PETROL, style.OCHRE):
        path = re.search(rf'<path d="M [0-9.]+ ([0-9.]+) L [^"]*"[^>]*stroke: {colour}', svg)
        places[colour] = float(path[1])
    # SVG counts from the top.
    assert places[style.PETROL] < places[style.OCHRE]


def test_a_picture_leaves_no_settings_behind(inv):
    """The reader's own matplotlib settings are neither used nor changed."""
    with mpl.rc_context({"lines.linewidth": 9.0, "axes.facecolor": "red"}):
        before = dict(mpl.rcParams)
        svg = residuals.draw_residuals(residuals.residual_data(inv.fit(), "fitted"))
        assert dict(mpl.rcParams) == before
    assert svg == residuals.draw_residuals(residuals.residual_data(inv.fit(), "fitted"))


def test_many_marks_become_pixels(inv):
    """3,000 residuals are drawn as an image, 96 as vector marks."""
    many = residuals.draw_residuals(residuals.residual_data(inv.fit(3000), "fitted"))
    assert many.count("data:image/png;base64,") == 2
    assert len(many) < 600_000


def test_labels_are_taken_literally(caplog):
    """Dollar signs are not mathematics, unknown signs no error, endless names no overflow."""
    names = ["price [$/kg] $x_1$", "木箱", "word " * 60, "x" * 300]
    rows = [paired.PairedRow(name, Bar(1.0, 0.0, 2.0), Absent("no posterior"), 1.0) for name in names]
    with caplog.at_level(logging.WARNING):
        svg = paired.draw_paired(paired.paired_data(rows, "€ per kg, β ≤ σ²"))
    assert svg.startswith("<svg ")
    assert style.wrap("word " * 60, 40.0, 2).endswith("…")
    assert all(style.text_width(line) <= 40.0 for line in style.wrap("x" * 300, 40.0, 2).split("\n"))


def test_wrapping_keeps_a_number_with_its_unit():
    """A narrow no-break space is no place to break; a short text stays whole."""
    assert style.wrap("above 2\u202fN", 10.0, 2) == "above\n2\u202fN"
    assert style.wrap("above zero", 40.0, 2) == "above zero"


@pytest.mark.parametrize(
    ("low", "high", "texts"),
    [
        (-2.2, 5.1, ["−2", "−1", "0", "1", "2", "3", "4", "5"]),
        (-0.16, 0.01, ["−0.15", "−0.10", "−0.05", "0.00"]),
        (0.0, 0.0, ["0"]),
    ],
)
def test_ticks_are_round_and_alike(low, high, texts):
    """All ticks of an axis have the same decimals; zero has no sign."""
    values, shown = style.tick_values(low, high, 8 if high > 1 else 4)
    assert shown == texts
    assert len(values) == len(texts)


def test_extreme_numbers_can_be_drawn():
    """Endless limits, tiny units and a single value break nothing."""
    for bar in (Bar(0.0, -np.inf, np.inf), Bar(1e-9, -1e-9, 2e-9), Bar(3e9, 1e9, 5e9), Bar(0.0, 0.0, 0.0)):
        row = paired.PairedRow("x", bar, Absent("no posterior"), None)
        assert paired.draw_paired(paired.paired_data([row], "x")).startswith("<svg ")


def test_no_panels_no_marks():
    """A run without questions has an empty picture, not an error."""
    assert ranks.draw_ranks(ranks.rank_data([])).startswith("<svg ")


GLYPHS = (
    '<svg><defs><path id="F-1" d="M 64 0 \nL 640 0 \nQ 640 320 320 640 \nz\n" '
    'transform="scale(0.015625)"/></defs>'
    '<g transform="scale(0.08 -0.08)"><use xlink:href="#F-1"/>'
    '<use xlink:href="#F-1" transform="translate(50.0 0)"/></g></svg>'
)


def test_compacting_joins_the_glyphs_of_a_text():
    """Outlines move to their places in thousandths of the type size; the definitions go."""
    assert compact(GLYPHS) == (
        '<svg><g transform="scale(0.08 -0.08)"><path d="M10 0l90 0q0 50-50 100zM510 0l90 0q0 50-50 100z" '
        'transform="scale(0.1)"/></g></svg>'
    )


def test_compacting_leaves_marks_alone():
    """A mark is a reference as well, but not a glyph; coordinates keep two decimals."""
    marks = '<g><use xlink:href="#m1" x="1.23456" y="2.0"/></g>'
    assert compact(marks) == '<g><use xlink:href="#m1" x="1.23" y="2.0"/></g>'
