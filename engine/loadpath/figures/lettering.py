"""Lettering as outlines: nothing in a text is read as a sign of layout; no font of the machine is used."""

from __future__ import annotations

import re
import unicodedata
from dataclasses import dataclass
from functools import lru_cache
from pathlib import Path
from typing import TYPE_CHECKING, Any

from loadpath.figures.picture import is_name
from loadpath.formula.names import Symbol, plain_symbol, symbol

if TYPE_CHECKING:
    import numpy as np

FONTS = Path(__file__).parent / "fonts"
LABEL, SMALL = 10.5, 8.5
"""Sizes in points: of symbols and axis labels; of ticks and peaks."""
SCRIPT, LOWERED = 7.5 / 10.5, 0.17
"""Size of a subscript and how far it is lowered, as parts of the size; 7.5 pt is the smallest lettering."""
REPLACEMENT = "\ufffd"
ELLIPSIS = "…"


@dataclass(frozen=True, slots=True)
class Piece:
    """A stretch of text in one face, size and height."""

    text: str
    sloping: bool = False
    lowered: bool = False


@dataclass(frozen=True)
class Outline:
    """Drawn lettering, its line beginning at (0, 0), in points."""

    vertices: np.ndarray[Any, Any]
    """(n, 2), y upwards."""
    codes: np.ndarray[Any, Any]
    """(n,), those of matplotlib's paths."""
    box: tuple[float, float, float, float]
    """Left, bottom, right, top of what is inked."""
    advance: float


# --- pieces -------------------------------------------------------------------------------------------------


def named(name: str, canonical: str) -> list[Piece]:
    """The pieces of a curve's name: the symbol, then what follows it in the name, such as `(x)`."""
    if not canonical:
        return [Piece(name)]
    rest = name.removeprefix(plain_symbol(canonical)) if name.startswith(plain_symbol(canonical)) else ""
    return [*_of_symbol(symbol(canonical)), *_mixed(rest)]


def variable(name: str) -> list[Piece]:
    """The pieces of a name alone; a text that is no name stays as it stands."""
    return _of_symbol(symbol(name)) if is_name(name) else [Piece(name)]


def _of_symbol(s: Symbol) -> list[Piece]:
    pieces = _mixed(s.prefix + s.base + "′" * s.primes)
    return [*pieces, Piece(s.subscript, lowered=True)] if s.subscript else pieces


def _mixed(text: str) -> list[Piece]:
    """Letters slope, digits and brackets don't."""
    return [Piece(part, part.isalpha()) for part in re.findall(r"[^\W\d_]+|[\W\d_]+", text)]


# --- outlines -----------------------------------------------------------------------------------------------


def outline(pieces: list[Piece], size: float, most: float) -> Outline:
    """The outline of the pieces on one line. One wider than `most` points is cut and ends in an ellipsis."""
    drawn = _outline(tuple(pieces), size)
    if drawn.advance <= most:
        return drawn
    text = "".join(p.text for p in pieces)
    fits, too_long = 0, len(text)
    while too_long - fits > 1:
        middle = (fits + too_long) // 2
        if _outline((Piece(text[:middle] + ELLIPSIS),), size).advance <= most:
            fits = middle
        else:
            too_long = middle
    return _outline((Piece(text[:fits].rstrip() + ELLIPSIS),), size)


@lru_cache(maxsize=2048)
def _outline(pieces: tuple[Piece, ...], size: float) -> Outline:
    import numpy as np

    vertices, codes, at = [np.empty((0, 2))], [np.empty(0, dtype=np.uint8)], 0.0
    for piece in pieces:
        scale, rise = (size * SCRIPT, -LOWERED * size) if piece.lowered else (size, 0.0)
        for text, font in _in_fonts(_printable(piece.text), piece.sloping):
            points, kinds, advance = _glyphs(text, font)
            vertices.append(points * scale + (at, rise))
            codes.append(kinds)
            at += advance * scale
        at += 0.02 * size
    points, kinds = np.concatenate(vertices), np.concatenate(codes)
    inked = points[kinds != 79]  # a closing point has no place of its own
    low, high = (inked.min(axis=0), inked.max(axis=0)) if len(inked) else (np.zeros(2), np.zeros(2))
    return Outline(points, kinds, (float(low[0]), float(low[1]), float(high[0]), float(high[1])), at)


def _printable(text: str) -> str:
    """Without what controls a device or the direction of writing; line ends become spaces."""
    text = re.sub(r"[\t\n\r\u2028\u2029]+", " ", text)
    return "".join(REPLACEMENT if unicodedata.category(c) in ("Cc", "Cf", "Cs") else c for c in text)


def _in_fonts(text: str, sloping: bool) -> list[tuple[str, str]]:
    """The text in stretches of one font file: ours or one that matplotlib brings; else a replacement sign."""
    import matplotlib

    ours = str(FONTS / f"loadpath-text-{'italic' if sloping else 'regular'}.ttf")
    brought = Path(matplotlib.get_data_path()) / "fonts" / "ttf"
    fonts = (ours, str(brought / f"DejaVuSerif{'-Italic' * sloping}.ttf"), str(brought / "DejaVuSans.ttf"))
    stretches: list[tuple[str, str]] = []
    for c in text:
        c = c if any(ord(c) in _characters(f) for f in fonts) else REPLACEMENT
        font = next(f for f in fonts if ord(c) in _characters(f))
        if stretches and stretches[-1][1] == font:
            stretches[-1] = (stretches[-1][0] + c, font)
        else:
            stretches.append((c, font))
    return stretches


@lru_cache(maxsize=4)
def _characters(font: str) -> frozenset[int]:
    from matplotlib.ft2font import FT2Font

    return frozenset(FT2Font(font).get_charmap())


def _glyphs(text: str, font: str) -> tuple[Any, Any, float]:
    """Outline of a text at size 1: vertices, codes, advance. Never read as mathtext."""
    import numpy as np
    from matplotlib.font_manager import FontProperties
    from matplotlib.textpath import text_to_path

    face = FontProperties(fname=font, size=text_to_path.FONT_SCALE)
    vertices, codes = text_to_path.get_text_path(face, text, ismath=False)
    width, _, _ = text_to_path.get_text_width_height_descent(text, face, ismath=False)
    points = np.asarray(vertices, dtype=float).reshape(-1, 2) / text_to_path.FONT_SCALE
    return points, np.asarray(codes, dtype=np.uint8), width / text_to_path.FONT_SCALE
