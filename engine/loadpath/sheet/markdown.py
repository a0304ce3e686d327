"""The CommonMark parser as a sheet needs it: tables, values, HTML shown as text, and no link that acts."""

from __future__ import annotations

import re
from collections.abc import Sequence

from markdown_it import MarkdownIt
from markdown_it.rules_inline import StateInline, image
from markdown_it.token import Token

from loadpath.sheet.values import value_rule

DEEPEST = 20
"""Lists and quotations within one another; a list counts twice. What lies deeper is not read."""

_ADDRESS = re.compile(r"\]\(\s*<?([^\s<>]*[^\s<>)])")
_SCHEME = re.compile(r"\s*([a-z][a-z0-9+.-]*):|\s*//", re.IGNORECASE)


class _SheetMarkdown(MarkdownIt):
    in_image = False

    def validateLink(self, url: str) -> bool:
        # an image with any address becomes a token, so that it can be refused in so many words
        return self.in_image or is_link(url)


def is_link(url: str) -> bool:
    """True for http, https, mailto, and places on the page or in the project; others stay text."""
    scheme = _SCHEME.match(url)
    return scheme is None or (scheme.group(1) or "").lower() in ("http", "https", "mailto")


def _image_rule(state: StateInline, silent: bool) -> bool:
    """The parser's own rule, which also notes where the image and its address were typed."""
    start, markdown = state.pos, state.md
    assert isinstance(markdown, _SheetMarkdown)
    before, markdown.in_image = markdown.in_image, True
    try:
        matched = image(state, silent)
    finally:
        markdown.in_image = before
    if matched and not silent:
        token = state.tokens[-1]
        address = _ADDRESS.match(state.src, start + 2 + len(token.content), state.pos)
        token.meta = {"at": (start, state.pos), "address": address.span(1) if address else (start, state.pos)}
    return matched


def parse(text: str) -> list[Token]:
    """The tokens of a sheet's body; `map` counts lines from 0."""
    markdown = _SheetMarkdown("commonmark", {"html": False, "maxNesting": DEEPEST}).enable("table")
    markdown.inline.ruler.at("image", _image_rule)
    markdown.inline.ruler.after("escape", "value", value_rule)
    return markdown.parse(text)


def plain_text(tokens: Sequence[Token] | None) -> str:
    """The words of inline tokens without their markup; values as typed."""
    parts = []
    for token in tokens or ():
        if token.type in ("softbreak", "hardbreak"):
            parts.append(" ")
        elif token.type == "image":
            parts.append(plain_text(token.children))
        else:
            parts.append(token.content)
    return "".join(parts)
