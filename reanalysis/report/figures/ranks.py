"""Whether the chains of a sampler agree: ranks of their draws."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from matplotlib.axes import Axes
from numpy.typing import NDArray
from scipy import stats

from reanalysis.report.figures import style
from reanalysis.report.fonts import SANS

FloatArray = NDArray[np.float64]
FEWEST, MOST, PANEL_HEIGHT, LABEL_HEIGHT, GAP = 2, 4, 22.0, 9.0, 6.0
POINTS = 50


@dataclass(frozen=True, slots=True)
class RankPanel:
    """One parameter.

    Attributes
    ----------
    label : str
    differences : ndarray, shape (chains, m)
        Share of a chain's draws whose rank among all draws is at most each of `m` even shares,
        minus that share.
    limit : float
        99 % of well-mixed runs stay within plus and minus this everywhere.
    """

    label: str
    differences: FloatArray
    limit: float


@dataclass(frozen=True, slots=True)
class RankData:
    """The panels, in reading order."""

    panels: tuple[RankPanel, ...]


def rank_data(parameters: Sequence[tuple[str, FloatArray, float]]) -> RankData:
    """Return the data of the picture.

    Parameters
    ----------
    parameters : sequence of (label, draws of shape (chains, draws), bulk effective sample size)

    Notes
    -----
    The limit is Kolmogorov's for one sample of a chain's share of the effective sample size,
    narrowed by sqrt(1 − 1/chains) because each chain is compared with a pool that holds it, at
    1 % shared among the chains (Bonferroni).

    References
    ----------
    Säilynoja, T., Bürkner, P.-C. and Vehtari, A. (2022). Graphical test for discrete uniformity
    and its applications in goodness-of-fit evaluation and multiple sample comparison.
    Statistics and Computing 32, 32.
    """
    return RankData(tuple(_panel(label, draws, ess) for label, draws, ess in parameters))


def _panel(label: str, draws: FloatArray, ess: float) -> RankPanel:
    chains, length = draws.shape
    shares = np.linspace(0.0, 1.0, POINTS)
    ranks = np.sort((stats.rankdata(draws) / draws.size).reshape(chains, length), axis=1)
    below = np.stack([np.searchsorted(row, shares, side="right") / length for row in ranks])
    size = min(ess / chains, length) if math.isfinite(ess) and ess > 0.0 else length
    critical = float(stats.kstwobign.isf(0.01 / chains))
    limit = critical * math.sqrt(max(1.0 - 1.0 / chains, 0.0) / max(size, 1.0))
    return RankPanel(label, np.asarray(below - shares), limit)


def draw_ranks(data: RankData) -> str:
    """Draw the panels, two to four in a row. Returns SVG."""
    per_row = min(max(len(data.panels), FEWEST), MOST)
    rows = max(math.ceil(len(data.panels) / per_row), 1)
    height = rows * (PANEL_HEIGHT + LABEL_HEIGHT) + 4.0
    width = (style.WIDTH - GAP * (per_row - 1)) / per_row
    reach = max((max(float(np.abs(p.differences).max()), p.limit) for p in data.panels), default=1.0) * 1.08
    with style.drawing():
        figure = style.new_figure(style.WIDTH, height)
        for position, panel in enumerate(data.panels):
            row, column = divmod(position, per_row)
            left = column * (width + GAP)
            bottom = height - (row + 1) * (PANEL_HEIGHT + LABEL_HEIGHT) + 4.5
            axes = style.add_axes(figure, left, bottom, width, PANEL_HEIGHT)
            _draw_panel(axes, panel, reach)
            label = style.wrap(panel.label, width, 1, style.SMALL_TEXT)
            style.add_text(figure, left, bottom + PANEL_HEIGHT + 0.8, label, va="bottom",
                           weight="semibold", family=SANS, fontsize=style.SMALL_TEXT)  # fmt: skip
        return style.to_svg(figure)


def _draw_panel(axes: Axes, panel: RankPanel, reach: float) -> None:
    shares = np.linspace(0.0, 1.0, panel.differences.shape[1])
    axes.set_xlim(0.0, 1.0)
    axes.set_ylim(-reach, reach)
    axes.set_yticks([])
    axes.set_xticks([0.0, 0.5, 1.0], ["smallest", "middle", "largest"])
    first, _, last = axes.get_xticklabels()
    first.set_horizontalalignment("left")
    last.set_horizontalalignment("right")
    axes.axhspan(-panel.limit, panel.limit, color=style.BAND, linewidth=0, zorder=0.5)
    axes.axhline(0.0, color=style.INK, linewidth=0.6, zorder=1)
    for chain in panel.differences:
        axes.plot(shares, chain, color=style.OCHRE, linewidth=0.9, alpha=0.85, zorder=2)
