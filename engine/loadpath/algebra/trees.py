"""Helpers on the formula tree: what holds a name, putting a tree in place of a name, building products."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import MISSING, fields, replace
from fractions import Fraction

from loadpath.algebra.failure import too_large
from loadpath.formula.binding import put_in
from loadpath.formula.tree import (
    Binary,
    Name,
    Negative,
    Node,
    Number,
    Operator,
    Part,
    Quantity,
    walk,
    with_children,
)

ZERO = Number("0")
ONE = Number("1")
LONGEST = 60
"""Characters of a number that can still be typed."""
ABSOLUTE = ("degC", "degF")
"""Units whose 0 is not nothing."""


def depends_on(f: Node, x: str) -> bool:
    """True where the name stands anywhere in the tree."""
    return any(isinstance(node, Name) and node.name == x for node in walk(f))


def substitute_name(f: Node, x: str, node: Node) -> Node:
    """The tree with a tree in place of each use of a name."""
    return put_in(f, {x: node})


def without_spans(node: Node) -> Node:
    """The same tree, typed nowhere."""
    spans = {f.name: f.default for f in fields(node) if not f.compare and f.default is not MISSING}
    return with_children(replace(node, **spans) if spans else node, without_spans)


def size(node: Node) -> int:
    """How many nodes a tree has."""
    return sum(1 for _ in walk(node))


# --- numbers ------------------------------------------------------------------------------------------------


def exact(typed: str) -> Fraction:
    """A typed number, exactly."""
    return Fraction(typed.replace("_", ""))


def quantity_value(node: Quantity) -> tuple[Fraction, str] | None:
    """Number and unit of a quantity of one part; None for feet and inches and for absolute temperatures."""
    if len(node.parts) != 1 or node.parts[0].unit in ABSOLUTE:
        return None
    part = node.parts[0]
    number = exact(part.whole) if part.whole else Fraction(0)
    if part.over:
        number += exact(part.over[0]) / exact(part.over[1])
    return number, part.unit


def quantity(number: Fraction, unit: str) -> Quantity:
    """A positive quantity as it would be typed."""
    return Quantity((Part(number_text(number), None, unit),))


def is_zero(node: Node) -> bool:
    """True for a typed 0, with or without a unit."""
    match node:
        case Number(text=typed):
            return exact(typed) == 0
        case Quantity():
            value = quantity_value(node)
            return value is not None and value[0] == 0
        case Negative(operand=operand):
            return is_zero(operand)
    return False


def is_short(value: Fraction) -> bool:
    """True where the decimal form of a number ends after a few digits."""
    under, places = value.denominator, 0
    while under > 1 and places < 20:
        value, places = value * 10, places + 1
        under = value.denominator
    return under == 1 and len(str(abs(value.numerator)).rstrip("0")) <= 8


def number_text(value: Fraction) -> str:
    """A number of 0 or more whose decimal form ends, as typed."""
    places = 0
    while value.denominator > 1:
        value, places = value * 10, places + 1
    digits = str(value.numerator)
    kept = digits.rstrip("0") or "0"
    shift = len(digits) - len(kept) - places
    if kept == "0":
        return "0"
    if 0 <= shift <= 12 and len(kept) + shift <= LONGEST:
        return kept + "0" * shift
    if shift < 0 and len(kept) + shift >= -3 and max(len(kept), -shift) + 2 <= LONGEST:
        padded = kept.rjust(1 - shift, "0")
        return f"{padded[:shift]}.{padded[shift:]}"
    if len(kept) > LONGEST - 6 or abs(shift + len(kept)) > 300:
        raise too_large("a number of the derived expression is too long to be written down")
    return f"{kept[0]}.{kept[1:]}e{shift + len(kept) - 1}" if kept[1:] else f"{kept}e{shift}"


def decimals_in(node: Node) -> bool:
    """True where a decimal number is typed other than as an exponent."""
    match node:
        case Number(text=typed):
            return exact(typed).denominator != 1
        case Binary(operator="^", left=left):
            return decimals_in(left)
        case Quantity():
            return False
    found = False

    def look(child: Node) -> Node:
        nonlocal found
        found = found or decimals_in(child)
        return child

    with_children(node, look)
    return found


# --- building -----------------------------------------------------------------------------------------------


def chain(operator: Operator, nodes: Iterable[Node]) -> Node:
    """`a*b*c`, left to right."""
    first, *rest = nodes
    for node in rest:
        first = Binary(operator, first, node)
    return first


def negated(node: Node) -> Node:
    """With a minus at its first factor, where an engineer puts it: `-P*L/2`."""
    match node:
        case Binary(operator="*" | "/" as operator, left=left, right=right):
            return Binary(operator, negated(left), right)
        case Negative(operand=operand):
            return operand
    return Negative(node)
