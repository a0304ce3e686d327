"""From the lines of a formula block to one text a statement, every character at its own offset in the source.

A statement that runs over several lines is read as one text: line ends, notes and indents become spaces of
the same length, so that a position in the text is a position in the source and no map is needed.
"""

from __future__ import annotations

import re
from dataclasses import dataclass

from loadpath.formula.statements import Note
from loadpath.text import Source, Span

TAB = 4
_NOTE = re.compile(r"(?<=\s)--(?=\s|$)")
_CITATION = re.compile(r"\[([^\[\]]*)\]")


@dataclass(frozen=True, slots=True)
class Item:
    """A stretch of text that is read at once: a statement's own lines, or one of its deeper lines."""

    text: str
    """Blanked as said above; `text[0]` stands at `start`."""
    start: int
    notes: tuple[Note, ...]

    @property
    def span(self) -> Span:
        """From the first to the last character that is not blank."""
        body = self.text.rstrip()
        lead = len(body) - len(body.lstrip())
        return Span(self.start + lead, self.start + len(body))


@dataclass(frozen=True, slots=True)
class Group:
    """The lines of one statement."""

    whole: Item
    """All of them joined."""
    head: Item
    """The first line alone."""
    deeper: tuple[Item, ...]
    """The deeper lines, still deeper ones joined to the one they continue."""

    @property
    def span(self) -> Span:
        """With its notes, from the first character to the last."""
        spans = [note.span for note in self.whole.notes]
        if self.whole.text.strip():
            spans.insert(0, self.whole.span)
        return Span(spans[0].start, max(span.end for span in spans))


@dataclass(frozen=True, slots=True)
class _Line:
    indent: int
    start: int
    body: str
    note: Note | None
    end: int


def indent_of(line: str) -> int:
    """Columns of white space in front, tabs to the next multiple of four."""
    columns = 0
    for character in line:
        if character == " ":
            columns += 1
        elif character == "\t":
            columns += TAB - columns % TAB
        else:
            break
    return columns


def without_notes(text: str) -> str:
    """Lines as typed, each without its note."""
    return "\n".join(_split_note(line, 0)[0] for line in text.split("\n"))


def _split_note(line: str, start: int) -> tuple[str, Note | None]:
    match = _NOTE.search(line)
    if match is None:
        return line, None
    text = line[match.end() :]
    offset = start + match.end()
    lead = len(text) - len(text.lstrip())
    stripped = text.strip()
    citations = tuple(
        (m.group(1).strip(), Span(offset + m.start(1), offset + m.end(1))) for m in _CITATION.finditer(text)
    )
    span = Span(offset + lead, offset + lead + len(stripped))
    return line[: match.start()], Note(stripped, citations, span)


def _lines(source: Source, span: Span) -> list[_Line]:
    lines, start = [], span.start
    for raw in source.cut(span).split("\n"):
        body, note = _split_note(raw, start)
        if raw.strip():
            lines.append(_Line(indent_of(raw), start, body, note, start + len(raw)))
        start += len(raw) + 1
    return lines


def _item(lines: list[_Line]) -> Item:
    start, at, pieces = lines[0].start, lines[0].start, []
    for line in lines:
        pieces += [" " * (line.start - at), line.body]
        at = line.start + len(line.body)
    notes = tuple(line.note for line in lines if line.note is not None)
    return Item("".join(pieces).replace("\t", " "), start, notes)


def _group(lines: list[_Line]) -> Group:
    deeper: list[list[_Line]] = []
    level = min((line.indent for line in lines[1:]), default=0)
    for line in lines[1:]:
        if line.indent > level and deeper:
            deeper[-1].append(line)
        else:
            level = line.indent
            deeper.append([line])
    return Group(_item(lines), _item(lines[:1]), tuple(_item(part) for part in deeper))


def groups(source: Source, span: Span) -> tuple[Group, ...]:
    """The statements of a block: a line that is deeper than the one that starts a statement belongs to it."""
    found: list[list[_Line]] = []
    for line in _lines(source, span):
        if found and line.indent > found[-1][0].indent:
            found[-1].append(line)
        else:
            found.append([line])
    return tuple(_group(lines) for lines in found)
