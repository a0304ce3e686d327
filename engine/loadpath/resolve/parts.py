"""What a statement holds: the names it defines, its trees, the names and units in them."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from functools import lru_cache

from loadpath.formula.lines import without_notes
from loadpath.formula.names import canonical, words_in
from loadpath.formula.statements import (
    Check,
    Choice,
    Criterion,
    Definition,
    Faulty,
    FunctionDefinition,
    Statement,
    Validity,
)
from loadpath.formula.tree import As, Branch, Call, Name, Node, Quantity, Relation, walk
from loadpath.functions import FUNCTIONS, LATER
from loadpath.resolve.model import Kind
from loadpath.text import Span

PI = "pi"
"""The only name that stands defined."""
_BINDING = LATER - {"count", "interp", "lookup", "simplified"}
"""Functions whose second argument is a name of their own, such as the `x` of `integral(f, x, a, b)`."""


@dataclass(frozen=True, slots=True)
class Use:
    """One use of a name."""

    name: str
    span: Span
    called: bool


def defined_by(statement: Statement) -> tuple[tuple[str, Span], ...]:
    """The name that a statement defines, with its place; those that a faulty one would have defined."""
    match statement:
        case Definition(name=name, name_span=span) | Choice(name=name, name_span=span):
            return ((name, span),)
        case FunctionDefinition(name=name, name_span=span):
            return ((name, span),)
        case Faulty(names=names, span=span):
            return tuple((name, span) for name in names)
    return ()


Nodes = tuple[Node | Branch, ...]


def nodes_in(statement: Statement) -> Nodes:
    """Every node of a statement's trees, in reading order."""
    return tuple(node for tree in expressions(statement) for node in walk(tree))


def expressions(statement: Statement) -> tuple[Node, ...]:
    """The trees that a statement holds."""
    match statement:
        case Definition(value=value):
            return (value,)
        case FunctionDefinition(body=body):
            return (body,)
        case Criterion(relation=relation) | Validity(relation=relation):
            return (relation,)
        case Check(relation=relation, tolerance=tolerance):
            return (relation, tolerance)
    return ()


def relations_in(statement: Statement) -> tuple[Relation, ...]:
    """The relations that a judged statement compares, in reading order; () for other statements."""
    if not isinstance(statement, Criterion | Validity | Check):
        return ()
    return tuple(node for node in nodes_in(statement) if isinstance(node, Relation))


def uses_in(statement: Statement, nodes: Nodes) -> Iterator[Use]:
    """Each use of a name that the sheet must bring, in reading order; no parameters, `pi` or built-ins."""
    bound = _bound_in(nodes)
    if isinstance(statement, FunctionDefinition):
        bound |= {parameter.name for parameter in statement.parameters}
    for node in nodes:
        if isinstance(node, Name):
            if node.name not in bound and node.name != PI:
                yield Use(node.name, node.span, False)
        elif isinstance(node, Call) and node.function not in FUNCTIONS:
            yield Use(node.function, node.at, True)
    if isinstance(statement, Validity):
        for name, span in statement.names:
            yield Use(name, span, False)


def _bound_in(nodes: Nodes) -> set[str]:
    """The names that live only within a call of a function that this version cannot work."""
    calls = [n for n in nodes if isinstance(n, Call) and n.function in _BINDING and len(n.arguments) > 1]
    return {call.arguments[1].name for call in calls if isinstance(call.arguments[1], Name)}


def mentioned_in(statement: Statement, nodes: Nodes) -> Iterator[str]:
    """Words that may have been meant as names: parts of units, and whatever a faulty line holds."""
    if isinstance(statement, Faulty):
        yield from map(canonical, words_in(without_notes(statement.text)))
    for node in nodes:
        if isinstance(node, Quantity):
            for part in node.parts:
                yield from _words_in_unit(part.unit)
        elif isinstance(node, As):
            yield from _words_in_unit(node.unit)


@lru_cache(maxsize=4096)
def _words_in_unit(unit: str) -> tuple[str, ...]:
    return tuple(canonical(word) for word in words_in(unit))


def kind_of(statement: Statement, nodes: Nodes) -> Kind:
    """What sort of step a statement is."""
    match statement:
        case Definition():
            return "result" if any(_is_named(node) for node in nodes) else "input"
        case Choice():
            return "choice"
        case FunctionDefinition():
            return "function"
        case Criterion():
            return "criterion"
        case Validity():
            return "valid"
        case Check():
            return "check"
    return "faulty"


def _is_named(node: object) -> bool:
    return (isinstance(node, Name) and node.name != PI) or (
        isinstance(node, Call) and node.function not in FUNCTIONS
    )
