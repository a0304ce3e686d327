"""YAML as text with places: no Python object is ever made from a tag, and every scalar is text as typed."""

from __future__ import annotations

import re
from dataclasses import dataclass, field

import yaml

from loadpath.findings import Finding, Remark, finding
from loadpath.sheet.characters import forbidden
from loadpath.sheet.yaml_trouble import yaml_finding
from loadpath.text import Source, Span

LARGEST_YAML = 100_000
"""Characters of one front matter or `project.yaml`."""
DEEPEST_YAML = 6
"""Mappings and lists within one another; the front matter needs four."""
MOST_NODES = 4_000
"""Keys, values and list items of one front matter."""


@dataclass(frozen=True, slots=True)
class Scalar:
    """A text."""

    text: str
    span: Span
    style: str = ""
    """"" for plain text, else the mark it begins with: a quote, `>` or `|`."""

    @property
    def nothing(self) -> bool:
        """True where nothing was typed (`client:`); `""` is an empty text instead."""
        return not self.text and not self.style


@dataclass(frozen=True, slots=True)
class Entry:
    """One `key: value`."""

    key: Scalar
    value: Yaml


@dataclass(frozen=True, slots=True)
class Mapping:
    """Entries in the order typed, each key once."""

    entries: tuple[Entry, ...]
    span: Span


@dataclass(frozen=True, slots=True)
class Items:
    """A list."""

    items: tuple[Yaml, ...]
    span: Span


Yaml = Scalar | Mapping | Items


def read_yaml(source: Source, span: Span) -> tuple[Mapping, tuple[Finding, ...]]:
    """The mapping that a stretch of a source holds. After a mistake, what stood before it is kept."""
    if span.end - span.start > LARGEST_YAML:
        message = f"more than {LARGEST_YAML} characters of front matter"
        return Mapping((), span), (finding("over-limit", message, source, Span(span.start, span.start)),)
    builder = _Builder(source, span.start)
    try:
        # the parser in Python, not the one in C: its messages and limits are the same on every machine
        for event in yaml.parse(source.cut(span), Loader=yaml.SafeLoader):
            builder.take(event)
    except yaml.YAMLError as error:
        builder.found.append(yaml_finding(error, source, span))
    except (ValueError, OverflowError):  # an escape such as "\U00110000" that is no character
        builder.add(
            "front-matter-syntax",
            "an escape in double quotes that is no character",
            span,
            "use single quotes",
        )
    except _Stop:
        pass
    return builder.finish(span), tuple(builder.found)


class _Stop(Exception):
    """Nothing below this point is read; a finding says why."""


@dataclass(slots=True)
class _Open:
    """A mapping or list that is not closed yet."""

    start: Span
    is_list: bool
    in_brackets: bool
    key: Yaml | None = None
    nodes: list[Yaml] = field(default_factory=list)
    entries: list[Entry] = field(default_factory=list)
    first: dict[str, Scalar] = field(default_factory=dict)

    def closed(self, end: Span) -> Mapping | Items:
        span = self.start.join(end)
        return Items(tuple(self.nodes), span) if self.is_list else Mapping(tuple(self.entries), span)


class _Builder:
    """Builds the tree from the parser's events, and can give what it has at any time."""

    def __init__(self, source: Source, start: int) -> None:
        self.source, self.start = source, start
        self.found: list[Finding] = []
        self.stack: list[_Open] = []
        self.root: Yaml | None = None
        self.nodes = 0

    def take(self, event: yaml.Event) -> None:
        """One event more. Raises `_Stop` where a limit is passed."""
        span = self.span(event)
        if isinstance(event, yaml.DocumentStartEvent) and self.root is not None:
            self.stop("front-matter-syntax", "a second YAML document begins here", span, "remove this line")
        if isinstance(event, yaml.NodeEvent):
            self.nodes += 1
            if self.nodes > MOST_NODES:
                self.stop(
                    "over-limit",
                    f"more than {MOST_NODES} keys and values of front matter",
                    span,
                    "shorten it",
                )
            self.refuse_marks(event, span)
        if isinstance(event, yaml.AliasEvent):
            self.put(Scalar(self.source.cut(span), span, "*"))
        elif isinstance(event, yaml.ScalarEvent):
            self.put(self.scalar(event, span))
        elif isinstance(event, yaml.CollectionStartEvent):
            self.open(event, span)
        elif isinstance(event, yaml.CollectionEndEvent):
            self.put(self.stack.pop().closed(span))

    def finish(self, span: Span) -> Mapping:
        """The whole, with what is still open closed where reading stopped."""
        while self.stack:
            self.put(self.stack.pop().closed(span))
        if self.root is None or (isinstance(self.root, Scalar) and self.root.nothing):
            return Mapping((), span)
        if isinstance(self.root, Mapping):
            return self.root
        if not self.found:
            first = self.source.line_span(self.source.line_number(self.root.span.start))
            message = "front matter holds lines of `key: value`, but something else stands here"
            self.add("front-matter-syntax", message, first, "write a key, a colon, a space and its value")
        return Mapping((), span)

    def scalar(self, event: yaml.ScalarEvent, span: Span) -> Scalar:
        style = event.style or ""
        if style in ("|", ">"):
            span = Span(span.start, span.start + len(self.source.cut(span).rstrip()))
        if forbidden(event.value):
            message = "an escape in double quotes gives a character that no text can hold"
            self.add(
                "front-matter-syntax", message, span, "use single quotes, in which a backslash is a backslash"
            )
            return Scalar("", span, style)
        return Scalar(event.value, span, style)

    def open(self, event: yaml.CollectionStartEvent, span: Span) -> None:
        if len(self.stack) >= DEEPEST_YAML:
            message = f"front matter nested deeper than {DEEPEST_YAML} levels"
            self.stop("over-limit", message, span, "put a text that begins with a bracket in quotes")
        is_list = isinstance(event, yaml.SequenceStartEvent)
        self.stack.append(_Open(span, is_list, bool(event.flow_style)))

    def put(self, node: Yaml) -> None:
        """A node is complete: it is the root, a list item, a key or the value of the key before it."""
        if not self.stack:
            self.root = node
            return
        top = self.stack[-1]
        if not top.is_list and top.key is None:
            top.key = node
            return
        if top.is_list:
            top.nodes.append(node)
        else:
            key, top.key = top.key, None
            self.entry(top, key, node)

    def entry(self, top: _Open, key: Yaml | None, value: Yaml) -> None:
        if not isinstance(key, Scalar):
            assert key is not None
            help = "put a text that begins with a bracket in quotes"
            self.add("front-matter-syntax", "a key is a word, not a list or a mapping", key.span, help)
        elif key.text == "<<" and not key.style:
            self.add(
                "yaml-alias", "`<<` would merge another mapping into this one", key.span, "type the keys out"
            )
        elif self.continues(top, key, value):
            last = top.entries[-1]
            top.entries[-1] = Entry(last.key, self.joined(last.value, key))
        elif key.text in top.first:
            remarks = (Remark("first given here", top.first[key.text].span),)
            self.add(
                "duplicate-key", f"`{key.text}` is given twice", key.span, "keep one of the two", remarks
            )
        else:
            top.first[key.text] = key
            top.entries.append(Entry(key, value))
            self.refuse_cut_text(value)

    def continues(self, top: _Open, key: Scalar, value: Yaml) -> bool:
        """True where a comma stands in a text between braces: `{stability: held by the deck, SB-101}`."""
        if not (top.in_brackets and top.entries and isinstance(value, Scalar) and value.nothing):
            return False
        before = top.entries[-1].value
        plain = isinstance(before, Scalar) and not before.style and before.text and not key.style
        return bool(plain) and ":" not in self.source.text[key.span.end : value.span.start]

    def joined(self, before: Yaml, after: Scalar) -> Scalar:
        assert isinstance(before, Scalar)
        gap = re.sub(r"\s+", " ", self.source.text[before.span.end : after.span.start])
        return Scalar(before.text + gap + after.text, before.span.join(after.span))

    def refuse_marks(self, event: yaml.NodeEvent, span: Span) -> None:
        """No anchors, aliases and tags: a text that begins with their mark needs quotes."""
        if isinstance(event, yaml.AliasEvent):
            mark, what = "*", "an alias of another value"
        elif event.anchor is not None:
            mark, what = "&", "an anchor"
        elif getattr(event, "tag", None) is not None:
            mark, what = "!", "a tag"
        else:
            return
        end = re.compile(r"[^\s,\[\]{}]+").match(self.source.text, span.start)
        span = Span(span.start, end.end() if end else span.start + 1)
        message = f"`{mark}` at the beginning of a value makes it {what}, which front matter doesn't have"
        self.add("yaml-alias", message, span, f"put a text that begins with `{mark}` in quotes")

    def refuse_cut_text(self, value: Yaml) -> None:
        """`Slip #2` would be read as `Slip`, the rest as a comment."""
        if not isinstance(value, Scalar) or value.style or value.nothing:
            return
        cut = re.compile(r"[ \t]+(#\w[^\n]*)").match(self.source.text, value.span.end)
        if cut:
            message = "a ` #` in a value begins a comment, so the text would be cut off here"
            help = "put the whole text in quotes; leave a space after the `#` of a comment"
            self.add("front-matter-value", message, Span(*cut.span(1)), help)

    def span(self, event: yaml.Event) -> Span:
        assert event.start_mark is not None and event.end_mark is not None
        return Span(self.start + event.start_mark.index, self.start + event.end_mark.index)

    def add(self, slug: str, message: str, span: Span, help: str, remarks: tuple[Remark, ...] = ()) -> None:
        self.found.append(finding(slug, message, self.source, span, help=help, remarks=remarks))

    def stop(self, slug: str, message: str, span: Span, help: str) -> None:
        self.add(slug, message, span, help)
        raise _Stop
