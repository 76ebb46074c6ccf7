"""Would the fitted model produce data like these? One posterior predictive check by family."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np
from matplotlib.axes import Axes
from numpy.typing import NDArray

from reanalysis.bayesian.result import Draws
from reanalysis.design.model import Design
from reanalysis.report import numbers
from reanalysis.report.figures import style
from reanalysis.report.figures.smooth import density

FloatArray = NDArray[np.float64]
CURVES, REPLICATES = 30, 200
POINTS = 120
GROUPS, MOST_COUNTS = 10, 16
HEIGHT, BOTTOM, LEFT = 49.0, 11.0, 13.0


@dataclass(frozen=True, slots=True)
class PredictiveCurves:
    """Densities of the observed and of replicated outcomes.

    Attributes
    ----------
    grid, observed : ndarray, shape (m,)
    replicated : ndarray, shape (r, m)
    axis_label : str
    """

    grid: FloatArray
    observed: FloatArray
    replicated: FloatArray
    axis_label: str


@dataclass(frozen=True, slots=True)
class PredictiveBars:
    """Observed amounts in groups beside the range of replicated ones.

    Attributes
    ----------
    places : ndarray, shape (g,)
        Where the groups stand on the axis.
    names : tuple of str
        Names of the groups; empty when the axis is one of numbers.
    observed, low, middle, high : ndarray, shape (g,)
        Observed amount; 2.5 %, 50 % and 97.5 % points of the replicated ones.
    amount_words, axis_label : str
        What is counted, and what the groups are.
    """

    places: FloatArray
    names: tuple[str, ...]
    observed: FloatArray
    low: FloatArray
    middle: FloatArray
    high: FloatArray
    amount_words: str
    axis_label: str


PredictiveData = PredictiveCurves | PredictiveBars


def predictive_data(design: Design, draws: Draws, seed: int) -> PredictiveData:
    """Replicate the outcome from the posterior and summarise it as suits the family.

    Parameters
    ----------
    design : Design
        n rows.
    draws : Draws
        Posterior draws; an evenly spaced part of them is used.
    seed : int
        Of the replicated outcomes.

    Returns
    -------
    PredictiveCurves
        Gaussian: densities of 30 replicated data sets.
    PredictiveBars
        Bernoulli: share of events in ten groups of rows by predicted probability; Poisson: how
        many rows have each count; both over 200 replicated data sets.

    References
    ----------
    Gelman, A., Meng, X.-L. and Stern, H. (1996). Posterior predictive assessment of model fitness
    via realized discrepancies. Statistica Sinica 6, 733-760.
    """
    match design.family.name:
        case "gaussian":
            return _curves(design, draws, seed)
        case "bernoulli":
            return _calibration(design, draws, seed)
        case "poisson":
            return _counts(design, draws, seed)


def _means(design: Design, draws: Draws, wanted: int) -> Iterator[tuple[int, FloatArray]]:
    """Give position and fitted means, shape (n,), of evenly spaced draws, one at a time to spare memory."""
    coefficients = draws.flat
    offset = 0.0 if design.offset is None else design.offset
    positions = np.unique(np.linspace(0, len(coefficients) - 1, wanted).astype(int))
    for position in positions:
        eta = design.matrix @ coefficients[position] + offset
        yield int(position), design.family.inverse_link(np.asarray(eta))


def _curves(design: Design, draws: Draws, seed: int) -> PredictiveCurves:
    rng = np.random.default_rng(seed)
    sigma = draws.flat_auxiliary[:, 0]
    replicas = [rng.normal(mean, sigma[k]) for k, mean in _means(design, draws, CURVES)]
    observed = design.response.values
    low, high = np.quantile(np.concatenate([observed, *replicas]), [0.0005, 0.9995])
    air = 0.08 * float(high - low)
    grid = np.linspace(min(low, observed.min()) - air, max(high, observed.max()) + air, POINTS)
    replicated = np.stack([density(replica, grid) for replica in replicas])
    return PredictiveCurves(grid, density(observed, grid), replicated, _outcome(design))


def _calibration(design: Design, draws: Draws, seed: int) -> PredictiveBars:
    rng = np.random.default_rng(seed)
    means = [mean for _, mean in _means(design, draws, REPLICATES)]
    predicted = np.mean(means, axis=0)
    groups = [part for part in np.array_split(np.argsort(predicted, kind="stable"), GROUPS) if part.size]
    replicated = np.empty((len(means), len(groups)))
    for row, mean in enumerate(means):
        outcome = rng.random(len(mean)) < mean
        replicated[row] = [outcome[group].mean() for group in groups]
    low, middle, high = np.quantile(replicated, [0.025, 0.5, 0.975], axis=0)
    event = f"{design.response.name} = {design.response.event}"
    return PredictiveBars(
        places=np.asarray([predicted[group].mean() for group in groups]),
        names=(),
        observed=np.asarray([design.response.values[group].mean() for group in groups]),
        low=low,
        middle=middle,
        high=high,
        amount_words=f"share with {event}",
        axis_label=f"predicted probability of {event}",
    )


def _counts(design: Design, draws: Draws, seed: int) -> PredictiveBars:
    rng = np.random.default_rng(seed)
    observed = design.response.values
    edges = _count_edges(observed)
    # A mean beyond 1e15 cannot be drawn from, and is far beyond the last group anyway.
    replicas = [rng.poisson(np.minimum(mean, 1e15)) for _, mean in _means(design, draws, REPLICATES)]
    replicated = np.stack([_tally(replica, edges) for replica in replicas])
    low, middle, high = np.quantile(replicated, [0.025, 0.5, 0.975], axis=0)
    return PredictiveBars(
        places=np.arange(len(edges), dtype=np.float64),
        names=_count_names(edges),
        observed=_tally(observed, edges),
        low=low,
        middle=middle,
        high=high,
        amount_words="number of rows",
        axis_label=_outcome(design),
    )


def _count_edges(observed: FloatArray) -> FloatArray:
    """Lowest count of each group; the last group is open. One count a group while they are few."""
    most = int(np.quantile(observed, 0.99)) + 1
    step = max(int(np.ceil((most + 1) / MOST_COUNTS)), 1)
    return np.arange(0, most + step, step, dtype=np.float64)


def _tally(counts: NDArray[np.floating] | NDArray[np.integer], edges: FloatArray) -> FloatArray:
    groups = np.searchsorted(edges, counts, side="right") - 1
    return np.bincount(groups, minlength=len(edges)).astype(np.float64)


def _count_names(edges: FloatArray) -> tuple[str, ...]:
    step = int(edges[1] - edges[0])
    closed = [
        numbers.count(edge) if step == 1 else f"{numbers.count(edge)}–{numbers.count(edge + step - 1)}"
        for edge in edges[:-1]
    ]
    return (*closed, f"{numbers.count(edges[-1])}+")


def _outcome(design: Design) -> str:
    unit = design.response.unit
    return f"{design.response.name}, {unit}" if unit else design.response.name


def draw_predictive(data: PredictiveData) -> str:
    """Draw the picture, 170 mm by 52 mm. Returns SVG."""
    with style.drawing():
        figure = style.new_figure(style.WIDTH, HEIGHT)
        if isinstance(data, PredictiveCurves):
            _draw_curves(style.add_axes(figure, 0.0, BOTTOM, style.WIDTH, HEIGHT - BOTTOM - 1.0), data)
        else:
            axes = style.add_axes(figure, LEFT, BOTTOM, style.WIDTH - LEFT, HEIGHT - BOTTOM - 7.0)
            _draw_bars(axes, data)
            heading = style.wrap(data.amount_words, 90.0, 1, style.SMALL_TEXT)
            style.add_text(figure, 0.0, HEIGHT - 0.3, heading, va="top", color=style.SOFT,
                           fontsize=style.SMALL_TEXT)  # fmt: skip
            _name_marks(figure_axes=axes)
        return style.to_svg(figure)


def _draw_curves(axes: Axes, data: PredictiveCurves) -> None:
    style.number_axis(axes, (float(data.grid[0]), float(data.grid[-1])), data.axis_label)
    axes.set_ylim(0.0, 1.06 * max(float(data.replicated.max()), float(data.observed.max())))
    axes.set_yticks([])
    axes.plot(data.grid, data.replicated.T, color=style.OCHRE, linewidth=0.6, alpha=0.45, zorder=1)
    axes.plot(data.grid, data.observed, color=style.INK, linewidth=1.5, zorder=2)
    # The emptier upper corner takes the words.
    half = len(data.grid) // 5
    right = float(data.replicated[:, -half:].max()) <= float(data.replicated[:, :half].max())
    place, side = (0.997, "right") if right else (0.003, "left")
    for height, words, colour in ((0.97, "observed", style.INK), (0.84, _replicated(data), style.OCHRE_TEXT)):
        axes.text(place, height, words, transform=axes.transAxes, ha=side, va="top", color=colour)


def _replicated(data: PredictiveCurves) -> str:
    return f"{numbers.count(len(data.replicated))} replicated data sets"


def _draw_bars(axes: Axes, data: PredictiveBars) -> None:
    reach = float(max(data.high.max(), data.observed.max())) or 1.0
    axes.set_ylim(0.0, 1.06 * reach)
    values, texts = style.tick_values(0.0, 1.06 * reach, 5)
    axes.set_yticks(values, texts)
    if data.names:
        axes.set_xlim(-0.6, len(data.places) - 0.4)
        axes.set_xticks(data.places, data.names)
        axes.set_xlabel(data.axis_label, color=style.SOFT, fontsize=style.SMALL_TEXT, labelpad=3)
    else:
        style.number_axis(axes, style.padded(data.places.tolist(), 0.05), data.axis_label)
        axes.plot(axes.get_xlim(), axes.get_xlim(), color=style.RULE, linewidth=0.6, zorder=0.5)
    axes.vlines(data.places, data.low, data.high, color=style.OCHRE, linewidth=3.6, alpha=0.45, zorder=1)
    axes.plot(
        data.places, data.middle, "_", color=style.OCHRE_TEXT, markersize=7, markeredgewidth=1, zorder=2
    )
    axes.plot(data.places, data.observed, "D", color=style.INK, markersize=3.4, markeredgewidth=0, zorder=3,
              clip_on=False)  # fmt: skip


def _name_marks(figure_axes: Axes) -> None:
    """Write above the plot, at its right end, what the two marks are."""
    width = style.size_of(figure_axes)[0]
    replicated, observed = "bar: 95 % of replicated data sets".replace(" %", "\u202f%"), "diamond: observed"
    end = style.text_width(replicated, style.SMALL_TEXT) + 5.0
    y = figure_axes.get_ylim()[1] * (1.0 + 4.2 / style.size_of(figure_axes)[1])
    for x, words, colour in ((width, replicated, style.OCHRE_TEXT), (width - end, observed, style.INK)):
        style.edge_text(figure_axes, x, y, words, ha="right", va="center", color=colour,
                        fontsize=style.SMALL_TEXT)  # fmt: skip
