"""Prose as Markdown again, written from its tokens: a host sees what the sheet's own reader saw, and no more.

Text as typed would not do: a host reads HTML where the sheet's reader sees none, and takes other
stretches for
code.
"""

from __future__ import annotations

import re
from collections.abc import Callable, Sequence
from itertools import chain, repeat
from typing import Any

from markdown_it.token import Token
from markdown_it.tree import SyntaxTreeNode

_SPECIAL = re.compile(r"([\\`*_{}\[\]|$~#])")
_OPENS = re.compile(r"^ *\d+(?=[.)](?:\s|$))|^ *(?=[-+](?:\s|$)|=+\s*$|:?-+:?\s*$)", re.MULTILINE)
"""What would open a list or underline a heading at the start of a line."""


def escape(text: str) -> str:
    """Plain text that Markdown shows as it stands: no markup, no tags, no math."""
    safe = _SPECIAL.sub(r"\\\1", text).replace("&", "&amp;").replace("<", "&lt;").replace(">", "&gt;")
    return _as_text(safe)


def _as_text(lines: str) -> str:
    return _OPENS.sub(lambda opening: opening.group() + "\\", lines)


def prose(tokens: Sequence[Token], value: Callable[[Any], str]) -> str:
    """Markdown of block tokens; `value` gives the text of a value that stands in them."""
    return _Writer(value).blocks(SyntaxTreeNode(tokens).children)


def inline(token: Token, value: Callable[[Any], str]) -> str:
    """Markdown of one inline token, on one line."""
    (node,) = SyntaxTreeNode([token]).children
    return _Writer(value).inline(node).replace("\\\n", " ").replace("\n", " ")


class _Writer:
    def __init__(self, value: Callable[[Any], str]) -> None:
        self.value = value
        self.in_table = False

    # --- blocks ---

    def blocks(self, nodes: Sequence[SyntaxTreeNode], between: str = "\n\n") -> str:
        return between.join(self.block(node) for node in nodes)

    def block(self, node: SyntaxTreeNode) -> str:
        match node.type:
            case "bullet_list" | "ordered_list":
                return self.list(node)
            case "blockquote":
                return _indented(self.blocks(node.children), "> ", "> ")
            case "fence" | "code_block":
                return _fenced(node.content, node.info if node.type == "fence" else "")
            case "table":
                return self.table(node)
            case "hr":
                return "* * *"
            case "heading":
                return f"{'#' * int(node.tag[1:])} {self.inside(node)}".replace("\n", " ")
            case "inline":
                return self.inline(node)
        return self.inside(node)

    def inside(self, node: SyntaxTreeNode) -> str:
        return "".join(self.inline(child) for child in node.children)

    def list(self, node: SyntaxTreeNode) -> str:
        tight = all(
            child.hidden for item in node.children for child in item.children if child.type == "paragraph"
        )
        items = []
        for number, item in enumerate(node.children, int(node.attrs.get("start", 1))):
            mark = f"{number}{node.markup} " if node.type == "ordered_list" else f"{node.markup} "
            items.append(
                _indented(self.blocks(item.children, "\n" if tight else "\n\n"), mark, " " * len(mark))
            )
        return ("\n" if tight else "\n\n").join(items)

    def table(self, node: SyntaxTreeNode) -> str:
        rows = [row for part in node.children for row in part.children]
        self.in_table = True
        lines = [self.row(row) for row in rows]
        self.in_table = False
        lines.insert(1, "|" + "|".join(_alignment(cell) for cell in rows[0].children) + "|")
        return "\n".join(lines)

    def row(self, row: SyntaxTreeNode) -> str:
        return "| " + " | ".join(self.inside(cell).replace("\n", " ") for cell in row.children) + " |"

    # --- inside a line ---

    def inline(self, node: SyntaxTreeNode) -> str:
        match node.type:
            case "inline":
                return _as_text(self.inside(node))
            case "softbreak":
                return "\n"
            case "hardbreak":
                return "\\\n"
            case "code_inline":
                return _code(node.content.replace("|", "\\|") if self.in_table else node.content)
            case "em" | "strong":
                return f"{node.markup}{self.inside(node)}{node.markup}"
            case "link":
                return f"[{self.inside(node)}](<{str(node.attrs['href']).replace('&', '&amp;')}>)"
            case "value":
                return self.value(node.meta.get("value")) if node.meta.get("value") else escape(node.content)
        return escape(node.content)


# --- helpers ------------------------------------------------------------------------------------------------


def _indented(text: str, first: str, others: str) -> str:
    marks = chain([first], repeat(others))
    return "\n".join((mark + line).rstrip(" ") for mark, line in zip(marks, text.split("\n"), strict=False))


def _longest_run(text: str) -> int:
    return max((len(run) for run in re.findall("`+", text)), default=0)


def _code(text: str) -> str:
    ticks = "`" * (_longest_run(text) + 1)
    pad = (
        " "
        if text.startswith("`") or text.endswith("`") or (text.strip() and text[0] == text[-1] == " ")
        else ""
    )
    return ticks + pad + text + pad + ticks


def _fenced(text: str, info: str) -> str:
    ticks = "`" * max(_longest_run(text) + 1, 3)
    word = re.match(r"[\w+-]*", info)
    lines = text if text.endswith("\n") or not text else text + "\n"
    return f"{ticks}{word.group() if word else ''}\n{lines}{ticks}"


def _alignment(cell: SyntaxTreeNode) -> str:
    style = str(cell.attrs.get("style", ""))
    return {"left": ":---", "right": "---:", "center": ":---:"}.get(style.rpartition(":")[2].strip(), "---")
