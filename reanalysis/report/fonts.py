"""Where the templates and fonts lie, in a checkout as in an installed wheel, and how each user gets them."""

from __future__ import annotations

import base64
from dataclasses import dataclass
from functools import cache
from pathlib import Path
from typing import Literal

from matplotlib import font_manager

from reanalysis.errors import Problem, ReportError

Container = Literal["woff2", "ttf"]
_CSS_NAMES: dict[Container, str] = {"woff2": "woff2", "ttf": "truetype"}

SERIF, SANS = "Reanalysis Serif", "Reanalysis Sans"


@dataclass(frozen=True, slots=True)
class Face:
    """One font file: family, CSS weight and style."""

    family: str
    weight: Literal[400, 600]
    style: Literal["normal", "italic"]
    file: str
    """Name without its ending: each face exists as ``.woff2`` (small) and ``.ttf`` (quick to read)."""


FACES = (
    Face(SERIF, 400, "normal", "serif-regular"),
    Face(SERIF, 400, "italic", "serif-italic"),
    Face(SERIF, 600, "normal", "serif-semibold"),
    Face(SANS, 400, "normal", "sans-regular"),
    Face(SANS, 400, "italic", "sans-italic"),
    Face(SANS, 600, "normal", "sans-semibold"),
)


@cache
def templates_folder() -> Path:
    """Return the folder of the templates: inside the package when installed, beside it in a checkout.

    Raises
    ------
    ReportError
        When neither exists: the installation is incomplete.
    """
    package = Path(__file__).resolve().parents[1]
    for folder in (package / "templates", package.parent / "templates"):
        if (folder / "fonts").is_dir():
            return folder
    problem = Problem(
        where="installation of reanalysis",
        found="the templates of the report are not there",
        allowed="",
        advice="install the package again",
    )
    raise ReportError(problem)


@cache
def register_fonts() -> None:
    """Make the report's fonts known to matplotlib, for this process only."""
    for face in FACES:
        if face.family == SANS:
            font_manager.fontManager.addfont(templates_folder() / "fonts" / f"{face.file}.ttf")


@cache
def font_face_css(container: Container) -> str:
    """Return the CSS that carries all fonts inside itself, as data URIs.

    Unpacking WOFF2 takes a PDF writer a fifth of a report's time; TrueType nearly triples the
    fonts' share of an HTML file. The glyphs are the same.
    """
    rules = []
    for face in FACES:
        file = templates_folder() / "fonts" / f"{face.file}.{container}"
        content = base64.b64encode(file.read_bytes()).decode("ascii")
        rules.append(
            f'@font-face{{font-family:"{face.family}";font-weight:{face.weight};'
            f"font-style:{face.style};src:url(data:font/{container};base64,{content}) "
            f'format("{_CSS_NAMES[container]}")}}'
        )
    return "\n".join(rules)
