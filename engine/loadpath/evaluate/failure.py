"""A number that cannot be had."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

from loadpath.formula.canonical import text
from loadpath.formula.mistake import Mistake
from loadpath.formula.tree import Name, Node
from loadpath.resolve import Resolved
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


def shower(resolved: Resolved) -> Show:
    """Shows values in the unit of the name they have, else in the sheet's unit for their kind."""

    def show(node: Node, si: float) -> str:
        unit = _unit(resolved, node)
        if unit is None:
            return f"{plain(si, exact_digits(si, 4))} in SI units"
        value = unit.from_si(si)
        return f"{plain(value, exact_digits(value, 4))} {unit.text}".rstrip()

    return show


def _unit(resolved: Resolved, node: Node) -> Unit | None:
    """None for what hangs on a function's parameters, whose kind the call decides."""
    try:
        found = resolved.checker.type_of(node)
    except Mistake:
        return None
    finally:
        resolved.checker.warnings.clear()
    if found.unknown or found.words is not None:
        return None
    if isinstance(node, Name) and node.name in resolved.by_name:
        return resolved.entries[resolved.by_name[node.name]].unit
    return resolved.system.unit_for(found.dimension, found.absolute, found.flavour == "bar")
