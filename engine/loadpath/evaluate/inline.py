"""Putting the bodies of the sheet's functions in place of their calls: algebra and numerical methods look at
whole expressions."""

from __future__ import annotations

from collections.abc import Callable

from loadpath.evaluate.failure import Failure
from loadpath.formula.binding import put_in
from loadpath.formula.statements import FunctionDefinition
from loadpath.formula.tree import Call, Node, span_of, walk, with_children
from loadpath.text import Span

MOST_NODES = 20_000
"""Of an expression with all bodies put in place."""
FunctionOf = Callable[[str], FunctionDefinition | None]


def mapped(node: Node, change: Callable[[Node], Node]) -> Node:
    """The tree with `change` done to each node, the lowest first."""

    return change(with_children(node, lambda child: mapped(child, change)))


def inlined(node: Node, function: FunctionOf, place: Span | None = None) -> Node:
    """The tree without calls of the sheet's own functions. Raises `Failure` at `place` where it grows too
    large."""
    size = 0

    def change(each: Node) -> Node:
        nonlocal size
        definition = function(each.function) if isinstance(each, Call) else None
        if definition is None or not isinstance(each, Call):
            return each
        body = inlined(definition.body, function, place or span_of(node))
        size += sum(1 for _ in walk(body))
        if size > MOST_NODES:
            raise too_large(place or span_of(node), MOST_NODES)
        given = {p.name: a for p, a in zip(definition.parameters, each.arguments, strict=True)}
        return put_in(body, given)

    return mapped(node, change)


def too_large(place: Span, most: int) -> Failure:
    """An expression that grew beyond what a reader could follow."""
    return Failure(
        "derived-too-large",
        lambda show: f"what comes out here has more than {most} parts",
        place,
        "split the problem into several functions or shorter stretches, or give bounds",
    )
