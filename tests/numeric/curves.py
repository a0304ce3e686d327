"""Formulas as they are typed, for the tests of the numerical methods."""

from __future__ import annotations

from collections.abc import Callable

from loadpath.evaluate.numbers import Compiler
from loadpath.formula.lines import Item
from loadpath.formula.parser import parse_block
from loadpath.formula.reader import Reader
from loadpath.formula.statements import FunctionDefinition
from loadpath.formula.tree import Node
from loadpath.numeric import left_of
from loadpath.text import Source, Span


def tree(text: str) -> Node:
    return Reader(Item(text, 0, ())).expression()


def cases(*lines: str) -> Node:
    """The body of a function of x that is `cases`."""
    source = Source("", "\n".join(["    f(x) = cases", *("        " + line for line in lines)]))
    (statement,), found = parse_block(source, Span(0, len(source.text)))
    assert found == () and isinstance(statement, FunctionDefinition)
    return statement.body


def value_of(values: dict[str, float]) -> Callable[[Node], float]:
    """Works a tree that is free of the name of the curve."""
    return lambda node: float(Compiler({}).compile_tree(node)(values, {}))


class Formula:
    """A tree with the values of its names: as a curve, and what the methods ask of it."""

    def __init__(self, text: str | Node, x: str = "x", /, **values: float) -> None:
        self.node = tree(text) if isinstance(text, str) else text
        self.x = x
        self.values = values
        self.value = value_of(values)
        self._work = Compiler({}).compile_tree(self.node, frozenset([x]))

    def __call__(self, at: float) -> float:
        return float(self._work(self.values, {self.x: at}))

    def left(self, at: float) -> float:
        return Formula(left_of(self.node, self.x, at, self.value), self.x, **self.values)(at)
