"""Antiderivatives and definite integrals of trees, term by term in the order typed."""

from __future__ import annotations

from collections.abc import Callable
from fractions import Fraction

from loadpath.algebra.brackets import has_bracket, step_of, told_by, told_sign
from loadpath.algebra.collecting import collected, grouped_over, positive_first, value_of, weight
from loadpath.algebra.failure import NoForm
from loadpath.algebra.frame import framed
from loadpath.algebra.powers import holds, put, split
from loadpath.algebra.primitives import asked, logarithms_together, own_primitive, primitive
from loadpath.algebra.terms import (
    Term,
    Terms,
    expanded,
    factor,
    is_sum,
    merged,
    power,
    product,
    read,
    scaled,
    settled,
    times,
    write,
)
from loadpath.algebra.trees import ZERO, decimals_in, depends_on, is_zero
from loadpath.formula.tree import Binary, Bracket, Call, Name, Node, rebuilt

AboveZero = Callable[[Node], bool]
"""The caller's answer, from values, to whether a tree without the variable is above zero."""


def never(node: Node) -> bool:
    """Nothing is known to be above zero."""
    return False


def antiderivative(
    f: Node, x: str, above_zero: AboveZero = never, *, seconds: float | None = None
) -> Node | None:
    """The antiderivative that is 0 at x = 0 where there is one, else one without a constant added.

    `vanishes_at_zero` says which it is. None where there is no closed form.
    """

    def work() -> Terms:
        out: Terms = ()
        for term in read(f):
            out += _from_zero(term, x, above_zero)
        return logarithms_together(merged(out))

    with told_by(above_zero):
        return framed(work, (f,), last=x, seconds=seconds, none=True)


def _from_zero(term: Term, x: str, above_zero: AboveZero) -> Terms:
    """The term's antiderivative less its value at 0, where it has one."""
    outside, inside = split(term, x)
    decimals = decimals_in(write((term,)))
    if not inside.factors:
        return (times(outside, factor(Name(x))),)
    found = primitive(inside, x)
    try:
        start = _at(found, x, ZERO, above_zero)
    except NoForm:
        start = ()
    if not start:
        return grouped_over(outside, found, decimals)
    whole = logarithms_together(merged((*found, *scaled(start, Fraction(-1)))))
    if not has_bracket(write(found), x):
        return product((outside,), collected(positive_first(whole), decimals))
    return product((outside,), positive_first(whole))


def vanishes_at_zero(F: Node, x: str, above_zero: AboveZero = never) -> bool:
    """True where an antiderivative is 0 at x = 0, on the same word of the caller on the brackets."""
    with told_by(above_zero):
        found = framed(lambda: expanded(_at(read(F), x, ZERO, above_zero)), (F,), last=x, none=True)
    return found is not None and is_zero(found)


def definite(
    f: Node, x: str, a: Node, b: Node, above_zero: AboveZero = never, *, seconds: float | None = None
) -> Node | None:
    """F(b) - F(a) as one fraction; None where there is no closed form.

    Whether f is bounded between a and b hangs on values and is the caller's to see: `denominators` lists what
    must not be 0 there.
    """

    def work() -> Terms:
        out: Terms = ()
        for term in read(f):
            outside, inside = split(term, x)
            out += product((outside,), _between(inside, x, a, b, above_zero))
        out = logarithms_together(merged(out))
        return _shorter(collected(out, any(decimals_in(n) for n in (f, a, b))))

    with told_by(above_zero):
        return framed(work, (f, b, a), last=x, in_place=(b, a), seconds=seconds, none=True)


def _between(inside: Term, x: str, a: Node, b: Node, above_zero: AboveZero) -> Terms:
    if not inside.factors:
        return settled((*read(b), *scaled(read(a), Fraction(-1))))
    try:
        found = own_primitive(inside, x)
        ends = [_at(found, x, place, above_zero) for place in (a, b)]
    except NoForm:
        if has_bracket(write((inside,)), x):
            raise
        return asked("definite", (inside,), x, a=a, b=b)
    return merged((*ends[1], *scaled(ends[0], Fraction(-1))))


def _shorter(terms: Terms) -> Terms:
    """Sums above and below the line, cancelled where they can be."""
    if len(terms) != 1:
        return terms
    sums = [(n, e) for n, e in terms[0].factors if is_sum(n)]
    if not (any(e > 0 for _, e in sums) and any(e < 0 for _, e in sums)):
        return terms
    try:
        other = asked("simplified", terms, "")
    except NoForm:
        return terms
    return other if weight(other) < weight(terms) else terms


def denominators(f: Node, x: str) -> tuple[Node, ...]:
    """What stands below a line or in a logarithm and holds x: between the bounds of an integral none of
    these may be 0."""
    found: dict[Node, None] = {}

    def look(node: Node) -> Node | None:
        match node:
            case Binary(operator="/", right=right) if depends_on(right, x):
                found[right] = None
            case Binary(operator="^", left=left, right=right) if depends_on(left, x):
                exponent = value_of(right)
                if exponent is None or exponent < 0:
                    found[left] = None
            case Call(function="ln" | "log10", arguments=(only,)) if depends_on(only, x):
                found[only] = None
            case Call(function="tan" | "sec", arguments=(only,)) if depends_on(only, x):
                found[Call("cos", (only,))] = None
        return None

    rebuilt(f, look)
    return tuple(found)


def _at(terms: Terms, x: str, place: Node, above_zero: AboveZero) -> Terms:
    """With a place in x. At a typed 0 a rising bracket is nothing unless the caller says otherwise; one whose
    inside is no difference any more is opened on the caller's word."""
    start = is_zero(place)

    def change(node: Node) -> Node | None:
        if isinstance(node, Bracket) and holds(node.inner, x):
            return _bracket_at(node, x, place, start, above_zero)
        return None

    opened = read(rebuilt(write(terms), change))
    return settled(put(opened, x, ZERO if start else place))


def _bracket_at(bracket: Bracket, x: str, place: Node, start: bool, above_zero: AboveZero) -> Node:
    inside = settled(put(read(bracket.inner), x, ZERO if start else place))
    known = told_sign(inside)
    if known is None and start and _rises(bracket, x):
        return write(read(Bracket(write(inside), bracket.power))) if above_zero(write(inside)) else ZERO
    if known and len(inside) == 1:
        return write(power(inside[0], Fraction(bracket.power))) if known > 0 else ZERO
    return write(read(Bracket(write(inside), bracket.power)))


def _rises(bracket: Bracket, x: str) -> bool:
    return step_of(bracket, x).way == 1
