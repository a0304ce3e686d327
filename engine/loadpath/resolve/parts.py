"""What a statement holds: the names it defines, its trees, the names and units in them."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

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
from loadpath.formula.tree import As, Call, Name, Node, Quantity, Relation, walk
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
    return tuple(node for tree in expressions(statement) for node in walk(tree) if isinstance(node, Relation))


def uses_in(statement: Statement) -> Iterator[Use]:
    """Each use of a name that the sheet must bring, in reading order; parameters, `pi` and built-ins left out."""
    own = {p.name for p in statement.parameters} if isinstance(statement, FunctionDefinition) else set()
    for tree in expressions(statement):
        bound = own | _bound_in(tree)
        for node in walk(tree):
            if isinstance(node, Name) and node.name not in bound and node.name != PI:
                yield Use(node.name, node.span, False)
            elif isinstance(node, Call) and node.function not in FUNCTIONS:
                yield Use(node.function, node.at, True)
    if isinstance(statement, Validity):
        for name, span in statement.names:
            yield Use(name, span, False)


def _bound_in(tree: Node) -> set[str]:
    """The names that live only within a call of a function that this version cannot work."""
    return {
        node.arguments[1].name
        for node in walk(tree)
        if isinstance(node, Call) and node.function in _BINDING and len(node.arguments) > 1
        and isinstance(node.arguments[1], Name)
    }  # fmt: skip


def mentioned_in(statement: Statement) -> Iterator[str]:
    """Words that may have been meant as names: parts of units, and whatever a faulty line holds."""
    if isinstance(statement, Faulty):
        yield from map(canonical, words_in(without_notes(statement.text)))
    for tree in expressions(statement):
        for node in walk(tree):
            units = [p.unit for p in node.parts] if isinstance(node, Quantity) else []
            for unit in [node.unit] if isinstance(node, As) else units:
                yield from map(canonical, words_in(unit))


def kind_of(statement: Statement) -> Kind:
    """What sort of step a statement is."""
    match statement:
        case Definition(value=value):
            return "result" if any(_is_named(node) for node in walk(value)) else "input"
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
