"""Residuals of the frequentist fit: against the fitted values, and against a normal distribution."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from matplotlib.axes import Axes
from numpy.typing import NDArray
from scipy import stats

from reanalysis.frequentist.result import FrequentistFit
from reanalysis.report import numbers
from reanalysis.report.figures import style
from reanalysis.report.fonts import SANS

FloatArray = NDArray[np.float64]
HEIGHT, PANEL, GAP, LEFT = 53.0, 72.0, 12.0, 7.0
KNOTS, BAND_CORNERS = 60, 100


@dataclass(frozen=True, slots=True)
class ResidualData:
    """What the picture shows.

    Attributes
    ----------
    fitted, residuals : ndarray, shape (m,)
        The finite ones, in increasing order of the fitted values.
    mean_at, mean : ndarray, shape (j,)
        Running mean of the residuals.
    normal, ordered, band_low, band_high : ndarray, shape (m,)
        Normal quantiles, ordered residuals, and the 95 % range of each under normality.
    outside : int
        How many ordered residuals lie outside their range.
    residual_words, fitted_words : str
        Names of the axes.
    """

    fitted: FloatArray
    residuals: FloatArray
    mean_at: FloatArray
    mean: FloatArray
    normal: FloatArray
    ordered: FloatArray
    band_low: FloatArray
    band_high: FloatArray
    outside: int
    residual_words: str
    fitted_words: str


def residual_data(fit: FrequentistFit, fitted_words: str) -> ResidualData:
    """Return the data of the picture; `fitted_words` names the fitted values with their unit.

    The range of the k-th of m ordered residuals is the central 95 % of the normal quantile of a
    Beta(k, m − k + 1) variable, one order statistic at a time.

    References
    ----------
    David, H. A. and Nagaraja, H. N. (2003). Order Statistics, 3rd ed., section 2.1.
    """
    usable = np.isfinite(fit.residuals) & np.isfinite(fit.fitted)
    order = np.argsort(fit.fitted[usable], kind="stable")
    fitted, residuals = fit.fitted[usable][order], fit.residuals[usable][order]
    count = len(residuals)
    rank = np.arange(1, count + 1)
    ordered = np.sort(residuals)
    band_low, band_high = (
        np.asarray(stats.norm.ppf(stats.beta.ppf(share, rank, count - rank + 1))) for share in (0.025, 0.975)
    )
    mean_at, mean = running_mean(fitted, residuals)
    return ResidualData(
        fitted=fitted,
        residuals=residuals,
        mean_at=mean_at,
        mean=mean,
        normal=np.asarray(stats.norm.ppf((rank - 0.5) / max(count, 1))),
        ordered=ordered,
        band_low=band_low,
        band_high=band_high,
        outside=int(np.sum((ordered < band_low) | (ordered > band_high))),
        residual_words="studentised residual" if fit.method == "OLS" else "quantile residual",
        fitted_words=fitted_words,
    )


def running_mean(x: FloatArray, y: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Return means of neighbouring points: each of a window of a fifth of them (at least 10), x sorted.

    Returns
    -------
    at, mean : ndarray, shape (j,)
        Means of x and of y within each window, j at most `KNOTS`.
    """
    window = min(max(len(x) // 5, 10), len(x))
    if window == 0:
        return x, y
    starts = np.unique(np.linspace(0, len(x) - window, KNOTS).astype(int))
    sums_x, sums_y = (np.concatenate([[0.0], np.cumsum(values)]) for values in (x, y))
    at, mean = ((sums[starts + window] - sums[starts]) / window for sums in (sums_x, sums_y))
    return np.asarray(at), np.asarray(mean)


def draw_residuals(data: ResidualData) -> str:
    """Draw both panels, 170 mm by 56 mm. Returns SVG."""
    with style.drawing():
        figure = style.new_figure(style.WIDTH, HEIGHT)
        right = LEFT + PANEL + GAP
        for left, draw in ((LEFT, _draw_against_fitted), (right, _draw_against_normal)):
            width = PANEL if left == LEFT else style.WIDTH - right
            draw(style.add_axes(figure, left, 11.0, width, HEIGHT - 17.0), data)
        heading = {
            "va": "top",
            "ha": "left",
            "fontsize": style.SMALL_TEXT,
            "weight": "semibold",
            "family": SANS,
        }
        style.add_text(
            figure,
            0.0,
            HEIGHT - 0.3,
            f"{data.residual_words} against fitted value, with running mean",
            **heading,
        )
        style.add_text(
            figure, right - LEFT, HEIGHT - 0.3, "ordered residuals against normal quantiles", **heading
        )
        return style.to_svg(figure)


def _draw_against_fitted(axes: Axes, data: ResidualData) -> None:
    _side_axis(axes, style.padded(data.residuals.tolist()))
    style.number_axis(axes, style.padded(data.fitted.tolist(), 0.03), data.fitted_words, wanted=6)
    axes.axhline(0.0, color=style.SOFT, linewidth=0.6, zorder=1.5)
    _points(axes, data.fitted, data.residuals)
    axes.plot(data.mean_at, data.mean, color=style.INK, linewidth=1.6, zorder=3)


def _draw_against_normal(axes: Axes, data: ResidualData) -> None:
    _side_axis(axes, style.padded([*data.ordered.tolist(), *data.normal.tolist()]))
    style.number_axis(axes, style.padded(data.normal.tolist(), 0.03), "normal quantile", wanted=6)
    # A hundred corners are as smooth to the eye as one for every row.
    corners = np.unique(np.linspace(0, max(len(data.normal) - 1, 0), BAND_CORNERS).astype(int))
    band = (data.normal[corners], data.band_low[corners], data.band_high[corners])
    axes.fill_between(*band, color=style.BAND, linewidth=0, zorder=0.5)
    axes.plot(data.normal[[0, -1]], data.normal[[0, -1]], color=style.INK, linewidth=0.8, zorder=1.5)
    _points(axes, data.normal, data.ordered)


def _side_axis(axes: Axes, limits: tuple[float, float]) -> None:
    axes.set_ylim(*limits)
    values, texts = style.tick_values(*limits, 5)
    axes.set_yticks(values, texts)


def _points(axes: Axes, x: FloatArray, y: FloatArray) -> None:
    many = len(x) > style.MANY_MARKS
    axes.plot(x, y, "o", color=style.PETROL, alpha=0.25 if many else 0.5, markersize=1.6 if many else 2.6,
              markeredgewidth=0, rasterized=many, zorder=2)  # fmt: skip


def outside_words(data: ResidualData) -> str:
    """Return how many residuals lie outside the band, for the caption: ``4 of 96``."""
    return f"{numbers.count(data.outside)} of {numbers.count(len(data.ordered))}"
