"""Where a tree breaks along its name, and the polynomials that it is between the breaks."""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass
from itertools import pairwise

from loadpath.formula.binding import own_name
from loadpath.formula.tree import Binary, Bracket, Branch, Call, Node, Relation, children
from loadpath.numeric.polynomial import ON_THE_BRACKET, UNIT, Coefficients, Stretch, at, read_polynomial
from loadpath.numeric.trees import Worth, holding, unrolled
from loadpath.numeric.trouble import check_bounds

CRUMB = 1e-12
"""A coefficient within this much of the sizes it was added up from is zero: it is rounding."""


@dataclass(frozen=True, slots=True)
class Piece:
    """A polynomial from one break to the next, in t = (x - start)/(end - start)."""

    start: float
    end: float
    coefficients: Coefficients
    """Lowest power first, coherent SI; rounding crumbs are zero; at least one."""
    sizes: Coefficients
    """The magnitudes that each coefficient was added up from."""

    def rounding(self, t: float) -> float:
        """What of the value at t may be rounding."""
        return CRUMB * at(self.sizes, t)


def same_place(a: float, b: float) -> bool:
    """True where two places are one, as a bracket sees it."""
    return abs(a - b) <= ON_THE_BRACKET * max(abs(a), abs(b))


def bracket_places(node: Node, x: str, value: Worth) -> tuple[float, ...]:
    """Places where brackets of x and conditions on x change over, rising, each once.

    Found where the bracket's inside, or the difference of a relation's sides, is a polynomial of x. What
    stands inside an integral or another function with a name of its own is not looked at: it doesn't jump.
    """
    node = unrolled(node, x, value)
    holds = holding(node, frozenset([x]))
    found: list[float] = []
    for each in _outer(node):
        if id(each) not in holds:
            continue
        if isinstance(each, Bracket):
            found += [place for place, _ in _crossings(each.inner, x, value)]
        elif isinstance(each, Relation):
            for left, right in pairwise(each.operands):
                found += [place for place, _ in _crossings(Binary("-", left, right), x, value)]
    return merged(found)


def merged(places: list[float]) -> tuple[float, ...]:
    """Sorted, each once within rounding."""
    kept: list[float] = []
    for place in sorted(places):
        if not kept or not same_place(kept[-1], place):
            kept.append(place)
    return tuple(kept)


def jumps(node: Node, x: str, value: Worth) -> tuple[tuple[float, bool], ...]:
    """Places of zero-order brackets; True with those that begin there, False with those that end there."""
    node = unrolled(node, x, value)
    holds = holding(node, frozenset([x]))
    brackets = [b for b in _outer(node) if isinstance(b, Bracket) and b.power == 0 and id(b) in holds]
    return tuple(crossing for b in brackets for crossing in _crossings(b.inner, x, value))


def begins_at(bracket: Bracket, x: str, place: float, value: Worth) -> bool:
    """True where the bracket goes from zero to something at that place."""
    found = _crossings(bracket.inner, x, value)
    return any(rises and same_place(crossing, place) for crossing, rises in found)


def _outer(node: Node | Branch) -> Iterator[Node | Branch]:
    """The node and those below it, without what stands in a function that has a name of its own."""
    waiting = [node]
    while waiting:
        each = waiting.pop()
        yield each
        if not (isinstance(each, Call) and own_name(each) is not None):
            waiting += reversed(tuple(children(each)))


def _crossings(inside: Node, x: str, value: Worth) -> list[tuple[float, bool]]:
    """Where a polynomial goes through zero, and whether it rises there; nothing for any other tree."""
    try:
        reading = read_polynomial(inside, x, value, brackets=False)
    except (ArithmeticError, ValueError):
        return []
    if reading is None:
        return []
    c, _ = reading.work(UNIT)
    while c and c[-1] == 0:
        c = c[:-1]
    if len(c) == 2:
        return [(-c[0] / c[1] + 0.0, c[1] > 0)]
    return _real_crossings(c) if len(c) > 2 else []


def _real_crossings(c: Coefficients) -> list[tuple[float, bool]]:
    import numpy as np

    if not all(map(math.isfinite, c)):
        return []
    roots = np.roots(c[::-1])
    real = sorted(float(r.real) for r in roots if abs(r.imag) <= 1e-9 * abs(r))
    # an even number of roots at one place only touches
    places = [p for p in dict.fromkeys(real) if real.count(p) % 2]
    rises = [c[-1] > 0 if (len(places) - i) % 2 else c[-1] < 0 for i in range(len(places))]
    return list(zip(places, rises, strict=True))


def pieces(node: Node, x: str, low: float, high: float, value: Worth) -> tuple[Piece, ...] | None:
    """The tree as polynomials between its breaks from `low` to `high`; None where it is none.

    Each bracket is opened about the start of the piece, so that twenty spans lose no digits. `value` works a
    tree that is free of x. Raises ValueError for bounds that are none.
    """
    low, high = check_bounds(low, high)
    node = unrolled(node, x, value)
    reading = read_polynomial(node, x, value, brackets=True)
    if reading is None:
        return None
    inner = [p for p in bracket_places(node, x, value) if low < p < high]
    inner = [p for p in inner if not same_place(p, low) and not same_place(p, high)]
    found = []
    for start, end in pairwise([low, *inner, high]):
        c, sizes = reading.work(Stretch(start, end - start))
        if not all(map(math.isfinite, sizes)):
            return None
        found.append(Piece(start, end, _clean(c, sizes), sizes or (0.0,)))
    return tuple(found)


def _clean(c: Coefficients, sizes: Coefficients) -> Coefficients:
    kept = [0.0 if abs(each) <= CRUMB * size else each for each, size in zip(c, sizes, strict=True)]
    while len(kept) > 1 and kept[-1] == 0:
        kept.pop()
    return tuple(kept) or (0.0,)
