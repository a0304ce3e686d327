"""Markdown as Git hosts show it: `$$` math, an anchor for each step, tables for registers, images in files beside it."""

from __future__ import annotations

import re
from collections.abc import Callable
from functools import lru_cache
from typing import Any

from markupsafe import Markup

from loadpath.document.model import CallLine, Document, FigureBlock, Line, ProseBlock, Ref, SectionHead
from loadpath.formula.names import plain_symbol
from loadpath.formula.tree import Name, Node, Shown
from loadpath.render.math import latex, latex_lines
from loadpath.render.templates import environment
from loadpath.units.printing import quantity

ENDINGS = {"image/png": "png", "image/jpeg": "jpg", "image/svg+xml": "svg"}
_SPECIAL = re.compile(r"([\\`*_{}\[\]|$~#])")
_CODE = re.compile(r"(^(?P<fence>`{3,}|~{3,})[^\n]*\n.*?^(?P=fence)[`~]*[ \t]*$)|(?P<ticks>`+)(?!`)(?:.*?[^`])(?P=ticks)(?!`)", re.S | re.M)
_TAG = re.compile(r"<(?!(?:https?|mailto):[^\s<>]*>)")
_LINK = re.compile(r"\](?=\(\s*<?\s*(?!https?:|mailto:)[a-zA-Z][a-zA-Z0-9+.-]*:)|\](?=:\s*<?\s*(?!https?:|mailto:)[a-zA-Z][a-zA-Z0-9+.-]*:)")


def render(document: Document, stem: str) -> tuple[str, dict[str, bytes]]:
    """The text of a document, and the images that stand beside it, by file name."""
    images = {_image_name(b, stem): b.data for b in document.figures if b.data}
    text = _environment().get_template("document.md.j2").render(
        d=document, s=document.summary, r=document.registers, t=document.title_block,
        kind=lambda block: type(block).__name__, prose=lambda b: prose(b, document), heading=lambda b: _heading(b, document),
        image=lambda b: _image_name(b, stem),
    )  # fmt: skip
    return re.sub(r"\n{3,}", "\n\n", str(text)).strip() + "\n", images


@lru_cache(maxsize=1)
def _environment() -> Any:
    filters: dict[str, Callable[..., Any]] = {
        "display": lambda node: Markup(f"$$\n{latex(node)}\n$$"),
        "equation": lambda name, sides: Markup(f"$$\n{latex_lines(name, sides)}\n$$"),
        "inline": _inline_math,
        "shown": _shown,
        "ref": _ref,
        "name_math": lambda name: _inline_math(Name(name)),
        "line": _line,
        "call": _call,
        "cell": lambda text: Markup(str(_escape(text)).replace("\n", " ")),
    }
    return environment(filters, _escape)


# --- escaping ---------------------------------------------------------------------------------------------------


def escape(text: str) -> Markup:
    """Plain text that Markdown shows as it stands: no markup, no tags, no math."""
    safe = _SPECIAL.sub(r"\\\1", text).replace("&", "&amp;").replace("<", "&lt;").replace(">", "&gt;")
    safe = re.sub(r"^(\s*)([-+]|\d+[.)])(?=\s)", lambda m: f"{m[1]}{m[2][:-1]}\\{m[2][-1]}", safe, flags=re.M)
    return Markup(safe)


def _escape(value: Any) -> Any:
    if isinstance(value, Markup):
        return value
    return escape(value) if isinstance(value, str) else value


def prose(block: ProseBlock, document: Document) -> Markup:
    """Prose as typed, with values in place, and nothing in it that a host would take for HTML or a live link of another scheme."""
    parts, at = [], block.start
    end = block.start + len(block.text)
    for start, stop, value in document.value_spans:
        if block.start <= start and stop <= end:
            parts += [_harmless(block.text[at - block.start : start - block.start]), str(_shown(value))]
            at = stop
    parts.append(_harmless(block.text[at - block.start :]))
    return Markup("".join(parts))


def _harmless(text: str) -> str:
    """Source text outside code: tags shown as text, dollars no math."""
    out, at = [], 0
    for code in _CODE.finditer(text):
        out += [_defused(text[at : code.start()]), code.group()]
        at = code.end()
    return "".join([*out, _defused(text[at:])])


def _defused(text: str) -> str:
    text = _TAG.sub("&lt;", text)
    text = re.sub(r"&(?=#?\w+;)(?!lt;)", "&amp;", text)
    text = _LINK.sub(r"\\]", text)
    return re.sub(r"(?<!\\)\$", r"\\$", text)


# --- pieces -----------------------------------------------------------------------------------------------------


def _shown(value: Shown | str) -> Markup:
    if isinstance(value, str):
        return escape(value)
    return escape(f"“{value.number}”" if value.word else quantity(value.number, value.unit))


def _inline_math(node: Node) -> Markup:
    return Markup(f"${latex(node)}$")


def _ref(ref: Ref) -> Markup:
    name = (escape(plain_symbol(ref.name)) if ref.is_name else escape(ref.name)) + " " if ref.name else Markup("")
    return Markup(f"[{name}{ref.number}](#s{ref.number})")


def _line(line: Line) -> Markup:
    return Markup("").join(escape(p) if isinstance(p, str) else _inline_math(p) for p in line.parts)


def _call(call: CallLine) -> Markup:
    sides = " = ".join(latex(side) for side in (call.call, *call.sides, call.value))
    return Markup(f"${sides}$" + ("" if call.closes else " (from unrounded values)"))


def _heading(block: SectionHead, document: Document) -> Markup:
    words = []
    for token in block.tokens.children or ():
        if token.type == "value":
            words.append(str(_shown(document.values.get(token.meta["value"], token.content))))
        elif token.type == "code_inline":
            words.append(f"`{token.content}`")
        else:
            words.append(str(escape(token.content)))
    number = f"{block.number} " if block.number else ""
    return Markup("#" * min(block.level, 6) + " " + number + "".join(words).replace("\n", " "))


def _image_name(block: FigureBlock, stem: str) -> str:
    return f"{stem}.figure-{block.number}.{ENDINGS.get(block.media_type, 'bin')}"
