"""Antiderivatives of single terms, without a constant.

Powers, brackets and functions of something linear in x are worked here by their own rules, so that what was
typed keeps its form; all else is asked of SymPy through the door.
"""

from __future__ import annotations

from fractions import Fraction

from loadpath.algebra import door
from loadpath.algebra.brackets import has_bracket, in_powers_of_line, is_single, singles, step_of
from loadpath.algebra.collecting import collected
from loadpath.algebra.failure import NoForm
from loadpath.algebra.powers import holds, polynomial, powers_of, put, split, straight
from loadpath.algebra.terms import (
    UNIT,
    Term,
    Terms,
    as_term,
    expanded,
    factor,
    inverse,
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
from loadpath.algebra.wire import Book
from loadpath.formula.tree import Bracket, Call, Name, Node


def primitive(inside: Term, x: str) -> Terms:
    """An antiderivative without a constant; raises NoForm where there is no closed form."""
    try:
        return own_primitive(inside, x)
    except NoForm:
        if has_bracket(write((inside,)), x):
            raise
    return asked("integrate", (inside,), x)


def own_primitive(inside: Term, x: str) -> Terms:
    """An antiderivative of a term by rules of our own, with a name inside; raises NoForm where none fits."""
    if any(has_bracket(n, x) for n, _ in inside.factors):
        return _of_brackets(inside, x)
    line = _of_line(inside, x)
    if line is not None:
        return line
    powers = powers_of((inside,), x)
    if powers is None:
        raise NoForm
    out: Terms = ()
    for term in expanded((inside,), lambda base: holds(base, x)):
        outside, with_x = split(term, x)
        exponent = with_x.factors[0][1] if with_x.factors else Fraction(0)
        if exponent == -1:
            out += (times(outside, factor(Call("ln", (Name(x),)))),)
        else:
            out += (times(outside, Term(1 / (exponent + 1), ((Name(x), exponent + 1),))),)
    return merged(out)


HIGHEST = 6
"""Power up to which a sum is multiplied out to be integrated."""
_OF_LINE = {
    "sin": ("cos", -1),
    "cos": ("sin", 1),
    "exp": ("exp", 1),
    "sinh": ("cosh", 1),
    "cosh": ("sinh", 1),
}


def _of_line(inside: Term, x: str) -> Terms | None:
    """A power or function of something linear in x, kept as typed: (a + b*x)^n, sin(pi*x/L)."""
    others = [f for f in inside.factors if f[0] != Name(x) and not _whole_power_of_sum(*f)]
    if len(others) != 1:
        return None
    base, exponent = others[0]
    if len(inside.factors) > 1:
        rest = Term(Fraction(1), tuple(f for f in inside.factors if f != others[0]))
        return None if isinstance(base, Call) else _powers_beside_line(rest, base, exponent, x)
    if isinstance(base, Call) and len(base.arguments) == 1 and exponent == 1 and base.function in _OF_LINE:
        line = straight(base.arguments[0], x)
        function, factor_of = _OF_LINE[base.function]
        if line is None:
            return None
        return (times(scaled((inverse(as_term(line[0])),), Fraction(factor_of))[0],
                      factor(Call(function, base.arguments))),)  # fmt: skip
    return None if isinstance(base, Call) else _powers_beside_line(UNIT, base, exponent, x)


def _whole_power_of_sum(base: Node, exponent: Fraction) -> bool:
    """True for what is multiplied out; a higher power keeps its form where it can."""
    return is_sum(base) and 0 < exponent <= HIGHEST and exponent.denominator == 1


def _powers_beside_line(rest: Term, base: Node, exponent: Fraction, x: str) -> Terms | None:
    """p(x)*u^n with u linear in x, by powers of u."""
    line, powers = straight(base, x), polynomial((rest,), x)
    if line is None or powers is None:
        return None
    slope = as_term(line[0])
    out: Terms = ()
    for order, coefficient in in_powers_of_line(powers, slope, line[1]):
        raised = exponent + order + 1
        higher = factor(Call("ln", (base,))) if not raised else Term(1 / raised, ((base, raised),))
        out += product(coefficient, (times(inverse(slope), higher),))
    return merged(out)


def _of_brackets(inside: Term, x: str) -> Terms:
    out: Terms = ()
    for term in singles((inside,), x):
        single = is_single(term, x)
        if single is None:
            outside, with_x = split(term, x)
            found = primitive(with_x, x) if with_x.factors else (factor(Name(x)),)
            out += product((outside,), found)
            continue
        rest, bracket = single
        outside, with_x = split(rest, x)
        if with_x.factors:
            out += product((outside,), _beyond(with_x, bracket, x))
            continue
        slope = inverse(step_of(bracket, x).slope)
        order = bracket.power + 1
        higher = Term(Fraction(1, order), ((Bracket(bracket.inner, order), Fraction(1)),))
        out += (times(times(outside, slope), higher),)
    return merged(out)


def _beyond(with_x: Term, bracket: Bracket, x: str) -> Terms:
    """g(x)*<u>^n where g is no polynomial: what H = antiderivative of g*u^n gains from the place on."""
    step = step_of(bracket, x)
    over = product((with_x,), power(as_term(read(bracket.inner)), Fraction(bracket.power)))
    found: Terms = ()
    for term in over:
        outside, inside = split(term, x)
        found += product((outside,), primitive(inside, x) if inside.factors else (factor(Name(x)),))
    gain = logarithms_together(merged((*found, *scaled(put(found, x, write(step.place)), Fraction(-1)))))
    return (times(as_term(gain), factor(Bracket(bracket.inner, 0))),)


def logarithms_together(terms: Terms) -> Terms:
    """c*ln(u) - c*ln(v) as c*ln(u/v), whose argument is a plain number."""
    out = list(terms)
    for i, first in enumerate(out):
        if _logarithm(first) is None:
            continue
        for j in range(i + 1, len(out)):
            one, two = _logarithm(out[i]), _logarithm(out[j])
            if one is None or two is None or one[1] != two[1] or one[0] != -two[0]:
                continue
            ratio = collected(product(settled(read(one[2])), (inverse(as_term(settled(read(two[2])))),)))
            call = read(Call("ln", (write(ratio),)))
            joined = product((Term(one[0], tuple(one[3])),), call)
            out[i] = joined[0] if joined else Term(Fraction(0))
            out[j] = Term(Fraction(0))
            break
    return tuple(t for t in out if t.number)


def _logarithm(
    term: Term,
) -> tuple[Fraction, frozenset[tuple[Node, Fraction]], Node, list[tuple[Node, Fraction]]] | None:
    """Number, other factors (as a set and in order) and argument of a term with one logarithm."""
    calls = [(n, e) for n, e in term.factors if isinstance(n, Call) and n.function == "ln"]
    if len(calls) != 1 or calls[0][1] != 1 or not isinstance(calls[0][0], Call):
        return None
    others = [f for f in term.factors if f != calls[0]]
    return term.number, frozenset(others), calls[0][0].arguments[0], others


def asked(work: str, terms: Terms, x: str, **others: Node) -> Terms:
    """What SymPy finds."""
    book = Book((x,) if x else ())
    arguments = {"f": book.encode(write(terms)), **{k: book.encode(v) for k, v in others.items()}}
    answer = door.ask(work, **arguments)
    return book.decode(answer["form"] if work == "integrate" else answer)
