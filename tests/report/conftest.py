"""The demonstration report, rendered once for all tests of this room."""

from __future__ import annotations

import importlib.util
import sys
from pathlib import Path

import pytest

HERE = Path(__file__).resolve().parent


def _load(name):
    """Load a helper that lies beside the tests; the test runner keeps this folder off the import path."""
    full = f"report_tests_{name}"
    if full not in sys.modules:
        spec = importlib.util.spec_from_file_location(full, HERE / f"{name}.py")
        module = importlib.util.module_from_spec(spec)
        sys.modules[full] = module
        spec.loader.exec_module(module)
    return sys.modules[full]


@pytest.fixture(scope="session")
def inv():
    """The invented results."""
    return _load("invented")


@pytest.fixture(scope="session")
def demo():
    """The module that makes the demonstration report."""
    return _load("demo")


@pytest.fixture(scope="session")
def drawn(inv, demo):
    """All pictures of the demonstration report."""
    return demo.pictures(inv)


@pytest.fixture(scope="session")
def document(demo, drawn):
    """The demonstration report."""
    return demo.document(drawn)


@pytest.fixture(scope="session")
def html(document):
    """The demonstration report as HTML."""
    from reanalysis.report.html import render_html

    return render_html(document)


@pytest.fixture(scope="session")
def pdf(document):
    """The demonstration report as PDF."""
    from reanalysis.report.pdf import render_pdf

    return render_pdf(document)
