"""Macaulay brackets by their own rules: `<u>^n` with u linear in x is u^n where u >= 0, else nothing.

* A product of brackets becomes a sum of single ones; two places whose order isn't typed meet at `max(a, b)`.
* A power of x times a bracket becomes brackets of higher order: x*<x - a>^1 = <x - a>^2 + a*<x - a>^1.
* Anything else that holds a bracket, such as a stepped stiffness below the line, is the expression with the
  bracket off, plus a step of the difference: f = f_off + (f_on - f_off)*<x - a>^0.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator
from contextlib import contextmanager
from contextvars import ContextVar
from dataclasses import dataclass
from fractions import Fraction
from math import comb

from loadpath.algebra.collecting import collected, positive_first
from loadpath.algebra.failure import NoForm, no_closed_form, remaining, too_large
from loadpath.algebra.powers import holds, polynomial, split, straight
from loadpath.algebra.terms import (
    MOST_TERMS,
    Term,
    Terms,
    as_term,
    expanded,
    factor,
    inverse,
    merged,
    power,
    product,
    read,
    scaled,
    settled,
    sign,
    times,
    write,
)
from loadpath.algebra.trees import ZERO, negated
from loadpath.formula.tree import Binary, Bracket, Call, Name, Node, rebuilt, walk


@dataclass(frozen=True, slots=True)
class Step:
    """Where a bracket of x begins."""

    slope: Term
    place: Terms
    way: int | None
    """1 where it is on beyond the place (rising), -1 before it (falling), None where the slope's sign hangs
    on a name."""
    at_zero: Terms
    """The inside at x = 0."""


def step_of(bracket: Bracket, x: str) -> Step:
    """Raises NoForm where the inside isn't linear in x."""
    line = straight(bracket.inner, x)
    if line is None:
        raise NoForm
    slope = as_term(collected(line[0]))
    place = settled(times(t, inverse(scaled((slope,), Fraction(-1))[0])) for t in line[1])
    return Step(slope, place, sign((slope,)), line[1])


_told: ContextVar[Callable[[Node], bool] | None] = ContextVar("told", default=None)


@contextmanager
def told_by(above_zero: Callable[[Node], bool]) -> Iterator[None]:
    """While inside, the caller is asked for the sign of what is no difference any more."""
    token = _told.set(above_zero)
    try:
        yield
    finally:
        _told.reset(token)


def told_sign(terms: Terms) -> int | None:
    """The sign of typed numbers, or of a single term such as L/3 where the caller says it."""
    known, above_zero = sign(terms), _told.get()
    if known is not None or len(terms) != 1 or above_zero is None:
        return known
    node = write(terms)
    if above_zero(node):
        return 1
    return -1 if above_zero(negated(node)) else None


def has_bracket(node: Node, x: str) -> bool:
    """True where a bracket of x stands in the tree."""
    return any(isinstance(n, Bracket) and holds(n.inner, x) for n in walk(node))


def places(f: Node, x: str, highest: int | None = None) -> tuple[Node, ...]:
    """The places of the brackets of x, in the order met, each once; up to an order only where one is given.

    Raises AlgebraFailure where the inside of a bracket isn't linear in x.
    """
    found: dict[Node, None] = {}
    for node in walk(f):
        if isinstance(node, Bracket) and holds(node.inner, x) and (highest is None or node.power <= highest):
            try:
                found[write(step_of(node, x).place)] = None
            except NoForm:
                message = f"the place of a bracket can't be told: its inside is not linear in {x}"
                raise no_closed_form(message) from None
    return tuple(found)


# --- single brackets ----------------------------------------------------------------------------------------


def singles(terms: Terms, x: str) -> Terms:
    """The same sum with at most one bracket of x in each term, and no power of x beside it.

    Raises NoForm where two brackets can't be brought together.
    """
    remaining()
    out: list[Term] = []
    for term in expanded(terms, lambda base: has_bracket(base, x)):
        brackets = [_powered(n, e) for n, e in term.factors if _is_plain(n, e, x)]
        rest = Term(term.number, tuple(f for f in term.factors if not _is_plain(*f, x)))
        deep = next((n for n, _ in rest.factors if has_bracket(n, x)), None)
        if deep is not None:
            out += singles(_stepped(term, deep, x), x)
        elif not brackets:
            out.append(term)
        elif len(brackets) == 1:
            out += _about(rest, brackets[0], x)
        else:
            first, second, *more = brackets
            others = times(rest, Term(Fraction(1), tuple((b, Fraction(1)) for b in more)))
            out += singles(product(_together(first, second, x), (others,)), x)
        if len(out) > MOST_TERMS:
            raise too_large(f"the products of brackets give more than {MOST_TERMS} terms")
    return merged(out)


def _is_plain(base: Node, exponent: Fraction, x: str) -> bool:
    return isinstance(base, Bracket) and holds(base.inner, x) and exponent > 0 and exponent.denominator == 1


def _powered(bracket: Node, exponent: Fraction) -> Bracket:
    assert isinstance(bracket, Bracket)
    return Bracket(bracket.inner, bracket.power * int(exponent))


def _stepped(term: Term, deep: Node, x: str) -> Terms:
    """The term with the brackets that stand deep in it off, and a step of the difference at each.

    Where the order of their places isn't typed, the first alone is taken out here.
    """
    inners = list(dict.fromkeys(n.inner for n in walk(deep) if isinstance(n, Bracket) and holds(n.inner, x)))
    before = read(_switched((term,), tuple(inners), False))
    rising = _typed_order(inners, x)
    if rising is None:
        rising = inners[:1]
        before = read(_switched((term,), (inners[0],), False))
    out = before
    for i, inner in enumerate(rising):
        now = read(_switched((term,), tuple(rising[: i + 1]), True, tuple(rising[i + 1 :])))
        change = collected((*now, *scaled(before, Fraction(-1))))
        out += product(change, (factor(Bracket(inner, 0)),))
        before = now
    return out


def _typed_order(inners: list[Node], x: str) -> list[Node] | None:
    """The insides of rising brackets in the order of their places, None where that isn't typed."""
    steps = [(step_of(Bracket(inner, 0), x), inner) for inner in inners]
    if any(step.way != 1 for step, _ in steps):
        return None
    out: list[tuple[Step, Node]] = []
    for step, inner in steps:
        signs = [told_sign(_difference(step.place, other.place)) for other, _ in out]
        if any(known is None for known in signs):
            return None
        out.insert(sum(1 for known in signs if known is not None and known >= 0), (step, inner))
    return [inner for _, inner in out]


def _switched(terms: Terms, inners: tuple[Node, ...], on: bool, off: tuple[Node, ...] = ()) -> Node:
    """With the brackets of some insides on, or off."""

    def change(node: Node) -> Node | None:
        if not isinstance(node, Bracket) or node.inner not in inners + off:
            return None
        if not on or node.inner in off:
            return ZERO
        return write(power(as_term(read(node.inner)), Fraction(node.power)))

    return rebuilt(write(terms), change)


def _about(rest: Term, bracket: Bracket, x: str) -> Terms:
    """p(x)*<u>^n as brackets of u; left as it is where p is no polynomial."""
    outside, inside = split(rest, x)
    if not inside.factors:
        return (times(rest, factor(bracket)),)
    powers = polynomial((inside,), x)
    if powers is None:
        return (times(rest, factor(bracket)),)
    step = step_of(bracket, x)
    out: list[Term] = []
    for order, coefficient in in_powers_of_line(powers, step.slope, step.at_zero):
        if coefficient:
            higher = factor(Bracket(bracket.inner, bracket.power + order))
            out.append(times(times(outside, _one(coefficient)), higher))
    return tuple(out)


def in_powers_of_line(powers: dict[int, Terms], slope: Term, at_zero: Terms) -> list[tuple[int, Terms]]:
    """A polynomial in x by powers of u = slope*x + at_zero, the highest first."""
    place = as_term(settled(times(t, scaled((inverse(slope),), Fraction(-1))[0]) for t in at_zero))
    out = []
    for j in range(max(powers), -1, -1):
        shifted: Terms = ()
        for k, coefficient in powers.items():
            if k >= j:
                moved = power(place, Fraction(k - j))
                shifted += product(scaled(coefficient, Fraction(comb(k, j))), moved)
        out.append((j, product(settled(shifted), power(slope, Fraction(-j)))))
    return out


def _one(terms: Terms) -> Term:
    """One term: a sum before a bracket stands in parentheses, a term with a plus first."""
    return as_term(positive_first(terms)) if terms else as_term(terms)


# --- two brackets -------------------------------------------------------------------------------------------


def _together(first: Bracket, second: Bracket, x: str) -> Terms:
    """The product of two brackets as a sum of single ones."""
    if first.inner == second.inner:
        return (factor(Bracket(first.inner, first.power + second.power)),)
    one, two = _unit(first, x), _unit(second, x)
    scale = times(one[0], two[0])
    (a, n, way_a), (b, m, way_b) = one[1], two[1]
    if way_a == way_b:
        return product((scale,), _same_way((a, n), (b, m), x, way_a))
    if way_a < 0:
        (a, n), (b, m) = (b, m), (a, n)
    return product((scale,), _between((a, n), (b, m), x))


def _unit(bracket: Bracket, x: str) -> tuple[Term, tuple[Terms, int, int]]:
    """|slope|^n, and place, order and way of the bracket with a slope of 1 or -1."""
    step = step_of(bracket, x)
    if step.way is None:
        raise NoForm
    size = scaled((step.slope,), Fraction(step.way))[0]
    return power(size, Fraction(bracket.power))[0], (step.place, bracket.power, step.way)


def _bracket(place: Terms, order: int, x: str, way: int = 1) -> Bracket:
    left, right = (Name(x), write(place)) if way > 0 else (write(place), Name(x))
    if way > 0 and not place:
        return Bracket(left, order)
    return Bracket(Binary("-", left, right), order)


def _difference(a: Terms, b: Terms) -> Terms:
    return settled((*a, *scaled(b, Fraction(-1))))


def _same_way(one: tuple[Terms, int], two: tuple[Terms, int], x: str, way: int) -> Terms:
    """Both rising: on beyond the larger place; both falling: on before the smaller."""
    (a, n), (b, m) = one, two
    apart = told_sign(scaled(_difference(b, a), Fraction(way)))
    if apart is None:
        return _meeting(one, two, x, way)
    if apart < 0:
        (a, n), (b, m) = (b, m), (a, n)
    return _shifted(_distance(b, a, way), n, _bracket(b, m, x, way))


def _distance(b: Terms, a: Terms, way: int) -> Terms:
    return _difference(b, a) if way > 0 else _difference(a, b)


def _shifted(distance: Terms, n: int, bracket: Bracket) -> Terms:
    """(u + distance)^n * <u>^m."""
    out: Terms = ()
    for i in range(n + 1):
        coefficient = scaled(power(as_term(distance), Fraction(i)), Fraction(comb(n, i)))
        out += product(coefficient, (factor(Bracket(bracket.inner, bracket.power + n - i)),))
    return merged(out)


def _meeting(one: tuple[Terms, int], two: tuple[Terms, int], x: str, way: int) -> Terms:
    """Places whose order isn't typed, c = max(a, b)."""
    (a, n), (b, m) = one, two
    c = read(Call("max" if way > 0 else "min", (write(a), write(b))))
    bracket = _bracket(c, n + m, x, way)
    return _two_lines((_distance(c, a, way), n), (_distance(c, b, way), m), bracket)


def _two_lines(one: tuple[Terms, int], two: tuple[Terms, int], bracket: Bracket, turned: int = 1) -> Terms:
    """(u + p)^n*(turned*u + q)^m*<u>^0, where p or q is nothing and so is every product of the two."""
    (_, n), (_, m) = one, two
    out: Terms = (scaled((factor(bracket),), Fraction(turned**m))[0],)
    for i in range(1, max(n, m) + 1):
        parts: Terms = ()
        for (distance, order), whole in ((one, turned**m), (two, turned ** (m - i) if m >= i else 0)):
            if order >= i:
                raised = power(as_term(distance), Fraction(i))
                parts += scaled(raised, Fraction(comb(order, i) * whole))
        if parts := settled(parts):
            out += (times(_one(parts), factor(Bracket(bracket.inner, n + m - i))),)
    return merged(out)


def _between(one: tuple[Terms, int], two: tuple[Terms, int], x: str) -> Terms:
    """<x - a>^n*<b - x>^m: on from a to b, nothing where b is not beyond a."""
    (a, n), (b, m) = one, two
    apart = told_sign(_difference(b, a))
    if apart is not None and apart <= 0:
        return ()
    fall = power(as_term((*b, Term(Fraction(-1), ((Name(x), Fraction(1)),)))), Fraction(m))
    first = _about(as_term(fall), _bracket(a, n, x), x)
    if apart:
        rise = power(as_term((factor(Name(x)), *scaled(a, Fraction(-1)))), Fraction(n))
        last = _about(as_term(product(rise, fall)), _bracket(b, 0, x), x)
    else:
        c = read(Call("max", (write(a), write(b))))
        last = _two_lines((_difference(c, a), n), (_difference(b, c), m), _bracket(c, n + m, x), -1)
    return merged((*first, *scaled(last, Fraction(-1))))


def is_single(term: Term, x: str) -> tuple[Term, Bracket] | None:
    """What stands beside the only bracket of x, and the bracket."""
    for base, exponent in term.factors:
        if _is_plain(base, exponent, x) and exponent == 1:
            rest = Term(term.number, tuple(f for f in term.factors if f[0] != base))
            assert isinstance(base, Bracket)
            return rest, base
    return None
