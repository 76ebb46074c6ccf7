"""Drop the rows in which something is missing, and keep account of them."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

import pandas as pd

from reanalysis.errors import DataError, Problem

Policy = Literal["complete-cases", "refuse"]


@dataclass(frozen=True, slots=True)
class CompleteCases:
    """Rows without missing values.

    Attributes
    ----------
    frame : DataFrame
        The rows kept, in their order and with their index; factors without their unused levels.
    rows_read : int
        Rows before.
    dropped_by : tuple of (str, int)
        For each variable with missing values, in the frame's order, the rows in which it is missing
        (a row with two missing variables counts for both).
    """

    frame: pd.DataFrame
    rows_read: int
    dropped_by: tuple[tuple[str, int], ...]


def complete_cases(frame: pd.DataFrame, policy: Policy) -> CompleteCases:
    """Keep the rows in which nothing is missing.

    Parameters
    ----------
    frame : DataFrame
        The variables of the model, as `reanalysis.data.dataset.Dataset` holds them.
    policy : {"complete-cases", "refuse"}
        What the study says about missing values.

    Returns
    -------
    CompleteCases

    Raises
    ------
    DataError
        When the policy is ``"refuse"`` and something is missing, or when no row is complete.
    """
    missing = frame.isna()
    counts = ((str(name), int(missing[name].sum())) for name in frame.columns)
    dropped_by = tuple((name, count) for name, count in counts if count)
    by_variable = ", ".join(f"{name} in {count:,}" for name, count in dropped_by)
    kept = frame.loc[~missing.any(axis=1)]
    if dropped_by and policy == "refuse":
        raise DataError(
            Problem(
                "data.missing",
                f"{len(frame) - len(kept):,} of {len(frame):,} rows have missing values: {by_variable}",
                'no missing values, since missing = "refuse"',
                'complete the data, or set missing = "complete-cases" to leave these rows out',
            )
        )
    if kept.empty:
        raise DataError(
            Problem(
                "data",
                f"none of the {len(frame):,} rows is complete; missing: {by_variable or 'no rows at all'}",
                "at least one row without missing values",
                "leave out the variable with most missing values, or check `missing_values`",
            )
        )
    return CompleteCases(_without_unused_levels(kept), len(frame), dropped_by)


def _without_unused_levels(frame: pd.DataFrame) -> pd.DataFrame:
    columns = {
        name: column.cat.remove_unused_categories()
        if isinstance(column.dtype, pd.CategoricalDtype)
        else column
        for name, column in frame.items()
    }
    return pd.DataFrame(columns, index=frame.index)
