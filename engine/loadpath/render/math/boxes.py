"""What a formula looks like, whatever the notation: rows of figures, symbols, fractions, powers, brackets.

`layout` makes boxes from a formula tree, `width` measures them, `breaking` opens what is too wide for a
line, and one writer each turns them into MathML or LaTeX. Everything that is a matter of print (which
brackets, `×` or `⋅`, fraction or stroke) is settled by `layout`, so that the notations cannot differ in it.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, field
from typing import Literal

from loadpath.formula.names import Symbol


@dataclass(frozen=True, slots=True)
class Box:
    """Anything that is printed in a formula."""


@dataclass(frozen=True, slots=True)
class Figure(Box):
    """A number in plain form: `12345.6`, `-3.2`, `12.5e6`, `2 1/2`."""

    number: str


@dataclass(frozen=True, slots=True)
class Amount(Box):
    """Numbers with units; one pair mostly, two for feet and inches. An empty number leaves the unit alone."""

    parts: tuple[tuple[str, str], ...]


@dataclass(frozen=True, slots=True)
class Variable(Box):
    """A name; one with an empty base is the rest of a subscript that was cut."""

    symbol: Symbol


@dataclass(frozen=True, slots=True)
class Words(Box):
    """Upright text."""

    text: str
    small: bool = False


@dataclass(frozen=True, slots=True)
class Function(Box):
    """The upright name of a built-in function, with an index below (`log` 10)."""

    name: str
    index: str = ""


Kind = Literal[
    "relation", "logic", "sum", "product", "slash", "comma", "sign", "apply", "open", "close", "raise",
    "big", "gap",
]  # fmt: skip


@dataclass(frozen=True, slots=True)
class Operator(Box):
    """A sign between, before or after boxes.

    `open` and `close` are brackets whose inside may be broken, `big` is taller than a line of text, `gap` a
    thin space.
    """

    sign: str
    kind: Kind
    tall: bool = False
    """An `open` or `close` whose inside holds fractions."""


@dataclass(frozen=True, slots=True)
class Break(Box):
    """Nothing; a line may end here."""


@dataclass(frozen=True, slots=True)
class Row(Box):
    """Boxes side by side; holds no row directly (`row` splices them)."""

    boxes: tuple[Box, ...]


@dataclass(frozen=True, slots=True)
class Fence(Box):
    """Brackets with their inside."""

    opening: str
    inner: Box
    closing: str


@dataclass(frozen=True, slots=True)
class Fraction(Box):
    """A fraction built up, and the same on the line for where it is too wide."""

    top: Box
    bottom: Box
    flat: Box = field(compare=False)


@dataclass(frozen=True, slots=True)
class Ranged(Box):
    """A sign that takes what stands behind it over a range: `∫`, `∑`, `lim`, `max`."""

    sign: str
    below: Box
    above: Box | None = None

    @property
    def head(self) -> Operator | Function:
        """The sign alone."""
        return Function(self.sign) if self.sign.isalpha() else Operator(self.sign, "big")

    @property
    def beside(self) -> bool:
        """True where the range stands behind the sign, not below and above it."""
        return self.sign == "∫"


@dataclass(frozen=True, slots=True)
class Power(Box):
    """A base with its exponent."""

    base: Box
    exponent: Box


@dataclass(frozen=True, slots=True)
class Root(Box):
    """A root; the index is "" for the square root."""

    inner: Box
    index: str = ""


@dataclass(frozen=True, slots=True)
class Table(Box):
    """Branches behind a brace: value and condition, None for `otherwise`."""

    rows: tuple[tuple[Box, Box | None], ...]
    chosen: int | None
    """Index of the branch taken, None where none is marked."""


SMALLEST = 2
"""Script level below which nothing gets smaller: 7.5 pt in a document set in 11 pt."""


@dataclass(frozen=True, slots=True)
class Size:
    """How small print has become inside a formula."""

    level: int = 0
    compact: bool = False
    """Inside a fraction or a script, where a further fraction gets smaller."""

    def script(self) -> Size:
        """Of an exponent or a subscript."""
        return Size(self.level + 1, True)

    def within(self) -> Size:
        """Above and below the stroke of a fraction."""
        return Size(self.level + self.compact, True)


FULL = Size()


def row(*boxes: Box) -> Box:
    """Boxes side by side; one alone stays as it is."""
    spliced = tuple(inner for box in boxes for inner in parts(box))
    return spliced[0] if len(spliced) == 1 else Row(spliced)


def parts(box: Box) -> tuple[Box, ...]:
    """The boxes of a row, or the box alone."""
    return box.boxes if isinstance(box, Row) else (box,)


def bracketed(box: Box) -> Fence:
    """The box in round brackets."""
    return Fence("(", box, ")")


def inside(box: Box) -> Iterator[Box]:
    """The boxes directly within a box."""
    match box:
        case Row(boxes=boxes):
            yield from boxes
        case Fence(inner=inner) | Root(inner=inner):
            yield inner
        case Fraction(top=top, bottom=bottom):
            yield from (top, bottom)
        case Power(base=base, exponent=exponent):
            yield from (base, exponent)
        case Ranged(below=below, above=above):
            yield below
            if above is not None:
                yield above
        case Table(rows=rows):
            for value, condition in rows:
                yield value
                if condition is not None:
                    yield condition


def is_tall(box: Box) -> bool:
    """True where brackets round the box have to grow with it."""
    match box:
        case Fraction() | Table() | Ranged():
            return True
        case Operator(kind=kind):
            return kind == "big"
        case Power(base=base):
            return is_tall(base)
        case Row() | Fence() | Root():
            return any(is_tall(inner) for inner in inside(box))
    return False


def has_big_sign(box: Box) -> bool:
    """True where a sign taller than a line of text stands within, and brackets round it become wide."""
    if isinstance(box, Operator):
        return box.kind == "big"
    return isinstance(box, Ranged) or any(has_big_sign(inner) for inner in inside(box))
