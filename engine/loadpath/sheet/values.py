"""`{name}` and `{name [unit]}`: values that prose prints. `\\{` is a brace."""

from __future__ import annotations

import re
from collections.abc import Callable, Iterable, Iterator
from typing import TYPE_CHECKING, Any

from loadpath.findings import Finding, finding
from loadpath.formula.names import canonical, is_letter, is_name_character
from loadpath.sheet.model import Value, Words
from loadpath.text import Source, Span

if TYPE_CHECKING:
    from markdown_it.rules_inline import StateInline

LONGEST_VALUE = 300
"""Characters between the braces; a longer stretch is no value."""

_BRACES = rf"\{{[^{{}}]{{0,{LONGEST_VALUE}}}\}}"
_VALUE = re.compile(_BRACES)
_PIECE = re.compile(rf"(?P<escaped>\\[{{}}])|(?P<value>{_BRACES}|\{{)")
_FORM = re.compile(r"\{\s*(?P<name>[^\s\[\]{}]+)\s*(?:\[\s*(?P<unit>[^\[\]{}]*?)\s*\]\s*)?\}")

Place = Callable[[int], int]
"""From an offset into a text that was taken out of a source to the offset in that source."""


# --- in Markdown --------------------------------------------------------------------------------------------


def value_rule(state: StateInline, silent: bool) -> bool:
    """The markdown-it rule: `{` begins a token `value`, with its offset in the paragraph as `meta["at"]`.

    Code spans, links' addresses and `\\{` are taken by rules that stand before this one.
    """
    if state.src[state.pos] != "{":
        return False
    match = _VALUE.match(state.src, state.pos, state.posMax)
    typed = match.group() if match else "{"
    if not silent:
        token = state.push("value", "", 0)
        token.content = typed
        token.meta = {"at": state.pos}
    state.pos += len(typed)
    return True


def values_in(tokens: Iterable[Any]) -> Iterator[Value]:
    """The values of markdown-it tokens, in reading order."""
    for token in tokens:
        if token.type == "value":
            yield token.meta["value"]
        if token.children:
            yield from values_in(token.children)


# --- in the front matter ------------------------------------------------------------------------------------


def read_words(text: str, source: Source, place: Place) -> tuple[Words, tuple[Finding, ...]]:
    """Prose of the front matter with its values."""
    values, found = [], []
    for match in _PIECE.finditer(text):
        if match.group("value"):
            value, wrong = read_value(match.group("value"), match.start(), source, place)
            values.append(value)
            found += [wrong] if wrong else []
    return Words(text, tuple(values)), tuple(found)


def pieces(words: Words) -> Iterator[str | Value]:
    """The text of front matter in parts: plain text, `\\{` already a brace, and the values between."""
    values, at = iter(words.values), 0
    for match in _PIECE.finditer(words.text):
        yield words.text[at : match.start()]
        yield match.group("escaped")[1] if match.group("escaped") else next(values)
        at = match.end()
    yield words.text[at:]


# --- in both ------------------------------------------------------------------------------------------------


def read_value(typed: str, at: int, source: Source, place: Place) -> tuple[Value, Finding | None]:
    """What stands in a pair of braces at an offset into a text. One that can't be read has no name."""

    def span(start: int, end: int) -> Span:
        return Span(place(at + start), place(at + end - 1) + 1) if end > start else Span(place(at), place(at))

    whole = span(0, len(typed))
    match = _FORM.fullmatch(typed)
    if match is None or not _is_name(match["name"]) or match["unit"] == "":
        return Value(typed, "", "", source, whole), _not_a_value(typed, source, whole)
    value = Value(
        typed,
        canonical(match["name"]),
        match["unit"] or "",
        source,
        whole,
        span(*match.span("name")),
        span(*match.span("unit")) if match["unit"] else Span(whole.end, whole.end),
    )
    return value, None


def _is_name(text: str) -> bool:
    parts = text.split(".")
    return all(part and is_letter(part[0]) and all(map(is_name_character, part)) for part in parts)


def _not_a_value(typed: str, source: Source, span: Span) -> Finding:
    if typed == "{":
        message, help = (
            "a brace that opens here is not closed",
            "write `{name}` to print a value, or `\\{` for a brace",
        )
    elif re.fullmatch(r"\{\s*\}|\{\s*[^\[\]]*\[\s*\]\s*\}", typed):
        message = "a name or a unit is missing between the brackets"
        help = "write `{name}` or `{name [unit]}`; a brace that is only a brace is typed `\\{`"
    else:
        message = "braces in prose hold one name, but something else stands here"
        help = (
            "give it a name on a formula line and write `{name}`; a brace that is only a brace is typed `\\{`"
        )
    return finding("bad-syntax", message, source, span, help=help)
