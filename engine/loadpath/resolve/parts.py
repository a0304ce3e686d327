"""What a statement holds: the names it defines, its trees, the names and units in them."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from functools import lru_cache

from loadpath.formula.binding import own_name
from loadpath.formula.lines import without_notes
from loadpath.formula.names import canonical, words_in
from loadpath.formula.statements import (
    Check,
    Choice,
    Column,
    Criterion,
    Definition,
    Faulty,
    FunctionDefinition,
    Plot,
    Solution,
    Statement,
    Table,
    Tabulate,
    Unknown,
    Validity,
)
from loadpath.formula.tree import As, At, Branch, Call, Name, Node, Quantity, Relation, children, walk
from loadpath.functions import NAMES as BUILT_IN
from loadpath.functions import SPECIAL
from loadpath.resolve.model import Kind
from loadpath.text import Span

PI = "pi"
"""The only name that stands defined."""


@dataclass(frozen=True, slots=True)
class Use:
    """One use of a name."""

    name: str
    span: Span
    called: bool
    row: bool = False
    """True for what says which row of a column: a choice, or a label without quotes."""


def defined_by(statement: Statement) -> tuple[tuple[str, Span], ...]:
    """The name that a statement defines, with its place; those that a faulty one would have defined."""
    match statement:
        case Definition(name=name, name_span=span) | Choice(name=name, name_span=span):
            return ((name, span),)
        case FunctionDefinition(name=name, name_span=span) | Unknown(name=name, name_span=span):
            return ((name, span),)
        case Table(name=name, name_span=span) | Column(name=name, name_span=span):
            return ((name, span),)
        case Solution():
            return ((statement.name, statement.sought.span),)
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
        case Solution(together=together):
            bounds = (bound for each in together.sought for bound in (each.low, each.high))
            return (*together.equations, *(bound for bound in bounds if bound is not None))
        case Plot(curves=curves, low=low, high=high) | Tabulate(curves=curves, low=low, high=high):
            return (*curves, low, high)
        case Column(cells=cells):
            return cells
        case Table(two_way=two_way) if two_way is not None:
            return (*two_way.across, *two_way.down, *(cell for row in two_way.cells for cell in row))
    return ()


def relations_in(statement: Statement) -> tuple[Relation, ...]:
    """The relations that a judged statement compares, in reading order; () for other statements."""
    if not isinstance(statement, Criterion | Validity | Check):
        return ()
    return tuple(node for node in nodes_in(statement) if isinstance(node, Relation))


def uses_in(statement: Statement) -> Iterator[Use]:
    """Each use of a name that the sheet must bring, in reading order; no parameters, `pi` or built-ins."""
    bound = frozenset({PI, *_own_names(statement)})
    for tree in expressions(statement):
        yield from _uses(tree, bound)
    if isinstance(statement, Validity):
        for name, span in statement.names:
            yield Use(name, span, False)


def _own_names(statement: Statement) -> tuple[str, ...]:
    """Names that live only within a statement."""
    match statement:
        case FunctionDefinition(parameters=parameters):
            return tuple(parameter.name for parameter in parameters)
        case Solution(together=together):
            return tuple(sought.name for sought in together.sought)
        case Plot(variable=variable) | Tabulate(variable=variable):
            return (variable,)
    return ()


def _uses(node: Node | Branch, bound: frozenset[str]) -> Iterator[Use]:
    if isinstance(node, Name):
        if node.name not in bound:
            yield Use(node.name, node.span, False)
        return
    if isinstance(node, At):
        yield from _uses(node.operand, bound)
        if isinstance(node.row, Name):
            yield Use(node.row.name, node.row.span, False, row=True)
        return
    if isinstance(node, Call):
        if node.function not in BUILT_IN:
            yield Use(node.function, node.at, True)
        if (own := own_name(node)) is not None:
            yield from _uses(node.arguments[0], bound | {own.name})
            for argument in node.arguments[2:]:
                yield from _uses(argument, bound)
            return
    for child in children(node):
        yield from _uses(child, bound)


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
        case Unknown():
            return "unknown"
        case Solution():
            return "solution"
        case Table() | Column() | Tabulate():
            return "table"
        case Plot():
            return "plot"
    return "faulty"


def _is_named(node: object) -> bool:
    return (isinstance(node, Name) and node.name != PI) or (
        isinstance(node, Call) and (node.function not in BUILT_IN or node.function in SPECIAL)
    )
