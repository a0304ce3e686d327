"""Putting the bodies of the sheet's functions in place of their calls: algebra and numerical methods look at
whole expressions."""

from __future__ import annotations

from collections.abc import Callable, Mapping

from loadpath.evaluate.failure import Failure
from loadpath.formula.binding import free_names, put_in
from loadpath.formula.statements import FunctionDefinition
from loadpath.formula.tree import (
    At,
    Binary,
    Call,
    Name,
    Node,
    Number,
    Word,
    rebuilt,
    span_of,
    walk,
    with_children,
)
from loadpath.resolve import Rows
from loadpath.resolve.columns import is_brought_back
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


def rows_written_out(node: Node, names: frozenset[str], columns: Mapping[str, Rows]) -> Node:
    """The tree with each `sum`, `min` or `max` of a column in which one of the names stands written out, a
    cell a row: what looks over the name must see where it stands."""

    def change(each: Node) -> Node | None:
        if not (isinstance(each, Call) and is_brought_back(each) and free_names(each) & names):
            return None
        column = each.arguments[0]
        held = sorted(free_names(column) & set(columns))
        rows = [put_in(column, {name: _cell(name, columns[name], i) for name in held})
                for i in range(columns[held[0]].count)]  # fmt: skip
        if each.function == "count":
            return Number(str(len(rows)))
        if each.function != "sum":
            return Call(each.function, tuple(rows), each.span, each.at)
        total = rows[0]
        for row in rows[1:]:
            total = Binary("+", total, row, each.span, each.at)
        return total

    return rebuilt(node, change)


def _cell(column: str, rows: Rows, index: int) -> Node:
    return At(Name(column), Word(rows.labels[index]) if rows.labels else Number(str(index + 1)))


def too_large(place: Span, most: int) -> Failure:
    """An expression that grew beyond what a reader could follow."""
    return Failure(
        "derived-too-large",
        lambda show: f"what comes out here has more than {most} parts",
        place,
        "split the problem into several functions or shorter stretches, or give bounds",
    )
