"""Set-up shared by all tests: in CI nothing is skipped, and hypothesis runs the same examples every time."""

from __future__ import annotations

import os
from collections.abc import Generator

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
