"""The names that `reanalysis` offers: all of them there, none of them loaded before it is used."""

from __future__ import annotations

import json
import subprocess
import sys
from importlib import import_module

import pytest

import reanalysis

HEAVY = {"numpy", "pandas", "scipy", "pydantic", "pymc", "bambi", "statsmodels", "matplotlib", "weasyprint"}


def test_names_are_sorted_and_complete() -> None:
    """`__all__` is sorted and lists exactly what has a home, at most a dozen names."""
    assert reanalysis.__all__ == sorted(reanalysis._HOMES)
    assert len(reanalysis.__all__) <= 12


@pytest.mark.parametrize("name", reanalysis.__all__)
def test_name_is_what_its_home_defines(name: str) -> None:
    """Each name is the very object of the module that defines it."""
    thing = getattr(reanalysis, name)

    assert thing is getattr(import_module(reanalysis._HOMES[name]), name)
    assert thing.__module__ == reanalysis._HOMES[name]
    assert thing.__doc__


def test_unknown_name_is_refused() -> None:
    """A name that is not offered raises the error that `hasattr` and `from … import` rely on."""
    with pytest.raises(AttributeError, match="module 'reanalysis' has no attribute 'analyze'"):
        _ = reanalysis.analyze


def test_import_loads_nothing() -> None:
    """Importing the package takes no library with it; asking for a light name takes only what that needs."""
    code = (
        "import json, sys\nimport reanalysis\n"
        "first = sorted({name.split('.')[0] for name in sys.modules})\n"
        "reanalysis.ReanalysisError\n"
        "print(json.dumps([first, sorted({name.split('.')[0] for name in sys.modules})]))"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)  # noqa: S603

    first, second = (set(names) for names in json.loads(done.stdout))
    assert first & HEAVY == set()
    assert second & HEAVY == set()
    assert "reanalysis" in first
