"""Limits, and other forms of the same expression."""

from __future__ import annotations

from contextlib import suppress
from fractions import Fraction

from loadpath.algebra.brackets import has_bracket, singles
from loadpath.algebra.collecting import collected, weight
from loadpath.algebra.failure import NoForm, no_closed_form
from loadpath.algebra.frame import framed
from loadpath.algebra.powers import holds, polynomial, put, split
from loadpath.algebra.primitives import asked
from loadpath.algebra.terms import Terms, expanded, merged, product, read, scaled, settled, sign
from loadpath.algebra.trees import ZERO, decimals_in, depends_on
from loadpath.formula.tree import Binary, Bracket, Name, Node, Number, rebuilt


def limit(f: Node, x: str, a: Node, *, seconds: float | None = None) -> Node | None:
    """What f tends to from both sides of x = a; None where it is not known or differs."""

    def work() -> Terms:
        if depends_on(a, x):
            raise NoForm
        with suppress(NoForm):
            return _value_at(read(f), x, a)
        if not has_bracket(f, x):
            return collected(asked("limit", read(f), x, a=a))
        sides = [asked("limit", read(side), x, a=a) for side in _sides(f, x, a)]
        if any(expanded((*side, *scaled(sides[0], Fraction(-1)))) for side in sides[1:]):
            raise NoForm
        return collected(sides[0])

    return framed(work, (f, a), last=x, in_place=(a,), seconds=seconds, none=True)


def _value_at(terms: Terms, x: str, a: Node) -> Terms:
    """The value at the place itself, where nothing jumps or becomes 0 below a line there."""
    for term in terms:
        for base, exponent in term.factors:
            if holds(base, x) and (base != Name(x) and not _is_plain(base, exponent, x, a)):
                raise NoForm
            if base == Name(x) and exponent < 0 and sign(read(a)) in (0, None):
                raise NoForm
    return merged(u for t in terms for u in put((t,), x, a))


def _is_plain(base: Node, exponent: Fraction, x: str, a: Node) -> bool:
    """A polynomial, or a bracket that does not jump at the place."""
    if isinstance(base, Bracket) and exponent > 0:
        return bool(settled(put(read(base.inner), x, a))) or base.power > 0
    whole = exponent > 0 and exponent.denominator == 1
    return whole and not has_bracket(base, x) and polynomial(read(base), x) is not None


def _sides(f: Node, x: str, a: Node) -> list[Node]:
    """Without brackets: those at the place off and on; raises NoForm where one begins elsewhere."""
    out = []
    for on in (False, True):

        def change(node: Node, on: bool = on) -> Node | None:
            if not (isinstance(node, Bracket) and holds(node.inner, x)):
                return None
            inside = settled(put(read(node.inner), x, a))
            known = sign(inside)
            if known is None:
                raise NoForm
            live = on if known == 0 else known > 0
            return Binary("^", node.inner, Number(str(node.power))) if live else ZERO

        out.append(rebuilt(f, change))
    return out


def simplified(f: Node, *, seconds: float | None = None) -> Node:
    """A shorter form of the same, where there is one; brackets stay as they stand."""

    def work() -> Terms:
        terms = read(f)
        forms = [terms, settled(terms), collected(expanded(terms), decimals_in(f))]
        with suppress(NoForm):
            forms.append(asked("simplified", terms, ""))
        return min(forms, key=weight)

    found = framed(work, (f,), seconds=seconds, none=True)
    return f if found is None else found


def single_brackets(f: Node, x: str, *, seconds: float | None = None) -> Node:
    """Products of brackets, and powers of x beside them, as sums of single brackets.

    Raises AlgebraFailure where two brackets can't be brought together.
    """

    def work() -> Terms:
        out: Terms = ()
        for term in read(f):
            outside, inside = split(term, x)
            out += product((outside,), singles((inside,), x))
        return merged(out)

    try:
        found = framed(work, (f,), last=x, seconds=seconds)
    except NoForm:
        found = None
    if found is None:
        raise no_closed_form("the product of these brackets can't be written with single brackets")
    return found
