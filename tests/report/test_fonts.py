"""The fonts that the report carries."""

from __future__ import annotations

import pytest
from fontTools.ttLib import TTFont

from reanalysis.errors import ReportError
from reanalysis.report import fonts

SIGNS = "−×≤≥βσμ²⁻⁶±≈→∞–—“”’…·€ÄÅéßøŁčŞΩЖ\u2009\u202f\u00a0"


@pytest.mark.parametrize("face", fonts.FACES, ids=lambda face: face.file)
def test_every_face_has_the_signs_of_statistics(face):
    """No sign of a report falls back to another font."""
    folder = fonts.templates_folder() / "fonts"
    cmap = TTFont(folder / f"{face.file}.woff2").getBestCmap()
    assert [sign for sign in SIGNS if ord(sign) not in cmap] == []


def test_figures_of_the_serif_and_sans_are_tabular():
    """All digits are equally wide, so that columns of numbers line up."""
    font = TTFont(fonts.templates_folder() / "fonts" / "sans-regular.woff2")
    assert len({font["hmtx"][font.getBestCmap()[ord(digit)]][0] for digit in "0123456789"}) == 1


def test_names_respect_the_reserved_font_name():
    """Cut-down fonts do not carry the name that the licence reserves, and the licence comes along."""
    folder = fonts.templates_folder() / "fonts"
    for face in fonts.FACES:
        names = TTFont(folder / f"{face.file}.woff2")["name"].names
        assert not any("Source" in str(record) for record in names if record.nameID in {1, 3, 4, 6, 16})
    assert "SIL OPEN FONT LICENSE Version 1.1" in (folder / "OFL.txt").read_text(encoding="utf-8")


@pytest.mark.parametrize(("container", "name"), [("woff2", "woff2"), ("ttf", "truetype")])
def test_the_css_carries_all_six_faces(container, name):
    """One rule a face, each with its file inside."""
    css = fonts.font_face_css(container)
    assert css.count("@font-face") == css.count(f"data:font/{container};base64,") == 6
    assert css.count(f'format("{name}")') == 6


def test_both_containers_hold_the_same_face():
    """HTML and PDF show the same glyphs."""
    folder = fonts.templates_folder() / "fonts"
    for face in fonts.FACES:
        small, quick = (TTFont(folder / f"{face.file}.{kind}") for kind in ("woff2", "ttf"))
        assert small.getBestCmap() == quick.getBestCmap()
        assert small["hmtx"].metrics == quick["hmtx"].metrics


def test_missing_templates_are_an_error(monkeypatch, tmp_path):
    """An incomplete installation is named as such."""
    fonts.templates_folder.cache_clear()
    with monkeypatch.context() as patch:
        patch.setattr(fonts, "__file__", str(tmp_path / "a" / "b" / "fonts.py"))
        with pytest.raises(ReportError, match="install the package again"):
            fonts.templates_folder()
    fonts.templates_folder.cache_clear()


def test_an_installed_package_finds_its_own_templates(monkeypatch, tmp_path):
    """In a wheel the templates lie inside the package."""
    inside = tmp_path / "reanalysis" / "templates"
    (inside / "fonts").mkdir(parents=True)
    fonts.templates_folder.cache_clear()
    with monkeypatch.context() as patch:
        patch.setattr(fonts, "__file__", str(tmp_path / "reanalysis" / "report" / "fonts.py"))
        assert fonts.templates_folder() == inside
    fonts.templates_folder.cache_clear()
