"""Prior distributions in words and numbers."""

from __future__ import annotations

from reanalysis.report.numbers import given, quantity
from reanalysis.study import distributions as dist

_FIXED = {
    "flat": "flat",
    "half_flat": "flat above zero",
    "log_flat": "flat in the logarithm (1/x)",
}


def describe(distribution: dist.Distribution, unit: str) -> str:
    """Return a distribution in words: ``normal, centre 0, SD 28 N``."""
    if distribution.dist in _FIXED:
        return _FIXED[distribution.dist]
    return _unbounded(distribution, unit) or _positive(distribution, unit)


def _number(value: float, unit: str = "") -> str:
    return quantity(given(float(f"{value:.3g}")), unit)


def _unbounded(distribution: dist.Distribution, unit: str) -> str:
    match distribution:
        case dist.Normal(mean=mean, sd=sd):
            return f"normal, centre {_number(mean)}, SD {_number(sd, unit)}"
        case dist.StudentT(df=df, location=location, scale=scale):
            return f"Student t, {_number(df)} df, centre {_number(location)}, scale {_number(scale, unit)}"
        case dist.Cauchy(location=location, scale=scale):
            return f"Cauchy, centre {_number(location)}, scale {_number(scale, unit)}"
        case dist.Laplace(location=location, scale=scale):
            return f"Laplace, centre {_number(location)}, scale {_number(scale, unit)}"
        case dist.Uniform(low=low, high=high):
            return f"uniform, {_number(low)} to {_number(high, unit)}"
        case _:
            return ""


def _positive(distribution: dist.Distribution, unit: str) -> str:
    match distribution:
        case dist.LogNormal(meanlog=meanlog, sdlog=sdlog):
            return f"log-normal, centre {_number(meanlog)}, SD {_number(sdlog)} in the logarithm"
        case dist.Gamma(shape=shape, rate=rate):
            return f"gamma, shape {_number(shape)}, rate {_number(rate)}"
        case dist.Exponential(rate=rate):
            return f"exponential, rate {_number(rate)}"
        case dist.HalfNormal(sd=sd):
            return f"half normal, SD {_number(sd, unit)}"
        case dist.HalfCauchy(scale=scale):
            return f"half Cauchy, scale {_number(scale, unit)}"
        case dist.HalfStudentT(df=df, scale=scale):
            return f"half Student t, {_number(df)} df, scale {_number(scale, unit)}"
        case _:
            return distribution.dist
