"""Certified and published results."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import pytest

REFERENCE = Path(__file__).resolve().parents[1] / "reference"


@pytest.fixture(scope="session")
def nist() -> dict[str, Any]:
    """Certified values of NIST's linear regression problems."""
    sets: dict[str, Any] = json.loads((REFERENCE / "nist.json").read_text(encoding="utf-8"))["sets"]
    return sets


@pytest.fixture(scope="session")
def published() -> dict[str, Any]:
    """Published results of generalised linear models."""
    values: dict[str, Any] = json.loads((REFERENCE / "glm.json").read_text(encoding="utf-8"))
    return values
