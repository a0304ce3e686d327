"""How wide boxes are, in em of the formula: coarse advance widths of TeX Gyre Pagella, rounded up."""

from __future__ import annotations

import unicodedata

from loadpath.render.math.boxes import (
    FULL,
    SMALLEST,
    Amount,
    Box,
    Fence,
    Figure,
    Fraction,
    Function,
    Operator,
    Power,
    Ranged,
    Root,
    Row,
    Size,
    Table,
    Variable,
    Words,
    has_big_sign,
)
from loadpath.units.printing import typeset, unit_symbol

COLUMN = 30.0
"""The formula column of the printed page: 118 mm at 11 pt."""
PAGE = 42.0
"""The whole measure of the printed page: 165 mm at 11 pt."""

_CLASSES = {
    0.21: "'|⁡", 0.28: "ijlI.,:;! ⋅\u00a0¹·", 0.35: "frtJ-()[]{}\"`/\\°²³⁴⁵⁶⁷⁸⁹⁰′", 0.45: "sczeι*⁻",
    0.5: "0123456789abgkoqvxyδεζθνξπσχ?$_#", 0.6: "dhnpuSPBEFLTαβγηκλμρτφψ^~ΓΕΙ", 0.72: "ACKRUVXYZ&@",
    0.8: "DGHMNOQmwω%+−=≤≥<>×÷", 0.95: "MWmw→…", 0.17: "\u2009\u202f",
}  # fmt: skip
_WIDTHS = {character: size for size, characters in _CLASSES.items() for character in characters}
_SPACES = {
    "relation": 0.56, "sum": 0.45, "product": 0.45, "slash": 0.12, "comma": 0.17, "logic": 1.0, "gap": 0.2,
}  # fmt: skip


def text_width(text: str) -> float:
    """Width of upright text."""
    return sum(_WIDTHS.get(character) or _other(character) for character in text)


def _other(character: str) -> float:
    if unicodedata.east_asian_width(character) in "WF":
        return 1.0
    return 0.0 if unicodedata.category(character) in ("Mn", "Cf") else 0.8


def width(box: Box, size: Size = FULL) -> float:
    """Width of a box in em of the formula around it."""
    match box:
        case Row(boxes=boxes):
            return sum(width(inner, size) for inner in boxes)
        case Fence(inner=inner):
            return width(inner, size) + (1.4 if has_big_sign(inner) else 1.0) * _scale(size)
        case Fraction(top=top, bottom=bottom):
            return max(width(top, size.within()), width(bottom, size.within())) + 0.2
        case Power(base=base, exponent=exponent):
            return width(base, size) + width(exponent, size.script()) + 0.05
        case Root(inner=inner):
            return width(inner, size) + _scale(size)
        case Ranged():
            return _ranged(box, size)
        case Table(rows=rows):
            values = max(width(value, size) for value, _ in rows)
            return values + max(width(condition, size) if condition else 4.0 for _, condition in rows) + 3.5
    return _scale(size) * _leaf(box, _scale(size.script()) / _scale(size))


def _ranged(box: Ranged, size: Size) -> float:
    ends = max(width(end, size.script()) for end in (box.below, box.above) if end is not None)
    sign, compact = width(box.head, size), size.compact and box.sign == "∑"
    return sign + ends if box.beside or compact else max(sign, ends + 0.4 * _scale(size))


def _scale(size: Size) -> float:
    return (1.0, 0.75, 0.7)[min(size.level, SMALLEST)]


def _leaf(box: Box, script: float) -> float:
    """Width of a box without boxes inside; `script`: size of its subscripts against itself."""
    match box:
        case Figure(number=number):
            return _figure(number)
        case Amount(parts=parts):
            return sum(_amount(number, unit) for number, unit in parts) + 0.3 * (len(parts) - 1)
        case Variable(symbol=s):
            return text_width(s.prefix + s.base) + script * text_width(s.subscript) + 0.3 * s.primes + 0.05
        case Words(text=text, small=small):
            return text_width(text) * (script if small else 1)
        case Function(name=name, index=index):
            return text_width(name) + script * text_width(index)
        case Operator(sign=sign, kind="big"):
            return 1.3 if sign == "∫" else 1.65
        case Operator(tall=True):
            return 0.75
        case Operator(sign=sign, kind=kind):
            return text_width(sign) + _SPACES.get(kind, 0.1)
    return 0.0


def _figure(number: str) -> float:
    return text_width(typeset(number)) + (0.4 if "e" in number.lower() else 0.0)


def _amount(number: str, unit: str) -> float:
    return (_figure(number) + 0.25 if number else 0.0) + text_width(unit_symbol(unit))
