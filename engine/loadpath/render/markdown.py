"""Markdown as Git hosts show it: `$$` math, an anchor for each step, tables for registers, images in files
beside it."""

from __future__ import annotations

import re
from collections.abc import Callable, Sequence
from functools import lru_cache
from itertools import chain
from typing import Any
from urllib.parse import quote

from markupsafe import Markup

from loadpath.document.model import (
    CallLine,
    Document,
    FigureBlock,
    Line,
    PlotBlock,
    ProseBlock,
    Ref,
    SectionHead,
)
from loadpath.formula.names import plain_symbol
from loadpath.formula.tree import Name, Node, Shown
from loadpath.render.markdown_prose import escape as plain
from loadpath.render.markdown_prose import inline, prose
from loadpath.render.math import latex, latex_equations, latex_lines
from loadpath.render.templates import environment, without_turns
from loadpath.units.printing import quantity

BREAK = r"\cr"
"""Between two lines of math."""
ENDINGS = {"image/png": "png", "image/jpeg": "jpg", "image/svg+xml": "svg"}


def render(document: Document, stem: str) -> tuple[str, dict[str, bytes]]:
    """The text of a document, and the images that stand beside it, by file name."""
    images = {_image_name(b, stem): data for b in document.figures if (data := _image_data(b))}
    values, written = _values(document), []

    def keep(block: ProseBlock) -> Markup:
        written.append(prose(block.tokens, values))
        return Markup("\0")

    text = (
        _environment()
        .get_template("document.md.j2")
        .render(
            d=document,
            s=document.summary,
            r=document.registers,
            t=document.title_block,
            kind=lambda block: type(block).__name__,
            prose=keep,
            heading=lambda b: _heading(b, document),
            image=lambda b: Markup(quote(_image_name(b, stem))),
        )
    )
    parts = re.sub(r"\n{3,}", "\n\n", re.sub(r" +\n", "\n", str(text))).strip().split("\0")
    return without_turns("".join(chain.from_iterable(zip(parts, [*written, ""], strict=True))) + "\n"), images


@lru_cache(maxsize=1)
def _environment() -> Any:
    filters: dict[str, Callable[..., Any]] = {
        "display": lambda node: _aligned([node]),
        "equation": lambda name, sides: Markup(f"$$\n{latex_lines(name, sides)}\n$$"),
        "inline": _inline_math,
        "shown": _shown,
        "ref": _ref,
        "name_math": lambda name: _inline_math(Name(name)),
        "line": _line,
        "call": _call,
        "alt": _alt,
        "own_name": lambda name: name.rpartition(".")[2],
        "aligned": _aligned,
        "cell": lambda text: Markup(str(_escape(text)).replace("\n", " ")),
    }
    return environment(filters, _escape)


# --- escaping ---------------------------------------------------------------------------------------------


def escape(text: str) -> Markup:
    """Plain text that Markdown shows as it stands: no markup, no tags, no math."""
    return Markup(plain(text))


def _escape(value: Any) -> Any:
    if isinstance(value, Markup):
        return value
    return escape(value) if isinstance(value, str) else value


# --- pieces -----------------------------------------------------------------------------------------------


def _shown(value: Shown | str) -> Markup:
    if isinstance(value, str):
        return escape(value)
    return escape(f"“{value.number}”" if value.word else quantity(value.number, value.unit))


def _aligned(nodes: Sequence[Node]) -> Markup:
    """Formulas on their own, one beneath the other; each is broken where it is longer than a line."""
    lines = latex_equations(nodes)
    return Markup(f"$$\n{lines if BREAK in lines else latex(nodes[0])}\n$$")


def _inline_math(node: Node) -> Markup:
    return Markup(f"${latex(node)}$")


def _ref(ref: Ref) -> Markup:
    name = (
        (escape(plain_symbol(ref.name)) if ref.is_name else escape(ref.name)) + " "
        if ref.name
        else Markup("")
    )
    return Markup(f"[{name}{ref.number}](#s{ref.number})")


def _line(line: Line) -> Markup:
    return Markup("").join(escape(p) if isinstance(p, str) else _inline_math(p) for p in line.parts)


def _call(call: CallLine) -> Markup:
    sides = " = ".join(latex(side) for side in (*call.typed, call.call, *call.sides, call.value))
    return Markup(f"${sides}$" + ("" if call.closes else " (from unrounded values)"))


def _heading(block: SectionHead, document: Document) -> Markup:
    number = f"{block.number} " if block.number else ""
    return Markup(f"{'#' * block.level} {number}{inline(block.tokens, _values(document))}")


def _values(document: Document) -> Callable[[Any], str]:
    return lambda value: str(_shown(document.values.get(value, value.typed)))


def _alt(block: PlotBlock) -> str:
    from loadpath.figures import describe

    return (block.picture.alt or describe(block.picture)) if block.picture else ""


def _image_name(block: FigureBlock | PlotBlock, stem: str) -> str:
    ending = "svg" if isinstance(block, PlotBlock) else ENDINGS.get(block.media_type, "bin")
    return f"{stem}.figure-{block.number}.{ending}"


def _image_data(block: FigureBlock | PlotBlock) -> bytes:
    if isinstance(block, FigureBlock):
        return block.data
    from loadpath.figures import svg

    return svg(block.picture) if block.picture else b""
