"""Statements: which one a line is. Parsing always succeeds: a bad line becomes `Faulty` and a finding."""

from __future__ import annotations

import re

from loadpath.findings import Finding
from loadpath.formula import criteria, definitions, meant
from loadpath.formula.lines import Group, groups
from loadpath.formula.mistake import Mistake
from loadpath.formula.names import RESERVED
from loadpath.formula.reader import Reader
from loadpath.formula.several import read_plot, read_solve, read_tabulate, read_unknowns
from loadpath.formula.statements import Faulty, Statement
from loadpath.functions import NAMES as FUNCTION_NAMES
from loadpath.text import Source, Span

LONGEST_STATEMENT = 20_000
"""Characters of one statement with its deeper lines."""

_UNWORKED = re.compile(
    r"(use\s+\w+\s.*\sas\s+\w+|beam\s+\w+\s+over\s|solve\s+for\s+\w|take\s+\w.*\sfrom\s+\w"
    r"|(plot|tabulate)\s.*\sfor\s+\w+\s+from\s)"
)


_SEVERAL = {
    "unknown": read_unknowns, "solve": read_solve, "plot": read_plot, "tabulate": read_tabulate,
}  # fmt: skip


def parse_block(source: Source, span: Span) -> tuple[tuple[Statement, ...], tuple[Finding, ...]]:
    """The statements of an indented block that covers whole lines, and what is wrong with them."""
    statements: list[Statement] = []
    found: list[Finding] = []
    solve: Span | None = None
    """Of a `solve for` above whose equations may stand on its own level."""
    for group in groups(source, span):
        try:
            statements += read_statements(group)
            solve = None
        except Mistake as mistake:
            if solve is None:
                found.append(mistake.as_finding(source))
            statements.append(_faulty(group, source, solve or mistake.span))
            if mistake.slug == "stray-line" and Reader(group.head).word() == "solve":
                solve = mistake.span
    return tuple(statements), tuple(found)


def is_statement(text: str) -> bool:
    """True where a whole line of prose would be read as a statement, or was plainly meant as one."""
    line = text.strip()
    if _UNWORKED.match(line):
        return True
    if not re.search(r"[=<>]", line):
        return False
    source = Source("", "    " + line)
    try:
        for group in groups(source, Span(0, len(source.text))):
            read_statements(group)
    except Mistake:
        return False
    return True


def read_statements(group: Group) -> tuple[Statement, ...]:
    """What a group of lines is: one statement, or one for each unknown. Raises `Mistake`."""
    text = group.whole.text
    if len(text) > LONGEST_STATEMENT:
        message = f"a statement of more than {LONGEST_STATEMENT} characters"
        raise Mistake("over-limit", group.span, message, "split it into several")
    if not text.strip():
        message = "a note stands here without a statement"
        raise Mistake("bad-syntax", group.span, message, "text without a formula begins at the margin")
    _refuse_stray_lines(group)
    reader = Reader(group.whole)
    several = _SEVERAL.get(reader.word())
    if several is not None and not meant.is_named_so(group.whole.text):
        return several(group, reader)
    return (_read(group),)


def _read(group: Group) -> Statement:
    reader, text = Reader(group.whole), group.whole.text
    word = reader.word()
    if meant.CRITERION.match(text):
        return criteria.read_criterion(group, reader)
    if meant.CRITERION_WORDS.match(text):
        raise meant.no_colon(reader)
    if meant.VALIDITY.match(text):
        return criteria.read_validity(group, reader)
    if meant.CHECK.match(text):
        return criteria.read_check(group, reader)
    if meant.COLON.match(text):
        raise meant.no_such_beginning(reader)
    if word in meant.LATER:
        raise meant.not_available(reader, word)
    if word in RESERVED or (
        word in FUNCTION_NAMES and not meant.FUNCTION.match(text) and meant.DEFINES.match(text)
    ):
        raise meant.reserved(reader, word)
    return definitions.read_definition(group, reader)


def _refuse_stray_lines(group: Group) -> None:
    """A deeper line that could stand by itself, below one that could too, was indented by accident."""
    if Reader(group.head).word() == "solve":
        return  # its equations begin like definitions
    stray = next((item for item in group.deeper if meant.begins_statement(item.text)), None)
    if stray is None:
        return
    try:
        _read(Group(group.head, group.head, ()))
    except Mistake:
        return
    raise Mistake(
        "stray-line", stray.span,
        "this line is indented deeper than the statement above, so that it goes on it",
        "indent it as far as the line above",
    )  # fmt: skip


def _faulty(group: Group, source: Source, trouble: Span) -> Faulty:
    text = group.whole.text
    typed = source.cut(Span(group.whole.start, group.span.end)).strip("\n")
    stray = [item.text for item in group.deeper if meant.begins_statement(item.text)]
    names = [name for line in (text, *stray) for name in meant.names(line)]
    return Faulty(
        group.span,
        group.whole.notes,
        typed,
        tuple(dict.fromkeys(names)),
        meant.criterion(text),
        meant.guards(text),
        trouble,
    )
