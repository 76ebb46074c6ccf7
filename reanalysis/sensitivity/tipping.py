"""The prior at which an answer changes."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Literal

import numpy as np

from reanalysis.sensitivity.result import NoTipping, SweepPoint, TippingPrior, TippingResult


def find_tipping(
    claim: Literal["direction", "beyond"], points: Sequence[SweepPoint], act_when: float
) -> TippingResult:
    """Find the prior width at which a claim's probability crosses the one needed to act.

    Parameters
    ----------
    claim : str
        ``direction`` or ``beyond``.
    points : sequence of SweepPoint
        In increasing width.
    act_when : float

    Notes
    -----
    The crossing is interpolated linearly between neighbouring points, in the logarithm of the width.
    """
    widths = np.array([point.width for point in points])
    values = [point.prob_direction if claim == "direction" else point.prob_beyond for point in points]
    excess = np.array(values, dtype=np.float64) - act_when
    reached = excess >= 0.0
    crossings = np.flatnonzero(reached[1:] != reached[:-1])
    if crossings.size == 0:
        return NoTipping(claim, "always" if bool(reached[0]) else "never")
    if crossings.size > 1:
        return NoTipping(claim, "several")
    at = int(crossings[0])
    share = excess[at] / (excess[at] - excess[at + 1])
    log_width = np.log(widths[at]) + share * (np.log(widths[at + 1]) - np.log(widths[at]))
    return TippingPrior(claim, float(np.exp(log_width)), "wider" if bool(reached[-1]) else "narrower")
