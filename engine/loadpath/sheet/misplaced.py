"""Formula lines that stand where CommonMark makes them prose: each is reported, none is passed over.

What such a line would have defined is kept as `Faulty`, so that its uses are not reported as unknown names
and its criterion counts as not shown.
"""

from __future__ import annotations

import re
from collections.abc import Iterator
from dataclasses import dataclass, replace
from itertools import groupby

from loadpath.findings import Finding, finding
from loadpath.formula.lines import indent_of
from loadpath.formula.parser import is_statement, parse_block
from loadpath.formula.statements import (
    Choice,
    Criterion,
    CriterionKind,
    Definition,
    Faulty,
    FunctionDefinition,
    Note,
    Statement,
    Validity,
)
from loadpath.sheet.places import Places
from loadpath.text import Source, Span

FORMULA_INDENT = 4
"""Columns."""


@dataclass(frozen=True, slots=True)
class Surroundings:
    """What a paragraph stands in."""

    in_list: bool
    in_quote: bool
    in_heading: bool
    """True for an underlined heading, which is a paragraph with a line below it."""

    @property
    def words(self) -> str:
        return "a list" if self.in_list else "a quotation"


@dataclass(frozen=True, slots=True)
class _Line:
    """A line of a paragraph that is a formula line, or is indented like one."""

    number: int
    """In the source, from 1."""
    span: Span
    """Its text, without the white space around it."""
    slug: str


def in_paragraph(
    content: str, places: Places, source: Source, around: Surroundings
) -> tuple[list[Finding], list[Faulty]]:
    """Findings for the formula lines of a paragraph, one for each run, and what the lines would have been."""
    found: list[Finding] = []
    lost: list[Faulty] = []
    # lines that follow one another have one cause
    lines = enumerate(_lines(content, places, source, around))
    for _, run in groupby(lines, lambda pair: pair[1].number - pair[0]):
        members = [line for _, line in run]
        found.append(_finding(members, source, around))
        for line in members:
            lost += lost_statements(source, line.span, members[0].span)
    return found, lost


def _lines(content: str, places: Places, source: Source, around: Surroundings) -> Iterator[_Line]:
    code = None
    at = 0
    for index, line in enumerate(content.split("\n")):
        start, end = at + len(line) - len(line.lstrip()), at + len(line.rstrip())
        at += len(line) + 1
        if start >= end:
            continue
        span = Span(places(start), places(end - 1) + 1)
        slug = _slug(source, span, index, around)
        if slug and "`" in content:
            code = _code_spans(content) if code is None else code
            slug = "" if any(a <= start and end <= b for a, b in code) else slug
        if slug:
            yield _Line(source.line_number(span.start), span, slug)


def _slug(source: Source, span: Span, index: int, around: Surroundings) -> str:
    """Which finding a line of a paragraph is, "" for ordinary prose."""
    before = source.text[source.line_span(source.line_number(span.start)).start : span.start]
    indented = not before.strip() and indent_of(before) >= FORMULA_INDENT
    if indented and index > 0 and not around.in_list:
        return "swallowed-formula"
    if around.in_heading or not is_statement(source.cut(span).rstrip("\\")):
        return ""
    return "swallowed-formula" if indented else "formula-in-prose"


def _finding(lines: list[_Line], source: Source, around: Surroundings) -> Finding:
    first, more = lines[0], len(lines) - 1
    label = "" if not more else f"and the {'line' if more == 1 else f'{more} lines'} below"
    margin = "put a line of text at the margin between, and an empty line above"
    if first.slug == "swallowed-formula":
        above = "list item" if around.in_list else "quotation" if around.in_quote else "text"
        message = f"this line is indented like a formula line, but it goes on the {above} above"
        help = (
            margin if around.in_list else "leave an empty line above; text that goes on begins at the margin"
        )
    elif around.in_list or around.in_quote:
        message = f"a formula line stands in {around.words}, where nothing is evaluated"
        help = f"indent it by four spaces below {around.words}; {margin}; or put it in backticks"
    else:
        message = "a line of prose reads as a formula line, but it is not indented as one"
        help = "indent it by four spaces below an empty line, or put it in backticks"
    return finding(first.slug, message, source, first.span, label=label, help=help)


def _code_spans(content: str) -> list[tuple[int, int]]:
    """Stretches between backticks."""
    marks = [m.span() for m in re.finditer(r"(?<!`)`+", content)]
    spans, at = [], 0
    for index, (start, end) in enumerate(marks):
        if start < at or _is_escaped(content, start):
            continue
        close = next((m for m in marks[index + 1 :] if m[1] - m[0] == end - start), None)
        if close is not None:
            at = close[1]
            spans.append((start, at))
    return spans


def _is_escaped(content: str, at: int) -> bool:
    before = content[:at]
    return (len(before) - len(before.rstrip("\\"))) % 2 == 1


def nested_block(source: Source, span: Span, around: Surroundings) -> Finding:
    """The finding for an indented block inside a list or a quotation."""
    message = f"a formula block stands in {around.words}, where nothing is evaluated"
    where = f"below {around.words}, with a line of text at the margin between"
    help = f"put it {where}; text that is to stand as typed goes in a fence"
    return finding("nested-formula", message, source, span, help=help)


def lost_statements(source: Source, span: Span, trouble: Span) -> list[Faulty]:
    """What misplaced lines would have been; `trouble` is the place of their finding."""
    statements, _ = parse_block(source, span)
    return [replace(_faulty(s, source), trouble=trouble) for s in statements if _is_missed(s)]


def lost_in_quotation(content: str, source: Source, first_line: int, trouble: Span) -> list[Faulty]:
    """The same for a block whose lines begin with quotation marks; `content` is the block without them."""
    typed = Source("", content)
    lost = []
    for faulty in lost_statements(typed, Span(0, len(content)), trouble):
        span = source.line_span(first_line + typed.line_number(faulty.span.start) - 1)
        notes = [Note(n.text, tuple((key, trouble) for key, _ in n.citations), trouble) for n in faulty.notes]
        lost.append(replace(faulty, span=span, notes=tuple(notes)))
    return lost


def _is_missed(statement: Statement) -> bool:
    """False for a line that could not be read and defines nothing: mere text, mostly."""
    if not isinstance(statement, Faulty):
        return True
    return bool(statement.names or statement.criterion or statement.guards)


def _faulty(statement: Statement, source: Source) -> Faulty:
    if isinstance(statement, Faulty):
        return statement
    criterion: tuple[CriterionKind, str] | None = None
    names: tuple[str, ...] = ()
    if isinstance(statement, Criterion):
        criterion = (statement.kind, statement.name)
    elif isinstance(statement, Definition | Choice | FunctionDefinition):
        names = (statement.name,)
    guards = tuple(name for name, _ in statement.names) if isinstance(statement, Validity) else ()
    return Faulty(statement.span, statement.notes, source.cut(statement.span), names, criterion, guards)
