"""Sums as one fraction, as an engineer writes them: common factors out, over one denominator."""

from __future__ import annotations

from fractions import Fraction
from math import gcd

from loadpath.algebra.failure import NoForm
from loadpath.algebra.terms import (
    Term,
    Terms,
    as_number,
    as_term,
    expanded,
    factor,
    inverse,
    is_sum,
    merged,
    number_power,
    product,
    read,
    scaled,
    times,
    write,
)
from loadpath.algebra.trees import ONE, is_short, size
from loadpath.formula.tree import Node, walk


def content(terms: Terms) -> Fraction:
    """The largest number that leaves whole numbers in every term."""
    over, under = 0, 1
    for term in terms:
        over = gcd(over, abs(term.number.numerator))
        under = under * term.number.denominator // gcd(under, term.number.denominator)
    return Fraction(over, under)


def grouped(outside: Term, inside: Terms, decimals: bool = False) -> Terms:
    """`outside*(inside)`: one term where a name stands outside, else each term by itself."""
    inside = merged(inside)
    if len(inside) <= 1 or not outside.factors:
        return tuple(times(outside, t) for t in inside)
    inside = positive_first(inside)
    pulled = Fraction(1) if decimals and not _whole(inside) else content(inside)
    if inside[0].number < 0:
        pulled = -pulled
    base = write(scaled(inside, 1 / pulled))
    return (times(Term(outside.number * pulled, outside.factors), factor(base)),)


def _whole(terms: Terms) -> bool:
    return all(not _has_decimal_form(t.number) for t in terms)


def _has_decimal_form(number: Fraction) -> bool:
    return number.denominator != 1 and is_short(number)


def positive_first(terms: Terms) -> Terms:
    """A term with a plus first, where there is one."""
    at = next((i for i, t in enumerate(terms) if t.number > 0), 0)
    return (terms[at], *terms[:at], *terms[at + 1 :])


def collected(terms: Terms, decimals: bool = False) -> Terms:
    """A sum as one fraction: common factors out, over one denominator."""
    terms = merged(terms)
    if len(terms) < 2:
        return terms
    common = _common_factors(terms)
    rest = tuple(times(t, inverse(common)) for t in terms)
    opened = expanded(rest, lambda base: not _deep(base))
    kept = merged(rest)
    if not opened:
        return ()
    inside = opened if len(opened) == 1 or size(write(opened)) < size(write(kept)) else kept
    if len(inside) > 1:
        again = _common_factors(inside)
        if again.factors:
            return collected((times(common, as_term(collected(inside, decimals))),), decimals)
    if len(inside) == 1:
        return (times(common, inside[0]),)
    return _cancelled(grouped(Term(Fraction(1), common.factors or ((ONE, Fraction(1)),)), inside, decimals))


def _deep(base: Node) -> bool:
    return size(base) > 200


def _common_factors(terms: Terms) -> Term:
    found: dict[Node, list[Fraction]] = {}
    for term in terms:
        for base, exponent in term.factors:
            found.setdefault(base, []).append(exponent)
    lowest = {n: min(es if len(es) == len(terms) else (*es, Fraction(0))) for n, es in found.items()}
    return Term(Fraction(1), tuple((n, e) for n, e in lowest.items() if e))


def _cancelled(terms: Terms) -> Terms:
    """Sums that are the same but for a number, above and below the line, cancelled."""
    (term,) = terms
    term = Term(term.number, tuple(f for f in term.factors if f[0] != ONE))
    bases = [n for n, _ in term.factors if is_sum(n)]
    for i, first in enumerate(bases):
        for second in bases[i + 1 :]:
            ratio = _ratio(read(first), read(second))
            if ratio is None:
                continue
            exponent = dict(term.factors)[second]
            if exponent.denominator == 1:
                without = Term(term.number, tuple(f for f in term.factors if f[0] != second))
                number = number_power(ratio, int(exponent)) or Fraction(1)
                return _cancelled((times(without, Term(number, ((first, exponent),))),))
    return (term,)


def _ratio(a: Terms, b: Terms) -> Fraction | None:
    """b over a, where that is a number."""
    if len(a) != len(b):
        return None
    first = {frozenset(t.factors): t.number for t in a}
    ratios = {t.number / first[k] if (k := frozenset(t.factors)) in first else None for t in b}
    return ratios.pop() if len(ratios) == 1 else None


def grouped_over(outside: Term, inside: Terms, decimals: bool) -> Terms:
    """A factor stays outside where nothing but numbers stands below the line inside."""
    if any(e < 0 for t in inside for _, e in t.factors):
        return product((outside,), inside)
    return grouped(outside, inside, decimals)


def weight(terms: Terms) -> int:
    """How many nodes they take to write."""
    return sum(1 for _ in walk(write(terms)))


def value_of(node: Node) -> Fraction | None:
    """The exact value of a tree of plain numbers, None for any other."""
    try:
        return as_number(read(node))
    except NoForm:
        return None
