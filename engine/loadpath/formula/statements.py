"""The statements of a formula block, one frozen record each."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import Literal

from loadpath.formula.tree import NOWHERE, Node, Relation
from loadpath.text import Span

CriterionKind = Literal["strength", "stiffness", "stability", "limit"]


@dataclass(frozen=True, slots=True)
class AskedUnit:
    """A unit in square brackets: `[kN*m]`."""

    text: str
    """As typed, without spaces; `1`, `%`, `deg`, `ft-in 1/16` included."""
    span: Span = field(default=NOWHERE, compare=False)


@dataclass(frozen=True, slots=True)
class Note:
    """What follows ` -- `."""

    text: str
    """Citations kept in place: `rated load [hoist]`."""
    citations: tuple[tuple[str, Span], ...] = ()
    """Each key with its place."""
    span: Span = field(default=NOWHERE, compare=False)


@dataclass(frozen=True, slots=True)
class Statement:
    """What every statement has."""

    span: Span
    """From the first character to the last, notes and deeper lines included."""
    notes: tuple[Note, ...]
    """In the order typed; the first is the statement's own where its first line has one."""


@dataclass(frozen=True, slots=True)
class Definition(Statement):
    """`name [unit] = expression`: an input where the right side names nothing, else a result."""

    name: str
    name_span: Span
    unit: AskedUnit | None
    value: Node


@dataclass(frozen=True, slots=True)
class Choice(Statement):
    """`curve = "b" of "a", "b"`."""

    name: str
    name_span: Span
    word: str
    word_span: Span
    options: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class Parameter:
    """One parameter of a function: `x [m]`."""

    name: str
    unit: AskedUnit | None
    span: Span = field(default=NOWHERE, compare=False)


@dataclass(frozen=True, slots=True)
class FunctionDefinition(Statement):
    """`M(x [m]) [kN*m] = ...`."""

    name: str
    name_span: Span
    parameters: tuple[Parameter, ...]
    unit: AskedUnit | None
    body: Node


@dataclass(frozen=True, slots=True)
class Criterion(Statement):
    """`strength bending: sigma <= f_y`."""

    kind: CriterionKind
    name: str
    """Its own name, "" where it has none."""
    relation: Node
    """A `Relation`, or `Logic("or")` of two of them."""
    kind_span: Span


@dataclass(frozen=True, slots=True)
class Validity(Statement):
    """`valid: 3 <= t/d <= 12 for chi`."""

    relation: Node
    names: tuple[tuple[str, Span], ...]


@dataclass(frozen=True, slots=True)
class Check(Statement):
    """`check: a = b within 0.1 %`."""

    relation: Relation
    tolerance: Node


@dataclass(frozen=True, slots=True)
class Faulty(Statement):
    """A statement that could not be read. Its finding is reported; what hangs on `name` is not computed."""

    text: str
    """As typed, for the document."""
    names: tuple[str, ...]
    """The names it would have defined, as far as they can be made out."""
    criterion: tuple[CriterionKind, str] | None = None
    """Kind and name, where it began as a criterion: it then counts as not shown."""
    guards: tuple[str, ...] = ()
    """The names that a validity was meant for: nothing is shown of what hangs on them."""
    trouble: Span = field(default=NOWHERE, compare=False)
    """The place of its finding, which what hangs on it names; NOWHERE where that is the statement's own."""
