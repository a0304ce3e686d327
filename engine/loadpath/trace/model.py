"""The trace: one record a step, written while the numbers are worked. Documents, JSON and audits all read it.

Steps hold trees and full values; the texts made of them are in `trace.texts`, made when somebody asks.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass, field, replace
from functools import cached_property
from typing import Any

from loadpath.findings import Finding, ordered
from loadpath.formula.canonical import text as formula_text
from loadpath.formula.statements import Criterion, Faulty, Statement
from loadpath.formula.tree import Branch, Call, Cases, Node, Relation
from loadpath.resolve import Entry, Kind, Resolved, is_looking
from loadpath.sheet.model import Sheet
from loadpath.units import Unit


@dataclass(frozen=True, slots=True)
class Operand:
    """A value as it stands in a substitution."""

    si: float | str
    """Coherent SI; the word, for a choice."""
    unit: Unit
    """What it is printed in."""
    digits: int
    """Significant digits."""
    typed: str = ""
    """The number as typed, in plain form, where it stands as typed; it then has no further digits."""
    exact: bool = False
    """True for an input: its digits are all that it has."""


@dataclass(frozen=True, slots=True)
class Taken:
    """Which branch of a `cases` was taken."""

    cases: Cases
    index: int

    @property
    def branch(self) -> Branch:
        """The branch itself."""
        return self.cases.branches[self.index]


@dataclass(frozen=True, slots=True)
class Called:
    """A call of a function of the sheet, worked."""

    call: Call
    arguments: tuple[tuple[str, Operand], ...]
    """Each parameter with its value."""
    working: Working
    value: Operand


@dataclass(frozen=True, slots=True)
class Aside:
    """A line beneath a step: words, a piece of formula, words."""

    before: str
    tree: Node
    after: str


@dataclass(frozen=True, slots=True)
class Working:
    """How a value came about."""

    tree: Node
    """What was worked: the formula, or the branch taken."""
    scope: tuple[tuple[str, Operand], ...] = ()
    """Values of parameters, inside a function."""
    taken: Taken | None = None
    calls: tuple[Called, ...] = ()
    """Calls in it, each once, in reading order."""
    asides: tuple[Aside, ...] = ()
    """What governed a `min`, what was rounded, which unit `as` assumed: each a line beneath the step."""
    typed: Node | None = None
    """The formula as typed, where what was worked was derived from it: integrated, differentiated."""
    written: tuple[Node, ...] = ()
    """In place of a substitution: the cells that a `sum` adds up, with more digits each time."""

    @property
    def look(self) -> Called | None:
        """The call that looks at a whole expression or column, where the tree is nothing else."""
        alone = (called for called in self.calls if called.call == self.tree)
        return next((called for called in alone if is_looking(called.call)), None)


@dataclass(frozen=True, slots=True)
class PutBack:
    """One equation with the solution put back."""

    equation: Relation
    left: float
    right: float
    """SI."""
    unit: Unit
    size: float
    """Of the terms before they cancel, SI: what rounding goes with."""
    close: bool
    """True where the two agree to rounding."""


@dataclass(frozen=True, slots=True)
class Solved:
    """How the unknowns of one `solve for` were found; its steps share it."""

    method: str
    """`as a linear system of 2 equations`, `by bracketing (Brent), between the bounds in 400 steps`."""
    symbols: dict[str, Node]
    """The solution in symbols, where there is one."""
    put_back: tuple[PutBack, ...]
    others: tuple[tuple[str, Operand, str], ...] = ()
    """Roots that were found and not taken: name, value, why not."""
    derived: tuple[Relation, ...] = ()
    """The equations with their integrals and derivatives worked by algebra."""
    empty: tuple[Node, ...] = ()
    """Brackets that are 0 by their values, and left out of the solution in symbols."""
    workings: tuple[Working, ...] = ()
    """How the sides of each equation come about with the solution put back."""


@dataclass(frozen=True, slots=True)
class Row:
    """One row of a step that goes over a column."""

    label: str
    si: float | None
    working: Working | None
    verdict: Verdict | None = None


@dataclass(frozen=True, slots=True)
class Spot:
    """A largest or smallest value, with its place."""

    x: float
    y: float
    """SI."""


@dataclass(frozen=True, slots=True)
class Curve:
    """One expression over a range."""

    tree: Node
    """As typed."""
    unit: Unit
    points: tuple[tuple[float, float], ...]
    """SI; two points of one x are a jump, a nan is a gap."""
    largest: Spot | None
    smallest: Spot | None
    method: str
    """How the two were found: `exact`, or `numeric, 200 points`."""


@dataclass(frozen=True, slots=True)
class Curves:
    """What a `plot` or a `tabulate` shows."""

    variable: str
    unit: Unit
    """Of what runs over the range."""
    low: float
    high: float
    curves: tuple[Curve, ...]


@dataclass(frozen=True, slots=True)
class Verdict:
    """What a criterion, a validity or a check came to."""

    satisfied: bool | None
    """None where nothing was shown."""
    utilisation: float | None = None
    """Demand over limit; None where they have no such ratio."""
    demand: float | None = None
    limit: float | None = None
    """SI, of the governing part, both signs turned where both are negative."""
    part: int = 0
    """Which relation of an `or`, or which sign of a chain, governs."""
    margin: float | None = None
    """Limit less demand in SI, where there is no ratio."""
    one_sided: bool = False
    outside: tuple[str, ...] = ()
    """Names whose validity does not hold or was not shown, for which nothing is shown here."""
    conditional_on: tuple[str, ...] = ()
    """Keys of assumptions still to be confirmed that it hangs on."""
    sides: tuple[tuple[float | str, ...], ...] = ()
    """SI value of each operand of each relation."""
    within: float | None = None
    """Tolerance of a check, SI of the sides or a fraction of the right side."""

    def words(self, why: str, name: Callable[[str], str] = str) -> str:
        """The verdict as it reads; `why` is the reason where it could not be computed, `name` how names
        are written."""
        if self.satisfied is None:
            reason = why or "outside the range of " + ", ".join(name(n) for n in self.outside)
            return f"not shown: {reason}"
        if not self.satisfied:
            return "not satisfied"
        said = "satisfied on one side only" if self.one_sided else "satisfied"
        return said + (f", conditional on {', '.join(self.conditional_on)}" if self.conditional_on else "")


@dataclass(frozen=True, slots=True)
class Outline:
    """What is known of a step before any number is worked; shared by every run of one sheet."""

    entry: Entry
    number: str
    """`3.2`: second step of the third section."""
    sources: tuple[str, ...]
    """Keys cited in its notes, in order."""
    uses: tuple[str, ...]
    """Ids of the steps that it uses."""
    used_by: tuple[str, ...]
    """Ids of the steps that use it."""


@dataclass(frozen=True, slots=True)
class Step:
    """One step of the calculation."""

    outline: Outline
    si: float | str | tuple[float, ...] | None
    """Value in coherent SI at full precision; the word of a choice; of a column one a row; None where there
    is none."""
    digits: int
    """Significant digits that it is shown to."""
    working: Working | None
    verdict: Verdict | None
    why: str
    """`not computed because of line 12`, "" where it was computed or has no value to compute."""
    rows: tuple[Row, ...] = ()
    """Where it goes over a column."""
    governing: int | None = None
    """Index of the row that governs a criterion on columns."""
    solved: Solved | None = None
    curves: Curves | None = None

    @property
    def entry(self) -> Entry:
        """The statement, resolved."""
        return self.outline.entry

    @property
    def number(self) -> str:
        """`3.2`: second step of the third section."""
        return self.outline.number

    @property
    def sources(self) -> tuple[str, ...]:
        """Keys cited in its notes, in order."""
        return self.outline.sources

    @property
    def uses(self) -> tuple[str, ...]:
        """Ids of the steps that it uses."""
        return self.outline.uses

    @property
    def used_by(self) -> tuple[str, ...]:
        """Ids of the steps that use it."""
        return self.outline.used_by

    @property
    def id(self) -> str:
        """Stable name: a definition's name, a criterion's kind and name."""
        return self.entry.id

    @property
    def kind(self) -> Kind:
        """What sort of step it is."""
        return self.entry.kind

    @property
    def line(self) -> int:
        """1-based line of the sheet."""
        return self.entry.line

    @property
    def statement(self) -> Statement:
        """As parsed."""
        return self.entry.statement

    @property
    def unit(self) -> Unit:
        """The unit that the value is shown in."""
        return self.entry.unit

    @property
    def value(self) -> float | str | tuple[float, ...] | None:
        """The value in `unit` at full precision, of a column one a row; None where it was not computed."""
        if isinstance(self.si, tuple):
            return tuple(self.unit.from_si(si) for si in self.si)
        return self.unit.from_si(self.si) if isinstance(self.si, float) else self.si

    @property
    def note(self) -> str:
        """Its notes, joined, citations in place."""
        return "; ".join(note.text for note in self.statement.notes if note.text)


@dataclass(frozen=True)
class Trace:
    """Every step of one evaluated sheet, in reading order."""

    resolved: Resolved = field(repr=False)
    steps: tuple[Step, ...] = field(repr=False)
    sections: tuple[tuple[int, str], ...]
    """For each heading of the sheet in order: 0 or its section number, and its plain text."""
    findings: tuple[Finding, ...]
    """Everything wrong with the sheet and its numbers; `checking.audit` adds what a careful reader would
    ask."""
    digest: str
    """Of the sheet's text and of all that it is issued from: 64 hexadecimal digits."""
    work: Callable[[Node], float] = field(repr=False, compare=False)
    """Works a tree of printed values; what digits are checked with."""
    made: dict[tuple[str, str], Any] = field(default_factory=dict, repr=False, compare=False)
    """Texts already made (`trace.texts`), by what they are and the step's id: several formats ask for the
    same ones."""

    @property
    def sheet(self) -> Sheet:
        """The sheet that was evaluated."""
        return self.resolved.sheet

    @cached_property
    def by_id(self) -> dict[str, Step]:
        """Steps by id."""
        return {step.id: step for step in self.steps}

    @cached_property
    def by_name(self) -> dict[str, Step]:
        """Steps by the name that they define."""
        return {name: self.steps[index] for name, index in self.resolved.by_name.items()}

    def __getitem__(self, id: str) -> Step:
        """The step with an id. Raises KeyError."""
        return self.by_id[id]

    def __iter__(self) -> Iterator[Step]:
        return iter(self.steps)

    @property
    def criteria(self) -> tuple[Step, ...]:
        """The steps that are criteria, those that could not be read included."""
        return tuple(
            step for step in self.steps if step.verdict is not None and step.kind not in ("check", "valid")
        )

    @property
    def has_errors(self) -> bool:
        """True where the document is not for use."""
        return any(f.severity == "error" for f in self.findings)

    def feeds(self, id: str) -> frozenset[str]:
        """Ids of everything that a step hangs on, directly or not, itself left out."""
        return self._closure(id, lambda step: step.uses)

    def fed_by(self, id: str) -> frozenset[str]:
        """Ids of everything that hangs on a step, itself left out."""
        return self._closure(id, lambda step: step.used_by)

    def _closure(self, id: str, onward: Callable[[Step], tuple[str, ...]]) -> frozenset[str]:
        seen: set[str] = set()
        waiting = list(onward(self.by_id[id]))
        while waiting:
            at = waiting.pop()
            if at not in seen and at in self.by_id:
                seen.add(at)
                waiting += onward(self.by_id[at])
        return frozenset(seen)

    def with_findings(self, more: tuple[Finding, ...]) -> Trace:
        """The same trace with further findings."""
        return replace(self, findings=ordered(self.findings + more))


def criterion_kind(step: Step) -> str:
    """`strength`, `stiffness`, `stability` or `limit`, of a criterion that could not be read too."""
    statement = step.statement
    if isinstance(statement, Criterion):
        return statement.kind
    return _typed_criterion(statement)[0]


def criterion_name(step: Step) -> str:
    """The criterion's own name, else its relation in canonical spacing."""
    statement = step.statement
    if isinstance(statement, Criterion):
        return statement.name or formula_text(statement.relation)
    return _typed_criterion(statement)[1] or step.id


def _typed_criterion(statement: Statement) -> tuple[str, str]:
    """Kind and name of a criterion that could not be read; two times "" for any other statement."""
    return (statement.criterion if isinstance(statement, Faulty) else None) or ("", "")
