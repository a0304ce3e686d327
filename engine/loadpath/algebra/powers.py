"""Terms seen in powers of a name: polynomials, straight lines, values put in."""

from __future__ import annotations

from fractions import Fraction

from loadpath.algebra.collecting import collected
from loadpath.algebra.terms import Term, Terms, expanded, merged, read, settled, write
from loadpath.algebra.trees import substitute_name
from loadpath.formula.tree import Name, Node, walk


def holds(node: Node, x: str) -> bool:
    """True where the name stands in the tree."""
    return any(isinstance(n, Name) and n.name == x for n in walk(node))


def split(term: Term, x: str) -> tuple[Term, Term]:
    """The part without the name (the number with it) and the part with it."""
    with_x = [holds(n, x) for n, _ in term.factors]
    without = Term(term.number, tuple(f for f, has in zip(term.factors, with_x, strict=True) if not has))
    return without, Term(Fraction(1), tuple(f for f, has in zip(term.factors, with_x, strict=True) if has))


def powers_of(terms: Terms, x: str) -> dict[Fraction, Terms] | None:
    """Coefficients by the power of x, in the order met; None where x stands elsewhere than in such powers."""
    out: dict[Fraction, Terms] = {}
    for term in expanded(terms, lambda base: holds(base, x)):
        without, with_x = split(term, x)
        if any(n != Name(x) for n, _ in with_x.factors):
            return None
        exponent = with_x.factors[0][1] if with_x.factors else Fraction(0)
        out[exponent] = merged((*out.get(exponent, ()), without))
    return {e: c for e, c in out.items() if c}


def polynomial(terms: Terms, x: str) -> dict[int, Terms] | None:
    """Coefficients by whole power, 0 and above; None where it is no polynomial."""
    powers = powers_of(terms, x)
    if powers is None or any(e.denominator != 1 or e < 0 for e in powers):
        return None
    return {int(e): c for e, c in powers.items()}


def straight(node: Node, x: str) -> tuple[Terms, Terms] | None:
    """Slope and value at 0 of a tree that is linear in x; None where it is not, or does not hold x."""
    powers = polynomial(read(node), x)
    if powers is None or not powers or max(powers) != 1:
        return None
    return settled(collected(powers[1])), settled(powers.get(0, ()))


def put(terms: Terms, x: str, value: Node) -> Terms:
    """With a value in place of a name."""
    return merged(u for t in terms for u in read(substitute_name(write((t,)), x, value)))
