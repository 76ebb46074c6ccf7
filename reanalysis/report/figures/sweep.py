"""The posterior answer as a function of the prior's width."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from matplotlib.axes import Axes
from matplotlib.ticker import NullFormatter, NullLocator

from reanalysis.effects.result import Question
from reanalysis.report import numbers
from reanalysis.report.figures import style
from reanalysis.sensitivity.result import Sweep, TippingPrior

LEFT, RIGHT = 24.0, 38.0
"""Widths in mm of the number column at the left and of the curves' names at the right."""
PLOT, BOTTOM, LANE = 34.0, 11.0, 4.2
GAP = 3.0
"""Least distance in mm between a name and the next mark's line."""


@dataclass(frozen=True, slots=True)
class Curve:
    """A probability at each width; `dashed` tells the curves apart without colour."""

    words: str
    widths: tuple[float, ...]
    probabilities: tuple[float, ...]
    refitted: tuple[bool, ...]
    dashed: bool


@dataclass(frozen=True, slots=True)
class Mark:
    """A width with a name: a prior set, or the tipping prior (`tipping`)."""

    words: str
    width: float
    tipping: bool


@dataclass(frozen=True, slots=True)
class SweepData:
    """What the picture shows; `level` is the probability needed to act."""

    curves: tuple[Curve, ...]
    marks: tuple[Mark, ...]
    level: float
    axis_label: str


def sweep_data(
    question: Question, sweep: Sweep, named_widths: Sequence[tuple[str, float]], axis_label: str
) -> SweepData:
    """Return the data of the picture.

    Parameters
    ----------
    question : Question
    sweep : Sweep
    named_widths : sequence of (prior set, width)
        Standard deviations of the named prior sets' own priors of this effect, where they have one.
    axis_label : str
        Such as ``prior standard deviation of the film effect, N``.
    """
    widths = tuple(point.width for point in sweep.points)
    refitted = tuple(point.method == "refitted" for point in sweep.points)
    directions = tuple(point.prob_direction for point in sweep.points)
    curves = [Curve(_direction_words(question), widths, directions, refitted, dashed=True)]
    beyond = [point.prob_beyond for point in sweep.points if point.prob_beyond is not None]
    if question.matters_beyond is not None and len(beyond) == len(widths):
        words = _beyond_words(question, question.matters_beyond)
        curves.append(Curve(words, widths, tuple(beyond), refitted, dashed=False))
    marks = [Mark(name, width, tipping=False) for name, width in named_widths if np.isfinite(width)]
    for tipping in (sweep.direction_tipping, sweep.beyond_tipping):
        if isinstance(tipping, TippingPrior):
            words = f"tips at {numbers.given(float(f'{tipping.width:.3g}'))}"
            marks.append(Mark(words, tipping.width, tipping=True))
    return SweepData(tuple(curves), tuple(marks), question.act_when, axis_label)


def _direction_words(question: Question) -> str:
    side = {"greater": "above zero", "less": "below zero", "either": "on the likelier side of zero"}
    return f"probability that the effect is {side[question.direction]}"


def _beyond_words(question: Question, edge: float) -> str:
    signed = numbers.given(-edge if question.direction == "less" else edge)
    side = {"greater": "above", "less": "below", "either": "beyond"}[question.direction]
    tail = " either way" if question.direction == "either" else ""
    return f"probability that it is {side} {numbers.quantity(signed, question.unit)}{tail}"


def lanes(places: Sequence[float], widths: Sequence[float]) -> tuple[int, ...]:
    """Return the line above the plot on which each mark has its name.

    A name stands at the right of its mark's line, which rises to it. A mark further right is
    therefore named lower, or its line would run through this name.

    Parameters
    ----------
    places, widths : sequences of float
        Where the marks are and how wide their names are, mm.
    """
    result = [0] * len(places)
    order = sorted(range(len(places)), key=lambda mark: places[mark], reverse=True)
    for count, mark in enumerate(order):
        end = places[mark] + GAP + widths[mark]
        touched = [result[other] for other in order[:count] if places[other] < end]
        result[mark] = max(touched, default=-1) + 1
    return tuple(result)


def draw_sweep(data: SweepData) -> str:
    """Draw the picture, 170 mm wide and some 55 mm high. Returns SVG."""
    low, high = _limits(data)
    width = style.WIDTH - LEFT - RIGHT
    places = [float(np.log(mark.width / low) / np.log(high / low)) * width for mark in data.marks]
    rows = lanes(places, [style.text_width(mark.words, style.SMALL_TEXT) for mark in data.marks])
    top = LANE * (max(rows, default=-1) + 1) + 2.0
    with style.drawing():
        figure = style.new_figure(style.WIDTH, BOTTOM + PLOT + top)
        axes = style.add_axes(figure, LEFT, BOTTOM, width, PLOT)
        _prepare(axes, data, (low, high))
        for curve in data.curves:
            _draw_curve(axes, curve)
        for mark, place, lane in zip(data.marks, places, rows, strict=True):
            _draw_mark(axes, mark, place, lane)
        _name_curves(axes, data.curves, width + 2.5)
        return style.to_svg(figure)


def _limits(data: SweepData) -> tuple[float, float]:
    widths = [width for curve in data.curves for width in curve.widths] + [m.width for m in data.marks]
    return min(widths) / 1.08, max(widths) * 1.08


def _prepare(axes: Axes, data: SweepData, limits: tuple[float, float]) -> None:
    axes.set_xscale("log")
    axes.set_xlim(*limits)
    axes.set_ylim(-0.02, 1.02)
    ticks = _log_ticks(*limits)
    axes.set_xticks(ticks, [numbers.given(tick) for tick in ticks])
    axes.xaxis.set_minor_locator(NullLocator())
    axes.xaxis.set_minor_formatter(NullFormatter())
    axes.set_xlabel(data.axis_label, color=style.SOFT, fontsize=style.SMALL_TEXT, labelpad=3)
    axes.set_yticks([])
    words: dict[str, Any] = {"va": "center", "ha": "right", "fontsize": style.SMALL_TEXT}
    for tick in (0.0, 0.25, 0.5, 0.75, 1.0):
        axes.axhline(tick, color=style.RULE, linewidth=0.4, zorder=0)
        # 0.08 of the height is a line of text.
        if abs(tick - data.level) > 0.08:
            style.edge_text(axes, -2.0, tick, numbers.given(tick), color=style.SOFT, **words)
    axes.axhline(data.level, color=style.INK, linewidth=0.8, zorder=1)
    style.edge_text(axes, -2.0, data.level, f"to act {numbers.given(data.level)}", **words)


def _log_ticks(low: float, high: float) -> list[float]:
    """Round widths: 1, 2 and 5 times powers of ten, or only the powers when there would be too many."""
    exponents = range(int(np.floor(np.log10(low))), int(np.ceil(np.log10(high))) + 1)
    for steps in ((1, 2, 5), (1, 3), (1,)):
        ticks = [float(f"{step}e{exponent}") for exponent in exponents for step in steps]
        ticks = [tick for tick in ticks if low <= tick <= high]
        if len(ticks) <= 9:
            return ticks
    return ticks[:: max(len(ticks) // 6, 1)]


def _draw_curve(axes: Axes, curve: Curve) -> None:
    line: dict[str, Any] = {"dashes": (1.2, 1.4)} if curve.dashed else {}
    axes.plot(curve.widths, curve.probabilities, color=style.OCHRE, linewidth=1.5, zorder=3, **line)
    refits = [k for k, refitted in enumerate(curve.refitted) if refitted]
    axes.plot(
        [curve.widths[k] for k in refits],
        [curve.probabilities[k] for k in refits],
        "o",
        color="white",
        markeredgecolor=style.OCHRE,
        markersize=2.6,
        markeredgewidth=0.8,
        zorder=3.5,
    )


def _draw_mark(axes: Axes, mark: Mark, place: float, lane: int) -> None:
    millimetre = 1.04 / PLOT
    foot = 1.02 + (LANE * lane + 1.6) * millimetre
    line: dict[str, Any] = {"linewidth": 0.6, "color": style.PRIOR, "zorder": 0.5}
    if mark.tipping:
        line = {"linewidth": 0.8, "color": style.INK, "dashes": (4, 2.5), "zorder": 1}
    axes.plot([mark.width] * 2, [-0.02, foot + 2.6 * millimetre], clip_on=False, **line)
    colour = style.INK if mark.tipping else style.PRIOR_TEXT
    style.edge_text(axes, place + 1.2, foot, mark.words, va="bottom", color=colour,
                    fontsize=style.SMALL_TEXT)  # fmt: skip


def _name_curves(axes: Axes, curves: tuple[Curve, ...], x: float) -> None:
    """Write each curve's name at its right end; names that would touch are pushed apart."""
    blocks = [style.wrap(curve.words, RIGHT - 3.0, 3, style.SMALL_TEXT) for curve in curves]
    ends = [curve.probabilities[-1] for curve in curves]
    line = 3.6 / PLOT * 1.04
    half = [(block.count("\n") + 1) * line / 2.0 for block in blocks]
    places = [min(max(end, size), 1.02 - size + line / 2.0) for end, size in zip(ends, half, strict=True)]
    if len(places) == 2:
        need = half[0] + half[1] + 0.4 * line
        upper = 0 if ends[0] >= ends[1] else 1
        lower = 1 - upper
        places[lower] = min(places[lower], places[upper] - need)
        if places[lower] < half[lower]:
            places[lower] = half[lower]
            places[upper] = max(places[upper], places[lower] + need)
    for block, place in zip(blocks, places, strict=True):
        style.edge_text(axes, x, place, block, va="center", color=style.OCHRE_TEXT, linespacing=1.0,
                        fontsize=style.SMALL_TEXT)  # fmt: skip
