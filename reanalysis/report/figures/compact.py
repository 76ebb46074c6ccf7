"""Rewrite matplotlib's SVG so that it is small and quick to lay out.

Each text comes as many references to glyphs; a PDF writer parses every one of them anew, which
is a third of the time of a report. Here each text becomes one path, in whole thousandths of
its size. Coordinates keep two decimals of a point, and comments go.
"""

from __future__ import annotations

import re

_GLYPH = re.compile(r'<path id="([^"]+)"(?: d="([^"]*)")? transform="scale\(0\.015625\)"/>')
_USES = re.compile(
    r'(?:<use xlink:href="#[^"]+"(?: transform="translate\([-0-9.]+ [-0-9.]+\)")?/>\s*)+(?=</g>)'
)
_USE = re.compile(r'<use xlink:href="#([^"]+)"(?: transform="translate\(([-0-9.]+) ([-0-9.]+)\)")?/>')
_COMMAND = re.compile(r"([MLQCz])([^MLQCz]*)")
_COORDINATES = re.compile(r' (d|x|y)="([^"]*)"')
_LONG_NUMBER = re.compile(r"(\.\d\d)\d+")
_COMMENT = re.compile(r"<!--.*?-->", flags=re.DOTALL)
_EMPTY_DEFS = re.compile(r"<defs>\s*</defs>")

GLYPH_UNITS = 6.4
"""Units of a glyph's outline in a thousandth of the type size."""


def compact(svg: str) -> str:
    """Return the same picture in fewer bytes and elements."""
    svg = _COMMENT.sub("", svg)
    glyphs = {name: outline or "" for name, outline in _GLYPH.findall(svg)}
    svg = _GLYPH.sub("", svg)
    svg = _COORDINATES.sub(lambda match: f' {match[1]}="{_LONG_NUMBER.sub(r"\1", match[2])}"', svg)
    svg = _USES.sub(lambda match: _one_path(match[0], glyphs), svg)
    svg = re.sub(r"\s+", " ", svg).replace("> <", "><")
    return _EMPTY_DEFS.sub("", svg)


def _one_path(uses: str, glyphs: dict[str, str]) -> str:
    """Join the glyphs of a text; marks, which are references too, stay as they are."""
    found = _USE.findall(uses)
    if any(name not in glyphs for name, _, _ in found):
        return uses
    outlines = [
        _shifted(glyphs[name], float(x or 0.0) * 10.0, float(y or 0.0) * 10.0) for name, x, y in found
    ]
    return f'<path d="{"".join(outlines)}" transform="scale(0.1)"/>'


def _shifted(outline: str, x: float, y: float) -> str:
    """Move an outline and write it with relative coordinates, which are shorter."""
    parts: list[str] = []
    pen = (0, 0)
    for letter, arguments in _COMMAND.findall(outline):
        values = [float(value) / GLYPH_UNITS for value in arguments.split()]
        points = [(round(a + x), round(b + y)) for a, b in zip(values[::2], values[1::2], strict=True)]
        if letter == "M":
            parts.append(f"M{_pair(points[0])}")
        elif letter == "z":
            parts.append("z")
            continue
        else:
            steps = [(a - pen[0], b - pen[1]) for a, b in points]
            parts.append(letter.lower() + " ".join(_pair(step) for step in steps).replace(" -", "-"))
        pen = points[-1]
    return "".join(parts)


def _pair(point: tuple[int, int]) -> str:
    return f"{point[0]}{'' if point[1] < 0 else ' '}{point[1]}"
