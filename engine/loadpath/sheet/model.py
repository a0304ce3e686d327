"""A sheet as read: front matter, then blocks in reading order. Nothing here is evaluated."""

from __future__ import annotations

from dataclasses import dataclass, field
from pathlib import PurePosixPath
from typing import Any

from loadpath.findings import Finding
from loadpath.formula.statements import Statement
from loadpath.formula.tree import NOWHERE
from loadpath.text import Source, Span

# --- front matter -------------------------------------------------------------------------------------------


@dataclass(frozen=True, slots=True)
class Words:
    """Prose of the front matter (objective, method, conclusion, reasons): may hold `{values}`."""

    text: str = ""
    values: tuple[Value, ...] = ()
    """The `{name [unit]}` in it, in order."""


@dataclass(frozen=True, slots=True)
class Value:
    """`{sigma}` or `{sigma [ksi]}` in prose."""

    typed: str
    """The whole as typed, braces included."""
    name: str
    """Canonical; "" where it could not be read (a finding says why)."""
    unit: str
    """"" where none was asked for."""
    source: Source = field(compare=False)
    span: Span = field(default=NOWHERE, compare=False)
    """Of the whole, braces included."""
    name_span: Span = field(default=NOWHERE, compare=False)
    unit_span: Span = field(default=NOWHERE, compare=False)


@dataclass(frozen=True, slots=True)
class SourceEntry:
    """One entry of `sources`."""

    key: str
    text: str
    file: str = ""
    """A file in the project's folder that is the source, "" where there is none."""
    source: Source | None = field(default=None, compare=False)
    """The text that declares it: the sheet, or a `project.yaml`."""
    span: Span = field(default=NOWHERE, compare=False)
    """Of the key."""


@dataclass(frozen=True, slots=True)
class Confirmed:
    """Who confirmed an assumption, when, and where it is written."""

    by: str
    on: str
    document: str


@dataclass(frozen=True, slots=True)
class Assumption:
    """One entry of `assumptions`."""

    key: str
    text: str
    confirm: bool = False
    """True while it is still to be confirmed."""
    confirmed: Confirmed | None = None
    source: Source | None = field(default=None, compare=False)
    span: Span = field(default=NOWHERE, compare=False)


@dataclass(frozen=True, slots=True)
class Revision:
    """One line of the revision table."""

    letter: str
    date: str = ""
    by: str = ""
    change: str = ""


@dataclass(frozen=True, slots=True)
class FrontMatter:
    """The keys of section 1 of the language, the project's defaults filled in. Scalars are text as typed."""

    format: int = 1
    title: str = ""
    subtitle: str = ""
    number: str = ""
    revision: str = ""
    owner: str = ""
    project: str = ""
    client: str = ""
    client_document: str = ""
    date: str = ""
    language: str = "en"
    status: str = ""
    created_by: str = ""
    reviewed_by: str = ""
    approved_by: str = ""
    revisions: tuple[Revision, ...] = ()
    objective: Words = Words()
    method: Words = Words()
    conclusion: Words = Words()
    codes: tuple[str, ...] = ()
    drawings: tuple[str, ...] = ()
    not_applicable: tuple[tuple[str, str], ...] = ()
    """Pairs of kind (strength, stiffness, stability) and reason."""
    units: str = "SI"
    """Name of the system."""
    unit_overrides: tuple[tuple[str, str], ...] = ()
    """Pairs of kind (force, length, ...) and unit."""
    digits: int = 4
    page: str = "A4"
    sources: tuple[SourceEntry, ...] = ()
    assumptions: tuple[Assumption, ...] = ()
    unread: frozenset[str] = field(default=frozenset(), compare=False)
    """Keys that may be given, but could not be read (a finding says why): nothing can be said of them."""


# --- blocks -------------------------------------------------------------------------------------------------


@dataclass(frozen=True, slots=True)
class Heading:
    """A heading of the sheet's own."""

    level: int
    """1 to 6 as typed."""
    tokens: Any
    """The markdown-it inline token, as in `Prose`."""
    text: str
    """Plain text."""
    span: Span


@dataclass(frozen=True, slots=True)
class Prose:
    """Paragraphs, lists, quotations, tables and fenced code: a run of CommonMark without formula lines."""

    tokens: tuple[Any, ...]
    """markdown-it tokens; `{name}` is an inline token of type `value` whose `meta["value"]` is a `Value`."""
    values: tuple[Value, ...]
    text: str
    """The source lines as typed, for Markdown output."""
    span: Span


@dataclass(frozen=True, slots=True)
class Formulas:
    """An indented block: statements in order."""

    statements: tuple[Statement, ...]
    span: Span


@dataclass(frozen=True, slots=True)
class Image:
    """An image that stands alone in its paragraph: a figure."""

    path: PurePosixPath
    """Relative to the sheet's folder, never leading out of the project."""
    caption: str
    media_type: str
    """`image/png`, `image/jpeg` or `image/svg+xml`; "" where the file was refused (a finding says why)."""
    data: bytes = field(repr=False)
    number: int
    """Counted from 1 in reading order."""
    span: Span


Block = Heading | Prose | Formulas | Image


@dataclass(frozen=True, slots=True)
class Sheet:
    """One calc sheet, read."""

    source: Source
    front: FrontMatter
    blocks: tuple[Block, ...]
    findings: tuple[Finding, ...]
    project_texts: tuple[str, ...] = ()
    """Each `project.yaml` that it draws on, outermost first; part of the digest."""

    @property
    def statements(self) -> tuple[Statement, ...]:
        """Every statement, in reading order."""
        return tuple(s for block in self.blocks if isinstance(block, Formulas) for s in block.statements)
