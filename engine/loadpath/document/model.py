"""The document: what a reader sees, in reading order, before any format.

Renderers read only this and never compute. Formulas stay trees (`formula.tree`); values are `Shown` nodes
with plain numbers. How they look is up to the printers.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Any

from loadpath.findings import Finding
from loadpath.formula.statements import CriterionKind
from loadpath.formula.tree import Node, Relation, Shown
from loadpath.text import Source

if TYPE_CHECKING:
    from loadpath.figures import Picture

CAUTION = (
    "This calculation is to be checked by a competent person before anything is built, lifted or loaded on "
    "its strength. Applicable codes, local regulations and the judgement of a licensed engineer govern."
)


# --- small parts ------------------------------------------------------------------------------------------


@dataclass(frozen=True, slots=True)
class Ref:
    """A link to a step."""

    number: str
    name: str = ""
    """Canonical name, or the words of a criterion; "" where only the number is shown."""
    is_name: bool = True
    """True where `name` is a symbol, False where it is words."""


@dataclass(frozen=True, slots=True)
class Cited:
    """A citation inside a note."""

    key: str
    kind: str
    """`source`, `assumption`, or "" for an unknown key."""


Inline = str | Cited
"""Plain text, or a citation."""


@dataclass(frozen=True, slots=True)
class Head:
    """What every step shows."""

    number: str
    """`3.2`; its anchor is `s3.2`."""
    kind: str
    note: tuple[Inline, ...]
    feeds_from: tuple[Ref, ...]
    used_in: tuple[Ref, ...]
    findings: tuple[Finding, ...]
    """Those of its lines."""
    why: str = ""
    """`not computed because of line 12`, "" where it was."""


@dataclass(frozen=True, slots=True)
class Line:
    """A line beneath a step: words and pieces of formula."""

    parts: tuple[str | Node, ...]


@dataclass(frozen=True, slots=True)
class CallLine:
    """A call of a function of the sheet: `M(2 m) = ... = ... = 31.25 kN*m`."""

    call: Node
    """The call with the printed values of its arguments."""
    sides: tuple[Node, ...]
    """Body as typed, then with values."""
    value: Shown
    closes: bool
    conditions: tuple[Line, ...] = ()
    """Which branch was taken and what governed."""
    typed: tuple[Node, ...] = ()
    """The call as typed, then with values in its arguments, where an argument is worked out in it."""


# --- steps ------------------------------------------------------------------------------------------------


@dataclass(frozen=True, slots=True)
class InputRow:
    """A design input or a choice."""

    head: Head
    name: str
    typed: Node | None
    """As typed, where that is more than the value."""
    value: Shown
    options: tuple[str, ...] = ()
    """Of a choice."""


@dataclass(frozen=True, slots=True)
class BranchRow:
    """One branch of `cases`."""

    value: Node
    condition: Node | None
    taken: bool
    numbers: tuple[Node, ...] = ()
    """The condition with its numbers, where it is the one taken."""
    note: tuple[Inline, ...] = ()


@dataclass(frozen=True, slots=True)
class ResultRow:
    """A result: formula, substitution, value."""

    head: Head
    name: Node
    sides: tuple[Node, ...]
    """Formula, what algebra made of it, then substitution: as many of them as there are."""
    value: Shown | None
    closes: bool
    """False where the substitution needs unrounded values."""
    branches: tuple[BranchRow, ...] = ()
    lines: tuple[Line, ...] = ()
    calls: tuple[CallLine, ...] = ()
    derived: int | None = None
    """Which of the sides algebra made of the formula, counted from 0."""


@dataclass(frozen=True, slots=True)
class ColumnRow:
    """One row of a result that goes over a column."""

    label: str
    sides: tuple[Node, ...]
    """With values in place of names; () where nothing stands in their place."""
    value: Shown
    closes: bool = True
    calls: tuple[CallLine, ...] = ()


@dataclass(frozen=True, slots=True)
class ColumnBlock:
    """A result that goes over the rows of a table: the formula once, then a row a piece."""

    head: Head
    name: Node
    sides: tuple[Node, ...]
    """Formula, then what algebra made of it."""
    rows: tuple[ColumnRow, ...]
    lines: tuple[Line, ...] = ()
    """What is said beneath: of the whole, then of the rows, each thing once with the rows that it is true
    of."""


@dataclass(frozen=True, slots=True)
class FunctionRow:
    """A function of the sheet, as defined."""

    head: Head
    name: Node
    body: Node | None
    branches: tuple[BranchRow, ...]
    units: Line
    """`x in m, M in kN⋅m`."""
    derived: Node | None = None
    """What algebra made of the body."""
    lines: tuple[Line, ...] = ()


@dataclass(frozen=True, slots=True)
class UnknownRow:
    """An unknown that a later `solve for` finds."""

    head: Head
    name: str
    unit: str
    """As it prints, "" for a plain number."""
    solved_in: Ref | None


@dataclass(frozen=True, slots=True)
class PutBackLine:
    """One equation with the solution put back."""

    equation: Relation
    left: Shown
    right: Shown
    residual: Shown
    """Left less right."""


@dataclass(frozen=True, slots=True)
class SolutionRow:
    """One unknown found; the first one of its `solve for` brings the equations, the last one the proof."""

    head: Head
    name: Node
    equations: tuple[Relation, ...]
    """As typed, on the first of the steps that share them; else ()."""
    notes: tuple[tuple[Inline, ...], ...]
    """Those of each equation."""
    derived: tuple[Relation, ...]
    """The same with integrals and derivatives worked, where algebra had something to do."""
    bounds: tuple[Relation, ...]
    method: str
    """How it was solved; "" but on the first."""
    sides: tuple[Node, ...]
    """The solution in symbols, then with values; () where it was found in numbers."""
    value: Shown | None
    closes: bool
    lines: tuple[Line, ...] = ()
    """Other roots, and why they were not taken."""
    put_back: tuple[PutBackLine, ...] = ()
    """On the last of the steps that share them."""
    calls: tuple[CallLine, ...] = ()
    """Of functions in the equations, with the solution put back; beside `put_back`."""
    equations_at: Ref | None = None
    """The first of the steps that share them, whose trail says what they hang on; None on that one itself."""


@dataclass(frozen=True, slots=True)
class TableCell:
    """One cell of a table of data."""

    typed: Node | None
    """As typed, where that is more than the value."""
    value: Shown | None
    """None where it was not computed."""


@dataclass(frozen=True, slots=True)
class TableColumn:
    """One column of a table of data: a step of its own."""

    head: Head
    name: str
    unit: str
    """That all its cells are printed in, as it prints; "" for plain numbers."""
    cells: tuple[TableCell, ...]


@dataclass(frozen=True, slots=True)
class TableBlock:
    """A table of data, or a table of values worked along a range."""

    head: Head
    name: str
    """"" for a table of values."""
    corner: str
    """What stands over the row labels."""
    labels: tuple[str | Shown, ...]
    """Of the rows, in front of them; () where the first column is data."""
    columns: tuple[TableColumn, ...]
    across: tuple[Shown, ...] = ()
    """Header cells of a two-way table; `body` then holds its cells."""
    body: tuple[tuple[Shown, ...], ...] = ()
    title: Line | None = None
    """Of a table of values: what is listed, over which range."""
    heads: tuple[Line, ...] = ()
    """Of a table of values: the header cells; its rows are `body`."""


@dataclass(frozen=True, slots=True)
class PlotBlock:
    """A figure drawn from the numbers of the sheet."""

    head: Head
    number: int
    """Of the figure."""
    caption: Line
    picture: Picture | None
    """None where nothing could be computed."""
    lines: tuple[Line, ...] = ()
    """Largest and smallest values with their places, and how they were found."""


@dataclass(frozen=True, slots=True)
class JudgedLine:
    """One row of a criterion, a validity or a check on columns."""

    label: str
    lines: tuple[Node, ...]
    """With values in place of names, then each side as one number."""
    ratio: str
    verdict: str
    governs: bool
    strong: bool
    """True where it governs or stands against use."""
    calls: tuple[CallLine, ...] = ()
    closes: bool = True
    """False where printed values don't lead to the printed sides."""


@dataclass(frozen=True, slots=True)
class CriterionBox:
    """A criterion with its verdict."""

    head: Head
    criterion: CriterionKind
    title: str
    """Its own name, "" where it has none."""
    relation: Node | None
    """As typed; None where it could not be read."""
    lines: tuple[Node, ...]
    """With values in place of names, then each side as one number; of the governing row."""
    ratio: str
    """"" where there is none."""
    bar: float | None
    margin: Shown | None
    verdict: str
    listed: bool
    """True where it stands in the front list."""
    shown: bool
    satisfied: bool | None
    asides: tuple[Line, ...] = ()
    calls: tuple[CallLine, ...] = ()
    typed: str = ""
    """The line as typed, where it could not be read."""
    rows: tuple[JudgedLine, ...] = ()
    """Where it is judged row by row."""
    closes: bool = True
    """False where printed values don't lead to the printed sides."""
    derived: Node | None = None
    """What algebra made of the relation."""


@dataclass(frozen=True, slots=True)
class JudgedRow:
    """A validity or a cross-check."""

    head: Head
    relation: Node
    lines: tuple[Node, ...]
    words: Line
    """What is asked: `for χ`, `within 0.1 %`."""
    verdict: str
    holds: bool | None
    calls: tuple[CallLine, ...] = ()
    rows: tuple[JudgedLine, ...] = ()
    derived: Node | None = None
    closes: bool = True
    """False where printed values don't lead to the printed sides."""


@dataclass(frozen=True, slots=True)
class FaultyRow:
    """A line that could not be read, as typed, with its finding."""

    head: Head
    typed: str


StepBlock = (
    InputRow | ResultRow | ColumnBlock | FunctionRow | UnknownRow | SolutionRow | TableBlock | PlotBlock
    | CriterionBox | JudgedRow | FaultyRow
)  # fmt: skip


# --- other blocks -----------------------------------------------------------------------------------------


@dataclass(frozen=True, slots=True)
class SectionHead:
    """A heading of the sheet."""

    level: int
    """2 for sections, 3 and more below them."""
    number: int
    """Of the section; 0 for lower headings."""
    tokens: Any
    text: str


@dataclass(frozen=True, slots=True)
class ProseBlock:
    """A run of prose, as markdown-it tokens."""

    tokens: tuple[Any, ...]
    findings: tuple[Finding, ...] = ()


@dataclass(frozen=True, slots=True)
class FigureBlock:
    """An embedded image, or the reason why there is none."""

    number: int
    caption: str
    media_type: str
    data: bytes = field(repr=False)
    findings: tuple[Finding, ...] = ()


Block = StepBlock | SectionHead | ProseBlock | FigureBlock


# --- front and back ---------------------------------------------------------------------------------------


@dataclass(frozen=True, slots=True)
class VerdictLine:
    """A criterion in the front list or among the governing ones."""

    criterion: str
    """Kind."""
    ref: Ref | None
    """None where the kind has no criterion."""
    ratio: str
    verdict: str
    strong: bool
    """True where it stands against use."""
    row: str = ""
    """Label of the row that governs it, where it is judged row by row."""


Prose = tuple[str | Shown, ...]
"""Front-matter prose with the values in it; a value that was not computed is text that says so."""


@dataclass(frozen=True, slots=True)
class OpenAssumption:
    """An assumption to be confirmed, with what hangs on it."""

    key: str
    text: str
    criteria: tuple[Ref, ...]


@dataclass(frozen=True, slots=True)
class Summary:
    """The front of the document, conclusion first."""

    conclusion: tuple[tuple[str, bool], ...]
    """Phrases of the first line, each with True where it is strong."""
    listed: tuple[VerdictLine, ...]
    words: Prose
    objective: Prose
    method: Prose
    governing: tuple[VerdictLine, ...]
    to_confirm: tuple[OpenAssumption, ...]
    review: str


@dataclass(frozen=True, slots=True)
class InputEntry:
    """One row of the register of design inputs."""

    ref: Ref
    note: tuple[Inline, ...]
    typed: Node | None
    value: Shown | str
    """Words, for a table."""
    sources: tuple[Cited, ...]
    open: bool
    """True where it hangs on an assumption still to be confirmed."""


@dataclass(frozen=True, slots=True)
class AssumptionEntry:
    """One row of the register of assumptions."""

    key: str
    text: str
    state: str
    open: bool
    cited_by: tuple[Ref, ...]


@dataclass(frozen=True, slots=True)
class SourceEntryRow:
    """One row of the register of sources."""

    key: str
    text: str
    cited_by: tuple[Ref, ...]


@dataclass(frozen=True, slots=True)
class CriterionEntry:
    """One row of the register of criteria."""

    line: VerdictLine
    relation: Node | None


@dataclass(frozen=True, slots=True)
class RevisionEntry:
    """One row of the revision table."""

    letter: str
    date: str
    by: str
    change: str


@dataclass(frozen=True, slots=True)
class Registers:
    """What stands behind the steps."""

    inputs: tuple[InputEntry, ...]
    assumptions: tuple[AssumptionEntry, ...]
    sources: tuple[SourceEntryRow, ...]
    criteria: tuple[CriterionEntry, ...]
    findings: tuple[tuple[Finding, str], ...]
    """Each with the anchor of the place where it stands, "" where it has none in the document."""
    further_findings: int
    """How many more there are than are listed."""
    revisions: tuple[RevisionEntry, ...]
    codes: tuple[str, ...]
    drawings: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class TitleBlock:
    """The data fields of ISO 7200 as they print."""

    owner: str
    title: str
    subtitle: str
    number: str
    revision: str
    """With the status."""
    created_by: str
    reviewed_by: str
    approved_by: str
    date: str
    made: str
    """Program, version and fingerprint."""


@dataclass(frozen=True, slots=True)
class Document:
    """A whole document."""

    language: str
    page: str
    title: str
    subtitle: str
    about: tuple[str, ...]
    """Number and revision, project, client: phrases of one line."""
    alerts: tuple[str, ...]
    """What stands against use, the worst first."""
    summary: Summary
    blocks: tuple[Block, ...]
    front_findings: tuple[Finding, ...]
    """Those that have no place among the blocks."""
    registers: Registers
    title_block: TitleBlock
    values: dict[Any, Shown | str] = field(repr=False)
    """What each `{name}` of the prose prints, by `Value`."""
    figures: tuple[FigureBlock | PlotBlock, ...]
    source: Source = field(repr=False)
    """The sheet's own text; a finding may stand in another file."""
    caution: str = CAUTION
