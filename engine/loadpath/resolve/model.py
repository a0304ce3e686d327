"""What resolving gives: for each statement its id, its type, what it uses, and whether it can be computed."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Literal

from loadpath.findings import Finding
from loadpath.formula.statements import Statement
from loadpath.sheet.model import Sheet, Value
from loadpath.text import Span
from loadpath.units import ONE, PLAIN, Dimension, Unit, UnitSystem

if TYPE_CHECKING:
    from loadpath.resolve.dimensions import Checker

Kind = Literal[
    "input", "choice", "result", "function", "criterion", "check", "valid", "unknown", "solution", "table",
    "plot", "faulty",
]  # fmt: skip
Flavour = Literal["", "cycles", "turning", "bar"]


@dataclass(frozen=True, slots=True)
class Type:
    """What can be said of a value before it is known."""

    dimension: Dimension = PLAIN
    absolute: bool = False
    """An absolute temperature: it has differences, but no multiples."""
    zero: bool = False
    """A bare `0`, which fits any dimension."""
    unknown: bool = False
    """Comes from something that could not be read or checked; fits everything."""
    words: tuple[str, ...] | None = None
    """The options of a choice."""
    flavour: Flavour = field(default="", compare=False)
    """`cycles` from Hz; `turning` from rpm, rad/s or a root of stiffness over mass; `bar` from bar."""
    mass: tuple[Span, str] | None = field(default=None, compare=False)
    """A typed mass unit that went into it: its place and its name."""


UNKNOWN = Type(unknown=True)


@dataclass(frozen=True, slots=True)
class Rows:
    """The rows that a column has."""

    table: str
    labels: tuple[str, ...]
    """() where the table's first column is numbers."""
    count: int

    def go_with(self, other: Rows) -> bool:
        """True where two columns may be joined row by row."""
        return self.table == other.table or (bool(self.labels) and self.labels == other.labels)

    def label(self, index: int) -> str:
        """What a reader calls a row."""
        return self.labels[index] if self.labels else str(index + 1)

    def said(self, index: int) -> str:
        """A row in words: `row "web"`, or `row 2` where rows have no labels."""
        return f'row "{self.labels[index]}"' if self.labels else f"row {index + 1}"


@dataclass(frozen=True, slots=True)
class TwoWayTypes:
    """Types of a two-way table."""

    down: Type
    across: Type
    cells: Type


@dataclass(frozen=True, slots=True)
class Entry:
    """One statement, resolved."""

    statement: Statement
    id: str
    kind: Kind
    line: int
    """1-based, of the statement's first character."""
    name: str
    """The name it defines, "" for criteria, checks and validities."""
    type: Type
    unit: Unit
    """What its value is shown in; for a relation, what the sides of the first one are."""
    side_units: tuple[Unit, ...]
    """For each relation in it, in reading order, the unit of its sides."""
    asked: bool
    """True where the line asks for its unit."""
    uses: tuple[str, ...]
    """Names of the sheet that it uses, each once, in the order typed."""
    blocked_by: int
    """Line of the mistake that keeps it from being computed, 0 where it can be."""
    rows: Rows | None = None
    """Where its value is a column, or it is judged row by row."""


@dataclass(frozen=True, slots=True)
class Resolved:
    """A sheet whose names, order and dimensions are checked."""

    sheet: Sheet
    system: UnitSystem
    checker: Checker = field(repr=False, compare=False)
    """Answers for the type of any further expression of this sheet."""
    entries: tuple[Entry, ...]
    """One a statement, in reading order."""
    by_name: dict[str, int]
    """Index into `entries` of what defines a name."""
    values: dict[Value, Unit]
    """The unit that each readable value in prose is printed in."""
    findings: tuple[Finding, ...]
    meant: frozenset[str] = frozenset()
    """Names and keys that count as used or cited: printed in prose, suggested for one that is unknown, part
    of a unit, or anywhere on a line that could not be read."""


__all__ = ["ONE", "UNKNOWN", "Entry", "Flavour", "Kind", "Resolved", "Rows", "TwoWayTypes", "Type"]
