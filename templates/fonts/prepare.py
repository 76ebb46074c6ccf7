"""Make the font files beside this script from the foundry's own TrueType files.

Run once, by hand, when the foundry publishes a new version::

    python templates/fonts/prepare.py FOLDER_WITH_SERIF_TTFS FOLDER_WITH_SANS_TTFS

The files are cut down to Latin, Greek, Cyrillic and the signs that a statistical
report needs, so that a self-contained HTML file stays small. The licence (OFL.txt)
reserves the family's original name for unmodified files, so the cut-down ones are renamed.
"""

from __future__ import annotations

import sys
from pathlib import Path

from fontTools import subset
from fontTools.misc.transform import Identity
from fontTools.pens.transformPen import TransformPen
from fontTools.pens.ttGlyphPen import TTGlyphPen
from fontTools.ttLib import TTFont

HERE = Path(__file__).resolve().parent
FACES = (
    (0, "SourceSerif4-Regular.ttf", "Serif", "Regular", "serif-regular.ttf"),
    (0, "SourceSerif4-It.ttf", "Serif", "Italic", "serif-italic.ttf"),
    (0, "SourceSerif4-Semibold.ttf", "Serif", "SemiBold", "serif-semibold.ttf"),
    (1, "SourceSans3-Regular.ttf", "Sans", "Regular", "sans-regular.ttf"),
    (1, "SourceSans3-It.ttf", "Sans", "Italic", "sans-italic.ttf"),
    (1, "SourceSans3-Semibold.ttf", "Sans", "SemiBold", "sans-semibold.ttf"),
)
RANGES = (
    (0x20, 0x7E),  # ASCII
    (0xA0, 0x17F),  # Latin-1, Latin Extended-A
    (0x218, 0x21B),  # Romanian
    (0x300, 0x304),  # combining accents
    (0x384, 0x3CE),  # Greek
    (0x400, 0x45F),  # Cyrillic
    (0x1E80, 0x1E85),  # Welsh
    (0x2002, 0x200B),  # spaces
    (0x2010, 0x2026),  # dashes, quotation marks, bullet, ellipsis
    (0x202F, 0x203A),
    (0x2070, 0x208E),  # superscripts and subscripts
    (0x20AC, 0x20AC),
    (0x2116, 0x2122),
    (0x2190, 0x2193),  # arrows
    (0x2202, 0x2265),  # mathematics
)
FEATURES = ("kern", "liga", "ccmp", "locl", "mark", "mkmk", "lnum", "tnum", "case")
SUPERSCRIPT_MINUS = 0x207B


def main(folders: list[Path]) -> None:
    """Write all six faces, each as TrueType and as WOFF2."""
    for folder, source, family, style, target in FACES:
        font = TTFont(folders[folder] / source)
        font.recalcTimestamp = False
        _subset(font)
        if SUPERSCRIPT_MINUS not in font.getBestCmap():
            _add_superscript_minus(font)
        _rename(font, f"Reanalysis {family}", style)
        font.save(HERE / target, reorderTables=True)  # for pictures and PDF: quick to read
        font.flavor = "woff2"  # for HTML: small
        font.save((HERE / target).with_suffix(".woff2"), reorderTables=False)


def _subset(font: TTFont) -> None:
    options = subset.Options()
    options.hinting = False
    options.layout_features = list(FEATURES)
    options.name_IDs = ["*"]
    options.notdef_outline = True
    cutter = subset.Subsetter(options)
    cutter.populate(unicodes=[code for low, high in RANGES for code in range(low, high + 1)])
    cutter.subset(font)


def _add_superscript_minus(font: TTFont) -> None:
    """Add the sign of 10⁻⁶, which the serif lacks: its minus, at the size and height of its figures."""
    cmap = font.getBestCmap()
    minus, two, superscript = cmap[0x2212], cmap[ord("2")], cmap[0xB2]
    glyphs, metrics = font["glyf"], font["hmtx"]
    scale = (glyphs[superscript].yMax - glyphs[superscript].yMin) / (glyphs[two].yMax - glyphs[two].yMin)
    middle = (glyphs[superscript].yMax + glyphs[superscript].yMin) / 2
    own_middle = (glyphs[minus].yMax + glyphs[minus].yMin) / 2
    pen = TTGlyphPen(None)
    shape = Identity.translate(0, middle - scale * own_middle).scale(scale)
    font.getGlyphSet()[minus].draw(TransformPen(pen, shape))
    name = "uni207B"
    font.setGlyphOrder([*font.getGlyphOrder(), name])
    glyphs[name] = pen.glyph()
    advance, bearing = metrics[minus]
    metrics[name] = (round(advance * scale), round(bearing * scale))
    for table in font["cmap"].tables:
        if table.isUnicode():
            table.cmap[SUPERSCRIPT_MINUS] = name


def _rename(font: TTFont, family: str, style: str) -> None:
    names = font["name"]
    compact = family.replace(" ", "")
    legacy_style = "Regular" if style == "SemiBold" else style
    legacy_family = f"{family} SemiBold" if style == "SemiBold" else family
    licence = {0, 5, 8, 9, 11, 13, 14}
    names.names = [record for record in names.names if record.nameID in licence and record.platformID == 3]
    postscript = f"{compact}-{style}"
    new = {1: legacy_family, 2: legacy_style, 3: postscript, 4: f"{family} {style}", 6: postscript}
    if style == "SemiBold":
        new |= {16: family, 17: style}
    for identifier, text in new.items():
        names.setName(text, identifier, 3, 1, 0x409)


if __name__ == "__main__":
    main([Path(argument) for argument in sys.argv[1:3]])
