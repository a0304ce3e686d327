"""The formula tree: what a formula line means, as typed, in about twenty kinds of frozen node.

Every node carries the span it was read from; spans stay out of equality, so that two trees are equal when
they mean the same.
Names hold their canonical text (`formula.names`): Greek spelled out, Unicode NFC.
Whatever is done with formulas (printing, substitution, dimensions, numbers) is a function over these nodes.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass, field, replace
from typing import Literal

from loadpath.text import Span

NOWHERE = Span(0, 0)


@dataclass(frozen=True, slots=True)
class Node:
    """Anything in a formula."""


# --- values -------------------------------------------------------------------------------------------------


@dataclass(frozen=True, slots=True)
class Number(Node):
    """A plain number as typed."""

    text: str
    """As typed, `_` groups and exponent kept: `12_000`, `1.2e6`."""
    span: Span = field(default=NOWHERE, compare=False)


@dataclass(frozen=True, slots=True)
class Part:
    """One number with its unit inside a quantity: `12 ft` of `12 ft 6 1/2 in`."""

    whole: str
    """Number as typed, "" where there is only a fraction; a leading `-` only before degC or degF."""
    over: tuple[str, str] | None
    """Numerator and denominator of a typed fraction, or None."""
    unit: str
    """Unit as typed, without spaces."""


@dataclass(frozen=True, slots=True)
class Quantity(Node):
    """A number with a unit: one part, or feet and inches in two."""

    parts: tuple[Part, ...]
    span: Span = field(default=NOWHERE, compare=False)
    unit_span: Span = field(default=NOWHERE, compare=False)
    """Of the last part's unit."""


@dataclass(frozen=True, slots=True)
class Word(Node):
    """A word in double quotes: one of a choice."""

    text: str
    span: Span = field(default=NOWHERE, compare=False)


@dataclass(frozen=True, slots=True)
class Name(Node):
    """A use of a name, dots included: `b.I_y`."""

    name: str
    span: Span = field(default=NOWHERE, compare=False)


# --- operations ---------------------------------------------------------------------------------------------

Operator = Literal["+", "-", "*", "/", "^"]


@dataclass(frozen=True, slots=True)
class Negative(Node):
    """Unary minus; binds looser than `^`."""

    operand: Node
    span: Span = field(default=NOWHERE, compare=False)


@dataclass(frozen=True, slots=True)
class Binary(Node):
    """`left operator right`."""

    operator: Operator
    left: Node
    right: Node
    span: Span = field(default=NOWHERE, compare=False)
    """Of the whole; the operator's own place is `at`."""
    at: Span = field(default=NOWHERE, compare=False)


@dataclass(frozen=True, slots=True)
class Call(Node):
    """A built-in function, or one defined on the sheet."""

    function: str
    arguments: tuple[Node, ...]
    span: Span = field(default=NOWHERE, compare=False)
    at: Span = field(default=NOWHERE, compare=False)
    """Of the function's name."""


@dataclass(frozen=True, slots=True)
class Bracket(Node):
    """A Macaulay bracket `<x - a>^n`."""

    inner: Node
    power: int
    span: Span = field(default=NOWHERE, compare=False)


@dataclass(frozen=True, slots=True)
class As(Node):
    """`(f_c as psi)`: the plain number of a unit in a value."""

    operand: Node
    unit: str
    span: Span = field(default=NOWHERE, compare=False)
    unit_span: Span = field(default=NOWHERE, compare=False)


@dataclass(frozen=True, slots=True)
class At(Node):
    """`plates.b at "top flange"`: one cell of a column; binds tightest."""

    operand: Node
    row: Node
    """A `Word`, or the `Name` of a choice that says which row; a `Number` counts rows without labels, and is
    never typed."""
    span: Span = field(default=NOWHERE, compare=False)


# --- relations ----------------------------------------------------------------------------------------------

Sign = Literal["<=", "<", ">=", ">", "=", "≠"]
"""`≠` is only ever printed, never typed."""


@dataclass(frozen=True, slots=True)
class Relation(Node):
    """`a <= b`, or a chain `a <= x <= b`: one more operand than signs."""

    operands: tuple[Node, ...]
    signs: tuple[Sign, ...]
    span: Span = field(default=NOWHERE, compare=False)
    at: tuple[Span, ...] = field(default=(), compare=False)
    """Of each sign."""


@dataclass(frozen=True, slots=True)
class Logic(Node):
    """Relations joined by `and` or by `or`."""

    word: Literal["and", "or"]
    operands: tuple[Node, ...]
    span: Span = field(default=NOWHERE, compare=False)


@dataclass(frozen=True, slots=True)
class Branch:
    """One line of `cases`."""

    value: Node
    condition: Node | None
    """None for `otherwise`."""
    span: Span = field(default=NOWHERE, compare=False)


@dataclass(frozen=True, slots=True)
class Cases(Node):
    """`cases` with its branches, in the order typed; the first that holds is taken."""

    branches: tuple[Branch, ...]
    span: Span = field(default=NOWHERE, compare=False)


# --- what printing puts in place of names -------------------------------------------------------------------


@dataclass(frozen=True, slots=True)
class Shown(Node):
    """A printed value standing in a substitution: never typed, never evaluated."""

    number: str
    """In plain form: `56.10`, `-3.2`, `12.5e6`, `2 1/2`."""
    unit: str
    """Unit in typed form, "" for a plain number."""
    word: bool = False
    """True where it is a word of a choice."""


@dataclass(frozen=True, slots=True)
class Factor(Node):
    """A printed conversion factor at the end of a substitution: `12 in/ft`."""

    body: Node
    number: str
    unit: str
    divided: bool = False
    """True where the body is divided by it."""


_CHILDREN: dict[type, tuple[str, ...]] = {
    Negative: ("operand",),
    Binary: ("left", "right"),
    Call: ("arguments",),
    Bracket: ("inner",),
    As: ("operand",),
    At: ("operand", "row"),
    Relation: ("operands",),
    Logic: ("operands",),
    Branch: ("value", "condition"),
    Cases: ("branches",),
    Factor: ("body",),
}
"""The fields that hold the nodes below, left to right."""


def children(node: Node | Branch) -> Iterator[Node | Branch]:
    """The nodes directly below, left to right."""
    for name in _CHILDREN.get(type(node), ()):
        value = getattr(node, name)
        if isinstance(value, tuple):
            yield from value
        elif value is not None:
            yield value


def with_children(node: Node, change: Callable[[Node], Node]) -> Node:
    """The node with each tree directly below changed, those of the branches of `cases` too; the node itself
    where nothing is."""
    new: dict[str, Node | tuple[Node | Branch, ...]] = {}
    for name in _CHILDREN.get(type(node), ()):
        old = getattr(node, name)
        if isinstance(old, tuple):
            items = tuple(_changed(item, change) for item in old)
            if any(a is not b for a, b in zip(items, old, strict=True)):
                new[name] = items
        elif (item := change(old)) is not old:
            new[name] = item
    return replace(node, **new) if new else node


def _changed(item: Node | Branch, change: Callable[[Node], Node]) -> Node | Branch:
    if isinstance(item, Node):
        return change(item)
    value, condition = change(item.value), None if item.condition is None else change(item.condition)
    if value is item.value and condition is item.condition:
        return item
    return replace(item, value=value, condition=condition)


def rebuilt(node: Node, change: Callable[[Node], Node | None]) -> Node:
    """Top down: where `change` gives a tree it stands for the node; else the nodes below are asked."""
    new = change(node)
    return new if new is not None else with_children(node, lambda child: rebuilt(child, change))


def walk(node: Node | Branch) -> Iterator[Node | Branch]:
    """The node and everything below it, in reading order."""
    waiting = [node]
    while waiting:
        node = waiting.pop()
        yield node
        if type(node) in _CHILDREN:
            waiting += reversed(tuple(children(node)))


def span_of(node: Node) -> Span:
    """Where a node was typed."""
    return getattr(node, "span", NOWHERE)
