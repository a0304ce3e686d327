"""Make the WOFF2 subsets and widths.json in this folder from TeX Gyre Pagella and TeX Gyre Pagella Math.

    python make_subsets.py FOLDER...

FOLDER holds the OTF files of releases 2.501 and 1.632 (Debian packages fonts-texgyre, fonts-texgyre-math).
Needs fontTools and Brotli, which loadpath itself does not. The same sources and the same versions of the two
give the same bytes. README.md says what is changed.

widths.json: face -> character -> advance in thousandths of the font size; "sloping" is the alphabet in which
MathML draws a one-letter <mi>. Kerning is left out. A character that is not there is drawn from another font.
"""
# mypy: disable-error-code="import-untyped, no-any-return"

import hashlib
import json
import sys
import unicodedata
from pathlib import Path
from typing import Any

from fontTools.misc.transform import Offset, Transform
from fontTools.pens.boundsPen import BoundsPen
from fontTools.pens.cu2quPen import Cu2QuPen
from fontTools.pens.t2CharStringPen import T2CharStringPen
from fontTools.pens.transformPen import TransformPen
from fontTools.pens.ttGlyphPen import TTGlyphPen
from fontTools.subset import Options, Subsetter
from fontTools.ttLib import TTFont, newTable

# result -> source, first 16 hexadecimal digits of its SHA-256, family and style it gets here
SOURCES = {
    "loadpath-text-regular.woff2": (
        "texgyrepagella-regular.otf",
        "44e64260716d8f2b",
        "Loadpath Text",
        "Regular",
    ),
    "loadpath-text-italic.woff2": (
        "texgyrepagella-italic.otf",
        "069bb27f48eb98a7",
        "Loadpath Text",
        "Italic",
    ),
    "loadpath-text-bold.woff2": ("texgyrepagella-bold.otf", "dd4f9b69f0b24f1f", "Loadpath Text", "Bold"),
    "loadpath-math.woff2": ("texgyrepagella-math.otf", "1f9e010f60e947d0", "Loadpath Math", "Regular"),
}
LATIN = [*range(0x20, 0x7F), *range(0xA0, 0x180)]
GREEK = [c for c in range(0x391, 0x3CA) if c != 0x3A2] + [0x3D1, 0x3D5, 0x3D6, 0x3F0, 0x3F1, 0x3F5]
SPACES = [0x2002, 0x2003, 0x2007, 0x2009, 0x200A, 0x202F]
PUNCTUATION = [ord(c) for c in "‐‑‒–—―‘’‚“”„†‡•…‰′″‹›⁄€№™"]
ARROWS = [ord(c) for c in "←↑→↓↔↕⇐⇒⇔"]
OPERATORS = [ord(c) for c in "∂∆∇∈∏∑−∓∕∗∘∙√∛∝∞∟∠∣∥∧∨∩∪∫∴∼≃≅≈≠≡≤≥≪≫⊥⊾⋀⋁⋅⋯⌀⟨⟩"]
COMMON = [*LATIN, *GREEK, *SPACES, *PUNCTUATION, *ARROWS, *OPERATORS]
# MathML: <mi> with one letter is drawn from the sloping alphabets; h is at U+210E
SLOPING = [*range(0x1D434, 0x1D468), 0x210E, *range(0x1D6E2, 0x1D71C), 0x1D6A4, 0x1D6A5]
FENCES = [ord(c) for c in "()[]{}|‖⌈⌉⌊⌋"]
PRIMES = [ord(c) for c in "′″‴"]
INVISIBLE = [0x2061, 0x2062, 0x2063, 0x2064]
MAXP = [
    f"max{name}"
    for name in (
        "TwilightPoints",
        "Storage",
        "FunctionDefs",
        "InstructionDefs",
        "StackElements",
        "SizeOfInstructions",
        "ComponentElements",
        "ComponentDepth",
        "Points",
        "Contours",
        "CompositePoints",
        "CompositeContours",
    )
]
DIGITS = ["zero", "one", "two", "three", "four", "five", "six", "seven", "eight", "nine"]


def main(folders: list[str]) -> int:
    if not folders:
        print(__doc__)
        return 2
    here = Path(__file__).parent
    widths = {}
    for result, (source, digest, family, style) in SOURCES.items():
        path = next((Path(f) / source for f in folders if (Path(f) / source).exists()), None)
        if path is None:
            print(f"{source} is in none of the folders", file=sys.stderr)
            return 1
        found = hashlib.sha256(path.read_bytes()).hexdigest()[: len(digest)]
        if found != digest:
            print(f"{source} is another release: SHA-256 begins {found}, not {digest}", file=sys.stderr)
            return 1
        font = TTFont(path, recalcTimestamp=False)
        if family == "Loadpath Math":
            constants = font["MATH"].table.MathConstants
            constants.ScriptScriptPercentScaleDown = 69  # not 55: at 11 pt nothing prints below 7.5 pt
            constants.RadicalVerticalGap.Value = 190  # not 120
            constants.RadicalDisplayStyleVerticalGap.Value = 190
            subset(font, [*COMMON, *SLOPING, *FENCES, *PRIMES, *INVISIBLE], features=["dtls"])
        else:
            add_raised_and_lowered(font)
            raised = [0x2070, *range(0x2074, 0x207C), *range(0x2080, 0x208C)]
            subset(font, [*COMMON, *raised], features=["kern", "liga", "locl", "ccmp", "mark", "mkmk"])
        rename(font, family, style)
        to_truetype(font)
        widths["sloping" if family == "Loadpath Math" else style.lower()] = advances(font, family)
        font.flavor = "woff2"
        font.save(here / result)
        print(f"{(here / result).stat().st_size:7} {result}")
    lines = [f"{json.dumps(k)}: {json.dumps(w, ensure_ascii=False)}" for k, w in sorted(widths.items())]
    (here / "widths.json").write_text("{" + ",\n".join(lines) + "}\n", encoding="utf-8")
    return 0


def advances(font: TTFont, family: str) -> dict[str, int]:
    """Character -> advance in thousandths of the font size; of the math font only the sloping letters."""
    cmap, metrics = font.getBestCmap(), font["hmtx"].metrics
    widths: dict[str, int] = {}
    for code, glyph in sorted(cmap.items()):
        if family != "Loadpath Math":
            widths[chr(code)] = metrics[glyph][0]
        elif code in SLOPING:
            widths.setdefault(unicodedata.normalize("NFKC", chr(code)), metrics[glyph][0])
    return widths


def subset(font: TTFont, characters: list[int], features: list[str]) -> None:
    options = Options()
    options.layout_features = features
    options.desubroutinize = True
    options.hinting = False
    options.name_IDs = [0, 1, 2, 3, 4, 5, 6, 13, 14]
    options.name_languages = [0x409]
    options.notdef_outline = True
    options.glyph_names = False
    options.recalc_timestamp = False
    options.drop_tables += ["DSIG", "FFTM"]
    subsetter = Subsetter(options)
    subsetter.populate(unicodes=characters)
    subsetter.subset(font)


def add_raised_and_lowered(font: TTFont) -> None:
    """Superior and inferior digits and signs, scaled from the ones on the line; the font has only ¹ ² ³.

    Scale and height are those of the font's own superior two.
    """
    glyphs = font.getGlyphSet()
    size = _bounds(glyphs, "two.superior")
    full = _bounds(glyphs, "two")
    scale = (size[3] - size[1]) / (full[3] - full[1])
    raise_by, lower_by = size[1] - full[1] * scale, -0.16 * font["head"].unitsPerEm
    names = {**dict(enumerate(DIGITS)), 10: "plus", 11: "minus"}
    for i, name in names.items():
        if not 1 <= i <= 3:
            _add(font, name, 0x2070 + i, Offset(0, raise_by).scale(scale))
        _add(font, name, 0x2080 + i, Offset(0, lower_by).scale(scale))


def _bounds(glyphs: Any, name: str) -> tuple[float, float, float, float]:
    pen = BoundsPen(glyphs)
    glyphs[name].draw(pen)
    return pen.bounds


def _add(font: TTFont, source: str, character: int, change: Transform) -> None:
    name = f"uni{character:04X}"
    glyphs = font.getGlyphSet()
    width = round(font["hmtx"][source][0] * change[0])
    left = round(_bounds(glyphs, source)[0] * change[0])
    cff = font["CFF "].cff
    top = cff.topDictIndex[0]
    pen = T2CharStringPen(width - top.Private.nominalWidthX, glyphs)
    glyphs[source].draw(TransformPen(pen, change))
    charstring = pen.getCharString(private=top.Private, globalSubrs=cff.GlobalSubrs)
    strings = top.CharStrings
    strings.charStrings[name] = len(strings.charStringsIndex)
    strings.charStringsIndex.append(charstring)
    top.charset.append(name)
    font.setGlyphOrder(top.charset)
    font["hmtx"][name] = (width, left)
    for table in font["cmap"].tables:
        if table.isUnicode():
            table.cmap[character] = name


def rename(font: TTFont, family: str, style: str) -> None:
    """The licence asks that a changed font doesn't carry the name of the original."""
    script = f"{family} {style}".replace(" ", "")
    version = font["name"].getDebugName(5).split(";")[0].removeprefix("Version ")
    origin = "TeX Gyre Pagella Math" if "Math" in family else "TeX Gyre Pagella"
    texts = {
        1: family,
        2: style,
        3: f"{script} from {origin} {version}",
        4: f"{family} {style}",
        5: f"Version {version}; subset of {origin} for loadpath",
        6: script,
        13: "GUST Font License; see GUST-FONT-LICENSE.txt beside this file",
    }
    for number, text in texts.items():
        font["name"].setName(text, number, 3, 1, 0x409)
    font["name"].names = [n for n in font["name"].names if n.platformID == 3]


def to_truetype(font: TTFont) -> None:
    """Cubic outlines become quadratic ones, within 0.4 of 1000 units.

    Chromium puts TrueType fonts into a PDF as fonts, CFF ones only as drawings of each glyph (Type 3).
    """
    glyphs = font.getGlyphSet()
    order = font.getGlyphOrder()
    glyf = newTable("glyf")
    glyf.glyphOrder = order
    glyf.glyphs = {}
    for name in order:
        pen = TTGlyphPen(glyphs)
        glyphs[name].draw(Cu2QuPen(pen, max_err=0.4, reverse_direction=True))
        glyf.glyphs[name] = pen.glyph()
    font["loca"] = newTable("loca")
    font["glyf"] = glyf
    del font["CFF "]
    if "VORG" in font:
        del font["VORG"]
    glyf.compile(font)
    metrics = font["hmtx"].metrics
    for name in order:
        metrics[name] = (metrics[name][0], getattr(glyf.glyphs[name], "xMin", 0))
    maxp = font["maxp"] = newTable("maxp")
    maxp.tableVersion = 0x00010000
    for key in MAXP:
        setattr(maxp, key, 0)
    maxp.maxZones = 1
    maxp.numGlyphs = len(order)
    font["post"].formatType = 3.0
    font.sfntVersion = "\000\001\000\000"


if __name__ == "__main__":
    sys.exit(main(sys.argv[1:]))
