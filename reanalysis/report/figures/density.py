"""The posterior density of a question, with the prior and the confidence interval."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Any

import numpy as np
from matplotlib.axes import Axes
from numpy.typing import NDArray

from reanalysis.effects.result import (
    FrequentistAnswer,
    FrequentistResult,
    PosteriorAnswer,
    Question,
)
from reanalysis.report import numbers
from reanalysis.report.figures import style
from reanalysis.report.figures.prior_shapes import prior_density
from reanalysis.report.figures.smooth import density
from reanalysis.report.figures.style import Absent, Bar
from reanalysis.study.distributions import Distribution

FloatArray = NDArray[np.float64]
POINTS = 200
HEIGHT = 51.0


@dataclass(frozen=True, slots=True)
class DensityData:
    """What the picture shows.

    Attributes
    ----------
    grid, posterior : ndarray, shape (m,)
        Effects and their posterior density, per unit of the effect.
    prior : ndarray, shape (m,), or None
        Density of the prior at the same effects; None when it is improper.
    prior_words : str
        ``weak prior``, ``flat prior``.
    shaded : tuple of (low, high)
        Where the effect is one that the question asks for: beyond what matters, or in the asked direction.
    shaded_words : str
        The probability of that, in words.
    confidence : Bar or Absent
    confidence_words : str
        What stands under the confidence interval.
    matters_beyond : float or None
    axis_label : str
    """

    grid: FloatArray
    posterior: FloatArray
    prior: FloatArray | None
    prior_words: str
    shaded: tuple[tuple[float, float], ...]
    shaded_words: str
    confidence: Bar | Absent
    confidence_words: str
    matters_beyond: float | None
    axis_label: str


@dataclass(frozen=True, slots=True)
class PosteriorOfQuestion:
    """A question's posterior under one prior set; `draws` may have any shape."""

    draws: FloatArray
    prior: Distribution
    answer: PosteriorAnswer
    level: float


def density_data(
    question: Question, posterior: PosteriorOfQuestion, frequentist: FrequentistResult, axis_label: str
) -> DensityData:
    """Return the data of the picture."""
    draws = np.asarray(posterior.draws, dtype=np.float64).ravel()
    confidence, confidence_words = _confidence(frequentist, posterior.level)
    low, high = _limits(draws, confidence, question.matters_beyond)
    grid = np.linspace(low, high, POINTS)
    return DensityData(
        grid=grid,
        posterior=density(draws, grid),
        prior=prior_density(posterior.prior, grid),
        prior_words=f"{posterior.answer.prior_set} prior",
        shaded=_shaded(question, posterior.answer),
        shaded_words=_shaded_words(question, posterior.answer),
        confidence=confidence,
        confidence_words=confidence_words,
        matters_beyond=question.matters_beyond,
        axis_label=axis_label,
    )


def _confidence(frequentist: FrequentistResult, level: float) -> tuple[Bar | Absent, str]:
    if not isinstance(frequentist, FrequentistAnswer):
        return Absent("no estimate exists"), "no confidence interval: no estimate exists"
    words = f"{numbers.level(level)} confidence interval, {numbers.p_equation(frequentist.p)}"
    return Bar(frequentist.estimate, frequentist.low, frequentist.high), words


def _limits(draws: FloatArray, confidence: Bar | Absent, band: float | None) -> tuple[float, float]:
    low, high = (float(value) for value in np.quantile(draws, [0.0005, 0.9995]))
    reach = high - low
    ends = [low, high, 0.0]
    if isinstance(confidence, Bar):
        ends += [
            end
            for end in (confidence.low, confidence.high)
            if math.isfinite(end) and low - reach < end < high + reach
        ]
    if band is not None and band < 2.0 * reach:
        ends += [-band, band]
    return style.padded(ends, 0.04)


def _shaded(question: Question, answer: PosteriorAnswer) -> tuple[tuple[float, float], ...]:
    edge = question.matters_beyond or 0.0
    if question.direction == "greater":
        return ((edge, math.inf),)
    if question.direction == "less":
        return ((-math.inf, -edge),)
    if question.matters_beyond is not None:
        return ((-math.inf, -edge), (edge, math.inf))
    return ((0.0, math.inf),) if answer.median >= 0.0 else ((-math.inf, 0.0),)


def _shaded_words(question: Question, answer: PosteriorAnswer) -> str:
    if question.matters_beyond is None or answer.beyond is None:
        side = "above" if _shaded(question, answer)[0][1] == math.inf else "below"
        share = numbers.probability(answer.direction.value, answer.direction.mcse)
        return f"{share} of the probability\nlies {side} zero"
    share = numbers.probability(answer.beyond.value, answer.beyond.mcse)
    edge = numbers.given(
        -question.matters_beyond if question.direction == "less" else question.matters_beyond
    )
    side = {"greater": "above", "less": "below", "either": "beyond"}[question.direction]
    tail = " either way" if question.direction == "either" else ""
    return f"{share} of the probability\nlies {side} {numbers.quantity(edge, question.unit)}{tail}"


def draw_density(data: DensityData) -> str:
    """Draw the picture, 170 mm by 56 mm. Returns SVG."""
    with style.drawing():
        figure = style.new_figure(style.WIDTH, HEIGHT)
        axes = style.add_axes(figure, 0.0, 11.0, style.WIDTH, HEIGHT - 12.0)
        style.number_axis(axes, (float(data.grid[0]), float(data.grid[-1])), data.axis_label)
        top = _top(data)
        # A quarter of the picture is for the confidence interval under the curve.
        axes.set_ylim(-0.27 * top, 1.06 * top)
        axes.set_yticks([])
        if data.matters_beyond is not None:
            axes.axvspan(-data.matters_beyond, data.matters_beyond, color=style.BAND, linewidth=0, zorder=0)
        _draw_posterior(axes, data)
        style.zero_line(axes)
        _draw_confidence(axes, data, top)
        _draw_words(axes, data, top)
        return style.to_svg(figure)


def _top(data: DensityData) -> float:
    peak = float(data.posterior.max()) or 1.0
    if data.prior is None:
        return peak
    finite = data.prior[np.isfinite(data.prior)]
    return max(peak, min(float(finite.max(initial=0.0)), 1.5 * peak))


def _draw_posterior(axes: Axes, data: DensityData) -> None:
    grid, curve = data.grid, data.posterior
    axes.fill_between(grid, 0.0, curve, color=style.OCHRE_LIGHT, linewidth=0, zorder=1)
    for low, high in data.shaded:
        inside = (grid >= low) & (grid <= high)
        if inside.any():
            # The edge itself lies between two points of the grid.
            x = np.unique(
                np.concatenate([grid[inside], [value for value in (low, high) if _within(value, grid)]])
            )
            axes.fill_between(
                x, 0.0, np.interp(x, grid, curve), color=style.OCHRE_DARK, linewidth=0, zorder=1.2
            )
    axes.plot(grid, curve, color=style.OCHRE, linewidth=1.4, zorder=2)
    if data.prior is None:
        axes.axhline(0.03 * _top(data), color=style.PRIOR, linewidth=1.0, dashes=(4, 2.5), zorder=2.5)
    else:
        axes.plot(grid, data.prior, color=style.PRIOR, linewidth=1.0, dashes=(4, 2.5), zorder=2.5)


def _within(value: float, grid: FloatArray) -> bool:
    return bool(grid[0] < value < grid[-1])


def _draw_confidence(axes: Axes, data: DensityData, top: float) -> None:
    low, high = axes.get_xlim()
    if isinstance(data.confidence, Bar):
        style.draw_confidence(axes, data.confidence, -0.085 * top)
        centre = min(max(data.confidence.centre, low), high)
    else:
        centre = (low + high) / 2.0
    reach = style.text_width(data.confidence_words, style.SMALL_TEXT) / style.WIDTH * (high - low) / 2.0
    place = min(max(centre, low + reach), high - reach)
    axes.text(place, -0.19 * top, data.confidence_words, color=style.PETROL, ha="center", va="center",
              fontsize=style.SMALL_TEXT)  # fmt: skip


def _draw_words(axes: Axes, data: DensityData, top: float) -> None:
    """Write the probability in an upper corner, and the prior's name beside its curve."""
    right = _corner_on_right(data, top)
    axes.text(0.997 if right else 0.003, 0.97, data.shaded_words, transform=axes.transAxes, va="top",
              ha="right" if right else "left", color=style.OCHRE_TEXT, linespacing=1.05)  # fmt: skip
    words: dict[str, Any] = {"color": style.PRIOR_TEXT, "fontsize": style.SMALL_TEXT}
    flank = _flank(data, top)
    if flank is None:
        prior = data.prior if data.prior is not None else np.full_like(data.grid, 0.03 * top)
        end = len(prior) - 1 if data.posterior[-1] <= data.posterior[0] else 0
        axes.text(0.997 if end else 0.003, float(prior[end]) + 0.025 * top, data.prior_words, va="bottom",
                  ha="right" if end else "left", transform=axes.get_yaxis_transform(), **words)  # fmt: skip
        return
    x, y, side = flank
    gap = 0.008 * float(data.grid[-1] - data.grid[0])
    axes.text(
        x + side * gap,
        y + 0.02 * top,
        data.prior_words,
        va="bottom",
        ha="left" if side > 0 else "right",
        **words,
    )


def _corner_on_right(data: DensityData, top: float) -> bool:
    """Choose the corner beside the shaded part, unless a curve runs through it and not through the other."""
    width = int(
        len(data.grid) * (style.text_width(max(data.shaded_words.split("\n"), key=len)) + 4) / style.WIDTH
    )
    curve = data.posterior if data.prior is None else np.maximum(data.posterior, data.prior)
    left_free, right_free = (float(part.max()) < 0.68 * top for part in (curve[:width], curve[-width:]))
    wanted = math.isinf(data.shaded[-1][1])
    return wanted if left_free == right_free else right_free


def _flank(data: DensityData, top: float) -> tuple[float, float, int] | None:
    """Return where a prior that stands out has its name: on its slope away from the posterior's peak.

    x, y and the side (+1 right) of the slope; None when the prior is nearly level in the picture.
    """
    if data.prior is None:
        return None
    prior = np.minimum(np.where(np.isfinite(data.prior), data.prior, top), top)
    peak = int(np.argmax(prior))
    side = 1 if int(np.argmax(data.posterior)) < peak else -1
    slope = np.arange(peak, len(prior)) if side > 0 else np.arange(peak, -1, -1)
    below = slope[prior[slope] < 0.6 * prior[peak]]
    if prior[peak] < 0.25 * top or below.size == 0:
        return None
    place = int(below[0])
    room = (len(prior) - place if side > 0 else place) / len(prior) * style.WIDTH
    if room < style.text_width(data.prior_words, style.SMALL_TEXT) + 3.0:
        return None
    return float(data.grid[place]), float(prior[place]), side
