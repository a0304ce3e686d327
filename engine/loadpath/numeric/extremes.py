"""The largest and the smallest value of a curve over an interval: exact for piecewise polynomials."""

from __future__ import annotations

import math
from collections.abc import Callable, Iterable
from dataclasses import dataclass, replace
from itertools import pairwise
from typing import Literal

from loadpath.formula.tree import Bracket, Node, rebuilt
from loadpath.numeric.pieces import CRUMB, Piece, begins_at, bracket_places, jumps, pieces, same_place
from loadpath.numeric.polynomial import at, derivative, roots_in_unit
from loadpath.numeric.search import edge, lowest_between
from loadpath.numeric.sides import beside, evenly, sides, spread_of
from loadpath.numeric.trees import ZERO, Worth, holding, unrolled
from loadpath.numeric.trouble import Curve, check_bounds, signed, tried, worked

Where = Literal["end", "break", "turning point", "left of a jump", "right of a jump", "sample"]

POINTS = 200
EXACT = "exact"
SAMPLED = f"numeric, {POINTS} points"


@dataclass(frozen=True, slots=True)
class Spot:
    """A place that was looked at, with the value there, both coherent SI."""

    x: float
    y: float
    where: Where


Over = tuple[float, float]


@dataclass(frozen=True, slots=True)
class Extremes:
    """The extremes over an interval, and what they were chosen from."""

    largest: Spot
    smallest: Spot
    """Of equal ones, the first place."""
    looked_at: tuple[Spot, ...]
    """Rising; where the method is numeric, without the plain samples."""
    method: str
    largest_over: Over | None = None
    smallest_over: Over | None = None
    """The stretch over which the extreme holds, where it does (the first one; numeric: between samples)."""

    @property
    def flat(self) -> bool:
        """True where the largest or the smallest value holds over a stretch."""
        return self.largest_over is not None or self.smallest_over is not None


@dataclass(frozen=True, slots=True)
class _Seen:
    """A spot with what of its value may be rounding."""

    spot: Spot
    rounding: float


@dataclass(frozen=True, slots=True)
class _Level:
    """A stretch over which the curve keeps one value."""

    start: float
    end: float
    y: float
    rounding: float


def left_of(node: Node, x: str, at: float, value: Worth) -> Node:
    """The tree as it is just left of a place: zero-order brackets that begin there count as 0."""
    node = unrolled(node, x, value)
    holds = holding(node, frozenset([x]))

    def change(each: Node) -> Node | None:
        if not isinstance(each, Bracket) or each.power > 0 or id(each) not in holds:
            return None
        return ZERO if begins_at(each, x, at, value) else None

    return rebuilt(node, change)


def extremes(
    f: Curve, f_left: Curve | None, node: Node, x: str, low: float, high: float, value: Worth
) -> Extremes:
    """Largest and smallest of f from `low` to `high`, both included; a jump counts on both sides.

    `node` is the tree that f works, `f_left(x)` the value just left of x (`left_of`), `value` works what is
    free of x. For piecewise polynomials ends, breaks and turning points are all looked at: "exact". Otherwise
    200 samples and the places where the tree breaks are looked at and the best ones refined. Values are those
    of f, but for limits at a jump. Raises `NotDefined` where f has no value at a place that is looked at, or
    grows without settling, and ValueError for bounds that are none.
    """
    low, high = check_bounds(low, high)
    try:
        found = pieces(node, x, low, high, value)
    except (ArithmeticError, ValueError):
        found = None  # f fails just so, and says where
    if found is not None:
        return _exact(f, f_left, found, jumps(node, x, value))
    return _sampled(f, f_left, bracket_places(node, x, value), low, high)


# --- piecewise polynomials ----------------------------------------------------------------------------------


def _exact(
    f: Curve, f_left: Curve | None, found: tuple[Piece, ...], jumping: tuple[tuple[float, bool], ...]
) -> Extremes:
    seen = _at_place(f, f_left, None, found[0], jumping)
    for piece, following in pairwise((*found, None)):
        assert piece is not None
        for t in roots_in_unit(derivative(piece.coefficients)):
            place = piece.start + t * (piece.end - piece.start)
            if 1e-9 < t < 1 - 1e-9 and piece.start < place < piece.end:
                seen.append(_Seen(Spot(place, worked(f, place), "turning point"), piece.rounding(t)))
        seen += _at_place(f, f_left, piece, following, jumping)
    level = [
        _Level(p.start, p.end, p.coefficients[0], p.rounding(1.0)) for p in found if len(p.coefficients) == 1
    ]
    return _chosen(seen, EXACT, level, tuple(each.spot for each in seen))


def _at_place(
    f: Curve,
    f_left: Curve | None,
    before: Piece | None,
    after: Piece | None,
    jumping: tuple[tuple[float, bool], ...],
) -> list[_Seen]:
    """What is looked at where two pieces meet, or at an end."""
    place = before.end if before else after.start if after else math.nan
    rounding = max(before.rounding(1.0) if before else 0.0, after.rounding(0.0) if after else 0.0)
    kinds = {begins for where, begins in jumping if same_place(where, place)}
    here = worked(f, place)
    left = right = here
    if before and True in kinds:
        left = at(before.coefficients, 1.0) if f_left is None else worked(f_left, place)
    if after and False in kinds:
        right = at(after.coefficients, 0.0)
    whole: Where = "break" if before and after else "end"
    return [_Seen(s, rounding) for s in _both_sides(place, left, here, right, rounding, whole)]


def _both_sides(
    place: float, left: float, here: float, right: float, least: float, whole: Where
) -> Iterable[Spot]:
    """One spot, or more where the sides differ by more than `least`."""
    jump_before, jump_after = abs(left - here) > least, abs(right - here) > least
    if whole == "break" and jump_before != jump_after:
        whole = "right of a jump" if jump_before else "left of a jump"
    if jump_before:
        yield Spot(place, left, "left of a jump")
    yield Spot(place, here, whole)
    if jump_after:
        yield Spot(place, right, "right of a jump")


# --- any other curve ----------------------------------------------------------------------------------------


def _sampled(f: Curve, f_left: Curve | None, places: tuple[float, ...], low: float, high: float) -> Extremes:
    samples = [(place, worked(f, place)) for place in evenly(low, high, POINTS)]
    spread = spread_of([y for _, y in samples])
    inner = [p for p in places if low < p < high]
    spots = [Spot(*samples[0], "end")]
    for start, end in pairwise([low, *inner, high]):
        spots += _inside(f, samples, start + beside(start, low, high), end - beside(end, low, high), spread)
        if end < high:
            spots += _around(f, f_left, end, low, high, spread)
    at_end = samples[-1][1] if f_left is None else worked(f_left, high)
    least = CRUMB * max(spread, abs(samples[-1][1]))
    spots += _both_sides(high, at_end, samples[-1][1], samples[-1][1], least, "end")
    known = tuple(s for s in spots if s.where != "sample")
    plain = [Spot(place, y, "sample") for place, y in samples[1:-1]]
    seen = [_Seen(s, CRUMB * abs(s.y)) for s in sorted((*spots, *plain), key=lambda s: s.x)]
    found = _chosen(seen, SAMPLED, _level(f, samples), known)
    largest = _first_of_level(found.largest, found.largest_over)
    smallest = _first_of_level(found.smallest, found.smallest_over)
    looked = sorted({*known, largest, smallest}, key=lambda s: (s.x, known.index(s) if s in known else -1))
    return replace(found, largest=largest, smallest=smallest, looked_at=tuple(looked))


def _first_of_level(spot: Spot, over: Over | None) -> Spot:
    """Where a sample lies on a level stretch, the place where that begins."""
    return Spot(over[0], spot.y, "break") if over and spot.where == "sample" and over[0] < spot.x else spot


def _around(
    f: Curve, f_left: Curve | None, place: float, low: float, high: float, spread: float
) -> Iterable[Spot]:
    worked(f, place)
    values = sides(f, f_left, place, low, high, spread)
    left = values.here if math.isnan(values.left) else values.left
    right = values.here if math.isnan(values.right) else values.right
    return _both_sides(place, left, values.here, right, CRUMB * max(spread, abs(values.here)), "break")


def _inside(
    f: Curve, samples: list[tuple[float, float]], start: float, end: float, spread: float
) -> list[Spot]:
    """The best places of a stretch without a break, refined around each sample that no neighbour beats."""
    if not start < end:
        return []
    places = [start, *(x for x, _ in samples if start < x < end), end]
    values = [worked(f, place) for place in places]
    found = []
    for sign in (1.0, -1.0):
        level = [sign * y for y in values]
        for i, y in enumerate(level):
            before, after = level[max(i - 1, 0)], level[min(i + 1, len(level) - 1)]
            if y <= min(before, after) and y < max(before, after):
                a, b = places[max(i - 1, 0)], places[min(i + 1, len(level) - 1)]
                place, lowest = lowest_between(signed(f, sign), a, b, spread)
                if lowest < y - CRUMB * abs(y) and min(place - a, b - place) > 1e-6 * (b - a):
                    found.append(Spot(place, sign * lowest, "turning point"))
                else:  # the sample is as good, or the curve goes on beyond an edge
                    turns = y < before and y < after
                    found.append(Spot(places[i], values[i], "turning point" if turns else "sample"))
    return found


def _level(f: Curve, samples: list[tuple[float, float]]) -> list[_Level]:
    """Stretches of three samples and more with one value, out to where it ends."""
    found = []
    start = 0
    for i in range(1, len(samples) + 1):
        y = samples[start][1]
        least = CRUMB * abs(y)
        if i < len(samples) and abs(samples[i][1] - y) <= least:
            continue
        if i - start >= 3:
            a, b = samples[start][0], samples[i - 1][0]
            before, after = samples[max(start - 1, 0)][0], samples[min(i, len(samples) - 1)][0]
            found.append(_Level(_edge(f, y, least, a, before), _edge(f, y, least, b, after), y, least))
        start = i
    return found


def _edge(f: Curve, y: float, least: float, inside: float, outside: float) -> float:
    return edge(lambda x: abs(tried(f, x) - y) <= least, inside, outside)


# --- choosing -----------------------------------------------------------------------------------------------


def _chosen(seen: list[_Seen], method: str, level: list[_Level], known: tuple[Spot, ...]) -> Extremes:
    largest, smallest = _first(seen, lambda y: y), _first(seen, lambda y: -y)
    over = [_over(level, best.spot.y, best.rounding) for best in (largest, smallest)]
    return Extremes(largest.spot, smallest.spot, known, method, *over)


def _first(seen: list[_Seen], worth: Callable[[float], float]) -> _Seen:
    """The first of those that only rounding sets below the best."""
    best = max(seen, key=lambda s: worth(s.spot.y))
    return next(s for s in seen if worth(s.spot.y) >= worth(best.spot.y) - max(s.rounding, best.rounding))


def _over(level: list[_Level], y: float, rounding: float) -> Over | None:
    over: Over | None = None
    for each in level:
        if abs(each.y - y) > max(rounding, each.rounding):
            continue
        if over is not None and each.start != over[1]:
            break
        over = (over[0] if over else each.start, each.end)
    return over
