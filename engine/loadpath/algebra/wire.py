"""Trees to and from the nested lists that travel to the worker.

    ["n", 5, 384]  a rational      ["pi"], ["e"]        ["s", 3]  a symbol, 0 is the variable
    ["+", a, b, ...]  ["*", a, b, ...]  ["^", base, exponent]  ["f", "sin", a]

Names, quantities and whatever else has no meaning there are symbols, numbered as they come; the book puts
them back. A calculus function of the variable that has no meaning there has no closed form.
"""

from __future__ import annotations

from fractions import Fraction
from typing import Any

from loadpath.algebra.collecting import positive_first
from loadpath.algebra.failure import NoForm, remaining, too_large
from loadpath.algebra.powers import holds
from loadpath.algebra.terms import (
    Term,
    Terms,
    as_number,
    as_term,
    factor,
    inverse,
    merged,
    numeric,
    power,
    read,
    times,
    write,
)
from loadpath.algebra.trees import exact
from loadpath.algebra.writing import current_order
from loadpath.formula.tree import Binary, Call, Name, Negative, Node, Number, Quantity

FUNCTIONS = frozenset(
    ["exp", "ln", "sin", "cos", "tan", "sec", "asin", "acos", "atan", "sinh", "cosh", "tanh", "abs"]
)
"""Functions that mean the same there; sqrt, cbrt and log10 travel as powers and quotients."""

Wire = list[Any]


class Book:
    """Which symbol stands for what."""

    def __init__(self, variables: tuple[str, ...]) -> None:
        self._variables = variables
        self._symbols: list[Node] = [Name(v) for v in variables]
        self._numbers = {node: i for i, node in enumerate(self._symbols)}
        self._cube_roots = False

    def encode(self, node: Node) -> Wire:
        """Raises NoForm where a tree without meaning there holds a variable."""
        match node:
            case Number(text=typed):
                return _rational(exact(typed))
            case Name(name="pi"):
                return ["pi"]
            case Negative(operand=operand):
                return ["*", ["n", -1, 1], self.encode(operand)]
            case Binary(operator="+", left=left, right=right):
                return ["+", self.encode(left), self.encode(right)]
            case Binary(operator="-", left=left, right=right):
                return ["+", self.encode(left), ["*", ["n", -1, 1], self.encode(right)]]
            case Binary(operator="*", left=left, right=right):
                return ["*", self.encode(left), self.encode(right)]
            case Binary(operator="/", left=left, right=right):
                return ["*", self.encode(left), ["^", self.encode(right), ["n", -1, 1]]]
            case Binary(operator="^", left=left, right=right):
                return ["^", self.encode(left), self.encode(right)]
            case Call(function=function, arguments=(only,)) if function in FUNCTIONS:
                return ["f", function, self.encode(only)]
            case Call(function="sqrt", arguments=(only,)):
                return ["^", self.encode(only), ["n", 1, 2]]
            case Call(function="cbrt", arguments=(only,)):
                self._cube_roots = True
                return ["^", self.encode(only), ["n", 1, 3]]
            case Call(function="log10", arguments=(only,)):
                ten = ["f", "ln", ["n", 10, 1]]
                return ["*", ["f", "ln", self.encode(only)], ["^", ten, ["n", -1, 1]]]
        return ["s", self._number(node)]

    def _number(self, node: Node) -> int:
        if node in self._numbers:
            return self._numbers[node]
        if not isinstance(node, (Name, Quantity)) and any(holds(node, v) for v in self._variables):
            raise NoForm
        self._numbers[node] = len(self._symbols)
        self._symbols.append(node)
        return self._numbers[node]

    @property
    def symbols(self) -> int:
        """How many symbols there are so far."""
        return len(self._symbols)

    # --- and back ---

    def decode(self, wire: Wire) -> Terms:
        """Terms in the order that the sheet's own names have."""
        kind = wire[0]
        if kind == "n":
            return numeric(Fraction(wire[1], wire[2]))
        if kind == "pi":
            return (factor(Name("pi")),)
        if kind == "e":
            return (factor(Call("exp", (Number("1"),))),)
        if kind == "s":
            return read(self._symbols[wire[1]])
        if kind == "+":
            return sorted_terms(merged(t for part in wire[1:] for t in self.decode(part)))
        if kind == "*":
            out = Term(Fraction(1))
            for part in wire[1:]:
                out = times(out, as_term(self.decode(part)))
            return (out,) if out.number else ()
        if kind == "^":
            return self._power(wire[1], wire[2])
        return read(Call(wire[1], tuple(write(self.decode(part)) for part in wire[2:])))

    def _power(self, base: Wire, exponent: Wire) -> Terms:
        inside, above = self.decode(base), self.decode(exponent)
        number = as_number(above)
        if number is None:
            return (factor(Binary("^", write(inside), write(above))),)
        if self._cube_roots and number.denominator == 3:
            root = Call("cbrt", (write(inside),))
            return (factor(root, Fraction(number.numerator)),)
        if number == -1 and len(inside) == 1:
            return (inverse(inside[0]),)
        return power(as_term(inside), number)


def sorted_terms(terms: Terms) -> Terms:
    """Highest powers of the first names first, and a term with a plus in front."""
    remaining()
    order = current_order()
    if order is None or len(terms) < 2:
        return terms
    top = len(order.ranks)

    def key(term: Term) -> tuple[object, ...]:
        powers = sorted((top + 2 if isinstance(n, Number) else order.rank(n), -e) for n, e in term.factors)
        return ((*powers, (top + 1, Fraction(0))), abs(term.number))

    return positive_first(tuple(sorted(terms, key=key)))


def _rational(value: Fraction) -> Wire:
    if value.numerator.bit_length() + value.denominator.bit_length() > 8000:
        raise too_large("a number of the expression is too long")
    return ["n", value.numerator, value.denominator]
