"""Trees from text, as the sheet's own parser reads them."""

from __future__ import annotations

import math
import operator
from collections.abc import Callable

from loadpath.formula.canonical import text
from loadpath.formula.parser import parse_block
from loadpath.formula.statements import Definition
from loadpath.formula.tree import (
    Binary,
    Bracket,
    Call,
    Name,
    Negative,
    Node,
    Number,
    Quantity,
    Relation,
)
from loadpath.text import Source, Span

__all__ = ["relation", "text", "tree", "worth"]


def tree(typed: str) -> Node:
    """The tree of an expression."""
    source = Source("-", f"    y_typed = {typed}\n")
    (statement,), findings = parse_block(source, Span(0, len(source.text)))
    assert not findings, findings
    assert isinstance(statement, Definition), statement
    return statement.value


def relation(typed: str) -> Relation:
    """The tree of an equation."""
    left, right = typed.split(" = ")
    return Relation((tree(left), tree(right)), ("=",))


def worth(node: Node, values: dict[str, float]) -> float:
    """The value of a tree in plain floats, by a way of its own; quantities count as their numbers."""
    match node:
        case Number(text=typed):
            return float(typed.replace("_", ""))
        case Quantity(parts=(part,)):
            return float(part.whole)
        case Name(name="pi"):
            return math.pi
        case Name(name=name):
            return values[name]
        case Negative(operand=operand):
            return -worth(operand, values)
        case Binary(operator=operator, left=left, right=right):
            return OPERATIONS[operator](worth(left, values), worth(right, values))
        case Call(function=function, arguments=arguments):
            return FUNCTIONS[function](*[worth(a, values) for a in arguments])
        case Bracket(inner=inner, power=power):
            inside = worth(inner, values)
            return inside**power if inside >= 0 else 0.0
    raise TypeError(type(node).__name__)


OPERATIONS: dict[str, Callable[[float, float], float]] = {
    "+": operator.add, "-": operator.sub, "*": operator.mul, "/": operator.truediv, "^": math.pow,
}  # fmt: skip
FUNCTIONS: dict[str, Callable[..., float]] = {
    "sqrt": math.sqrt, "cbrt": math.cbrt, "exp": math.exp, "ln": math.log, "log10": math.log10,
    "sin": math.sin, "cos": math.cos, "tan": math.tan, "sec": lambda u: 1 / math.cos(u), "asin": math.asin,
    "acos": math.acos, "atan": math.atan, "sinh": math.sinh, "cosh": math.cosh, "tanh": math.tanh,
    "abs": abs, "min": min, "max": max,
}  # fmt: skip
