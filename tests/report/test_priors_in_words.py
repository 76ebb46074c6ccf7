"""Prior distributions in words: every one that a study can name, with its numbers and unit."""

from __future__ import annotations

from typing import get_args

import pytest

from reanalysis.report.priors_in_words import describe
from reanalysis.study import distributions as dist

T, M = "\u202f", "\u2212"

WORDS = {
    "flat": (dist.Flat(), "flat"),
    "normal": (dist.Normal(mean=4.5, sd=2.4), f"normal, centre 4.5, SD 2.4{T}N"),
    "normal below zero": (dist.Normal(mean=-0.69, sd=0.4), f"normal, centre {M}0.69, SD 0.4{T}N"),
    "three digits": (dist.Normal(mean=0.0, sd=27.96553), f"normal, centre 0, SD 28{T}N"),
    "small": (dist.Normal(sd=0.000012345), f"normal, centre 0, SD 1.23{T}×{T}10⁻⁵{T}N"),
    "student": (dist.StudentT(df=4, location=1, scale=2.5), f"Student t, 4 df, centre 1, scale 2.5{T}N"),
    "cauchy": (dist.Cauchy(scale=2.5), f"Cauchy, centre 0, scale 2.5{T}N"),
    "laplace": (dist.Laplace(location=-1, scale=3), f"Laplace, centre {M}1, scale 3{T}N"),
    "uniform": (dist.Uniform(low=-2, high=8), f"uniform, {M}2 to 8{T}N"),
    "lognormal": (dist.LogNormal(meanlog=1, sdlog=0.5), "log-normal, centre 1, SD 0.5 in the logarithm"),
    "gamma": (dist.Gamma(shape=2, rate=0.1), "gamma, shape 2, rate 0.1"),
    "exponential": (dist.Exponential(rate=0.25), "exponential, rate 0.25"),
    "half flat": (dist.HalfFlat(), "flat above zero"),
    "log flat": (dist.LogFlat(), "flat in the logarithm (1/x)"),
    "half normal": (dist.HalfNormal(sd=5), f"half normal, SD 5{T}N"),
    "half cauchy": (dist.HalfCauchy(scale=5), f"half Cauchy, scale 5{T}N"),
    "half student": (dist.HalfStudentT(df=4, scale=10.4), f"half Student t, 4 df, scale 10.4{T}N"),
}


@pytest.mark.parametrize("case", WORDS)
def test_distribution_in_words(case: str) -> None:
    """Shape, centre and spread are said, the spread with its unit, to three significant digits."""
    distribution, words = WORDS[case]

    assert describe(distribution, "N") == words
    assert describe(distribution, "") == words.replace(f"{T}N", "")


def test_every_distribution_is_covered() -> None:
    """No distribution of the study file is left to its name in the code."""
    known = {type(distribution) for distribution, _ in WORDS.values()}

    assert known == set(get_args(get_args(dist.Distribution)[0]))
