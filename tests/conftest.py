"""Set-up shared by all tests: in CI nothing is skipped, and hypothesis runs the same examples every time."""

from __future__ import annotations

import os
from collections.abc import Callable, Generator
from functools import cache
from pathlib import Path
from typing import Any

import pytest
from hypothesis import HealthCheck, settings

# Compilation in a first call makes time limits for single examples meaningless.
settings.register_profile(
    "fast", max_examples=25, deadline=None, derandomize=True, database=None, print_blob=True
)
settings.register_profile(
    "nightly", max_examples=500, deadline=None, database=None, suppress_health_check=[HealthCheck.too_slow]
)
settings.load_profile(os.environ.get("HYPOTHESIS_PROFILE", "fast"))


def _refuse[Report: (pytest.TestReport, pytest.CollectReport)](report: Report) -> Report:
    """Turn a skipped or expected failure into a failure when CI is set: what did not run shows nothing."""
    excused = report.skipped or hasattr(report, "wasxfail")
    if excused and os.environ.get("CI"):
        reason = getattr(report, "wasxfail", None) or report.longrepr
        report.outcome = "failed"
        report.longrepr = f"skipped or expected to fail, which counts as a failure in CI: {reason}"
        vars(report).pop("wasxfail", None)
    return report


# First of the wrappers, so outermost: pytest's own marks a report as skipped or xfailed before we see it.
@pytest.hookimpl(wrapper=True, tryfirst=True)
def pytest_runtest_makereport() -> Generator[None, pytest.TestReport, pytest.TestReport]:
    """Judge each test's report."""
    return _refuse((yield))


@pytest.hookimpl(wrapper=True, tryfirst=True)
def pytest_make_collect_report() -> Generator[None, pytest.CollectReport, pytest.CollectReport]:
    """Judge each module's report: a whole module can skip itself while it is imported."""
    return _refuse((yield))


# The fixtures below import what they need when they are used: it takes seconds, and few tests need any of it.


@pytest.fixture(scope="session")
def store() -> Any:
    """Compiled models, shared by all tests: each structure is compiled once in a session."""
    from reanalysis.bayesian.model import ModelStore

    return ModelStore()


@pytest.fixture(scope="session")
def sampler() -> Any:
    """Settings of the sampler, as a study has them unless it says otherwise."""
    from reanalysis.bayesian.settings import SamplerSettings

    return SamplerSettings(
        seed=20261104, draws=2000, tune=500, chains=4, target_accept=0.9, low_rank=False, cores=2
    )


@pytest.fixture(scope="session")
def posterior_of(store: Any, sampler: Any) -> Callable[..., Any]:
    """Give a function that samples the posterior of a design under a prior set, at level 0.95."""
    from reanalysis.bayesian.fit import fit_posterior

    return lambda design, prior_set: fit_posterior(design, prior_set, sampler, 0.95, store)


@pytest.fixture(scope="session")
def design_of() -> Callable[..., Any]:
    """Give a function that builds the design of a frame, a formula, a family and further keys."""
    import pandas as pd

    from reanalysis.data.dataset import Dataset
    from reanalysis.design.build import build_design
    from reanalysis.study.spec import StudySpec

    def as_data(column: pd.Series) -> pd.Series | pd.Categorical:
        # Numbers as float64 and text as ordered factors, as the data room hands them over.
        if isinstance(column.dtype, pd.CategoricalDtype):
            return column
        if pd.api.types.is_string_dtype(column):
            return pd.Categorical(column, ordered=True)
        return column.astype(float)

    def make(frame: pd.DataFrame, formula: str, family: str = "gaussian", **keys: Any) -> Any:
        data = {key: keys.pop(key) for key in ("units", "missing") if key in keys}
        model = {"formula": formula, "family": family, **keys}
        spec = StudySpec.model_validate(
            {"title": "A test", "data": {"file": "x.csv", **data}, "model": model}
        )
        columns = {name: as_data(column) for name, column in frame.items()}
        table = pd.DataFrame(columns, index=frame.index)
        return build_design(spec, Dataset(table, sha256="", size=1, notes=()))

    return make


@pytest.fixture(scope="session")
def table_of() -> Callable[[str], Any]:
    """Give a function that reads a published data set by its name."""
    import pandas as pd

    folder = Path(__file__).parent / "reference"
    return lambda name: pd.read_csv(folder / f"{name}.csv", comment="#")


@pytest.fixture(scope="session")
def analysed(store: Any) -> Callable[[str], Any]:
    """Analyse a study, once a session, by its path from the root without the ending."""
    from reanalysis.analysis.run import analyse
    from reanalysis.study.read import load_study

    root = Path(__file__).resolve().parents[1]
    return cache(lambda study: analyse(load_study(root / f"{study}.toml"), store=store, cores=2))
