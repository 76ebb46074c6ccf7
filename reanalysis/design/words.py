"""Findings about the columns of a design, in words."""

from __future__ import annotations

from reanalysis.design.model import Design
from reanalysis.design.rank import Dependency


def describe_dependency(design: Design, dependency: Dependency) -> str:
    """Write an exact dependency as an equation between public names.

    Returns
    -------
    str
        ``"liner[foam] = Intercept - liner[none] - liner[film]"``, ``"height_cm = 2.54 * height_in"``,
        ``"liner[film]:store[B] is 0 in every row"``.
    """
    name = design.columns[dependency.column].name
    if not dependency.parts:
        return f"{name} is 0 in every row"
    text = ""
    for column, weight in dependency.parts:
        size = f"{abs(weight):.6g}"
        product = design.columns[column].name if size == "1" else f"{size} * {design.columns[column].name}"
        if not text:
            text = product if weight > 0 else f"-{product}"
        else:
            text += f" + {product}" if weight > 0 else f" - {product}"
    return f"{name} = {text}"


def listed(names: tuple[str, ...], limit: int = 6) -> str:
    """Join names with commas and "and"; beyond `limit`, say how many more there are."""
    if len(names) > limit:
        return f"{', '.join(names[:limit])} and {len(names) - limit} more"
    if len(names) < 2:
        return "".join(names)
    return f"{', '.join(names[:-1])} and {names[-1]}"
