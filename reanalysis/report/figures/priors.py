"""From prior to posterior: the interval of each prior set and what the data made of it."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from statistics import median

from matplotlib.axes import Axes

from reanalysis.effects.result import PosteriorAnswer, PosteriorResultForQuestion, Question
from reanalysis.report import numbers
from reanalysis.report.figures import style
from reanalysis.report.figures.prior_shapes import prior_interval
from reanalysis.report.figures.style import Absent, Bar, CoredBar
from reanalysis.study.distributions import Distribution

LABELS, TAGS, ROW = 30.0, 42.0, 9.0


@dataclass(frozen=True, slots=True)
class PriorRow:
    """One prior set.

    Attributes
    ----------
    name : str
    prior : Bar or None
        Its median and central interval; None when it is improper.
    prior_words : str
        The prior's interval in words: ``prior −55 to 55``, ``flat prior``.
    posterior : CoredBar or Absent
    posterior_words : str
        Its interval in words; empty when there is none.
    """

    name: str
    prior: Bar | None
    prior_words: str
    posterior: CoredBar | Absent
    posterior_words: str


@dataclass(frozen=True, slots=True)
class PriorsData:
    """All prior sets, from top to bottom."""

    rows: tuple[PriorRow, ...]
    matters_beyond: float | None
    axis_label: str


def priors_data(
    question: Question,
    answers: Sequence[tuple[PosteriorResultForQuestion, Distribution]],
    level: float,
    axis_label: str,
) -> PriorsData:
    """Return the data of the picture.

    Parameters
    ----------
    question : Question
    answers : sequence of (answer, prior of this effect)
        One for each prior set.
    level : float
        Of the intervals, the priors' own ones included.
    axis_label : str
    """
    rows = tuple(_row(answer, prior, level) for answer, prior in answers)
    return PriorsData(rows, question.matters_beyond, axis_label)


def _row(answer: PosteriorResultForQuestion, prior: Distribution, level: float) -> PriorRow:
    posterior, posterior_words = _posterior(answer)
    ends = prior_interval(prior, level)
    if ends is None:
        return PriorRow(answer.prior_set, None, "prior flat", posterior, posterior_words)
    low, middle, high = ends
    decimals = numbers.choose_decimals((high - low) / 4.0)
    prior_words = f"prior {numbers.interval(low, high, decimals)}"
    return PriorRow(answer.prior_set, Bar(middle, low, high), prior_words, posterior, posterior_words)


def _posterior(answer: PosteriorResultForQuestion) -> tuple[CoredBar | Absent, str]:
    if not isinstance(answer, PosteriorAnswer):
        return Absent("no posterior"), ""
    # A quarter of a 95 % interval is close to a standard deviation.
    spread = (answer.high - answer.low) / 4.0
    decimals = numbers.choose_decimals(spread, answer.mcse_low, answer.mcse_high)
    bar = CoredBar(answer.median, answer.low, answer.high, answer.core_low, answer.core_high)
    return bar, f"posterior {numbers.interval(answer.low, answer.high, decimals)}"


def axis_limits(data: PriorsData) -> tuple[float, float]:
    """Return the ends of the axis: the posteriors, zero, and those priors that are not much wider."""
    bars = [row.posterior for row in data.rows if isinstance(row.posterior, CoredBar)]
    finite = [bar for bar in bars if math.isfinite(bar.low) and math.isfinite(bar.high)]
    usual = median(bar.high - bar.low for bar in finite) if finite else 1.0
    ends = [0.0]
    for bar in finite:
        if bar.high - bar.low <= 8.0 * usual:
            ends += [bar.low, bar.high]
    for row in data.rows:
        if row.prior is not None and row.prior.high - row.prior.low <= 2.5 * usual:
            ends += [row.prior.low, row.prior.high]
    if data.matters_beyond is not None and data.matters_beyond <= 2.0 * usual:
        ends += [-data.matters_beyond, data.matters_beyond]
    return style.padded(ends)


def draw_priors(data: PriorsData) -> str:
    """Draw the picture, 170 mm wide; its height grows with the prior sets. Returns SVG."""
    plot = ROW * len(data.rows)
    with style.drawing():
        figure = style.new_figure(style.WIDTH, plot + 12.0)
        axes = style.add_axes(figure, LABELS, 11.0, style.WIDTH - LABELS - TAGS, plot)
        axes.set_ylim(-len(data.rows) + 0.5, 0.5)
        axes.set_yticks([])
        style.number_axis(axes, axis_limits(data), data.axis_label)
        if data.matters_beyond is not None:
            axes.axvspan(-data.matters_beyond, data.matters_beyond, color=style.BAND, linewidth=0, zorder=0)
        style.zero_line(axes)
        for position, row in enumerate(data.rows):
            _draw_row(axes, row, -float(position))
        return style.to_svg(figure)


def _draw_row(axes: Axes, row: PriorRow, y: float) -> None:
    low, high = axes.get_xlim()
    name = style.wrap(row.name, LABELS - 3.0, 2)
    style.edge_text(axes, -LABELS, y, name, va="center", ha="left", linespacing=1.0)
    start, end = (-math.inf, math.inf) if row.prior is None else (row.prior.low, row.prior.high)
    dashes = (3.5, 2.2)
    axes.plot([max(start, low), min(end, high)], [y + 0.2, y + 0.2], color=style.PRIOR, linewidth=1.1,
              dashes=dashes, zorder=2)  # fmt: skip
    for place, marker, outside in ((low, "<", start < low), (high, ">", end > high)):
        if outside:
            axes.plot([place], [y + 0.2], marker, color=style.PRIOR, markersize=3, clip_on=False)
    right = style.WIDTH - LABELS - TAGS + 4.0
    words = style.wrap(row.prior_words, TAGS - 4.0, 1, style.SMALL_TEXT)
    style.edge_text(axes, right, y + 0.2, words, color=style.PRIOR_TEXT, va="center",
                    fontsize=style.SMALL_TEXT)  # fmt: skip
    if isinstance(row.posterior, Absent):
        style.edge_text(axes, 1.5, y - 0.2, row.posterior.words, color=style.OCHRE_TEXT, va="center",
                        style="italic", fontsize=style.SMALL_TEXT)  # fmt: skip
        return
    style.draw_credible(axes, row.posterior, y - 0.2)
    words = style.wrap(row.posterior_words, TAGS - 4.0, 1, style.SMALL_TEXT)
    style.edge_text(axes, right, y - 0.2, words, color=style.OCHRE_TEXT, va="center",
                    fontsize=style.SMALL_TEXT)  # fmt: skip
