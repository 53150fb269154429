"""Make the font files of this folder from the TeX Gyre Pagella family (maintainers only).

Needs fontTools with brotli (extra ``maintain``) and the unmodified fonts, in Debian the packages ``fonts-texgyre``
and ``fonts-texgyre-math``::

    python site_templates/fonts/subset.py /usr/share/texmf/fonts/opentype/public

The text faces keep European Latin, Greek and the signs used in engineering text, with the features for kerning,
ligatures, lining and tabular figures and small capitals. The mathematical face keeps its MATH table and every
size variant: without them a browser draws small sums and brackets. ``figures.otf`` is the regular face again in a
form that matplotlib can measure; no page carries it. The licence (GUST-FONT-LICENSE.txt) asks that a changed font be
renamed; a subset is such a change, so each file gets a family name of its own.
"""

from __future__ import annotations

import argparse
import sys
from pathlib import Path

from fontTools import subset
from fontTools.ttLib import TTFont

HERE = Path(__file__).resolve().parent

LATIN = [*range(0x20, 0x7F), *range(0xA0, 0x180), 0x218, 0x219, 0x21A, 0x21B, 0x1E9E]
PUNCTUATION = [*range(0x2009, 0x2010), *range(0x2010, 0x2016), *range(0x2018, 0x201F), 0x2020, 0x2021, 0x2022]
PUNCTUATION += [0x2026, 0x202F, 0x2030, 0x2032, 0x2033, 0x2039, 0x203A, 0x2044, 0x20AC, 0x2122, 0x2116]
SCRIPTS = [0xB2, 0xB3, 0xB9, 0x2070, *range(0x2074, 0x208F)]
SIGNS = [*range(0x2190, 0x2196), 0x2202, 0x2206, 0x220F, 0x2211, 0x2212, 0x2215, 0x2217, 0x221A, 0x221E, 0x222B]
SIGNS += [0x2248, 0x2260, 0x2264, 0x2265, 0x2261, 0x25CA]
GREEK = [*range(0x391, 0x3AA), *range(0x3B1, 0x3CA), 0x3D1, 0x3D5, 0x3F5]
TEXT = [*LATIN, *PUNCTUATION, *SCRIPTS, *SIGNS, *GREEK]

MATH_LETTERS = [*range(0x1D434, 0x1D468), 0x210E, 0x2113, *range(0x1D6E2, 0x1D71C), 0x1D71E, 0x1D716, 0x1D717, 0x1D719]
MATH_SIGNS = [0xAC, 0xB0, 0xB1, 0xB7, 0xD7, 0xF7, 0x2D9, 0xA8, 0xAF, 0x203E, 0x2015, 0x302, 0x303, 0x304, 0x307, 0x308]
MATH_SIGNS += [0x2016, 0x2026, 0x2032, 0x2061, 0x2062, 0x2190, 0x2192, 0x2194, 0x21D2, 0x2200, 0x2202, 0x2203, 0x2206]
MATH_SIGNS += [0x2207, 0x2208, 0x220F, 0x2211, 0x2212, 0x2213, 0x2215, 0x2217, 0x2218, 0x221A, 0x221D, 0x221E, 0x2227]
MATH_SIGNS += [0x2228, 0x222B, 0x222C, 0x222E, 0x223C, 0x2245, 0x2248, 0x2260, 0x2261, 0x2264, 0x2265, 0x226A, 0x226B]
MATH_SIGNS += [0x22C5, 0x22EF, 0x2308, 0x2309, 0x230A, 0x230B, 0x27E8, 0x27E9]
MATH = [*range(0x20, 0x7F), 0xA0, 0xB5, *range(0x2009, 0x2010), *MATH_LETTERS, *MATH_SIGNS, *GREEK]

FACES = {
    "text-regular.woff2": ("tex-gyre/texgyrepagella-regular.otf", "Ledger Pagella", TEXT),
    "text-italic.woff2": ("tex-gyre/texgyrepagella-italic.otf", "Ledger Pagella", TEXT),
    "text-bold.woff2": ("tex-gyre/texgyrepagella-bold.otf", "Ledger Pagella", TEXT),
    "math.woff2": ("tex-gyre-math/texgyrepagella-math.otf", "Ledger Pagella Math", MATH),
    "figures.otf": ("tex-gyre/texgyrepagella-regular.otf", "Ledger Pagella", TEXT),
}
FAMILY_NAMES = {1, 3, 4, 6, 16}


def rename(font: TTFont, family: str) -> None:
    """Give the font the family name, keep copyright and licence entries as they stand."""
    style = font["name"].getDebugName(2) or "Regular"
    for record in font["name"].names:
        if record.nameID not in FAMILY_NAMES:
            continue
        text = family if record.nameID in (1, 16) else f"{family} {style}"
        record.string = text.replace(" ", "-") if record.nameID == 6 else text
    if "CFF " in font:
        cff = font["CFF "].cff
        cff.fontNames[0] = f"{family} {style}".replace(" ", "-")
        cff.topDictIndex[0].FamilyName = family
        cff.topDictIndex[0].FullName = f"{family} {style}"


def make(source: Path, target: Path, family: str, characters: list[int]) -> None:
    """Write one subset."""
    options = subset.Options()
    options.layout_features = ["kern", "liga", "lnum", "tnum", "smcp", "mark", "mkmk", "ccmp", "ssty", "dtls", "flac"]
    options.name_IDs = ["*"]
    options.notdef_outline = True
    options.hinting = False
    options.desubroutinize = target.suffix == ".otf"
    options.drop_tables += ["FFTM"]
    options.flavor = "woff2" if target.suffix == ".woff2" else None
    font = subset.load_font(str(source), options)
    subsetter = subset.Subsetter(options)
    subsetter.populate(unicodes=characters)
    subsetter.subset(font)
    rename(font, family)
    font["head"].modified = font["head"].created
    font.recalcTimestamp = False
    subset.save_font(font, str(target), options)


def main() -> None:
    """Make every file of FACES."""
    parser = argparse.ArgumentParser(description="Subset the TeX Gyre Pagella fonts for the report pages.")
    parser.add_argument("folder", type=Path, help="folder that holds tex-gyre/ and tex-gyre-math/")
    folder = parser.parse_args().folder
    for name, (source, family, characters) in FACES.items():
        make(folder / source, HERE / name, family, characters)
        sys.stdout.write(f"{name}: {(HERE / name).stat().st_size / 1000:.0f} kB\n")


if __name__ == "__main__":
    main()
