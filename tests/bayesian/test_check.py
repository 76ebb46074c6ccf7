"""The verdict on a run, on both sides of every limit."""

from __future__ import annotations

import json
from dataclasses import replace
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from reanalysis.bayesian.check import check_computation
from reanalysis.bayesian.result import Marginal
from reanalysis.bayesian.sampler import RawDraws
from reanalysis.bayesian.summaries import summarise

ENERGY = np.random.default_rng(1).normal(size=(4, 250))


@pytest.fixture(scope="module")
def good() -> Marginal:
    """A summary that is well within every limit."""
    draws = np.random.default_rng(0).normal(size=(4, 250))
    return replace(summarise(draws, 0.95), rhat=1.001, ess_bulk=900.0, ess_tail=800.0)


def raw(divergences: int = 0, energy: np.ndarray = ENERGY) -> RawDraws:
    """A run of 1,000 draws that says this about itself."""
    diverging = np.zeros(1000, dtype=bool)
    diverging[:divergences] = True
    nothing = np.zeros((4, 250, 1))
    return RawDraws(nothing, nothing[..., :0], diverging.reshape(4, 250), energy)


@pytest.mark.parametrize(
    "field, value, verdict",
    [
        ("rhat", 1.0099, "sound"),
        ("rhat", 1.0101, "doubtful"),
        ("rhat", 1.0499, "doubtful"),
        ("rhat", 1.0501, "failed"),
        ("rhat", float("nan"), "failed"),
        ("ess_bulk", 401.0, "sound"),
        ("ess_bulk", 399.0, "doubtful"),
        ("ess_bulk", 101.0, "doubtful"),
        ("ess_bulk", 99.0, "failed"),
        ("ess_tail", 401.0, "sound"),
        ("ess_tail", 399.0, "doubtful"),
        ("ess_tail", 101.0, "doubtful"),
        ("ess_tail", 99.0, "failed"),
        ("ess_tail", float("nan"), "failed"),
    ],
)
def test_worst_parameter_decides(good: Marginal, field: str, value: float, verdict: str) -> None:
    """One parameter outside a limit is enough, wherever it stands; it is named when it is outside."""
    words = {"rhat": "R-hat", "ess_bulk": "bulk effective", "ess_tail": "tail effective"}[field]
    bad = replace(good, **{field: value})

    for marginals in ((good, bad), (bad, good)):
        check = check_computation(raw(), marginals, attempts=1)
        assert check.verdict == verdict
        assert [finding for finding in check.findings if words in finding] == list(check.findings)
        assert len(check.findings) == (0 if verdict == "sound" else 1)


@pytest.mark.parametrize(
    "divergences, verdict", [(0, "sound"), (1, "doubtful"), (20, "doubtful"), (21, "failed")]
)
def test_divergences_are_counted(good: Marginal, divergences: int, verdict: str) -> None:
    """One divergent transition is a doubt, more than 2 % of the draws a failure."""
    check = check_computation(raw(divergences), (good,), attempts=2)

    assert check.verdict == verdict
    assert (check.divergences, check.draws, check.attempts) == (divergences, 1000, 2)
    assert check.findings == (() if verdict == "sound" else ("divergent transitions",))


def energy_with(bfmi: float) -> np.ndarray:
    """Energies of which the second chain has this E-BFMI: a slow wave with fast noise."""
    noise, wave = np.tile([1.0, -1.0], 125), np.sin(np.arange(250) / 25.0)

    def value(share: float) -> float:
        mixed = wave + share * noise
        return float(np.sum(np.diff(mixed) ** 2) / np.sum((mixed - mixed.mean()) ** 2))

    low, high = 0.0, 10.0
    for _ in range(60):
        middle = (low + high) / 2.0
        low, high = (middle, high) if value(middle) < bfmi else (low, middle)
    energy = ENERGY.copy()
    energy[1] = wave + low * noise
    return energy


@pytest.mark.parametrize(
    "bfmi, verdict", [(0.31, "sound"), (0.29, "doubtful"), (0.11, "doubtful"), (0.09, "failed")]
)
def test_worst_chain_decides_on_energy(good: Marginal, bfmi: float, verdict: str) -> None:
    """E-BFMI is that of the worst chain."""
    check = check_computation(raw(energy=energy_with(bfmi)), (good,), attempts=1)

    assert check.min_bfmi == pytest.approx(bfmi, abs=1e-6)
    assert check.verdict == verdict


def test_energy_diagnostic_has_its_published_value(good: Marginal) -> None:
    """Energies (1, 2, 1, 2, 3, 2) have E-BFMI 30/17."""
    path = Path(__file__).resolve().parents[1] / "reference" / "mcmc.json"
    known: dict[str, Any] = json.loads(path.read_text(encoding="utf-8"))["ebfmi"]

    check = check_computation(raw(energy=np.array([known["energy"]] * 2)), (good,), attempts=1)

    assert check.min_bfmi == pytest.approx(known["value"], rel=1e-12)
    assert check.min_bfmi == pytest.approx(30.0 / 17.0, rel=1e-12)


def test_all_worst_values_are_reported(good: Marginal) -> None:
    """The worst of each measure is kept, even when they belong to different parameters."""
    other = replace(good, rhat=1.02, ess_bulk=2000.0, ess_tail=300.0)

    check = check_computation(raw(3), (good, other), attempts=1)

    assert (check.max_rhat, check.min_ess_bulk, check.min_ess_tail) == (1.02, 900.0, 300.0)
    assert check.findings == (
        "R-hat above 1.01: the chains disagree",
        "tail effective sample size below 400",
        "divergent transitions",
    )
