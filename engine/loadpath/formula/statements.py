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


# --- unknowns and equations ---------------------------------------------------------------------------------


@dataclass(frozen=True, slots=True)
class Unknown(Statement):
    """One name of `unknown C_1 [rad], C_2 [mm]`: a later `solve for` finds its value."""

    name: str
    name_span: Span
    unit: AskedUnit


@dataclass(frozen=True, slots=True)
class Sought:
    """One unknown of a `solve for`."""

    name: str
    span: Span
    unit: AskedUnit | None
    """None where an `unknown` above has stated it."""
    low: Node | None = None
    high: Node | None = None
    """Bounds, both or none."""


@dataclass(frozen=True, slots=True)
class Equations:
    """What the steps of one `solve for` share."""

    sought: tuple[Sought, ...]
    equations: tuple[Relation, ...]
    """Each with one `=`."""
    notes: tuple[tuple[Note, ...], ...]
    """Those of each equation."""
    span: Span
    """Of the head line."""


@dataclass(frozen=True, slots=True)
class Solution(Statement):
    """One unknown of `solve for R_A [kN], R_B [kN]` with its equations."""

    index: int
    """Which of the unknowns, from 0."""
    together: Equations

    @property
    def sought(self) -> Sought:
        """The unknown itself."""
        return self.together.sought[self.index]

    @property
    def name(self) -> str:
        """Of the unknown."""
        return self.sought.name

    @property
    def is_last(self) -> bool:
        """True for the last unknown of its `solve for`."""
        return self.index == len(self.together.sought) - 1


# --- tables -------------------------------------------------------------------------------------------------


@dataclass(frozen=True, slots=True)
class Table(Statement):
    """A captioned table: its columns follow as statements of their own, unless it is two-way."""

    name: str
    name_span: Span
    head: str
    """What stands over the row labels, as typed."""
    labels: tuple[str, ...]
    """Of the rows; () where the first column is numbers."""
    rows: int
    two_way: TwoWay | None = None


@dataclass(frozen=True, slots=True)
class TwoWay:
    """A table whose header cells after the first are quantities."""

    across: tuple[Node, ...]
    """The header cells."""
    down: tuple[Node, ...]
    """The first column, its unit filled in."""
    cells: tuple[tuple[Node, ...], ...]
    """One tuple a row."""


@dataclass(frozen=True, slots=True)
class Column(Statement):
    """One column of a table: `plates.b`."""

    name: str
    """With the table's name in front."""
    name_span: Span
    table: str
    place: int
    """Among the columns that are steps, from 0."""
    unit: AskedUnit | None
    cells: tuple[Node, ...]
    """One a row; a number typed without unit has that of the header."""
    labels: tuple[str, ...]
    """Of the rows, as in the table."""


# --- pictures and tables of values --------------------------------------------------------------------------


@dataclass(frozen=True, slots=True)
class Plot(Statement):
    """`plot V(x), M(x) for x from 0 m to L`."""

    curves: tuple[Node, ...]
    variable: str
    variable_span: Span
    low: Node
    high: Node


@dataclass(frozen=True, slots=True)
class Tabulate(Statement):
    """`tabulate M(x), v(x) for x from 0 m to L, 10 steps`."""

    curves: tuple[Node, ...]
    variable: str
    variable_span: Span
    low: Node
    high: Node
    steps: int


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
