"""Source texts and places in them: the one page that states the conventions.

* An *offset* is a count of code points from the start of `Source.text`, 0-based.
* A `Span` is a half-open range of offsets: `start` belongs to it, `end` does not.
* Lines and columns are 1-based and counted in code points; a tab is one column.
* Line ends are `\\n` in `Source.text`; reading a file turns `\\r\\n` and `\\r` into `\\n` first.
"""

from __future__ import annotations

from bisect import bisect_right
from dataclasses import dataclass, field
from functools import cached_property
from typing import NamedTuple


class Span(NamedTuple):
    """A half-open range of offsets into the text of one source."""

    start: int
    end: int

    def join(self, other: Span) -> Span:
        """The smallest span that covers both."""
        return Span(min(self.start, other.start), max(self.end, other.end))


@dataclass(frozen=True)
class Source:
    """One text that somebody typed, with the name it is shown under."""

    path: str
    """As the user named it, or `-` for standard input; used in messages, never opened again."""
    text: str = field(repr=False)
    """The whole text, line ends as `\\n`."""

    @cached_property
    def line_starts(self) -> tuple[int, ...]:
        """Offset of the first character of each line."""
        starts = [0]
        for index, character in enumerate(self.text):
            if character == "\n":
                starts.append(index + 1)
        return tuple(starts)

    def line_number(self, offset: int) -> int:
        """The 1-based line that holds the offset."""
        return bisect_right(self.line_starts, offset)

    def column(self, offset: int) -> int:
        """The 1-based column of the offset, in code points."""
        return offset - self.line_starts[self.line_number(offset) - 1] + 1

    def line(self, number: int) -> str:
        """The text of a 1-based line, without its line end."""
        start = self.line_starts[number - 1]
        end = self.line_starts[number] - 1 if number < len(self.line_starts) else len(self.text)
        return self.text[start:end]

    def line_span(self, number: int) -> Span:
        """The span of a 1-based line, without its line end."""
        start = self.line_starts[number - 1]
        return Span(start, start + len(self.line(number)))

    def cut(self, span: Span) -> str:
        """The text that a span covers."""
        return self.text[span.start : span.end]
