"""Markdown: what a Git host shows of a document, and that nothing of a sheet acts there."""

from __future__ import annotations

import re
from collections.abc import Iterator
from functools import cache
from itertools import pairwise
from urllib.parse import unquote

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from markdown_it import MarkdownIt
from markdown_it.token import Token
from pages import (
    CALCSHEETS,
    EVERYTHING,
    HOSTILE,
    LABELS,
    PNG,
    SEVERAL,
    built,
    everywhere,
    issued,
    labelled,
)

from loadpath.document.model import CAUTION
from loadpath.render.markdown import escape, render
from loadpath.render.markdown_prose import prose
from loadpath.sheet.markdown import parse

HOST = MarkdownIt("commonmark", {"html": True}).enable(["table", "strikethrough"])
"""A reader that takes HTML, as a Git host does."""

TEXTS = {
    **{
        path.name.removesuffix(".sheet.md"): (lambda p=path: render(issued(p), "sheet"))
        for path in CALCSHEETS
    },
    "everything": lambda: render(built(EVERYTHING), "every thing (1)"),
    "several": lambda: render(built(SEVERAL), "several"),
    **{f"label {i}": (lambda t=text: render(built(labelled(t)), "labels")) for i, text in enumerate(LABELS)},
    "bare": lambda: render(built("---\ntitle: Bare\n---\n"), "bare"),
    "no sheet": lambda: render(built("no front matter\n"), "none"),
    **{
        f"hostile {i}": (lambda t=text: render(built(everywhere(t)), "hostile"))
        for i, text in enumerate(HOSTILE)
    },
}
each_text = pytest.mark.parametrize("name", TEXTS)


@cache
def written(name: str) -> str:
    return TEXTS[name]()[0]


def tokens(text: str) -> Iterator[Token]:
    """Every token that a host finds, those inside lines too."""
    for token in HOST.parse(text):
        yield token
        yield from token.children or ()


def seen(text: str) -> str:
    """The words that a host shows, without markup."""
    shown = (t.content for t in tokens(text) if t.type in ("text", "code_inline", "fence", "code_block"))
    return " ".join(" ".join(shown).split())


# --- form ---------------------------------------------------------------------------------------------------


@each_text
def test_tables_have_as_many_cells_in_each_row_as_in_their_head(name: str) -> None:
    """A host drops what is too much without a word."""
    tables: list[list[int]] = []
    before = ""
    for line in written(name).splitlines():
        if line.startswith("|"):
            assert line.endswith("|")
            if not before.startswith("|"):
                tables.append([])
            tables[-1].append(len(re.findall(r"(?<!\\)(?:\\\\)*\|", line)) - 1)
        before = line
    assert tables and all(len(set(table)) == 1 and len(table) >= 2 for table in tables)


@each_text
def test_math_is_closed(name: str) -> None:
    lines = written(name).splitlines()
    assert lines.count("$$") % 2 == 0
    inside = False
    for line in lines:
        if line == "$$":
            inside = not inside
        elif not inside:
            assert len(re.findall(r"(?<!\\)\$", re.sub(r"`[^`]*`", "", line))) % 2 == 0, line
        else:
            assert "$" not in line and line.strip(), (
                "an empty line ends the paragraph that the math stands in"
            )


@each_text
def test_anchors_are_unique_and_links_arrive(name: str) -> None:
    anchors = re.findall(r'<a id="(s[\d.]+[a-z]*)"></a>', written(name))
    assert len(anchors) == len(set(anchors))
    links = [str(t.attrs["href"]) for t in tokens(written(name)) if t.type == "link_open"]
    assert {link[1:] for link in links if link.startswith("#")} <= set(anchors)


@pytest.mark.parametrize("path", CALCSHEETS, ids=lambda p: p.name.removesuffix(".sheet.md"))
def test_every_step_has_an_anchor_and_every_number_is_told(path: object) -> None:
    document = issued(path)  # type: ignore[arg-type]
    text, _ = render(document, "sheet")
    for block in document.blocks:
        if hasattr(block, "head"):
            assert f'<a id="s{block.head.number}"></a>**{block.head.number}**' in text
        if hasattr(block, "verdict"):
            assert f"**{escape(block.verdict)}**" in text


@each_text
def test_headings_are_in_order_and_lines_have_no_blank_at_their_end(name: str) -> None:
    levels = [int(t.tag[1]) for t in HOST.parse(written(name)) if t.type == "heading_open"]
    assert levels[0] == 1 and levels.count(1) == 1
    assert all(below <= above + 1 for above, below in pairwise(levels))
    assert not re.search(r"[ \t]\n", written(name))
    assert (
        not written(name).startswith("\n")
        and written(name).endswith("\n")
        and not written(name).endswith("\n\n")
    )


# --- images -------------------------------------------------------------------------------------------------


def test_images_stand_beside_and_their_links_name_them() -> None:
    text, images = render(built(EVERYTHING), "every thing (1)")
    assert images == {"every thing (1).figure-1.png": PNG}
    (image,) = (t for t in tokens(text) if t.type == "image")
    assert unquote(str(image.attrs["src"])) == "every thing (1).figure-1.png"
    assert image.content == "A sketch"


def test_an_image_that_was_refused_is_told_and_not_linked() -> None:
    text, images = render(built("---\ntitle: T\n---\n\n![Secret](../secret.png)\n"), "t")
    assert images == {}
    assert "image" not in {t.type for t in tokens(text)}
    assert "Secret" in seen(text) and "image-path" in seen(text)


# --- hostile texts ------------------------------------------------------------------------------------------


@each_text
def test_a_host_finds_no_html_but_the_anchors_and_no_image_but_the_figures(name: str) -> None:
    for token in tokens(written(name)):
        if token.type in ("html_inline", "html_block"):
            assert re.fullmatch(r'<a id="s[\d.]+[a-z]*">|</a>', token.content), token.content
        if token.type == "image":
            assert re.fullmatch(r"[\w%]+\.figure-\d+\.(svg|png|jpg)", str(token.attrs["src"]))
        if token.type == "link_open":
            assert re.match(r"#s\d|https?://|mailto:", str(token.attrs["href"]))


@pytest.mark.parametrize(
    "text", [*HOSTILE, "- a", "1. b", "# c", "> d", "===", "---", "| x |", "~~z~~", "$1 and $2", "x_1 * y_2"]
)
def test_a_text_of_the_front_matter_is_shown_as_it_was_typed(text: str) -> None:
    markdown, _ = render(built(everywhere(text, front_only=True)), "t")
    expected = " ".join(re.sub("[\u202a-\u202e\u2066-\u2069]", "\ufffd", text).split())
    shown = seen(markdown)
    assert shown.count(expected) >= 20


@given(
    st.text(st.characters(exclude_categories=["Cs", "Cc", "Zl", "Zp"]), min_size=1).filter(
        lambda t: t.strip()
    )
)
def test_an_escaped_text_is_one_paragraph_of_itself(text: str) -> None:
    typed = " ".join(text.split())
    found = HOST.parse(escape(typed))
    assert [t.type for t in found] == ["paragraph_open", "inline", "paragraph_close"]
    assert {t.type for t in found[1].children or ()} <= {"text"}
    assert " ".join("".join(t.content for t in found[1].children or ()).split()) == typed


@pytest.mark.parametrize(
    "body",
    [
        "`foo\n\n<script>alert(1)</script>\n\n`bar",
        "``` a`b\n<b onclick=x>y</b>\n```",
        "a ` b\n` <script>x</script> ` z",
        "\\`<img src=x>`",
        "- `a\n- <u>x</u> `b",
        "| a ` | <b>x</b> ` |\n|---|---|\n| c | d |",
        "[a]\n\n[a]: javascript:alert(1)",
        "[a](java&#115;cript:alert(1)) <javascript:alert(1)>",
        "![i](http://e.invalid/a.png) inside",
        "![i][r] inside\n\n[r]: http://e.invalid/a.png",
        "<!-- a\n\nb -->",
        "<div>\n\n*x*\n\n</div>",
    ],
)
def test_prose_that_a_host_would_read_otherwise(body: str) -> None:
    """A host takes HTML, and so other stretches of the same text for code."""
    markdown, _ = render(built(f"---\ntitle: T\n---\n\n{body}\n"), "t")
    kinds = {t.type for t in tokens(markdown)}
    assert not kinds & {"html_inline", "html_block", "image"}
    assert not any("javascript" in str(t.attrs.get("href", "")) for t in tokens(markdown))


# --- prose, typed once and read again -----------------------------------------------------------------------


def shape(found: list[Token]) -> list[tuple[str, str]]:
    """What a parser makes of prose: each token with what it says; marks and line ends apart."""
    out: list[tuple[str, str]] = []
    for token in found:
        if token.type == "inline":
            out += shape(token.children or [])
        elif token.type in ("text", "softbreak", "image"):
            before = out.pop()[1] if out and out[-1][0] == "text" else ""
            out.append(("text", before + (" " if token.type == "softbreak" else token.content)))
        elif token.type in ("fence", "code_block"):
            out.append(("code", token.content.rstrip("\n")))
        else:
            said = token.content.strip() or f"{token.attrs.get('href', '')}{token.attrs.get('start', '')}"
            out.append((token.type, said))
    return [(kind, " ".join(said.split()) if kind == "text" else said) for kind, said in out]


PROSE = [
    "One paragraph,\nof two lines.\n\nAnd another with **bold *and slanted* text** and `code`.",
    "A line with a break\\\nand `` code with ` a tick `` and ` `` `.",
    "* a\n* b\n  - c\n  - d\n\n* e\n\n  with a second paragraph",
    "3. three\n4. four\n\n1) one\n2) two",
    "> quoted\n> - a list\n>\n> more\n\nnot quoted",
    "| a | b | c |\n|:--|:-:|--:|\n| 1 | `x \\| y` | *z* |\n| \\| | | [l](https://e.org/?a=1&b=2) |",
    "```text\n$ not math *not bold*\n\n\n<b>\n```\n\n~~~\n```\n~~~",
    "- a\n\n  ```\n  code in a list\n  ```\n\n- b",
    "\\* no list\n\n\\# no heading\n\n1\\. no list\n\na\n\\---\n\nb\n\\===",
    "2019. was a year\n\n+ 3 is no list to us, - 4 neither",
    "* * *\n\nafter a rule",
    "<https://e.org/a_b> and [text *with* markup](https://e.org 'title')",
    "5 < 6 > 4 & &copy; &amp;copy; \\& <b>no tag</b>",
    "x_1 and y_2, 2*3*4, __init__, ~~struck~~, $5 and $6, #7, |8|",
    "- [ ] to do\n- [x] done\n-\n- after an empty one",
]


@pytest.mark.parametrize("text", PROSE)
def test_prose_reads_as_it_was_meant(text: str) -> None:
    meant = parse(text)
    assert shape(HOST.parse(prose(meant, str))) == shape(meant)


@settings(max_examples=300, deadline=None)
@given(
    st.lists(
        st.sampled_from(
            [*"ab12.-+*_`~<>[]()#|\\!&;:=\n\n  $\"'", "\n\n", "```", "<b>", "&lt;", "- ", "1. ", "> ", "](x)"]
        ),
        min_size=1,
        max_size=40,
    ).map("".join)
)
def test_any_prose_stays_inert_and_says_the_same(text: str) -> None:
    """Whatever is typed: a host finds no HTML and no image, and reads what the sheet's own reader read."""
    meant = parse(text)
    markdown = prose(meant, str)
    assert not {t.type for t in tokens(markdown)} & {"html_inline", "html_block", "image"}
    assert shape(HOST.parse(markdown)) == shape(meant)


def test_values_are_printed_in_prose_and_not_in_code() -> None:
    body = (
        "It is {P}, {P [lbf]}, **{P}**, \\{P} and `{P}`.\n\n| a |\n|---|\n| {P} |\n\n"
        "## With {P}\n\n    P = 20 kN -- p\n"
    )
    text, _ = render(built(f"---\ntitle: T\n---\n\n{body}"), "t")
    assert seen(text).count("20\u202fkN".replace("\u202f", " ")) >= 4 or "20\u202fkN" in text
    assert "It is 20\u202fkN, 4496\u202flbf, **20\u202fkN**, \\{P\\} and `{P}`." in text
    assert "| 20\u202fkN |" in text
    assert "\n## 1 With 20\u202fkN\n" in text


def test_code_in_prose_keeps_its_empty_lines() -> None:
    text, _ = render(built("---\ntitle: T\n---\n\n```\na\n\n\n\nb\n```\n"), "t")
    assert "```\na\n\n\n\nb\n```" in text


# --- what a reader finds ------------------------------------------------------------------------------------


def test_the_document_in_order() -> None:
    text = seen(written("everything"))
    order = [
        "Everything", "Every kind of step", "Not for use: 2 errors", "Not checked", "Conclusion.",
        "not satisfied",
        "It does, with", "Objective.", "Method.", "Governing", "To confirm: A1.", "Review.",
        "Before any section",
        "taken", "ratio", "margin", "cross-check", "not computed because of line", "Error, line",
        "Design inputs",
        "no source", "Assumptions", "Sources", "Criteria", "Findings", "Revisions", "Codes and drawings",
        "Caution.",
        "legal owner", "Tern Slip boatyard", "R.M. (typed, not on record)", "loadpath 9.9.9",
    ]  # fmt: skip
    at = 0
    for phrase in order:
        assert text.find(phrase, at) >= 0, phrase
        at = text.find(phrase, at)
    assert CAUTION in text


def test_a_finding_is_one_quotation_with_its_mend() -> None:
    found = HOST.parse(written("everything"))
    starts = [i for i, t in enumerate(found) if t.type == "blockquote_open"]
    texts = []
    for start in starts:
        end = next(i for i in range(start, len(found)) if found[i].type == "blockquote_close")
        texts.append([t.content for t in found[start:end] if t.type == "inline"])
    (mismatch,) = (t for t in texts if "unit-mismatch" in t[0])
    assert mismatch[0].startswith("**Error, line 66.**")
    assert len(mismatch) == 2 and "factor" in mismatch[1]


# --- tables, algebra, figures -------------------------------------------------------------------------------


def part(number: str, name: str = "several") -> str:
    """What is written of one step, without its anchor."""
    _, _, rest = written(name).partition(f'<a id="s{number}"></a>')
    return re.split(r'\n<a id="s\d+\.\d+"></a>|\n## ', rest)[0].strip()


def test_a_table_of_data_in_full() -> None:
    assert part("1.2") == (
        "**1.2** **Table plates** *of the girder \\[s\\] \\[A1\\]*\n\n"
        '| plate | <a id="s1.2a"></a>1.2a $b$ in mm | <a id="s1.2b"></a>1.2b $h$ in mm '
        '| <a id="s1.2c"></a>1.2c $k$ |\n'
        "|---|---:|---:|---:|\n"
        "| lower flange | 220 | 20 | 1 |\n"
        "| web | 10 | 400.25 | $\\dfrac{P}{10\\thinspace \\mathrm{kN}}$ = 3.000 |\n\n"
        "- 1.2a $b$: used in [A 1.3](#s1.3), [t 1.4](#s1.4), [b\\_w 1.5](#s1.5)\n"
        "- 1.2b $h$: used in [A 1.3](#s1.3), [t 1.4](#s1.4)\n"
        "- 1.2c $k$: from [P 1.1](#s1.1) · used in [σ 1.7](#s1.7)"
    )


def test_a_result_row_by_row_in_full() -> None:
    assert part("1.4") == (
        "**1.4** *thickness*\n\n"
        "$$\nt = \\min(\\mathrm{plates.}b, \\mathrm{plates.}h)\n$$\n\n"
        "| row | with values | result |\n|---|---|---:|\n"
        "| lower flange | $\\min(220\\thinspace \\mathrm{mm}, 20\\thinspace \\mathrm{mm})$ | **20.00 mm** |\n"
        "| web | $\\min(10\\thinspace \\mathrm{mm}, 400.25\\thinspace \\mathrm{mm})$ | **10.00 mm** |\n\n"
        "- row lower flange: min: governed by $\\mathrm{plates.}h$\n\n"
        "- row web: min: governed by $\\mathrm{plates.}b$\n\n"
        "from [plates.b 1.2a](#s1.2a), [plates.h 1.2b](#s1.2b)"
    ).replace(" mm**", "\u202fmm**")


def test_a_criterion_row_by_row_in_full() -> None:
    mpa = "\\thinspace \\mathrm{MPa}"
    assert part("1.8") == (
        f"**1.8** **Strength** plates each \\[s\\]\n\n$$\n2 \\cdot \\sigma \\le 20{mpa}\n$$\n\n"
        "| row | with values | each side | ratio | verdict |\n|---|---|---|---:|---|\n"
        f"| lower flange | $2 \\times 6.818{mpa} \\le 20{mpa}$ | $13.64{mpa} \\le 20{mpa}$ | 0.682 "
        "| satisfied, conditional on A1 |\n"
        f"| **web** | $2 \\times 22.49{mpa} \\le 20{mpa}$ | $44.97{mpa} \\gt 20{mpa}$ | **2.249** "
        "| **not satisfied, governs** |\n\n"
        "ratio **2.249**, **not satisfied**\n\nfrom [σ 1.7](#s1.7)"
    )
    assert "[1.8](#s1.8) strength, plates, row web | 2.249 |" in written("several")


def test_a_two_way_table_in_full() -> None:
    assert part("1.10").startswith(
        "**1.10** **Table grid** *of factors \\[s\\]*\n\n"
        "| r | 0.1 | 0.2 |\n|---:|---:|---:|\n| 1 | 1.68 | 1.53 |\n| 2 | 1.71 | 1.55 |\n\nused in"
    )


def test_what_algebra_made_stands_by_itself() -> None:
    assert (
        "M(x) = \\int V(x)\\thinspace \\mathrm{d}x\n$$\n\nworked out\n\n"
        "$$\n{} = R \\cdot x - \\dfrac{q \\cdot x^{2}}{2}\n$$"
    ) in part("2.5")
    assert "\n\nworked out\n\n$$\nq \\cdot L = q \\cdot L\n$$\n\nwith values: $2" in part("2.14")
    assert "worked out" not in part("2.4")


def test_a_solution_in_full() -> None:
    assert part("2.10") == (
        "**2.10**\n\n$$\n"
        "R_{\\mathrm{B}} = \\dfrac{P \\cdot 1\\thinspace \\mathrm{m}}{L} = "
        "\\dfrac{30\\thinspace \\mathrm{kN} \\times 1\\thinspace \\mathrm{m}}{4\\thinspace \\mathrm{m}}"
        "\n$$\n\n= **7.500 kN**\n\n"
        "| put back | left | right | left less right |\n|---|---:|---:|---:|\n"
        "| $R_{\\mathrm{A}} + R_{\\mathrm{B}} = P$ | 30.0000 kN | 30.0000 kN | 0 kN |\n"
        "| $R_{\\mathrm{B}} \\cdot L = P \\cdot 1\\thinspace \\mathrm{m}$ | 30.0000 kN⋅m | 30.0000 kN⋅m "
        "| 0 kN⋅m |\n\n"
        "from the equations of [2.9](#s2.9)"
    ).replace(" kN", "\u202fkN")
    bounds = "between bounds $0\\thinspace \\mathrm{m} \\le d \\le \\dfrac{L}{2}$, solved by bracketing"
    assert bounds in part("2.11")
    assert "\n\n$d$ = **1.011\u202fm**\n\n" in part("2.11")


def test_an_unknown_is_one_line() -> None:
    assert part("2.3") == (
        "**2.3** *unknown: reaction*: $R$ in kN, solved for in [2.6](#s2.6) "
        "· used in [V 2.4](#s2.4), [R 2.6](#s2.6)"
    )


def test_a_plot_is_a_file_beside_the_text_with_its_caption() -> None:
    _, images = render(built(SEVERAL), "several")
    assert list(images) == ["several.figure-1.svg"]
    (image,) = [t for t in tokens(part("2.12")) if t.type == "image"]
    assert image.attrs["src"] in images and images[str(image.attrs["src"])].startswith(b"<svg ")
    assert image.content.startswith("Plot of V(x) in kN and M(x) in kN⋅m against x in m")
    assert "\n\n**Figure 1** *shear and moment*: $V(x)$, $M(x)$ for $x$ from" in part("2.12")


def test_a_table_of_values_in_full() -> None:
    assert part("2.13").startswith(
        "**2.13** Values of $M(x)$, $V(x)$ for $x$ from $0\\thinspace \\mathrm{m}$ to $L$\n\n"
        "| $x$ in m | $M(x)$ in kN⋅m | $V(x)$ in kN |\n|---:|---:|---:|\n"
        "| 0 | 0 | 4.000 |\n| 1 | 3.000 | 2.000 |\n| 2 | 4.000 | 0 |\n"
        "| 3 | 3.000 | −2.000 |\n| 4 | 0 | −4.000 |\n"
    )


@pytest.mark.parametrize("label", LABELS)
def test_a_row_label_is_shown_as_typed_wherever_it_stands(label: str) -> None:
    name = f"label {LABELS.index(label)}"
    paragraphs = [t.children or () for t in HOST.parse(written(name)) if t.type == "inline"]
    cells = ["".join(c.content for c in inside if c.type == "text") for inside in paragraphs]
    assert cells.count(label) == 5, "corner, table, result, criterion, validity"
    assert any(cell.startswith(f"row {label}: min: governed by") for cell in cells)
    assert not [t for t in tokens(written(name)) if t.type in ("image", "code_inline")]
    assert {t.content for t in tokens(written(name)) if t.type in ("html_inline", "html_block")} <= {
        "</a>", *(f'<a id="s0.{n}">' for n in ("1", "1a", "2", "3", "4", "5"))
    }  # fmt: skip
