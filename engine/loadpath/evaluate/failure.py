"""A number that cannot be had."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Iterator
from dataclasses import dataclass

from loadpath.formula.binding import own_name
from loadpath.formula.canonical import text
from loadpath.formula.mistake import Mistake
from loadpath.formula.statements import FunctionDefinition, Plot, Statement, Tabulate
from loadpath.formula.tree import Call, Name, Node, walk
from loadpath.resolve import UNKNOWN, Resolved, Type, expressions
from loadpath.text import Span
from loadpath.trace.digits import exact_digits
from loadpath.units import Unit
from loadpath.units.printing import plain

Show = Callable[[Node, float], str]
"""The value of a part of a formula, given in coherent SI, as a reader of the sheet knows it: `20 kN`."""


@dataclass
class Failure(Exception):
    """An operation that has no value; becomes a finding."""

    slug: str
    tell: Callable[[Show], str]
    """The message, with the values that led to it."""
    span: Span
    help: str

    def in_row(self, row: str) -> Failure:
        """The same, in one row of a column."""
        tell = self.tell
        return Failure(self.slug, lambda show: f"in {row}: {tell(show)}", self.span, self.help)


def short(node: Node) -> str:
    """A part of a formula in a message."""
    said = text(node)
    return said if len(said) <= 60 else said[:57] + "..."


def shower(resolved: Resolved, statements: Iterable[Statement] = ()) -> Show:
    """Shows values in the unit of the name they have, else in the sheet's unit for their kind.

    `statements`: those whose own names, a parameter or what runs over a range, may stand in a formula.
    """
    types = {name: found for each in statements for name, found in _own_types(resolved, each)}

    def show(node: Node, si: float) -> str:
        unit = _unit(resolved, node, types)
        if unit is None:
            return f"{plain(si, exact_digits(si, 4))} in SI units"
        value = unit.from_si(si)
        return f"{plain(value, exact_digits(value, 4))} {unit.text}".rstrip()

    return show


def _own_types(resolved: Resolved, statement: Statement) -> Iterator[tuple[str, Type]]:
    """The kind of each name that lives only within a statement, where its unit or its range says it."""
    ranges: list[tuple[str, tuple[Node, ...]]] = []
    match statement:
        case FunctionDefinition():
            yield from resolved.checker.parameter_types(statement).items()
        case Plot(variable=x, low=low, high=high) | Tabulate(variable=x, low=low, high=high):
            ranges.append((x, (low, high)))
    for node in (node for tree in expressions(statement) for node in walk(tree)):
        if isinstance(node, Call) and (own := own_name(node)) is not None:
            ranges.append((own.name, node.arguments[2:]))
    for name, bounds in ranges:
        kinds = (_type(resolved, bound) for bound in bounds)
        yield name, next((kind for kind in kinds if kind and not kind.zero), UNKNOWN)


def _type(resolved: Resolved, node: Node, types: dict[str, Type] | None = None) -> Type | None:
    try:
        return resolved.checker.type_of(node, types)
    except Mistake:
        return None
    finally:
        resolved.checker.warnings.clear()


def _unit(resolved: Resolved, node: Node, types: dict[str, Type]) -> Unit | None:
    """None for what hangs on a function's parameters, where the call decides their kind."""
    found = _type(resolved, node, types)
    if found is None or found.unknown or found.words is not None:
        return None
    if isinstance(node, Name) and node.name in resolved.by_name:
        return resolved.entries[resolved.by_name[node.name]].unit
    return resolved.system.unit_for(found.dimension, found.absolute, found.flavour == "bar")
