"""What the numerical methods ask of a formula tree, and the few changes they make to one."""

from __future__ import annotations

from collections.abc import Callable

from loadpath.formula.binding import own_name, put_in
from loadpath.formula.tree import (
    Binary,
    Branch,
    Call,
    Negative,
    Node,
    Number,
    Quantity,
    children,
    rebuilt,
    walk,
)
from loadpath.units import parse_unit

ZERO, ONE = Number("0"), Number("1")
MOST_TERMS = 200
"""A sum of more terms than this is not written out."""

Worth = Callable[[Node], float]
"""Works a tree that is free of the name in question: coherent SI."""


def holding(node: Node, names: frozenset[str]) -> frozenset[int]:
    """The `id` of every node, from the given one down, in which one of the names occurs."""
    found: set[int] = set()

    def mark(each: Node | Branch) -> bool:
        inside = [mark(child) for child in children(each)]
        if any(inside) or getattr(each, "name", None) in names:
            found.add(id(each))
        return id(each) in found

    mark(node)
    return frozenset(found)


def unrolled(node: Node, x: str, value: Worth) -> Node:
    """The tree with each `sum(f, k, m, n)` that holds the name written out term by term."""
    if not any(isinstance(each, Call) and each.function == "sum" for each in walk(node)):
        return node
    holds = holding(node, frozenset([x]))

    def change(each: Node) -> Node | None:
        if not (isinstance(each, Call) and each.function == "sum" and id(each) in holds):
            return None
        own = own_name(each)
        if own is None or any(id(bound) in holds for bound in each.arguments[2:]):
            return None
        first, last = (round(value(bound)) for bound in each.arguments[2:])
        if not 0 <= last - first < MOST_TERMS:
            return None
        terms = [put_in(each.arguments[0], {own.name: _counted(k)}) for k in range(first, last + 1)]
        whole = terms[0]
        for term in terms[1:]:
            whole = Binary("+", whole, term)
        return unrolled(whole, x, value)

    return rebuilt(node, change)


def _counted(k: int) -> Node:
    return Number(str(k)) if k >= 0 else Negative(Number(str(-k)))


def typed_number(node: Node) -> float | None:
    """The value of plain numbers typed as an exponent: `3`, `-1`, `1/3`; None for anything else."""
    match node:
        case Number(text=text):
            return float(text.replace("_", ""))
        case Negative(operand=operand):
            inner = typed_number(operand)
            return None if inner is None else -inner
        case Binary(operator="/", left=left, right=right):
            over, under = typed_number(left), typed_number(right)
            return over / under if over is not None and under else None
    return None


def is_zero(node: Node) -> bool:
    """True for a typed `0` with or without a unit; `0 degC` is not zero."""
    if isinstance(node, Quantity):
        return all(
            part.over is None
            and float(part.whole.replace("_", "")) == 0
            and parse_unit(part.unit).to_si(0.0) == 0
            for part in node.parts
        )
    return isinstance(node, Number) and float(node.text.replace("_", "")) == 0


def is_one(node: Node) -> bool:
    """True for a typed plain `1`."""
    return isinstance(node, Number) and float(node.text.replace("_", "")) == 1
