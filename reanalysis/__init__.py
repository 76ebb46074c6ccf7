"""Side-by-side frequentist and Bayesian re-analysis.

::

    study = load_study(Path("firmness.toml"))
    analysis = analyse(study)
    write_report(analysis, Path("out"))

Every name is imported on first use, so that the package itself loads at once.
"""

from __future__ import annotations

from importlib import import_module
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from reanalysis.analysis.result import Analysis
    from reanalysis.analysis.run import analyse
    from reanalysis.errors import ReanalysisError
    from reanalysis.report.results import build_results
    from reanalysis.report.write import write_report
    from reanalysis.study.read import load_study
    from reanalysis.study.spec import Study

__all__ = [
    "Analysis",
    "ReanalysisError",
    "Study",
    "analyse",
    "build_results",
    "load_study",
    "write_report",
]

_HOMES = {
    "Analysis": "reanalysis.analysis.result",
    "ReanalysisError": "reanalysis.errors",
    "Study": "reanalysis.study.spec",
    "analyse": "reanalysis.analysis.run",
    "build_results": "reanalysis.report.results",
    "load_study": "reanalysis.study.read",
    "write_report": "reanalysis.report.write",
}


def __dir__() -> list[str]:
    return sorted({*globals(), *__all__})


def __getattr__(name: str) -> Any:
    if name not in _HOMES:
        raise AttributeError(f"module {__name__!r} has no attribute {name!r}")
    return getattr(import_module(_HOMES[name]), name)
