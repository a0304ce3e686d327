"""Equations: linear systems in symbols, the roots of one equation, the real roots of a polynomial."""

from __future__ import annotations

from fractions import Fraction
from math import isfinite

from loadpath.algebra import door, failure
from loadpath.algebra.collecting import collected, positive_first
from loadpath.algebra.failure import NoForm, time_limit, too_large
from loadpath.algebra.frame import bounds, finished
from loadpath.algebra.terms import (
    HALF,
    Term,
    Terms,
    as_number,
    as_term,
    factor,
    inverse,
    merged,
    power,
    product,
    scaled,
    settled,
    times,
    write,
)
from loadpath.algebra.wire import Book, Wire
from loadpath.formula.tree import Binary, Call, Node, Relation

MINUS = Fraction(-1)


def _difference(equation: Relation) -> Node:
    if equation.signs != ("=",):
        raise NoForm
    return Binary("-", equation.operands[0], equation.operands[1])


def solve_linear(
    equations: tuple[Relation, ...], unknowns: tuple[str, ...], *, seconds: float | None = None
) -> dict[str, Node] | None:
    """The unknowns in the other names, in the order given.

    None where the equations aren't linear in them, or don't determine each of them.
    """
    sides = tuple(side for equation in equations for side in equation.operands)
    with bounds(sides, seconds=seconds):
        book = Book(unknowns)
        try:
            wires = [book.encode(_difference(e)) for e in equations]
            answers = door.ask("linear", equations=wires, unknowns=list(range(len(unknowns))))
            return {
                name: finished(collected(book.decode(wire)))
                for name, wire in zip(unknowns, answers, strict=True)
            }
        except NoForm:
            return None


def roots(equation: Relation, unknown: str, *, seconds: float | None = None) -> tuple[Node, ...] | None:
    """Candidates for the real roots of one equation in closed form: the caller puts each back.

    None where there is no closed form. Of a pair the one with the minus before the root comes first.
    """
    with bounds(equation.operands, seconds=seconds, fractions=True):
        book = Book((unknown,))
        try:
            side = book.encode(_difference(equation))
            factors = door.ask("factors", f=side)
            if factors is None:
                found = [book.decode(wire) for wire in door.ask("solve", f=side)]
            else:
                found = [root for wires in factors for root in _roots_of(wires, book)]
                numbers = [as_number(root) for root in found]
                if all(n is not None for n in numbers):
                    found.sort(key=lambda root: as_number(root) or Fraction(0))
            return tuple(dict.fromkeys(finished(root) for root in found))
        except NoForm:
            return None


def _roots_of(wires: list[Wire], book: Book) -> list[Terms]:
    """Of one factor, coefficients highest first."""
    coefficients = [book.decode(wire) for wire in wires]
    degree = len(coefficients) - 1
    if degree == 1:
        return [_ratio(scaled(coefficients[1], MINUS), coefficients[0])]
    if degree == 2:
        return _of_quadratic(*coefficients)
    middle = coefficients[1:-1]
    if not any(middle):
        return _of_power(_ratio(scaled(coefficients[-1], MINUS), coefficients[0]), degree)
    if degree == 4 and not coefficients[1] and not coefficients[3]:
        squares = _of_quadratic(coefficients[0], coefficients[2], coefficients[4])
        return [root for square in squares for root in _of_power(square, 2)]
    raise NoForm


def _ratio(over: Terms, under: Terms) -> Terms:
    return collected(product(collected(over), (inverse(as_term(collected(under))),)))


def _of_power(value: Terms, degree: int) -> list[Terms]:
    """x^degree = value."""
    known = as_number(value)
    if known == 0:
        return [()]
    if degree % 2 == 0:
        if known is not None and known < 0:
            return []
        root = power(as_term(value), Fraction(1, degree))
        return [scaled(root, MINUS), root]
    if degree == 3:
        return [(factor(Call("cbrt", (write(value),))),)]
    raise NoForm


def _of_quadratic(a: Terms, b: Terms, c: Terms) -> list[Terms]:
    """(-b -+ sqrt(b^2 - 4*a*c))/(2*a), with b halved where all its numbers are even."""
    if not b:
        return _of_power(_ratio(scaled(c, MINUS), a), 2)
    halved = all(t.number.denominator == 1 and t.number.numerator % 2 == 0 for t in b)
    factor_of = Fraction(1 if halved else 4)
    half = scaled(b, HALF) if halved else b
    square = power(as_term(half), Fraction(2))
    inside = settled((*square, *scaled(product(product(a, c), (Term(Fraction(1)),)), -factor_of)))
    known = as_number(inside)
    if known is not None and known < 0:
        return []
    root = as_term(power(as_term(positive_first(inside)), HALF))
    under = inverse(times(Term(Fraction(1 if halved else 2)), as_term(collected(a))))
    out = []
    for sign in (MINUS, -MINUS):
        top = merged((*scaled(half, MINUS), Term(root.number * sign, root.factors)))
        whole = top if len(top) == 1 else (factor(write(top)),)
        out.append(product(whole, (under,)))
    return out


def real_roots(coefficients: tuple[Fraction, ...], *, seconds: float | None = None) -> tuple[float, ...]:
    """The real roots of a polynomial, lowest power first: each once, rising, isolated exactly.

    Raises ValueError where every coefficient is 0: then every number is a root.
    """
    known = list(coefficients)
    while known and not known[-1]:
        known.pop()
    if not known:
        raise ValueError("a polynomial that is 0 everywhere has no roots of its own")
    if len(known) > 200:
        raise too_large("a polynomial of more than 200 coefficients")
    if len(known) == 1:
        return ()
    with time_limit(failure.TIME_LIMIT if seconds is None else seconds):
        pairs = [[c.numerator, c.denominator] for c in reversed(known)]
        found = tuple(float(value) for value in door.ask("real_roots", coefficients=pairs))
    if not all(map(isfinite, found)):
        raise too_large("a root of the polynomial is too large to be held")
    return found
