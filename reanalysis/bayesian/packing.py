"""Every prior distribution as one row of numbers, so that a compiled model can swap priors.

One log density covers the whole table of distributions up to its normalising
constant, with ``z = (x - location) / scale``::

    log p(x) = -q z^2 / 2 - h log(1 + z^2 / df) - l |z| + a log x - b x - r (log x - m)^2 / 2

A row holds (location, scale, q, h, df, l, a, b, r, m, support, low, high). The
terms in log x belong to positive distributions only. The constants that the
sampler never needs are left out; `reanalysis.bayesian.densities` has the exact
densities, and the tests compare the two.
"""

from __future__ import annotations

from enum import IntEnum, StrEnum

import numpy as np
from numpy.typing import NDArray

from reanalysis.bayesian.densities import is_positive
from reanalysis.study.distributions import (
    Cauchy,
    Distribution,
    Exponential,
    Gamma,
    HalfCauchy,
    HalfNormal,
    HalfStudentT,
    Laplace,
    LogFlat,
    LogNormal,
    Normal,
    StudentT,
    Uniform,
)

FloatArray = NDArray[np.float64]


class Support(IntEnum):
    """Where a parameter lives."""

    REAL = 0
    POSITIVE = 1
    INTERVAL = 2


class Slot(StrEnum):
    """The numbers of a row, in order."""

    LOCATION = "location"
    SCALE = "scale"
    Q = "q"
    H = "h"
    DF = "df"
    L = "l"
    A = "a"
    B = "b"
    R = "r"
    M = "m"
    SUPPORT = "support"
    LOW = "low"
    HIGH = "high"


WIDTH = len(Slot)

_NOTHING: dict[Slot, float] = {
    slot: 1.0 if slot in (Slot.SCALE, Slot.DF, Slot.HIGH) else 0.0 for slot in Slot
}


def support_of(distribution: Distribution) -> Support:
    """Where a parameter with this prior lives."""
    if isinstance(distribution, Uniform):
        return Support.INTERVAL
    return Support.POSITIVE if is_positive(distribution) else Support.REAL


def pack(distribution: Distribution) -> FloatArray:
    """Return the row of a distribution, shape (13,)."""
    values = _NOTHING | _terms(distribution) | {Slot.SUPPORT: float(support_of(distribution))}
    return np.array([values[slot] for slot in Slot])


def _terms(distribution: Distribution) -> dict[Slot, float]:
    match distribution:
        case Normal(mean=mean, sd=sd):
            return {Slot.LOCATION: mean, Slot.SCALE: sd, Slot.Q: 1.0}
        case StudentT(df=df, location=location, scale=scale):
            return {Slot.LOCATION: location, Slot.SCALE: scale, Slot.H: (df + 1.0) / 2.0, Slot.DF: df}
        case Cauchy(location=location, scale=scale):
            return {Slot.LOCATION: location, Slot.SCALE: scale, Slot.H: 1.0}
        case Laplace(location=location, scale=scale):
            return {Slot.LOCATION: location, Slot.SCALE: scale, Slot.L: 1.0}
        case Uniform(low=low, high=high):
            return {Slot.LOW: low, Slot.HIGH: high}
        case _:
            return _positive_terms(distribution)


def _positive_terms(distribution: Distribution) -> dict[Slot, float]:
    match distribution:
        case LogNormal(meanlog=meanlog, sdlog=sdlog):
            return {Slot.A: -1.0, Slot.R: 1.0 / sdlog**2, Slot.M: meanlog}
        case Gamma(shape=shape, rate=rate):
            return {Slot.A: shape - 1.0, Slot.B: rate}
        case Exponential(rate=rate):
            return {Slot.B: rate}
        case LogFlat():
            return {Slot.A: -1.0}
        case HalfNormal(sd=sd):
            return {Slot.SCALE: sd, Slot.Q: 1.0}
        case HalfCauchy(scale=scale):
            return {Slot.SCALE: scale, Slot.H: 1.0}
        case HalfStudentT(df=df, scale=scale):
            return {Slot.SCALE: scale, Slot.H: (df + 1.0) / 2.0, Slot.DF: df}
        case _:  # flat and half_flat: nothing to add
            return {}
