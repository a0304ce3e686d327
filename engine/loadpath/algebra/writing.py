"""From terms back to a tree, as an engineer writes it: `5*w*L^4/(384*E*I)`.

Within a product the numbers come first, then pi, quantities and names, sums in parentheses, functions,
brackets. Names come in the order typed: one that was typed before another in a product stays before it.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from contextvars import ContextVar
from dataclasses import dataclass, field
from fractions import Fraction

from loadpath.algebra.trees import ONE, chain, is_short, negated, number_text
from loadpath.formula.tree import Binary, Bracket, Call, Name, Negative, Node, Number, Quantity, walk

MOST_IN_ORDER = 40
"""Factors of one product that are looked at for their order."""
MOST_ORDERED = 200
"""Factors in all; beyond, only their first appearance counts."""

Factors = tuple[tuple[Node, Fraction], ...]


@dataclass(frozen=True, slots=True, eq=False)
class Order:
    """The order of names and quantities in a result, and whether its numbers are decimals."""

    ranks: dict[Node, int] = field(default_factory=dict)
    decimals: bool = False

    def rank(self, node: Node) -> int:
        """Where a factor stands among those of its kind; what it holds decides for a sum or function."""
        if node in self.ranks:
            return self.ranks[node]
        return min((self.ranks[n] for n in walk(node) if n in self.ranks), default=len(self.ranks))


_order: ContextVar[Order | None] = ContextVar("order", default=None)


def current_order() -> Order | None:
    """The order that products are being written in."""
    return _order.get()


def order_of(trees: Iterable[Node], last: str = "", decimals: bool = False) -> Order:
    """The order in which factors were typed; the variable after all it was not typed before."""
    before: dict[Node, set[Node]] = {}
    trees = tuple(trees)
    for tree in trees:
        for node in _plain_factors(tree):
            before.setdefault(node, set())
    for tree in trees if len(before) <= MOST_ORDERED else ():
        for run in _products(tree):
            for i, first in enumerate(run):
                for second in run[i + 1 :]:
                    if first != second and not _reaches(before, second, first):
                        before.setdefault(second, set()).add(first)
    waiting = sorted(before, key=lambda n: n == Name(last))
    ranks: dict[Node, int] = {}
    while waiting:
        ready = next(n for n in waiting if before[n] <= ranks.keys())
        waiting.remove(ready)
        ranks[ready] = len(ranks)
    return Order(ranks, decimals)


def _plain_factors(tree: Node) -> list[Node]:
    return [n for n in walk(tree) if isinstance(n, (Name, Quantity, Call))]


def _reaches(before: dict[Node, set[Node]], start: Node, goal: Node) -> bool:
    """True where `start` was already found to stand before `goal`."""
    seen, waiting = set(), [goal]
    while waiting:
        node = waiting.pop()
        if node == start:
            return True
        if node not in seen:
            seen.add(node)
            waiting += before.get(node, ())
    return False


def _products(tree: Node) -> list[list[Node]]:
    """The plain factors above and below the line of every product in the tree, as typed."""
    runs: list[list[Node]] = []
    inside: set[int] = set()
    for node in walk(tree):
        if isinstance(node, Binary) and node.operator in "*/" and id(node) not in inside:
            above: list[Node] = []
            below: list[Node] = []
            _gather(node, above, below, inside)
            runs += [above[:MOST_IN_ORDER], below[:MOST_IN_ORDER]]
    return runs


def _gather(node: Node, above: list[Node], below: list[Node], inside: set[int]) -> None:
    match node:
        case Binary(operator="*" | "/" as operator, left=left, right=right):
            inside.add(id(node))
            _gather(left, above, below, inside)
            up, down = (above, below) if operator == "*" else (below, above)
            _gather(right, up, down, inside)
        case Binary(operator="^", left=left) | Negative(operand=left):
            _gather(left, above, below, inside)
        case Name() | Quantity() | Call():
            above.append(node)


class ordered:
    """While inside, products are written in an order."""

    def __init__(self, order: Order) -> None:
        self._order = order

    def __enter__(self) -> None:
        self._token = _order.set(self._order)

    def __exit__(self, *_: object) -> None:
        _order.reset(self._token)


# --- products and sums --------------------------------------------------------------------------------------


def _kind(base: Node) -> int:
    match base:
        case Number():
            return 0
        case Name(name="pi"):
            return 1
        case Binary(operator="+" | "-"):
            return 3
        case Bracket():
            return 5
        case Call():
            return 4
    return 2


def in_order(factors: Factors) -> Factors:
    """Factors as they are written."""
    order = _order.get()
    if order is None:
        return tuple(sorted(factors, key=lambda f: _kind(f[0])))
    return tuple(sorted(factors, key=lambda f: (_kind(f[0]), order.rank(f[0]), _function(f[0]))))


def _function(base: Node) -> str:
    return base.function if isinstance(base, Call) else ""


def product_node(number: Fraction, factors: Factors) -> tuple[bool, Node]:
    """True where it is negative, and the tree of its size."""
    placed = in_order(factors)
    above = [_factor_node(base, e) for base, e in placed if e > 0]
    below = [_factor_node(base, -e) for base, e in placed if e < 0]
    over, under = _number_nodes(abs(number))
    if over != ONE or not above:
        above.insert(0, over)
    if under != ONE:
        below.insert(0, under)
    node = chain("*", above)
    return number < 0, Binary("/", node, chain("*", below)) if below else node


def _factor_node(base: Node, exponent: Fraction) -> Node:
    if exponent == 1:
        return base
    if exponent == Fraction(1, 2):
        return Call("sqrt", (base,))
    return Binary("^", base, exponent_node(exponent))


def exponent_node(exponent: Fraction) -> Node:
    """A typed exponent: `2`, `1.5`, `(1/3)`."""
    if is_short(exponent):
        typed = Number(number_text(abs(exponent)))
        return typed if exponent > 0 else Negative(typed)
    over = Number(str(abs(exponent.numerator)))
    return Binary("/", over if exponent > 0 else Negative(over), Number(str(exponent.denominator)))


def _number_nodes(number: Fraction) -> tuple[Number, Number]:
    """What a number puts above and below the line."""
    order = _order.get()
    if order is None or not order.decimals:
        over, under = Fraction(number.numerator), Fraction(number.denominator)
        return Number(number_text(over)), Number(number_text(under))
    left, rest = number.denominator, 1
    for prime in (2, 5):
        while left % prime == 0:
            left, rest = left // prime, rest * prime
    decimal = Fraction(number.numerator, rest)
    if not is_short(decimal):
        decimal, left = Fraction(number.numerator), number.denominator
    return Number(number_text(decimal)), Number(number_text(Fraction(left)))


def sum_node(parts: Sequence[tuple[bool, Node]]) -> Node:
    """Terms with their signs, in the order given."""
    (minus, out), *rest = parts
    if minus:
        out = negated(out)
    for minus, node in rest:
        out = Binary("-" if minus else "+", out, node)
    return out
