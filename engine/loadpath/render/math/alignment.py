"""Equations set as one block: left sides end, and right sides begin, at one line down the page."""

from __future__ import annotations

from collections.abc import Sequence

from loadpath.formula.tree import Node, Relation
from loadpath.render.math.boxes import Box, Operator, Row, parts, row
from loadpath.render.math.layout import lay_out
from loadpath.render.math.width import width

MOST_LEFT = 0.4
"""Part of the measure that left sides may take; a wider one stands above its relation."""
NOTHING = Row(())


def aligned(equations: Sequence[Node], most: float) -> tuple[list[tuple[Box, Box]], float]:
    """Rows of a left and a right side, and the em that are left for a right side.

    A right side begins with its relation, or is a left side that stands alone. A chain takes one row where it
    fits, else one for each relation.
    """
    split = [_sides(equation) for equation in equations]
    lefts = [width(first) for first, *rest in split if rest and _fits_left(first, most)]
    room = most - max(lefts, default=0.0)
    return [pair for sides in split for pair in _rows(sides, most, room)], room


def _rows(sides: list[Box], most: float, room: float) -> list[tuple[Box, Box]]:
    first, *rest = sides
    if rest and width(row(*rest)) <= room:
        rest = [row(*rest)]
    if not rest or not _fits_left(first, most):
        return [(NOTHING, side) for side in (first, *rest)]
    return [(first, rest[0]), *((NOTHING, side) for side in rest[1:])]


def _fits_left(first: Box, most: float) -> bool:
    return width(first) <= MOST_LEFT * most


def _sides(equation: Node) -> list[Box]:
    """The operands of a relation, each but the first behind its sign."""
    box = lay_out(equation)
    if not isinstance(equation, Relation):
        return [box]
    sides: list[list[Box]] = [[]]
    for part in parts(box):
        if isinstance(part, Operator) and part.kind == "relation":
            sides.append([])
        sides[-1].append(part)
    return [row(*side) for side in sides]
