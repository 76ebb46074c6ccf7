"""What is known of a study before anything is fitted."""

from __future__ import annotations

import hashlib
import subprocess
import sys
from collections.abc import Callable
from typing import Any

import numpy as np
import pandas as pd
import pytest

from reanalysis.analysis.prepare import prepare
from reanalysis.analysis.run import sampler_settings
from reanalysis.errors import DesignError

MODEL = 'formula = "y ~ x"\nfamily = "gaussian"'
QUESTION = '[[question]]\nname = "q"\neffect = "{}"\n'


@pytest.fixture
def frame() -> pd.DataFrame:
    """A small table with one row that has no outcome."""
    x = np.arange(9.0)
    return pd.DataFrame({"x": x, "y": np.where(x == 4.0, np.nan, 3.0 * x + np.sin(x))})


def test_a_study_is_prepared_whole(study_of: Callable[..., Any], frame: pd.DataFrame) -> None:
    """Rows, prior sets, questions and the data's fingerprint are there, the question tied to its column."""
    study = study_of(frame, MODEL, QUESTION.format("x") + '[[prior]]\nname = "own"\nsource = "s"\n')

    got = prepare(study)

    assert (got.design.rows.read, got.design.rows.used) == (9, 8)
    assert [one.name for one in got.prior_sets] == ["flat", "weak", "sceptical", "own"]
    assert [(q.name, q.column) for q in got.questions] == [("q", 1)]
    assert got.source.name == "table.csv"
    assert got.source.sha256 == hashlib.sha256(study.data_path.read_bytes()).hexdigest()
    assert got.source.size == study.data_path.stat().st_size
    assert got.study is study


def test_unknown_effects_are_refused_before_fitting(
    study_of: Callable[..., Any], frame: pd.DataFrame
) -> None:
    """A question about something that is not there never reaches a sampler."""
    with pytest.raises(DesignError, match='the model has no coefficient "z"'):
        prepare(study_of(frame, MODEL, QUESTION.format("z")))


def test_seed_follows_from_the_data(study_of: Callable[..., Any], frame: pd.DataFrame) -> None:
    """Without a stated seed it is the start of the data's SHA-256: other data, another seed."""
    first = prepare(study_of(frame, MODEL))
    seed = sampler_settings(first, 1).seed
    again = sampler_settings(prepare(study_of(frame, MODEL + "\nlevel = 0.9")), 1).seed
    frame.loc[0, "y"] = 0.5
    changed = sampler_settings(prepare(study_of(frame, MODEL)), 1).seed

    assert seed == int(first.source.sha256[:7], 16)
    assert again == seed
    assert changed != seed


def test_stated_settings_are_used(study_of: Callable[..., Any], frame: pd.DataFrame) -> None:
    """Seed, draws, tuning, chains and acceptance come from the study, cores from the caller."""
    stated = "[computation]\nseed = 5\ndraws = 300\ntune = 250\nchains = 3\ntarget_accept = 0.8\n"

    settings = sampler_settings(prepare(study_of(frame, MODEL, stated)), 7)

    assert (settings.seed, settings.draws, settings.tune, settings.chains) == (5, 300, 250, 3)
    assert (settings.target_accept, settings.cores, settings.low_rank) == (0.8, 7, False)


def test_preparing_needs_no_sampler() -> None:
    """Checking a study imports neither sampler nor statsmodels."""
    code = (
        "import sys, reanalysis.analysis.prepare\n"
        "print(sorted({'bambi', 'nutpie', 'pymc', 'pytensor', 'statsmodels'} & set(sys.modules)))"
    )

    done = subprocess.run([sys.executable, "-c", code], check=True, capture_output=True, text=True)  # noqa: S603

    assert done.stdout.strip() == "[]"
