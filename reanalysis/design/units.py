"""The unit of a coefficient, in words."""

from __future__ import annotations

from collections.abc import Mapping

from reanalysis.design.variables import Variable
from reanalysis.families import Family
from reanalysis.study import formula


def response_unit(factor: formula.Factor, units: Mapping[str, str]) -> str:
    """Unit of the response as modelled: ``N``, ``log(N)``; empty when the column has none."""
    unit = units.get(factor.columns[0], "")
    return f"{factor.function}({unit})" if unit and isinstance(factor, formula.Call) else unit


def coefficient_unit(
    family: Family, response: str, variables: tuple[Variable, ...], units: Mapping[str, str]
) -> str:
    """Unit of a coefficient on the linear-predictor scale.

    Parameters
    ----------
    family : Family
    response : str
        Unit of the response; used by the gaussian family, the others have words of their own.
    variables : tuple of Variable
        Those that the column is a product of; empty for the intercept.
    units : mapping of str to str
        Units of the data's columns.

    Returns
    -------
    str
        ``N per days``, ``N per (days * kg)``, ``log-odds``; empty for a response without a unit.
    """
    whole = response if family.name == "gaussian" else family.scale_words
    per = [
        unit
        for variable in variables
        if variable.kind == "numeric" and (unit := _predictor_unit(variable.factor, units))
    ]
    if not whole or not per:
        return whole
    return f"{whole} per {per[0]}" if len(per) == 1 else f"{whole} per ({' * '.join(per)})"


def _predictor_unit(factor: formula.Factor, units: Mapping[str, str]) -> str:
    unit = units.get(factor.columns[0], "")
    if isinstance(factor, formula.Column):
        return unit
    if factor.function in ("scale", "standardise"):
        return f"sd of {factor.argument.text.replace('`', '')}"
    if factor.function in ("center", "abs"):
        return _predictor_unit(factor.argument, units)
    return f"{factor.function}({unit})" if unit else ""
