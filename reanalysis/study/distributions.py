"""The prior distributions that a study file can name.

Each is a frozen pydantic model that forbids unknown keys: in the libraries
below, a misspelt argument is swallowed without a word and the default used
instead. The log densities live in `reanalysis.bayesian.densities`.
"""

from __future__ import annotations

from typing import Annotated, Literal

from pydantic import BaseModel, ConfigDict, Field, PositiveFloat, model_validator

Real = Annotated[float, Field(allow_inf_nan=False)]
Positive = Annotated[PositiveFloat, Field(allow_inf_nan=False)]


class _Distribution(BaseModel):
    model_config = ConfigDict(extra="forbid", frozen=True)


class Flat(_Distribution):
    """Constant on the whole line (improper)."""

    dist: Literal["flat"] = "flat"


class Normal(_Distribution):
    """Normal with mean and standard deviation."""

    dist: Literal["normal"] = "normal"
    mean: Real = 0.0
    sd: Positive


class StudentT(_Distribution):
    """Student's t with degrees of freedom, location and scale."""

    dist: Literal["student_t"] = "student_t"
    df: Positive
    location: Real = 0.0
    scale: Positive


class Cauchy(_Distribution):
    """Cauchy with location and scale."""

    dist: Literal["cauchy"] = "cauchy"
    location: Real = 0.0
    scale: Positive


class Laplace(_Distribution):
    """Double exponential with location and scale."""

    dist: Literal["laplace"] = "laplace"
    location: Real = 0.0
    scale: Positive


class Uniform(_Distribution):
    """Constant between two bounds."""

    dist: Literal["uniform"] = "uniform"
    low: Real
    high: Real

    @model_validator(mode="after")
    def _ordered(self) -> Uniform:
        if not self.low < self.high:
            raise ValueError(f"low must be below high; got low = {self.low}, high = {self.high}")
        return self


class LogNormal(_Distribution):
    """Positive; the logarithm is normal."""

    dist: Literal["lognormal"] = "lognormal"
    meanlog: Real = 0.0
    sdlog: Positive


class Gamma(_Distribution):
    """Positive; shape and rate."""

    dist: Literal["gamma"] = "gamma"
    shape: Positive
    rate: Positive


class Exponential(_Distribution):
    """Positive; rate."""

    dist: Literal["exponential"] = "exponential"
    rate: Positive


class HalfFlat(_Distribution):
    """Constant on the positive half line (improper)."""

    dist: Literal["half_flat"] = "half_flat"


class LogFlat(_Distribution):
    """Constant in the logarithm, p(x) proportional to 1/x (improper): the reference prior of a scale."""

    dist: Literal["log_flat"] = "log_flat"


class HalfNormal(_Distribution):
    """Positive half of a normal around zero."""

    dist: Literal["half_normal"] = "half_normal"
    sd: Positive


class HalfCauchy(_Distribution):
    """Positive half of a Cauchy around zero."""

    dist: Literal["half_cauchy"] = "half_cauchy"
    scale: Positive


class HalfStudentT(_Distribution):
    """Positive half of a Student's t around zero."""

    dist: Literal["half_student_t"] = "half_student_t"
    df: Positive
    scale: Positive


RealDistribution = Flat | Normal | StudentT | Cauchy | Laplace
"""Distributions on the whole line."""

PositiveDistribution = (
    LogNormal | Gamma | Exponential | HalfFlat | LogFlat | HalfNormal | HalfCauchy | HalfStudentT
)
"""Distributions on the positive half line."""

Distribution = Annotated[RealDistribution | PositiveDistribution | Uniform, Field(discriminator="dist")]
"""Any distribution of a coefficient."""

AuxiliaryDistribution = Annotated[PositiveDistribution, Field(discriminator="dist")]
"""Any distribution of a standard deviation or another positive auxiliary parameter."""
