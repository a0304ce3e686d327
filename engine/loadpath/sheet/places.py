"""Where the text of a markdown-it inline token was typed: its lines have lost their indents and markers."""

from __future__ import annotations

from bisect import bisect_right
from collections.abc import Sequence
from itertools import accumulate
from typing import TYPE_CHECKING

from loadpath.text import Source

if TYPE_CHECKING:
    from markdown_it.token import Token


class Places:
    """From the offsets of one paragraph, heading or cell to those of the source."""

    def __init__(self, content: str, line_offsets: Sequence[int], escaped_pipes: bool = False) -> None:
        lengths = [len(line) + 1 for line in content.split("\n")]
        self._starts = [0, *accumulate(lengths)][:-1]
        self._offsets = line_offsets
        self._pipes = content if escaped_pipes else ""

    def __call__(self, at: int) -> int:
        line = bisect_right(self._starts, at) - 1
        return self._offsets[line] + at - self._starts[line] + self._pipes.count("|", 0, at)


def paragraph_places(content: str, source: Source, first_line: int) -> Places:
    """Of a paragraph or an underlined heading: each of its lines is the end of a line of the source."""
    offsets = []
    lines = content.split("\n")
    # the parser leaves out a first line of nothing but unusual spaces
    while first_line < len(source.line_starts) and not _ends_with(source.line(first_line), lines[0]):
        first_line += 1
    for number, line in enumerate(lines, first_line):
        end = source.line_span(number).start + len(source.line(number).rstrip())
        offsets.append(end - len(line.rstrip()))
    return Places(content, offsets)


def _ends_with(typed: str, line: str) -> bool:
    return typed.rstrip().endswith(line.strip())


def heading_places(content: str, source: Source, line: int) -> Places:
    """Of a heading that begins with `#`."""
    typed = source.line(line)
    return Places(content, [source.line_span(line).start + max(typed.find(content, typed.find("#") + 1), 0)])


class CellPlaces:
    """Of the cells of tables, asked for in reading order."""

    def __init__(self, source: Source) -> None:
        self._source = source
        self._line = 0
        self._after = 0

    def __call__(self, token: Token, line: int) -> Places:
        if line != self._line:
            self._line, self._after = line, 0
        typed = token.content.replace("|", "\\|")
        at = max(self._source.line(line).find(typed, self._after), 0)
        self._after = max(self._after, at + len(typed))
        return Places(token.content, [self._source.line_span(line).start + at], escaped_pipes=True)
