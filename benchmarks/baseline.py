"""The plain loop: fit each study with statsmodels, then with bambi's defaults under three prior sets.

This is what an analyst writes by hand with both libraries at their defaults, and
what a batch of studies is timed against::

    python -m benchmarks.baseline [STUDIES]

prints the seconds that each study took and their mean.
"""

from __future__ import annotations

import sys
from collections.abc import Sequence
from dataclasses import dataclass
from time import perf_counter

import arviz as az
import bambi as bmb
import numpy as np
import pandas as pd
import statsmodels.formula.api as smf

FORMULA = "y ~ x1 + x2 + x3"
ROWS = 100
SLOPES = np.array([0.5, -0.3, 0.0])
CORES = 2


@dataclass(frozen=True, slots=True)
class SmallStudy:
    """One data set of the benchmark: columns ``y``, ``x1``, ``x2`` and ``x3``, a Gaussian outcome."""

    name: str
    table: pd.DataFrame


def make_studies(count: int, seed: int = 20251124) -> list[SmallStudy]:
    """Draw `count` studies of one structure, 100 rows and three predictors each."""
    studies = []
    for number, source in enumerate(np.random.SeedSequence(seed).spawn(count), start=1):
        random = np.random.default_rng(source)
        predictors = random.normal(size=(ROWS, SLOPES.size))
        table = pd.DataFrame(predictors, columns=["x1", "x2", "x3"])
        table["y"] = 10.0 + predictors @ SLOPES + random.normal(0.0, 1.0, size=ROWS)
        studies.append(SmallStudy(name=f"study_{number:03d}", table=table))
    return studies


def prior_sets() -> dict[str, dict[str, bmb.Prior] | None]:
    """Return bambi's own priors, tight normal slopes and wide ones."""
    slopes = ("x1", "x2", "x3")
    return {
        "default": None,
        "tight": {slope: bmb.Prior("Normal", mu=0.0, sigma=0.25) for slope in slopes},
        "wide": {slope: bmb.Prior("Normal", mu=0.0, sigma=10.0) for slope in slopes},
    }


def analyse(table: pd.DataFrame) -> dict[str, pd.DataFrame]:
    """Fit one study both ways and return a summary table of each fit."""
    fit = smf.ols(FORMULA, data=table).fit()
    limits = fit.conf_int()
    summaries = {
        "frequentist": pd.DataFrame(
            {"estimate": fit.params, "se": fit.bse, "p": fit.pvalues, "low": limits[0], "high": limits[1]}
        )
    }
    for name, priors in prior_sets().items():
        model = bmb.Model(FORMULA, table, priors=priors)
        posterior = model.fit(chains=4, cores=CORES, progressbar=False, random_seed=1)
        summaries[name] = az.summary(posterior)
    return summaries


def run(studies: Sequence[SmallStudy]) -> float:
    """Analyse the studies one after another; return the mean seconds per study, imports not counted."""
    start = perf_counter()
    for study in studies:
        before = perf_counter()
        analyse(study.table)
        print(f"{study.name}: {perf_counter() - before:.1f} s", flush=True)
    return (perf_counter() - start) / len(studies)


if __name__ == "__main__":
    wanted = int(sys.argv[1]) if len(sys.argv) > 1 else 3
    print(f"plain loop: {run(make_studies(wanted)):.1f} s a study, {wanted} studies")
