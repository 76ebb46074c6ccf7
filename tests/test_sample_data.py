"""The sample studies: reproducible, valid, and each with the story it is there to tell."""

from __future__ import annotations

import subprocess
import sys
import tomllib
from pathlib import Path

import numpy as np
import pandas as pd
import pytest
import statsmodels.api as sm

from reanalysis.study.spec import StudySpec

FOLDER = Path(__file__).resolve().parents[1] / "sample_data"
STUDIES = ("firmness", "storage_rot", "spots")


def test_script_writes_the_committed_tables(tmp_path: Path) -> None:
    """Running the script again gives the committed tables byte for byte, and no others."""
    subprocess.run([sys.executable, str(FOLDER / "make_data.py"), str(tmp_path)], check=True)  # noqa: S603

    written = {path.name: path.read_bytes() for path in tmp_path.iterdir()}
    assert written == {f"{name}.csv": (FOLDER / f"{name}.csv").read_bytes() for name in STUDIES}


@pytest.mark.parametrize("name", STUDIES)
def test_study_files_are_valid(name: str) -> None:
    """Each study file passes validation, names its own table and asks about what matters."""
    with (FOLDER / f"{name}.toml").open("rb") as stream:
        spec = StudySpec.model_validate(tomllib.load(stream))

    assert spec.data.file == f"{name}.csv"
    assert [prior.name for prior in spec.prior] == ["informed"]
    assert all(question.matters_beyond for question in spec.question)


def test_firmness_shows_a_large_effect() -> None:
    """The 95 % interval of film lies wholly above the 2 N that matter, that of foam wholly below."""
    table = pd.read_csv(FOLDER / "firmness.csv", keep_default_na=False, na_values=[""]).dropna()
    columns = np.column_stack(
        [np.ones(len(table)), table["liner"] == "film", table["liner"] == "foam", table["days"]]
    )

    fit = sm.OLS(table["firmness"].to_numpy(), columns.astype(float)).fit()

    assert len(table) == 92
    assert fit.conf_int()[1, 0] > 4.0
    assert fit.conf_int()[2, 1] < 2.0


def test_storage_rot_is_undecided() -> None:
    """The dip's effect is large but its p-value lies just above 0.05: the prior decides."""
    table = pd.read_csv(FOLDER / "storage_rot.csv", keep_default_na=False)
    columns = np.column_stack([np.ones(len(table)), table["dip"] == "hot_water", table["starch"]])

    fit = sm.GLM(
        (table["rotted"] == "yes").to_numpy(float), columns.astype(float), sm.families.Binomial()
    ).fit()

    assert fit.params[1] < -0.8
    assert 0.05 < fit.pvalues[1] < 0.06


def test_spots_shows_a_small_effect() -> None:
    """The net's effect has p below 0.01, and its 95 % interval never reaches the log rate that matters."""
    table = pd.read_csv(FOLDER / "spots.csv", keep_default_na=False)
    columns = np.column_stack([np.ones(len(table)), table["net"] == "hail", table["altitude"]])
    offset = np.log(table["apples"].to_numpy(float))

    fit = sm.GLM(table["spots"].to_numpy(), columns.astype(float), sm.families.Poisson(), offset=offset).fit()

    assert fit.params[1] < 0.0
    assert 0.001 < fit.pvalues[1] < 0.01
    assert fit.conf_int()[1, 0] > -0.22
