"""Designs from plain data frames."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import pandas as pd
import pytest

from reanalysis.data.dataset import Dataset
from reanalysis.design.build import build_design
from reanalysis.design.model import Design
from reanalysis.study.spec import StudySpec

DesignMaker = Callable[..., Design]


def as_dataset(frame: pd.DataFrame) -> Dataset:
    """Numbers as float64 and text as ordered categoricals, as the data room hands them over."""
    columns = {
        name: column
        if isinstance(column.dtype, pd.CategoricalDtype)
        else pd.Categorical(column, ordered=True)
        if pd.api.types.is_string_dtype(column)
        else column.astype(float)
        for name, column in frame.items()
    }
    return Dataset(pd.DataFrame(columns, index=frame.index), sha256="", size=1, notes=())


@pytest.fixture
def design_of() -> DesignMaker:
    """Give a function that builds the design of a frame, a formula, a family and further keys."""

    def make(frame: pd.DataFrame, formula: str, family: str = "gaussian", **keys: Any) -> Design:
        data = {
            "file": "x.csv",
            "units": keys.pop("units", {}),
            "missing": keys.pop("missing", "complete-cases"),
        }
        model = {"formula": formula, "family": family, **keys}
        spec = StudySpec.model_validate({"title": "A test", "data": data, "model": model})
        return build_design(spec, as_dataset(frame))

    return make
