"""Polynomials in floats, lowest power first, and a tree read as one on a stretch of its name.

Beside each coefficient goes its size: the sum of the magnitudes that it was added up from, which says how
much of it may be rounding.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from itertools import pairwise
from math import comb, sqrt

from loadpath.formula.tree import Binary, Bracket, Name, Negative, Node
from loadpath.numeric.trees import Worth, holding, typed_number

Coefficients = tuple[float, ...]
Sized = tuple[Coefficients, Coefficients]
"""Coefficients and their sizes; both empty for zero."""

MOST_DEGREE = 24
ON_THE_BRACKET = 1e-12
"""As in `evaluate.numbers`: a difference within this much of its larger operand is zero inside a bracket."""


# --- arithmetic ---------------------------------------------------------------------------------------------


def at(c: Coefficients, t: float) -> float:
    """The value at t."""
    y = 0.0
    for each in reversed(c):
        y = y * t + each
    return y


def derivative(c: Coefficients) -> Coefficients:
    """Of a polynomial."""
    return tuple(k * each for k, each in enumerate(c))[1:]


def _sum(a: Coefficients, b: Coefficients) -> Coefficients:
    longer, shorter = (a, b) if len(a) >= len(b) else (b, a)
    return tuple(x + y for x, y in zip(longer, shorter, strict=False)) + longer[len(shorter) :]


def _product(a: Coefficients, b: Coefficients) -> Coefficients:
    if len(a) == 1:
        return tuple(a[0] * y for y in b)
    if len(b) == 1:
        return tuple(x * b[0] for x in a)
    c = [0.0] * (len(a) + len(b) - 1) if a and b else []
    for i, x in enumerate(a):
        for j, y in enumerate(b):
            c[i + j] += x * y
    return tuple(c)


def _times(a: Sized, b: Sized) -> Sized:
    return _product(a[0], b[0]), _product(a[1], b[1])


def _power(a: Sized, n: int) -> Sized:
    whole: Sized = ((1.0,), (1.0,))
    for _ in range(n):
        whole = _times(whole, a)
    return whole


# --- real roots between 0 and 1 -----------------------------------------------------------------------------


def roots_in_unit(c: Coefficients) -> tuple[float, ...]:
    """The real roots from 0 to 1, rising; a root that only touches counts once. None for zero throughout."""
    while c and c[-1] == 0:
        c = c[:-1]
    if len(c) < 2 or abs(c[0]) > sum(map(abs, c[1:])):
        return ()
    if len(c) == 2:
        return tuple(t for t in (-c[0] / c[1],) if 0 <= t <= 1)
    if len(c) == 3:
        return tuple(t for t in _of_quadratic(*c) if 0 <= t <= 1)
    stations = [0.0, *roots_in_unit(derivative(c)), 1.0]
    touching = 1e-14 * sum(map(abs, c))
    found = [t for t in stations if abs(at(c, t)) <= touching]
    for a, b in pairwise(stations):
        if a not in found and b not in found and (at(c, a) < 0) != (at(c, b) < 0):
            found.append(_between(c, a, b))
    return tuple(sorted(set(found)))


def _of_quadratic(c: float, b: float, a: float) -> tuple[float, ...]:
    inside = b * b - 4 * a * c
    if inside < -1e-14 * b * b:
        return ()
    far = -(b + (sqrt(max(inside, 0.0)) if b >= 0 else -sqrt(max(inside, 0.0)))) / 2
    if far == 0:
        return (0.0,)
    return tuple(sorted({far / a, c / far}))


def _between(c: Coefficients, a: float, b: float) -> float:
    """The one root between places of opposite sign: Newton's steps, halving where one leads outside."""
    rising, slope_of = at(c, b) > 0, derivative(c)
    x = (a + b) / 2
    for _ in range(200):
        y, slope = at(c, x), at(slope_of, x)
        if y == 0:
            return x
        a, b = (a, x) if (y > 0) == rising else (x, b)
        new = x - y / slope if slope else a
        if not a < new < b:
            new = (a + b) / 2
        if abs(new - x) <= 1e-16 or b - a <= 1e-16:
            return new
        x = new
    return x


# --- a tree as a polynomial ---------------------------------------------------------------------------------


@dataclass(frozen=True, slots=True)
class Stretch:
    """From `start` on, x = start + width*t."""

    start: float
    width: float


Work = Callable[[Stretch], Sized]


@dataclass(frozen=True, slots=True)
class Reading:
    """A tree as a polynomial on any stretch in which no bracket breaks."""

    degree: int
    work: Work


def read_polynomial(node: Node, x: str, value: Worth, *, brackets: bool) -> Reading | None:
    """None where the tree is no polynomial of x, or one above `MOST_DEGREE`.

    With `brackets`, Macaulay brackets of polynomials count. `value` works what is free of x.
    """
    return _Reader(x, value, holding(node, frozenset([x])), brackets).read(node)


@dataclass(frozen=True, slots=True)
class _Reader:
    x: str
    value: Worth
    holds: frozenset[int]
    brackets: bool

    def read(self, node: Node) -> Reading | None:
        if id(node) not in self.holds:
            return _constant(float(self.value(node)))
        match node:
            case Name():
                return Reading(1, lambda s: ((s.start, s.width), (abs(s.start), abs(s.width))))
            case Negative(operand=operand):
                return _scaled(self.read(operand), -1.0)
            case Binary():
                return self._binary(node)
            case Bracket() if self.brackets:
                return self._bracket(node)
        return None

    def _binary(self, node: Binary) -> Reading | None:
        if node.operator == "^":
            return self._power(node)
        if node.operator == "/":
            if id(node.right) in self.holds:
                return None
            divisor = float(self.value(node.right))
            return _divided(self.read(node.left), divisor)
        left, right = self.read(node.left), self.read(node.right)
        if left is None or right is None:
            return None
        if node.operator == "*":
            return _multiplied(left, right)
        return _added(left, right if node.operator == "+" else _scaled(right, -1.0))

    def _power(self, node: Binary) -> Reading | None:
        if id(node.right) in self.holds:
            return None
        n = typed_number(node.right)
        n = float(self.value(node.right)) if n is None else n
        inner = self.read(node.left)
        if inner is None or n != int(n) or not 0 <= n * max(inner.degree, 1) <= MOST_DEGREE:
            return None
        whole, work = int(n), inner.work
        return Reading(inner.degree * whole, lambda s: _power(work(s), whole))

    def _bracket(self, node: Bracket) -> Reading | None:
        inner = _Reader(self.x, self.value, self.holds, brackets=False).read(node.inner)
        if inner is None or inner.degree * node.power > MOST_DEGREE:
            return None
        degree, n, work = inner.degree * node.power, node.power, inner.work
        line = work(UNIT)[0]
        if len(line) == 2 and line[1] != 0:
            return Reading(degree, _of_line(-line[0] / line[1], line[1], n))

        def bracket(s: Stretch) -> Sized:
            whole = work(s)
            return _power(whole, n) if at(whole[0], 0.5) >= 0 else ((), ())

        return Reading(degree, bracket)


UNIT = Stretch(0.0, 1.0)


def _of_line(place: float, slope: float, n: int) -> Work:
    """`<slope*(x - place)>^n`, opened about the start of the stretch."""

    def bracket(s: Stretch) -> Sized:
        apart = s.start - place
        if (apart + s.width / 2) * slope < 0:
            return (), ()
        if abs(apart) <= ON_THE_BRACKET * max(abs(s.start), abs(place)):
            apart = 0.0
        a, b = slope * apart, slope * s.width
        opened = tuple(comb(n, k) * a ** (n - k) * b**k for k in range(n + 1))
        return opened, tuple(abs(c) for c in opened)

    return bracket


def _constant(c: float) -> Reading:
    sized = ((c,), (abs(c),))
    return Reading(0, lambda s: sized)


def _scaled(reading: Reading | None, factor: float) -> Reading | None:
    if reading is None:
        return None
    work, by = reading.work, ((factor,), (abs(factor),))
    return Reading(reading.degree, lambda s: _times(by, work(s)))


def _divided(reading: Reading | None, divisor: float) -> Reading | None:
    if reading is None:
        return None
    work = reading.work

    def quotient(s: Stretch) -> Sized:
        c, sizes = work(s)
        return tuple(each / divisor for each in c), tuple(each / abs(divisor) for each in sizes)

    return Reading(reading.degree, quotient)


def _added(left: Reading, right: Reading | None) -> Reading | None:
    if right is None:
        return None
    a, b = left.work, right.work

    def total(s: Stretch) -> Sized:
        (c, sizes), (d, more) = a(s), b(s)
        return _sum(c, d), _sum(sizes, more)

    return Reading(max(left.degree, right.degree), total)


def _multiplied(left: Reading, right: Reading) -> Reading | None:
    if left.degree + right.degree > MOST_DEGREE:
        return None
    a, b = left.work, right.work
    return Reading(left.degree + right.degree, lambda s: _times(a(s), b(s)))
