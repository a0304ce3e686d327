"""HTML: one self-contained page with MathML, fonts inside, readable on screen and printed with its title
block."""

from __future__ import annotations

import base64
import math
import re
import unicodedata
from collections.abc import Sequence
from functools import lru_cache
from typing import Any

from markupsafe import Markup, escape

from loadpath.document.model import Block, Document, FigureBlock, PlotBlock, Ref, TitleBlock
from loadpath.findings.terminal import excerpt
from loadpath.formula.names import symbol
from loadpath.formula.tree import Name, Node, Shown
from loadpath.render.math import COLUMN, PAGE, equations, flow, mathml, widest
from loadpath.render.templates import environment, folder, without_turns
from loadpath.units.printing import MINUS, NARROW, THIN, quantity

POINT, GAP = 0.5, 0.34
"""Width of a decimal point and of the gap between groups of digits, as parts of a digit's width."""
TALL = 8
"""A table of more rows than this may be broken between two sheets of paper."""
ROW = 24.0
"""Width in em of a formula in a row of a table."""
CELL = 17
"""Characters that a cell of the printed title block surely holds on one line."""


def render(document: Document) -> str:
    """The page of a document."""
    page = (
        _environment()
        .get_template("document.html.j2")
        .render(
            d=document,
            s=document.summary,
            r=document.registers,
            t=document.title_block,
            style=Markup(style()),
            block_strings=Markup(title_block_strings(document.title_block, document.alerts)),
            inline=lambda tokens: _inline(tokens, document),
            prose=lambda tokens: _prose(tokens, document),
            figure=_figure,
            kind=lambda block: type(block).__name__,
            contents=_contents(document.blocks),
            tall=TALL,
        )
    )
    return without_turns(str(page))


@lru_cache(maxsize=1)
def _environment() -> Any:
    return environment(
        {
            "math": lambda node: Markup(mathml(node)),
            "flat": lambda node: Markup(mathml(node, flat=True)),
            "flow": _flow,
            "in_row": _in_row,
            "equations": _equations,
            "are_wide": _are_wide,
            "name_math": lambda name: _flow(Name(name)),
            "shown": printed,
            "symbol": symbol_html,
            "ref": ref_html,
            "breaks": breaks,
            "names_in": names_in,
            "excerpt": excerpt,
            "own_name": lambda name: name.rpartition(".")[2],
            "hung": hung,
            "alt": _alt,
            "drawn": _drawn,
        }
    )


# --- style and fonts --------------------------------------------------------------------------------------


@lru_cache(maxsize=1)
def style() -> str:
    """The style sheet with the fonts inside."""
    css = (folder() / "style.css").read_text(encoding="utf-8")
    css = re.sub(r"/\*.*?\*/", "", css, flags=re.S)
    css = re.sub(r"\n\s*\n+", "\n", css)

    def inside(match: re.Match[str]) -> str:
        data = base64.b64encode((folder() / match.group(1)).read_bytes()).decode()
        return f'url("data:font/woff2;base64,{data}")'

    return re.sub(r'url\("(fonts/[\w-]+\.woff2)"\)', inside, css).strip()


def css_string(text: str) -> str:
    """A text as a CSS string that no text can end: all but plain letters, digits and spaces as escapes."""
    out = []
    for character in without_turns(text):
        plain = character.isalnum() or character in " .,;:()+*=_·–-/"
        out.append(character if plain else f"\\{ord(character):x} ")
    return '"' + "".join(out) + '"'


def title_block_strings(block: TitleBlock, alerts: tuple[str, ...]) -> str:
    """The texts of the printed title block as CSS properties, and how many lines its rows need."""
    title = block.title + (f"\n{block.subtitle}" if block.subtitle else "")
    texts = {
        "owner": block.owner,
        "title": title,
        "number": block.number,
        "revision": block.revision,
        "created": block.created_by,
        "reviewed": block.reviewed_by,
        "approved": block.approved_by,
        "date": block.date,
    }
    rows = [
        max(
            _lines(block.owner, CELL),
            _lines(title, 2 * CELL),
            _lines(block.number, CELL),
            _lines(block.revision, CELL),
        ),
        max(_lines(t, CELL) for t in (block.created_by, block.reviewed_by, block.approved_by, block.date)),
    ]
    widths = {"title": 2 * CELL}
    lines = [f"--tb-{n}:{css_string(_breakable(text, widths.get(n, CELL)))}" for n, text in texts.items()]
    lines.append(f"--tb-made:{css_string(block.made)}")
    if alerts:
        lines.append(f"--tb-state:{css_string(alerts[0].rstrip('.'))}")
    lines += [f"--tb-lines-{i}:{count}" for i, count in enumerate(rows, 1)]
    return ":root{" + ";".join(lines) + "}"


def _breakable(text: str, width: int) -> str:
    """A text whose words may be broken where a cell can't hold them: margin boxes break no word."""
    return re.sub(rf"([^\s-]{{{width}}})(?=[^\s-])", "\\1\u200b", text)


def _lines(text: str, width: int) -> int:
    """Lines that a text takes in a cell, by words and their hyphens; wide characters count twice."""
    total = 0
    for line in text.split("\n"):
        used = 0
        total += 1
        for piece in re.findall(r"\s*(?:[^\s-]*-+|[^\s-]+)", line):
            size = sum(2 if unicodedata.east_asian_width(c) in "WF" else 1 for c in piece.strip())
            space = int(bool(used) and piece[0].isspace())
            if used and used + space + size > width:
                total, used, space = total + 1, 0, 0
            total += max(math.ceil(size / width) - 1, 0)
            used += size + space
    return max(total, 1)


# --- pieces of text ---------------------------------------------------------------------------------------


def printed(value: Shown | str) -> str:
    """A value in running text."""
    if isinstance(value, str):
        return value
    # a thin space may end a line, a narrow one that doesn't break may not
    return f"“{value.number}”" if value.word else quantity(value.number, value.unit).replace(THIN, NARROW)


def hung(column: Sequence[Shown | None]) -> list[str]:
    """For each number of a column the room to leave on its right, in digits, so that decimal points stand in
    line; "" where none is left, and where a number has a power of ten or is none."""
    tails = [_tail(value) for value in column]
    most = max((tail for tail in tails if tail is not None), default=0.0)
    return ["" if tail is None or tail == most else f"{most - tail:g}" for tail in tails]


def _tail(value: Shown | None) -> float | None:
    """Width of what stands behind the decimal point and of the point itself, in digits."""
    text = printed(value) if value is not None and not value.word else ""
    if not re.fullmatch(f"{MINUS}?[0-9.{NARROW}]+", text):
        return None
    _, point, part = text.partition(".")
    return len(part.replace(NARROW, "")) + GAP * part.count(NARROW) + POINT * len(point)


def symbol_html(name: str) -> Markup:
    """A name in running text: σ with its subscript."""
    s = symbol(name)
    sub = Markup("<sub>{}</sub>").format(s.subscript) if s.subscript else Markup("")
    return escape(s.prefix + s.base + "′" * s.primes) + sub


def ref_html(ref: Ref) -> Markup:
    """What a reference to a step reads: symbol or words, then the number."""
    if not ref.name:
        return escape(ref.number)
    name = symbol_html(ref.name) if ref.is_name else breaks(ref.name)
    return name + " " + escape(ref.number)


def breaks(text: str) -> Markup:
    """A long name that may be broken after `_`."""
    return Markup("_<wbr>").join(escape(part) for part in text.split("_"))


def names_in(words: str) -> Markup:
    """A verdict, the names in it with their subscripts: `outside the range of σ_1`."""
    parts = re.split(r"(?<![\w-])([^\W\d_]\w*?)_([\w,]+)", words)
    out = Markup("")
    for before, base, subscript in zip(parts[::3], [*parts[1::3], ""], [*parts[2::3], ""], strict=True):
        out += (
            escape(before) + escape(base) + (Markup("<sub>{}</sub>").format(subscript) if subscript else "")
        )
    return out


def _flow(node: Node, sign: str = "", wide: bool = False) -> Markup:
    return _joined(flow(node, sign, most=PAGE if wide else COLUMN))


def _in_row(node: Node, sign: str = "", flat: bool = False) -> Markup:
    """A formula in a row of a table, where there is less room."""
    return _joined(flow(node, sign, most=ROW, flat=flat))


def _equations(nodes: tuple[Node, ...]) -> list[tuple[Markup, Markup]]:
    """Equations aligned at their relation signs: for each row what stands left and right of it."""
    return [(_joined(left), _joined(right)) for left, right in equations(list(nodes))]


def _joined(pieces: list[str]) -> Markup:
    return Markup("<wbr>").join(Markup(piece) for piece in pieces)


def _are_wide(sides: tuple[Node, ...]) -> bool:
    """True where a formula does not fit beside the results: the result then stands beneath it."""
    return any(widest(side) > COLUMN for side in sides)


def _alt(block: PlotBlock) -> str:
    from loadpath.figures import describe

    return (block.picture.alt or describe(block.picture)) if block.picture else ""


def _drawn(block: PlotBlock) -> str:
    from loadpath.figures import svg

    assert block.picture is not None
    return f"data:image/svg+xml;base64,{base64.b64encode(svg(block.picture)).decode()}"


def _figure(block: FigureBlock) -> str:
    return f"data:{block.media_type};base64,{base64.b64encode(block.data).decode()}"


def _contents(blocks: tuple[Block, ...]) -> list[Any]:
    return [b for b in blocks if type(b).__name__ == "SectionHead" and b.number]  # type: ignore[union-attr]


# --- prose ------------------------------------------------------------------------------------------------


@lru_cache(maxsize=1)
def _renderer() -> Any:
    from markdown_it import MarkdownIt

    def value(self: Any, tokens: Any, index: int, options: Any, env: Any) -> str:
        found = env["values"].get(tokens[index].meta.get("value"), tokens[index].content)
        return str(escape(printed(found)))

    def image(self: Any, tokens: Any, index: int, options: Any, env: Any) -> str:
        return str(escape(tokens[index].content))

    markdown = MarkdownIt("commonmark", {"html": False}).enable("table")
    markdown.add_render_rule("value", value)
    markdown.add_render_rule("image", image)
    markdown.add_render_rule("table_open", lambda *_: '<div class="scroll"><table>\n')
    markdown.add_render_rule("table_close", lambda *_: "</table></div>\n")
    return markdown


def _prose(tokens: Any, document: Document) -> Markup:
    markdown = _renderer()
    return Markup(markdown.renderer.render(tokens, markdown.options, {"values": document.values}))


def _inline(tokens: Any, document: Document) -> Markup:
    markdown = _renderer()
    return Markup(
        markdown.renderer.renderInline(tokens.children or [], markdown.options, {"values": document.values})
    )
