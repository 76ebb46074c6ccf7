"""Pairs of intervals on one axis: confidence above, credible below."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from statistics import median

from matplotlib.axes import Axes

from reanalysis.bayesian.result import Marginal
from reanalysis.effects.result import (
    FrequentistAnswer,
    FrequentistResult,
    PosteriorAnswer,
    PosteriorResultForQuestion,
    Question,
)
from reanalysis.frequentist.result import CoefficientResult, Estimate
from reanalysis.report.figures import style
from reanalysis.report.figures.style import Absent, Bar, CoredBar

LABELS, TAGS = 46.0, 24.0
"""Widths in mm of the column of names at the left and of the words at the right."""
ROW, TIGHT_ROW, MANY_ROWS = 11.0, 7.5, 12
OUTLYING = 8.0
"""A row this many times as wide as the usual one does not set the axis; its lines end in arrows."""


@dataclass(frozen=True, slots=True)
class PairedRow:
    """One effect.

    Attributes
    ----------
    label : str
        Name of the effect.
    confidence : Bar or Absent
    credible : CoredBar or Absent
    matters_beyond : float or None
        Half width of the band of effects too small to matter.
    """

    label: str
    confidence: Bar | Absent
    credible: CoredBar | Absent
    matters_beyond: float | None


@dataclass(frozen=True, slots=True)
class PairedData:
    """Effects of one unit, from top to bottom."""

    rows: tuple[PairedRow, ...]
    axis_label: str


def question_row(
    question: Question, frequentist: FrequentistResult, posterior: PosteriorResultForQuestion
) -> PairedRow:
    """Return the row of a question."""
    confidence = (
        Bar(frequentist.estimate, frequentist.low, frequentist.high)
        if isinstance(frequentist, FrequentistAnswer)
        else Absent("no estimate exists")
    )
    credible = (
        CoredBar(posterior.median, posterior.low, posterior.high, posterior.core_low, posterior.core_high)
        if isinstance(posterior, PosteriorAnswer)
        else Absent("no posterior")
    )
    return PairedRow(question.name, confidence, credible, question.matters_beyond)


def coefficient_row(label: str, frequentist: CoefficientResult, posterior: Marginal | None) -> PairedRow:
    """Return the row of a coefficient; `posterior` is None when there is no posterior to show."""
    confidence = (
        Bar(frequentist.estimate, frequentist.low, frequentist.high)
        if isinstance(frequentist, Estimate)
        else Absent("no estimate exists")
    )
    credible = (
        Absent("no posterior")
        if posterior is None
        else CoredBar(
            posterior.median, posterior.low, posterior.high, posterior.core_low, posterior.core_high
        )
    )
    return PairedRow(label, confidence, credible, None)


def paired_data(rows: Sequence[PairedRow], axis_label: str) -> PairedData:
    """Return the data of the picture; all rows must be in the unit that `axis_label` names."""
    return PairedData(tuple(rows), axis_label)


def axis_limits(data: PairedData) -> tuple[float, float]:
    """Return the ends of the axis: zero, every interval but outlying ones, the bands where they are near."""
    bars = [bar for row in data.rows for bar in (row.confidence, row.credible) if not isinstance(bar, Absent)]
    finite = [bar for bar in bars if math.isfinite(bar.low) and math.isfinite(bar.high)]
    usual = median(bar.high - bar.low for bar in finite) if finite else 1.0
    shown = [bar for bar in finite if bar.high - bar.low <= OUTLYING * usual] or finite
    ends = [0.0, *(bar.low for bar in shown), *(bar.high for bar in shown)]
    reach = max(ends) - min(ends)
    bands = [row.matters_beyond for row in data.rows if row.matters_beyond is not None]
    near = [band for band in bands if not shown or band <= 1.5 * reach]
    return style.padded([*ends, *near, *(-band for band in near)])


def draw_paired(data: PairedData) -> str:
    """Draw the picture at full width; its height grows with the rows. Returns SVG."""
    row_height = ROW if len(data.rows) <= MANY_ROWS else TIGHT_ROW
    banded = any(row.matters_beyond is not None for row in data.rows)
    top, bottom = (5.0 if banded else 1.0), 11.0
    height = top + bottom + row_height * len(data.rows)
    with style.drawing():
        figure = style.new_figure(style.WIDTH, height)
        axes = style.add_axes(
            figure, LABELS, bottom, style.WIDTH - LABELS - TAGS, row_height * len(data.rows)
        )
        _prepare(axes, data, wanted=7)
        for position, row in enumerate(data.rows):
            y = -float(position)
            _draw_row(axes, row, y)
            lines = 2 if row_height == ROW else 1
            label = style.wrap(row.label, LABELS - 4.0, lines)
            style.edge_text(axes, -LABELS, y, label, va="center", ha="left", linespacing=1.0)
        _tags(axes, data)
        if banded:
            _band_label(axes, data)
        return style.to_svg(figure)


def draw_small_pair(data: PairedData) -> str:
    """Draw the first row alone, 70 mm by 28 mm, for the answer on page 1. Returns SVG."""
    with style.drawing():
        figure = style.new_figure(70.0, 28.0)
        axes = style.add_axes(figure, 2.0, 10.5, 66.0, 16.5)
        _prepare(axes, PairedData(data.rows[:1], data.axis_label), wanted=5)
        _draw_row(axes, data.rows[0], 0.0)
        return style.to_svg(figure)


def _prepare(axes: Axes, data: PairedData, wanted: int) -> None:
    axes.set_ylim(-len(data.rows) + 0.5, 0.5)
    axes.set_yticks([])
    label = style.wrap(data.axis_label, 66.0 if wanted == 5 else 110.0, 1, style.SMALL_TEXT)
    style.number_axis(axes, axis_limits(data), label, wanted)
    style.zero_line(axes)


def _draw_row(axes: Axes, row: PairedRow, y: float) -> None:
    low, high = axes.get_xlim()
    if row.matters_beyond is not None:
        start, end = max(low, -row.matters_beyond), min(high, row.matters_beyond)
        axes.fill_between([start, end], y - 0.47, y + 0.47, color=style.BAND, linewidth=0, zorder=0.5)
    for mark, offset, colour in (
        (row.confidence, 0.19, style.PETROL),
        (row.credible, -0.19, style.OCHRE_TEXT),
    ):
        if isinstance(mark, Absent):
            x = _clear_of_zero(axes, mark.words)
            style.edge_text(axes, x, y + offset, mark.words, color=colour, va="center", style="italic",
                            fontsize=style.SMALL_TEXT)  # fmt: skip
        elif isinstance(mark, Bar):
            style.draw_confidence(axes, mark, y + offset)
        else:
            style.draw_credible(axes, mark, y + offset)


def _clear_of_zero(axes: Axes, words: str) -> float:
    """Return where words start, in mm from the axis' left end, so that the zero line does not cross them."""
    low, high = axes.get_xlim()
    width = style.size_of(axes)[0]
    zero = -low / (high - low) * width
    length = style.text_width(words, style.SMALL_TEXT)
    if zero < 0.0 or zero > length + 3.0:
        return 1.5
    return zero + 1.5 if width - zero > length + 2.0 else width - length


def _tags(axes: Axes, data: PairedData) -> None:
    """Name each kind of interval once, at the right of the first row that has it."""
    width = style.WIDTH - LABELS - TAGS + 3.0
    for words, colour, offset, present in (
        ("confidence", style.PETROL, 0.19, [not isinstance(row.confidence, Absent) for row in data.rows]),
        ("credible", style.OCHRE_TEXT, -0.19, [not isinstance(row.credible, Absent) for row in data.rows]),
    ):
        if any(present):
            y = offset - present.index(True)
            style.edge_text(axes, width, y, words, color=colour, va="center", fontsize=style.SMALL_TEXT)


def _band_label(axes: Axes, data: PairedData) -> None:
    first = next(position for position, row in enumerate(data.rows) if row.matters_beyond is not None)
    half = data.rows[first].matters_beyond or 0.0
    low, high = axes.get_xlim()
    width = style.WIDTH - LABELS - TAGS
    words = "too small to matter"
    centre = (max(low, -half) + min(high, half)) / 2.0
    place = (centre - low) / (high - low) * width
    reach = style.text_width(words, style.SMALL_TEXT) / 2.0
    place = min(max(place, reach), width - reach)
    y = 0.5 + 1.2 * len(data.rows) / style.size_of(axes)[1]
    style.edge_text(axes, place, y, words, ha="center", va="bottom", color=style.SOFT,
                    fontsize=style.SMALL_TEXT)  # fmt: skip
