"""Places where a curve is zero, between bounds; and a tree's degree and coefficients in one unknown."""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass
from itertools import pairwise
from statistics import median

from loadpath.formula.tree import Binary, Name, Negative, Node
from loadpath.numeric.polynomial import MOST_DEGREE, UNIT, read_polynomial
from loadpath.numeric.search import edge, lowest_between
from loadpath.numeric.sides import beside, evenly
from loadpath.numeric.trees import Worth, holding, typed_number
from loadpath.numeric.trouble import Curve, NotDefined, check_bounds, signed, tried, worked

STEPS = 400
BRACKETING = f"bracketing (Brent), between the bounds in {STEPS} steps"
NO_MORE = 1e-12
"""A value within this much of the usual size of the curve's values is zero."""
ONE_ROOT = 1e-7
"""Roots nearer to each other than this share of the stretch are one."""


@dataclass(frozen=True, slots=True)
class Roots:
    """The roots found between two bounds, both included."""

    found: tuple[float, ...]
    """Rising, coherent SI. Where the curve is zero over a stretch, its two ends."""
    method: str
    residuals: tuple[float, ...]
    """The curve's value at each root."""
    over: tuple[tuple[float, float], ...] = ()
    """Stretches over which the curve is zero."""
    gaps: tuple[float, ...] = ()
    """Places looked at where the curve has no value: a root beside one can have been missed."""
    poles: tuple[float, ...] = ()
    """Places where the sign changes without the curve being zero: a pole, a jump, or no value there."""


def roots_between(f: Curve, low: float, high: float, places: tuple[float, ...] = ()) -> Roots:
    """Every change of sign on 400 even steps and at the places, and every place where f touches zero.

    Two roots within one step are found where the steps show |f| going down and up again. Raises `NotDefined`
    where f has no value on any step, ValueError for bounds that are none.
    """
    low, high = check_bounds(low, high)
    breaks = [x for p in places for d in (beside(p, low, high),) for x in (p - d, p, p + d) if low < x < high]
    points = [(x, tried(f, x)) for x in sorted({*evenly(low, high, STEPS + 1), *breaks})]
    sizes = [abs(y) for _, y in points if not math.isnan(y)]
    if not sizes:
        raise NotDefined(low)
    usual = median([s for s in sizes if s > 0] or [0.0])
    over = tuple(_zero_stretches(f, points))
    looked = [(x, y) for x, y in points if not any(start <= x <= end for start, end in over)]
    looked = sorted({*looked, *((x, 0.0) for ends in over for x in ends)})
    touching, lowest = _lows(f, looked, usual)
    found, poles = changes_of_sign(f, sorted({*looked, *lowest}), usual)
    found += touching + [x for x, y in looked if y == 0]
    roots = _apart(f, found, ONE_ROOT * (high - low))
    return Roots(
        tuple(roots),
        BRACKETING,
        tuple(tried(f, x) for x in roots),
        over,
        tuple(x for x, y in points if math.isnan(y)),
        tuple(sorted(poles)),
    )


Points = list[tuple[float, float]]


def _zero_stretches(f: Curve, points: Points) -> Iterator[tuple[float, float]]:
    """Three steps and more that are exactly zero, out to where that ends."""
    start = 0
    for i in range(1, len(points) + 1):
        if i < len(points) and points[i][1] == 0 == points[start][1]:
            continue
        if i - start >= 3 and points[start][1] == 0:
            a, b = points[start][0], points[i - 1][0]
            before, after = points[max(start - 1, 0)][0], points[min(i, len(points) - 1)][0]
            yield edge(lambda x: tried(f, x) == 0, a, before), edge(lambda x: tried(f, x) == 0, b, after)
        start = i


def changes_of_sign(f: Curve, points: Points, usual: float) -> tuple[list[float], list[float]]:
    """Roots between neighbours of opposite sign, and the places that only look like one."""
    found: list[float] = []
    poles: list[float] = []
    for (a, at_a), (b, at_b) in pairwise(points):
        if not (at_a < 0 < at_b or at_b < 0 < at_a):
            continue
        root = _brent(f, a, b)
        (found if _vanishes(f, root, b - a, usual) else poles).append(root)
    return found, poles


def _brent(f: Curve, a: float, b: float) -> float:
    """The place where the sign changes, to rounding; or one on the way there at which f has no value."""
    from scipy.optimize import brentq

    try:
        return float(
            brentq(lambda x: worked(f, x), a, b, xtol=1e-25 * (b - a), rtol=1e-15, maxiter=500, disp=False)
        )
    except NotDefined as trouble:
        return trouble.x


def _vanishes(f: Curve, root: float, step: float, usual: float) -> bool:
    """Tells a root from a pole or a jump: the values on both sides go to zero with the distance."""

    def larger_side(apart: float) -> float:
        values = [abs(tried(f, x)) for x in (root - apart, root + apart)]
        return max((v for v in values if not math.isnan(v)), default=math.inf)

    if math.isnan(tried(f, root)):
        return False
    near = larger_side(max(8 * math.ulp(root), 1e-12 * step))
    return near <= NO_MORE * usual or near <= 0.02 * larger_side(1e-4 * step)


def _lows(f: Curve, points: Points, usual: float) -> tuple[list[float], Points]:
    """Where |f| is least between steps of one sign: roots that touch, and points between two roots."""
    touching: list[float] = []
    lowest: Points = []
    for i, (x, y) in enumerate(points):
        (a, before), (b, after) = points[max(i - 1, 0)], points[min(i + 1, len(points) - 1)]
        sign = math.copysign(1.0, y)
        # a nan fails every comparison
        lowest_here = sign * before >= abs(y) and sign * after >= abs(y)
        if not (y and lowest_here and abs(y) < max(abs(before), abs(after))):
            continue
        try:
            place, least = lowest_between(signed(f, sign), a, b, max(abs(before), abs(after)))
        except NotDefined:
            continue
        if abs(y) < abs(least):
            place, least = x, sign * y
        if abs(least) <= NO_MORE * usual:
            touching.append(place)
        elif least < 0:
            lowest.append((place, sign * least))
    return touching, lowest


def _apart(f: Curve, found: list[float], nearest: float) -> list[float]:
    """Of roots nearer to each other than that, the one with the least residual."""
    kept: list[float] = []
    for root in sorted(set(found)):
        if not kept or root - kept[-1] > nearest:
            kept.append(root)
        elif abs(tried(f, root)) < abs(tried(f, kept[-1])):
            kept[-1] = root
    return kept


# --- polynomials in one unknown -----------------------------------------------------------------------------


def degree_in(node: Node, unknowns: frozenset[str]) -> int | None:
    """The degree in the one of the unknowns that occurs (0 where none does).

    None where two occur, or where the tree is no polynomial as typed: exponents are typed whole numbers.
    A term that cancels another still counts.
    """
    occurring = [name for name in sorted(unknowns) if id(node) in holding(node, frozenset([name]))]
    if len(occurring) > 1:
        return None
    return _degree(node, holding(node, unknowns))


def _degree(node: Node, holds: frozenset[int]) -> int | None:
    if id(node) not in holds:
        return 0
    match node:
        case Name():
            return 1
        case Negative(operand=operand):
            return _degree(operand, holds)
        case Binary(operator="^", left=left, right=right):
            inner, n = _degree(left, holds), typed_number(right)
            if inner is None or n is None or n < 0 or n != int(n):
                return None
            return inner * int(n)
        case Binary(operator="/", left=left, right=right):
            return _degree(left, holds) if id(right) not in holds else None
        case Binary(operator=operator, left=left, right=right):
            a, b = _degree(left, holds), _degree(right, holds)
            if a is None or b is None:
                return None
            return a + b if operator == "*" else max(a, b)
    return None


def coefficients(node: Node, unknown: str, value: Worth) -> tuple[float, ...] | None:
    """Coefficients in an unknown, lowest power first, as many as `degree_in` says and one; coherent SI.

    None where the tree is no polynomial, or one of a degree above 24. `value` works what is free of the
    unknown; what it raises is passed on.
    """
    degree = degree_in(node, frozenset([unknown]))
    if degree is None or degree > MOST_DEGREE:
        return None
    reading = read_polynomial(node, unknown, value, brackets=False)
    if reading is None:
        return None
    c, _ = reading.work(UNIT)
    return c + (0.0,) * (degree + 1 - len(c))
