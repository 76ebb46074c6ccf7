"""Where the templates and fonts lie, in a checkout as in an installed wheel, and how each user gets them."""

from __future__ import annotations

import base64
from dataclasses import dataclass
from functools import cache
from pathlib import Path
from typing import Literal

from matplotlib import font_manager

from reanalysis.errors import Problem, ReportError

SERIF, SANS = "Reanalysis Serif", "Reanalysis Sans"


@dataclass(frozen=True, slots=True)
class Face:
    """One font file: family, CSS weight and style."""

    family: str
    weight: Literal[400, 600]
    style: Literal["normal", "italic"]
    file: str
    """Name of the WOFF2 file, without its ending; the sans ones exist as TrueType as well."""


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
def font_face_css() -> str:
    """Return the CSS that carries all fonts inside itself, as data URIs."""
    rules = []
    for face in FACES:
        file = templates_folder() / "fonts" / f"{face.file}.woff2"
        content = base64.b64encode(file.read_bytes()).decode("ascii")
        rules.append(
            f'@font-face{{font-family:"{face.family}";font-weight:{face.weight};'
            f"font-style:{face.style};src:url(data:font/woff2;base64,{content}) "
            'format("woff2")}'
        )
    return "\n".join(rules)
