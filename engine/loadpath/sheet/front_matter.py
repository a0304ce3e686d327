"""Front matter: the keys of a sheet, over the defaults that `project.yaml` files above it give."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field, fields, replace
from typing import Any

from loadpath.findings import Finding, finding
from loadpath.project import Refused, World
from loadpath.sheet.characters import forbidden
from loadpath.sheet.front_values import Values, twice
from loadpath.sheet.model import Assumption, FrontMatter, SourceEntry
from loadpath.sheet.yaml_nodes import Entry, Scalar, Yaml, read_yaml
from loadpath.text import Source, Span

FENCE = "---"
KEYS = tuple(f.name for f in fields(FrontMatter) if f.name not in ("unit_overrides", "unread"))

_READERS: dict[str, Callable[[Values, Yaml], Any]] = {
    "format": Values.format,
    "date": Values.date,
    "language": Values.language,
    "status": Values.status,
    "revisions": Values.revisions,
    "objective": Values.words,
    "method": Values.words,
    "conclusion": Values.words,
    "codes": Values.texts,
    "drawings": Values.texts,
    "not_applicable": Values.not_applicable,
    "digits": Values.digits,
    "page": Values.page,
}
"""Keys not named here, nor joined below, take one line of text."""


def read_front_matter(source: Source, world: World) -> tuple[FrontMatter, int, tuple[Finding, ...]]:
    """The front matter, the offset at which the body of the sheet begins, and what is wrong.

    A value that cannot be read gives a finding, and its key keeps the default. A key with nothing behind its
    colon is not given: the project's default holds; `""` is an empty text.
    """
    given = _Given()
    for path, text in _project_texts(source, world, given):
        given.read(Source(path, text), Span(0, len(text)))
    span, body, missing = _find(source)
    given.found += missing
    given.unread.update(KEYS if missing else ())
    given.read(source, span)
    given.found += twice(given.sources.values(), given.assumptions.values())
    if not given.values.get("title") and "title" not in given.unread:
        help = "write `title: ...` into the front matter"
        given.found.append(
            finding("missing-title", "the sheet has no title", source, source.line_span(1), help=help)
        )
    return given.front_matter(), body, tuple(given.found)


@dataclass
class _Given:
    """What the texts read so far give; a nearer one is read later and wins."""

    values: dict[str, Any] = field(default_factory=dict)
    sources: dict[str, SourceEntry] = field(default_factory=dict)
    assumptions: dict[str, Assumption] = field(default_factory=dict)
    system: str = "SI"
    kinds: dict[str, str] = field(default_factory=dict)
    found: list[Finding] = field(default_factory=list)
    unread: set[str] = field(default_factory=set)
    """Keys of which a finding already says why they may be missing."""

    def read(self, source: Source, span: Span) -> None:
        mapping, found = read_yaml(source, span)
        values = Values(source)
        for entry in values.known(mapping.entries, KEYS, "of the front matter"):
            before = len(values.found)
            if not self.take(entry, values) and len(values.found) > before:
                self.unread.add(entry.key.text)
        stopped = any(f.slug in ("front-matter-syntax", "yaml-alias", "over-limit") for f in found)
        # where reading stopped, the last entry is not what was meant
        last = mapping.entries[-1].key.span.start if stopped and mapping.entries else span.end
        self.found += [*found, *(f for f in values.found if f.span is None or f.span.start < last)]
        if stopped:
            self.unread |= set(KEYS) - {entry.key.text for entry in mapping.entries[:-1]}

    def take(self, entry: Entry, values: Values) -> bool:
        """Takes up one value; False where it gives nothing."""
        key, node = entry.key.text, entry.value
        if isinstance(node, Scalar) and node.nothing:
            return False
        if key == "sources":
            sources = values.sources(node)
            self.sources |= sources
            return bool(sources)
        if key == "assumptions":
            assumptions = values.assumptions(node)
            self.assumptions |= assumptions
            return bool(assumptions)
        if key == "units":
            return self.take_units(values.units(node))
        value = _READERS.get(key, Values.text)(values, node)
        if value is not None:
            self.values[key] = value
        return bool(value)

    def take_units(self, units: tuple[str, dict[str, str]] | None) -> bool:
        """A named system begins anew; a mapping without one goes on the project's."""
        if units is None:
            return False
        system, kinds = units
        self.kinds = kinds if system else self.kinds | kinds
        self.system = system or self.system
        return True

    def front_matter(self) -> FrontMatter:
        return replace(
            FrontMatter(**self.values),
            units=self.system,
            unit_overrides=tuple(self.kinds.items()),
            sources=tuple(self.sources.values()),
            assumptions=tuple(self.assumptions.values()),
            unread=frozenset(self.unread),
        )


def _project_texts(source: Source, world: World, given: _Given) -> tuple[tuple[str, str], ...]:
    try:
        texts = world.project_texts()
    except Refused as refused:
        message = f"the project's defaults cannot be read: {refused}"
        given.found.append(finding("unreadable-file", message, source, None))
        given.unread.update(KEYS)
        return ()
    for path, text in texts:
        if match := forbidden(text):
            message = "a control character stands in this file"
            given.found.append(
                finding("unreadable-file", message, Source(path, text), Span(*match.span()), help="delete it")
            )
    return tuple((path, text) for path, text in texts if not forbidden(text))


def _find(source: Source) -> tuple[Span, int, list[Finding]]:
    """The stretch between the `---` lines, and the offset behind the second one."""
    text = source.text
    first = source.line_number(len(text) - len(text.lstrip()))
    found = [_missing(source)] if first > 1 or source.line(1).rstrip() != FENCE else []
    if source.line(first).rstrip() != FENCE:
        return Span(0, 0), 0, found
    start = source.line_span(first).end + 1
    for number in range(first + 1, len(source.line_starts) + 1):
        span = source.line_span(number)
        if text.startswith(FENCE, span.start) and source.cut(span).rstrip() == FENCE:
            return Span(start, span.start), min(span.end + 1, len(text)), found
    end = text.find("\n\n", start - 1) + 1 or len(text)
    message = "the front matter that begins here has no closing line `---`"
    help = "close it with a line `---` below its last key"
    unclosed = finding("no-front-matter", message, source, source.line_span(first), help=help)
    return Span(min(start, end), end), end, [unclosed]


def _missing(source: Source) -> Finding:
    if source.text.lstrip().startswith(FENCE):
        help = "delete what stands above the first `---`; it must be the first line"
    else:
        help = "begin with a line `---`, then `title: ...`, then a line `---`"
    message = "the sheet does not begin with front matter between `---` lines"
    return finding("no-front-matter", message, source, source.line_span(1), help=help)
