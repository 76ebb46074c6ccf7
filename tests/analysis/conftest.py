"""Studies written for a test, and the sample studies analysed once."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path
from typing import Any

import pandas as pd
import pytest

from reanalysis.analysis.result import Analysis
from reanalysis.analysis.run import analyse
from reanalysis.progress import StageClock
from reanalysis.study.read import load_study
from reanalysis.study.spec import Study

SAMPLES = Path(__file__).resolve().parents[2] / "sample_data"


@pytest.fixture(scope="session")
def stages() -> StageClock:
    """The clock that watches the sample studies."""
    return StageClock()


@pytest.fixture(scope="session")
def sample(store: Any, stages: StageClock) -> Callable[[str], Analysis]:
    """Give a function that analyses a sample study, each once in a session."""
    done: dict[str, Analysis] = {}

    def get(name: str) -> Analysis:
        if name not in done:
            done[name] = analyse(load_study(SAMPLES / f"{name}.toml"), store=store, cores=2, stages=stages)
        return done[name]

    return get


@pytest.fixture
def study_of(tmp_path: Path) -> Callable[..., Study]:
    """Give a function that writes a study and its table, and reads the study back."""

    def write(frame: pd.DataFrame, model: str, rest: str = "") -> Study:
        frame.to_csv(tmp_path / "table.csv", index=False)
        text = f'title = "A test"\n[data]\nfile = "table.csv"\n[model]\n{model}\n{rest}\n'
        (tmp_path / "study.toml").write_text(text, encoding="utf-8")
        return load_study(tmp_path / "study.toml")

    return write
