"""Trees from text, as the sheet's own parser reads them."""

from __future__ import annotations

from loadpath.formula.canonical import text
from loadpath.formula.parser import parse_block
from loadpath.formula.statements import Definition
from loadpath.formula.tree import Node, Relation
from loadpath.text import Source, Span

__all__ = ["relation", "text", "tree"]


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
