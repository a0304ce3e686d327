"""Blocks: what of a sheet's CommonMark is a heading, prose, formulas or an image."""

from __future__ import annotations

import pytest

from loadpath.formula.statements import Column, Definition, Faulty, Table
from loadpath.project import MemoryWorld
from loadpath.sheet import Block, Formulas, Heading, Image, Prose
from loadpath.sheet.blocks import read_blocks
from loadpath.text import Source

PNG = b"\x89PNG\r\n\x1a\n"
WORLD = MemoryWorld({"sketch.png": PNG, "my sketch (1).png": PNG, "logo.png": PNG})


def read(text: str) -> tuple[tuple[Block, ...], list[str]]:
    blocks, found = read_blocks(Source("a.sheet.md", text), 0, WORLD)
    return blocks, [f"{f.line}:{f.column} {f.slug}" for f in found]


def kinds(text: str) -> list[str]:
    blocks, found = read(text)
    assert found == []
    return [type(block).__name__ for block in blocks]


def test_blocks_come_in_reading_order() -> None:
    text = "# Loads\n\nText.\n\n    P = 1 kN\n\n    L = 6 m\n\n![Hoist](sketch.png)\n\n- one\n- two\n\nEnd.\n"
    assert kinds(text) == ["Heading", "Prose", "Formulas", "Image", "Prose"]


def test_prose_keeps_its_lines_as_typed_and_its_tokens() -> None:
    text = "First  line\nsecond.\n\n> quoted\n\n* * *\n\n```\nx = 1\n```\n\n| a |\n|---|\n| b |\n\n[r]: /x\n"
    (prose,), found = read(text)
    assert isinstance(prose, Prose)
    assert (prose.text, found) == (text.rstrip("\n"), [])
    types = [token.type for token in prose.tokens if token.level == 0 and token.nesting >= 0]
    assert types == ["paragraph_open", "blockquote_open", "hr", "fence", "table_open"]


def test_headings_of_both_forms() -> None:
    blocks, _ = read("## Bending *here* ##\n\nShear\n=====\n")
    assert [(b.level, b.text) for b in blocks if isinstance(b, Heading)] == [
        (2, "Bending here"),
        (1, "Shear"),
    ]


def test_a_formula_block_covers_whole_lines_from_the_first_to_the_last() -> None:
    text = "Loads:\n\n    P = 20 kN\n\n\tL = 6 m\n    \nEnd.\n"
    blocks, found = read(text)
    assert (found, [type(b).__name__ for b in blocks]) == ([], ["Prose", "Formulas", "Prose"])
    formulas = blocks[1]
    assert isinstance(formulas, Formulas)
    assert Source("", text).cut(formulas.span) == "    P = 20 kN\n\n\tL = 6 m"
    assert [s.name for s in formulas.statements if isinstance(s, Definition)] == ["P", "L"]


def test_what_is_wrong_with_a_formula_is_found_with_it() -> None:
    blocks, found = read("    P = 20 kN kN\n")
    assert isinstance(blocks[0], Formulas)
    assert isinstance(blocks[0].statements[0], Faulty)
    assert len(found) == 1


def test_the_body_may_begin_anywhere() -> None:
    source = Source("a.sheet.md", "---\ntitle: x\n---\n\nSee {P [kN]}.\n\n    P = 2 kN\n")
    blocks, found = read_blocks(source, 17, WORLD)
    assert found == ()
    prose, formulas = blocks
    assert isinstance(prose, Prose) and isinstance(formulas, Formulas)
    assert source.cut(prose.values[0].span) == "{P [kN]}"
    assert source.cut(formulas.statements[0].span) == "P = 2 kN"


def test_an_empty_body_has_no_blocks() -> None:
    assert read("") == ((), [])
    assert read(" \n\n\t\n") == ((), [])


def test_html_is_text() -> None:
    (prose,), found = read("<script>alert(1)</script>\n\na <b onclick='x'>b</b>\n")
    assert isinstance(prose, Prose)
    inner = [child.type for token in prose.tokens for child in token.children or ()]
    assert (set(inner), found) == ({"text"}, [])


@pytest.mark.parametrize(
    ("address", "kept"),
    [
        ("https://tern.example/a", True),
        ("http://tern.example", True),
        ("mailto:yard@tern.example", True),
        ("#loads", True),
        ("other.html", True),
        ("../other.sheet.md#a", True),
        ("javascript:alert(1)", False),
        ("JavaScript&colon;alert(1)", False),
        ("java&#10;script:alert(1)", True),  # no scheme: the line end is encoded, and the rest is a path
        ("data:text/html,x", False),
        ("data:image/png;base64,AAAA", False),
        ("file:///etc/hostname", False),
        ("vbscript:x", False),
        ("//tern.example/a", False),
    ],
)
def test_links_that_lead_to_no_page_are_text(address: str, kept: bool) -> None:
    for text in (f"[a]({address})", f"[a]\n\n[a]: {address}"):
        blocks, _ = read(text)
        tokens = [
            child for b in blocks if isinstance(b, Prose) for t in b.tokens for child in t.children or ()
        ]
        links = [str(token.attrs["href"]) for token in tokens if token.type == "link_open"]
        assert bool(links) == kept
        assert not any(link.lower().startswith(("javascript:", "data:", "file:")) for link in links)


# --- images ----------------------------------------------------------------------------------------------


def test_an_image_alone_in_its_paragraph_is_a_figure() -> None:
    text = "![Hoist *here*](sketch.png)\n\ntext\n\n![](<my sketch (1).png> 't')\n\n![c][r]\n\n[r]: logo.png\n"
    blocks, found = read(text)
    images = [b for b in blocks if isinstance(b, Image)]
    assert found == []
    assert [(i.number, str(i.path), i.caption) for i in images] == [
        (1, "sketch.png", "Hoist here"),
        (2, "my sketch (1).png", ""),
        (3, "logo.png", "c"),
    ]
    assert {(i.media_type, i.data) for i in images} == {("image/png", PNG)}


@pytest.mark.parametrize(
    ("text", "place"),
    [
        ("text ![a](sketch.png) text", "1:6"),
        ("![a](sketch.png)\n![b](logo.png)", "1:1"),
        ("- ![a](sketch.png)", "1:3"),
        ("> ![a](sketch.png)", "1:3"),
        ("# ![a](sketch.png)", "1:3"),
        ("[![a](sketch.png)](other.html)", "1:2"),
        ("| a | ![a](https://tern.example/a.png) |\n|---|---|\n", "1:7"),
    ],
)
def test_an_image_inside_text_is_refused_and_never_reaches_a_renderer(text: str, place: str) -> None:
    blocks, found = read(text)
    assert found[0] == f"{place} image-path"
    tokens = [t for b in blocks if isinstance(b, Prose) for t in b.tokens]
    tokens += [b.tokens for b in blocks if isinstance(b, Heading)]
    children = [child for token in tokens for child in token.children or ()]
    assert children
    assert all(child.type != "image" for child in children)


def test_a_refused_image_keeps_its_place_and_number() -> None:
    blocks, found = read("![a](missing.png)\n\n![b](sketch.png)\n")
    images = [b for b in blocks if isinstance(b, Image)]
    assert [(i.number, i.media_type) for i in images] == [(1, ""), (2, "image/png")]
    assert found == ["1:6 image-path"]


def test_a_caption_that_holds_a_value_says_that_it_cannot() -> None:
    _, found = read("![load {P}](sketch.png)\n")
    assert found == ["1:1 not-available"]
    assert read("![load \\{P}](sketch.png)\n")[1] == []


# --- what would leave something out of sight --------------------------------------------------------------


def test_a_captioned_table_is_a_block_of_statements() -> None:
    """What they hold is held in test_tables.py."""
    table = "| part | b [mm] |\n|---|---|\n| top | 200 |\n"
    for gap in ("", "\n"):
        blocks, found = read(f"Table plates: the pieces\nof the girder [a]\n{gap}{table}")
        assert found == []
        assert isinstance(blocks[-1], Formulas)
        assert [type(statement) for statement in blocks[-1].statements] == [Table, Column]
    assert read(f"Table 3 shows the pieces:\n\n{table}")[1] == []
    blocks, found = read(f"Table plates: the pieces\n\nText.\n\n{table}")
    assert found == ["1:1 table-shape"]
    (faulty,) = (s for block in blocks if isinstance(block, Formulas) for s in block.statements)
    assert isinstance(faulty, Faulty) and faulty.names == ("plates",)


def test_a_fence_that_is_not_closed_is_a_mistake() -> None:
    assert read("```\nx\n\n    P = 3 kN\n")[1] == ["1:1 swallowed-formula"]
    assert read("~~~~\nx\n~~~\n")[1] == ["1:1 swallowed-formula"]
    assert read("```")[1] == ["1:1 swallowed-formula"]
    assert read("```\nx\n```")[1] == []
    assert read("````\n```\n`````  \n")[1] == []


def test_nesting_that_is_not_read_is_told_once() -> None:
    assert read("> " * 30 + "a")[1] == ["1:1 over-limit"]
    deep = "".join("  " * level + "- a\n" for level in range(14))
    assert [line.split()[1] for line in read(deep)[1]] == ["over-limit"]
    assert read("> " * 19 + "a")[1] == []
