"""What all pictures share: colours, type, measures, number axes, and the way to SVG.

Sizes are millimetres on paper, type sizes points. Pictures are laid out by hand: a caller
says where an axis lies, so that labels stand at the edge of the text block.
"""

from __future__ import annotations

import io
import math
import warnings
from bisect import bisect_right
from collections.abc import Iterator, Sequence
from contextlib import contextmanager
from dataclasses import dataclass
from typing import Any

import matplotlib as mpl
from matplotlib.axes import Axes
from matplotlib.backends.backend_svg import FigureCanvasSVG
from matplotlib.figure import Figure
from matplotlib.font_manager import FontProperties
from matplotlib.textpath import text_to_path
from matplotlib.ticker import MaxNLocator
from matplotlib.transforms import blended_transform_factory

from reanalysis.report import numbers
from reanalysis.report.figures.compact import compact
from reanalysis.report.fonts import SANS, register_fonts

INK, SOFT, RULE = "#1d2329", "#5b6670", "#c9ced3"
PETROL = "#0f4c5c"
OCHRE, OCHRE_TEXT = "#c77d0a", "#8a5200"
OCHRE_LIGHT, OCHRE_DARK = "#f0dcb8", "#dda94f"
PRIOR, PRIOR_TEXT = "#9aa3ab", "#5b6670"
BAND = "#eef0ea"

WIDTH = 170.0
"""Width of the text block, mm."""
TEXT, SMALL_TEXT = 8.5, 8.0
MM_PER_INCH, POINTS_PER_MM = 25.4, 72.0 / 25.4
MANY_MARKS = 2000
"""More marks than this are drawn as pixels: thousands of vector marks take a PDF writer minutes."""


@dataclass(frozen=True, slots=True)
class Bar:
    """A point with an interval, in the unit of the effect."""

    centre: float
    low: float
    high: float


@dataclass(frozen=True, slots=True)
class CoredBar:
    """A point with an interval and its 50 % core, in the unit of the effect."""

    centre: float
    low: float
    high: float
    core_low: float
    core_high: float


@dataclass(frozen=True, slots=True)
class Absent:
    """Words that stand where an interval would be."""

    words: str


@contextmanager
def drawing() -> Iterator[None]:
    """Draw under the report's settings and nobody else's."""
    register_fonts()
    base = {key: value for key, value in mpl.rcParamsDefault.items() if not key.startswith("backend")}
    with mpl.rc_context(), warnings.catch_warnings():
        # A sign that no font has is drawn as a box; that must not stop a report.
        warnings.filterwarnings("ignore", message="Glyph .* missing from font")
        dict.update(mpl.rcParams, base)
        mpl.rcParams.update(
            {
                "font.family": [SANS, "DejaVu Sans"],
                "font.size": TEXT,
                "text.color": INK,
                "text.parse_math": False,
                "axes.edgecolor": RULE,
                "axes.linewidth": 0.6,
                "axes.spines.top": False,
                "axes.spines.right": False,
                "axes.spines.left": False,
                "axes.facecolor": "none",
                "axes.unicode_minus": True,
                "xtick.color": RULE,
                "ytick.color": RULE,
                "xtick.labelcolor": SOFT,
                "ytick.labelcolor": SOFT,
                "xtick.labelsize": SMALL_TEXT,
                "ytick.labelsize": SMALL_TEXT,
                "xtick.major.size": 2.5,
                "ytick.major.size": 2.5,
                "xtick.major.width": 0.6,
                "ytick.major.width": 0.6,
                "svg.fonttype": "path",
                "svg.hashsalt": "reanalysis",
                "path.simplify": True,
            }
        )
        yield


def new_figure(width: float, height: float) -> Figure:
    """Return an empty picture of a size in mm."""
    figure = Figure(figsize=(width / MM_PER_INCH, height / MM_PER_INCH))
    FigureCanvasSVG(figure)
    return figure


def add_axes(figure: Figure, left: float, bottom: float, width: float, height: float) -> Axes:
    """Return an axis that fills a rectangle given in mm from the lower left corner."""
    full_width, full_height = figure.get_size_inches() * MM_PER_INCH
    rectangle = (left / full_width, bottom / full_height, width / full_width, height / full_height)
    return figure.add_axes(rectangle)


def add_text(figure: Figure, x: float, y: float, text: str, **style: Any) -> None:
    """Write at a place given in mm from the lower left corner."""
    full_width, full_height = figure.get_size_inches() * MM_PER_INCH
    figure.text(x / full_width, y / full_height, text, **style)


def size_of(axes: Axes) -> tuple[float, float]:
    """Return width and height of an axis in mm."""
    figure = axes.get_figure(root=True)
    if figure is None:  # pragma: no cover - every axis here is made by add_axes
        return 1.0, 1.0
    width, height = figure.get_size_inches() * MM_PER_INCH
    box = axes.get_position()
    return float(box.width * width), float(box.height * height)


def to_svg(figure: Figure) -> str:
    """Return the picture as SVG text; equal pictures give equal bytes."""
    buffer = io.StringIO()
    nothing = {"Date": None, "Creator": None, "Format": None, "Type": None}
    figure.savefig(buffer, format="svg", transparent=True, metadata=nothing, dpi=250)
    text = buffer.getvalue()
    return compact(text[text.index("<svg") :])


def text_width(text: str, size: float = TEXT, weight: str = "normal") -> float:
    """Return the width of a text in mm."""
    register_fonts()
    font = FontProperties(family=[SANS], size=size, weight=weight)
    with warnings.catch_warnings():
        warnings.filterwarnings("ignore", message="Glyph .* missing from font")
        width, _, _ = text_to_path.get_text_width_height_descent(text, font, ismath=False)
    return float(width) / POINTS_PER_MM


def wrap(text: str, width: float, lines: int, size: float = TEXT) -> str:
    """Break a text into at most some lines of a width in mm; what does not fit ends in an ellipsis."""
    rows: list[str] = []
    # Not at every white space: a number and its unit are held together by a no-break space.
    words = [word for word in text.split(" ") if word]
    while words and len(rows) < lines:
        row = words.pop(0)
        while words and text_width(f"{row} {words[0]}", size) <= width:
            row = f"{row} {words.pop(0)}"
        rows.append(_fit(row, width, size))
    if words:
        rows[-1] = _fit(f"{rows[-1]} …", width, size) if not rows[-1].endswith("…") else rows[-1]
    return "\n".join(rows)


def _fit(row: str, width: float, size: float) -> str:
    if text_width(row, size) <= width:
        return row
    row = row.removesuffix(" …")
    kept = bisect_right(range(1, len(row) + 1), width, key=lambda end: text_width(f"{row[:end]}…", size))
    return f"{row[:kept]}…"


def tick_values(low: float, high: float, wanted: int) -> tuple[list[float], list[str]]:
    """Return round values between two limits with their texts, all with the same decimals."""
    values = MaxNLocator(wanted, steps=[1, 2, 5, 10]).tick_values(low, high)
    kept = [float(value) for value in values if low <= value <= high]
    if len(kept) < 2:
        return kept, [numbers.given(value) for value in kept]
    # The decimals of the step itself: 0.25 needs two, 0.5 one.
    step = numbers.given(kept[1] - kept[0])
    decimals = len(step.partition(".")[2]) if "×" not in step else 12
    # Locators leave 1e-17 where zero is meant.
    kept = [0.0 if abs(value) < (kept[1] - kept[0]) / 1e6 else value for value in kept]
    return kept, [numbers.estimate(value, decimals) for value in kept]


def number_axis(axes: Axes, limits: tuple[float, float], label: str, wanted: int = 7) -> None:
    """Give a picture its horizontal number axis."""
    axes.set_xlim(*limits)
    # A number right at the end of the axis would be cut off by the edge of the picture.
    air = 0.015 * (limits[1] - limits[0])
    values, texts = tick_values(limits[0] + air, limits[1] - air, wanted)
    axes.set_xticks(values, texts)
    axes.set_xlabel(label, color=SOFT, fontsize=SMALL_TEXT, labelpad=3)


def padded(values: Sequence[float], share: float = 0.06) -> tuple[float, float]:
    """Return limits that hold all finite values and some air."""
    finite = [value for value in values if math.isfinite(value)]
    low, high = min(finite, default=-1.0), max(finite, default=1.0)
    air = share * (high - low) or max(abs(high), 1.0) * share
    return low - air, high + air


def zero_line(axes: Axes) -> None:
    """Draw the line of no effect."""
    axes.axvline(0.0, color=INK, linewidth=0.8, zorder=1.5)


def draw_confidence(axes: Axes, bar: Bar, y: float, size: float = 4.6) -> None:
    """Draw a confidence interval: square, capped line; arrows where it leaves the picture."""
    low, high = axes.get_xlim()
    axes.plot([max(bar.low, low), min(bar.high, high)], [y, y], color=PETROL, linewidth=1.2, zorder=3)
    for end, marker, inside in ((bar.low, "<", bar.low >= low), (bar.high, ">", bar.high <= high)):
        place = min(max(end, low), high)
        axes.plot([place], [y], "|" if inside else marker, color=PETROL, markersize=5.5 if inside else 3,
                  markeredgewidth=1.2, zorder=3, clip_on=False)  # fmt: skip
    if low <= bar.centre <= high:
        axes.plot([bar.centre], [y], "s", color=PETROL, markersize=size, markeredgewidth=0, zorder=4)


def draw_credible(axes: Axes, bar: CoredBar, y: float, size: float = 4.6) -> None:
    """Draw a credible interval: circle, thick core, uncapped line; arrows where it leaves the picture."""
    low, high = axes.get_xlim()
    line: dict[str, Any] = {"color": OCHRE, "solid_capstyle": "butt"}
    axes.plot([max(bar.low, low), min(bar.high, high)], [y, y], linewidth=1.2, zorder=3, **line)
    core = [max(bar.core_low, low), min(bar.core_high, high)]
    if core[0] < core[1]:
        axes.plot(core, [y, y], linewidth=3.6, zorder=3, **line)
    for place, marker, outside in ((low, "<", bar.low < low), (high, ">", bar.high > high)):
        if outside:
            axes.plot([place], [y], marker, color=OCHRE, markersize=3, clip_on=False)
    if low <= bar.centre <= high:
        axes.plot([bar.centre], [y], "o", color="white", markeredgecolor=OCHRE, markersize=size,
                  markeredgewidth=1.2, zorder=4)  # fmt: skip


def edge_text(axes: Axes, x_mm: float, y: float, text: str, **style: Any) -> None:
    """Write beside a row: x in mm from the axis' left end, y in the axis' own numbers."""
    place = blended_transform_factory(axes.transAxes, axes.transData)
    axes.text(x_mm / size_of(axes)[0], y, text, transform=place, **style)
