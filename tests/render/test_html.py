"""HTML: one page that stands alone, that a screen reader can follow and that no text of a sheet can break."""

from __future__ import annotations

import base64
import re
from dataclasses import replace
from functools import cache
from itertools import pairwise
from pathlib import Path
from xml.etree import ElementTree

import pytest
from hypothesis import given
from hypothesis import strategies as st
from pages import (
    CALCSHEETS,
    EVERYTHING,
    HOSTILE,
    LABELS,
    PLAIN_HOSTILE,
    ROOT,
    SEVERAL,
    as_xml,
    built,
    everywhere,
    issued,
    labelled,
    skeleton,
    words,
)

from loadpath.document.model import CAUTION, ResultRow, TitleBlock
from loadpath.formula.tree import Shown
from loadpath.pipeline import audited, read_input
from loadpath.render.html import TALL, css_string, hung, render, style, title_block_strings
from loadpath.render.markdown import render as markdown
from loadpath.render.templates import folder
from loadpath.trace import texts
from loadpath.units.printing import quantity

PAGES = {
    **{path.name.removesuffix(".sheet.md"): (lambda p=path: render(issued(p))) for path in CALCSHEETS},
    "everything": lambda: render(built(EVERYTHING)),
    "several": lambda: render(built(SEVERAL)),
    **{f"label {i}": (lambda t=text: render(built(labelled(t)))) for i, text in enumerate(LABELS)},
    "bare": lambda: render(built("---\ntitle: Bare\n---\n")),
    "no sheet": lambda: render(built("no front matter\n")),
    **{f"hostile {i}": (lambda t=text: render(built(everywhere(t)))) for i, text in enumerate(HOSTILE)},
}
MISTAKES = sorted((ROOT / "tests" / "cases" / "mistakes").glob("*.case"))
each_page = pytest.mark.parametrize("name", PAGES)


@cache
def source(name: str) -> str:
    return PAGES[name]()


@cache
def page(name: str) -> ElementTree.Element:
    return as_xml(source(name))


def ids(root: ElementTree.Element) -> list[str]:
    return [e.attrib["id"] for e in root.iter() if "id" in e.attrib]


# --- form ---------------------------------------------------------------------------------------------------


@each_page
def test_a_page_is_well_formed(name: str) -> None:
    text = source(name)
    assert text.startswith("<!doctype html>\n<html lang=")
    root = as_xml(text)
    assert [child.tag for child in root] == ["head", "body"]


@each_page
def test_anchors_are_unique_and_every_link_within_the_page_arrives(name: str) -> None:
    root = page(name)
    known = ids(root)
    assert len(known) == len(set(known))
    inside = [a.attrib["href"][1:] for a in root.iter("a") if a.attrib.get("href", "").startswith("#")]
    assert set(inside) <= set(known)


@pytest.mark.parametrize("path", CALCSHEETS, ids=lambda p: p.name.removesuffix(".sheet.md"))
def test_every_step_has_its_anchor_and_is_linked_both_ways(path: Path) -> None:
    document = issued(path)
    root = as_xml(render(document))
    heads = [block.head for block in document.blocks if hasattr(block, "head")]
    assert [i for i in ids(root) if re.fullmatch(r"s\d+\.\d+", i)] == [f"s{head.number}" for head in heads]
    by_id = {e.attrib["id"]: e for e in root.iter() if "id" in e.attrib}
    for head in heads:
        links = {a.attrib["href"] for a in by_id[f"s{head.number}"].iter("a") if "href" in a.attrib}
        assert {f"#s{r.number}" for r in (*head.feeds_from, *head.used_in)} <= links


# --- it stands alone ----------------------------------------------------------------------------------------


@each_page
def test_nothing_is_fetched_from_elsewhere(name: str) -> None:
    text = source(name)
    root = as_xml(text)
    assert {e.tag for e in root.iter()} & {
        "link",
        "iframe",
        "object",
        "embed",
        "base",
        "form",
        "video",
        "audio",
    } == set()
    for element in root.iter():
        for attribute in ("src", "srcset", "data", "action", "poster", "background", "style"):
            value = element.attrib.get(attribute, "")
            assert re.match(r"data:image/|--[ud]:[\d.]+$|text-align:(left|right|center)$|$", value)
    css = "".join(e.text or "" for e in root.iter("style"))
    assert "@import" not in css
    addresses = re.findall(r"url\(([^)]{0,40})", css)
    assert addresses and all(address.startswith('"data:font/woff2;base64,') for address in addresses)


def test_the_four_fonts_are_inside() -> None:
    fonts = re.findall(r'url\("data:font/woff2;base64,([^"]*)"\)', style())
    assert len(fonts) == 4
    assert all(base64.b64decode(font)[:4] == b"wOF2" for font in fonts)
    assert "fonts/" not in style()
    assert "/*" not in style()


def test_script_only_marks_and_holds_no_text_of_the_sheet() -> None:
    scripts = {"".join(e.text or "" for e in page(name).iter("script")) for name in PAGES}
    assert len(scripts) == 1
    (script,) = scripts
    for word in (
        "fetch",
        "XMLHttp",
        "eval",
        "innerHTML",
        "document.write",
        "location",
        "storage",
        "cookie",
        "import",
    ):
        assert word not in script
    assert len(script.splitlines()) < 15


def test_nothing_waits_for_script_to_be_seen() -> None:
    root = page("everything")
    assert not [e for e in root.iter() if "hidden" in e.attrib or any(a.startswith("on") for a in e.attrib)]
    css = (folder() / "style.css").read_text(encoding="utf-8")
    screen = re.sub(r"@media print\{.*?\n\}", "", css, flags=re.DOTALL)
    hidden = {selector.strip() for selector in re.findall(r"([^{}]*)\{[^{}]*display:none", screen)}
    assert hidden <= {".rows thead", ".byrow thead"}, "rows that say themselves what they are"


# --- a screen reader ----------------------------------------------------------------------------------------


@each_page
def test_landmarks_and_language(name: str) -> None:
    root = page(name)
    assert re.fullmatch(r"[a-z]{2,3}(-[A-Za-z0-9]+)*", root.attrib["lang"])
    assert len(list(root.iter("main"))) == 1
    (nav,) = root.iter("nav")
    assert nav.attrib["aria-label"]
    labelled = list(root.iter("section"))
    assert labelled and all(e.attrib["aria-labelledby"] in ids(root) for e in labelled)
    first_link = next(root.iter("a"))
    assert (first_link.attrib["class"], first_link.attrib["href"]) == ("skip", "#summary")
    assert words(next(root.iter("title")))


@each_page
def test_headings_are_in_order(name: str) -> None:
    levels = [int(e.tag[1]) for e in page(name).iter() if re.fullmatch("h[1-6]", e.tag)]
    assert levels[0] == 1
    assert levels.count(1) == 1
    for above, below in pairwise(levels):
        assert below <= above + 1


@each_page
def test_tables_and_images_are_described(name: str) -> None:
    root = page(name)
    prose = {th for div in root.iter("div") if div.get("class") == "prose" for th in div.iter("th")}
    for th in root.iter("th"):
        assert th in prose or th.attrib["scope"] in ("row", "col")
    for image in root.iter("img"):
        assert image.attrib["alt"]
    for bar in root.iter("span"):
        if "bar" in bar.get("class", "").split():
            assert bar.attrib["aria-hidden"] == "true"


def test_a_figure_has_its_caption_twice_and_its_bytes_inside() -> None:
    root = page("everything")
    (figure,) = root.iter("figure")
    (image,) = figure.iter("img")
    assert image.attrib["alt"] == "A sketch"
    assert image.attrib["src"].startswith("data:image/png;base64,")
    assert words(next(figure.iter("figcaption"))) == "Figure 1A sketch"


# --- hostile texts ------------------------------------------------------------------------------------------

TAGS = {
    "html", "head", "body", "meta", "title", "style", "script", "a", "main", "header", "footer", "nav",
    "section",
    "h1", "h2", "h3", "h4", "h5", "h6", "p", "b", "i", "br", "wbr", "em", "strong", "code", "div", "span",
    "small",
    "sub", "sup", "dl", "dt", "dd", "ul", "ol", "li", "table", "thead", "tbody", "tr", "th", "td", "figure",
    "figcaption", "img", "pre", "blockquote", "hr",
    "math", "mrow", "mi", "mn", "mo", "mtext", "ms", "mspace", "mfrac", "msqrt", "mroot", "msub", "msup",
    "msubsup",
    "munder", "munderover", "mtable", "mtr", "mtd", "mpadded", "mstyle",
}  # fmt: skip
ATTRIBUTES = {
    "lang", "class", "charset", "name", "content", "href", "id", "aria-labelledby", "aria-label",
    "aria-hidden", "data-of",
    "scope", "colspan", "src", "alt", "style", "start",
    "displaystyle", "width", "stretchy", "fence", "separator", "form", "lspace", "rspace", "minsize",
    "maxsize",
    "columnalign", "mathvariant", "scriptlevel", "height", "depth", "voffset", "symmetric", "columnspacing",
    "rowspacing",
}  # fmt: skip


@pytest.mark.parametrize("text", HOSTILE)
def test_no_text_of_the_front_matter_adds_an_element_or_an_attribute(text: str) -> None:
    harmless = skeleton(render(built(everywhere("Harmless", front_only=True))))
    assert skeleton(render(built(everywhere(text, front_only=True)))) == harmless


@pytest.mark.parametrize("text", PLAIN_HOSTILE)
def test_no_note_heading_caption_word_or_prose_adds_an_element_or_an_attribute(text: str) -> None:
    """The faulty line at the end is left out of the comparison: its finding depends on what stands there."""
    plain, hostile = (re.sub(r"    z = x \+ .*\n", "", everywhere(t)) for t in ("Harmless", text))
    assert skeleton(render(built(hostile))) == skeleton(render(built(plain)))


@each_page
def test_only_known_elements_and_attributes(name: str) -> None:
    root = page(name)
    assert {e.tag for e in root.iter()} <= TAGS
    assert {a for e in root.iter() for a in e.attrib} <= ATTRIBUTES
    assert sum(e.tag == "script" for e in root.iter()) == 1
    assert sum(e.tag == "style" for e in root.iter()) == 2
    for a in root.iter("a"):
        assert re.match(r"#|https?://|mailto:", a.attrib.get("href", "#"))


@pytest.mark.parametrize("text", [*HOSTILE, "Näive & “quoted” <text> 吊耳"])
def test_a_text_is_shown_as_it_was_typed(text: str) -> None:
    """In the title, the registers and the title block; signs that turn the direction of writing are not."""
    expected = " ".join(re.sub("[\u202a-\u202e\u2066-\u2069]", "\ufffd", text).split())
    root = as_xml(render(built(everywhere(text, front_only=True))))
    places = [next(root.iter("h1")), next(root.iter("title"))]
    places += [e for e in root.iter("tr") if e.get("id") in ("src-s", "a-A1")]
    places += [e for e in root.iter("dl") if e.get("class") == "block"]
    assert all(expected in words(place) for place in places)


def test_no_sign_turns_the_direction_of_writing() -> None:
    for text in (
        everywhere("a\u202eb\u2067c"),
        "---\ntitle: T\n---\n\na\u202eb `c\u2066d`\n\n    x = 1 -- e\u202df\n",
    ):
        assert not re.search("[\u202a-\u202e\u2066-\u2069]", render(built(text)))


# --- the title block as CSS ---------------------------------------------------------------------------------


def read_css_string(css: str) -> tuple[str, str]:
    """The string that a CSS text begins with, and what stands behind it (CSS Syntax 3, 4.3.5 and 4.3.7)."""
    assert css[0] == '"'
    out, at = [], 1
    while css[at] != '"':
        assert css[at] != "\n", "a newline ends a string as a bad one"
        if css[at] != "\\":
            out.append(css[at])
            at += 1
            continue
        match = re.compile(r"\\([0-9a-fA-F]{1,6})[ \n\t]?").match(css, at)
        assert match, "an escape that is no number"
        out.append(chr(int(match.group(1), 16)))
        at = match.end()
    return "".join(out), css[at + 1 :]


@given(
    st.text(
        st.characters(
            exclude_categories=["Cs"],
            exclude_characters="\0\u202a\u202b\u202c\u202d\u202e\u2066\u2067\u2068\u2069",
        )
    )
)
def test_a_css_string_says_what_it_was_given_and_cannot_be_ended(text: str) -> None:
    written = css_string(text)
    assert read_css_string(written + ";next") == (text, ";next")
    assert not set(written) & set("<>{}&'\n\r\f")


@pytest.mark.parametrize("text", HOSTILE)
def test_the_style_of_the_title_block_holds_hostile_texts(text: str) -> None:
    css = title_block_strings(TitleBlock(*[text] * 10), (text,))
    assert css.startswith(":root{") and css.endswith("}")
    rest, names = css.removeprefix(":root{"), []
    while not rest.startswith("--tb-lines"):
        name, _, rest = rest.partition(":")
        _, rest = read_css_string(rest)
        assert rest[0] == ";"
        rest = rest[1:]
        names.append(name)
    fields = [
        "owner",
        "title",
        "number",
        "revision",
        "created",
        "reviewed",
        "approved",
        "date",
        "made",
        "state",
    ]
    assert names == [f"--tb-{name}" for name in fields]
    assert re.fullmatch(r"--tb-lines-1:\d+;--tb-lines-2:\d+\}", rest)


@pytest.mark.parametrize(
    ("title", "owner", "reviewed", "rows"),
    [
        ("Lug", "Yard", "", (2, 1)),
        ("Lug", "Tern Slip boatyard and engine works of the estuary", "", (4, 1)),
        (
            "A title of so many words that it takes more than the two lines of a short one, and then some",
            "",
            "",
            (4, 1),
        ),
        ("Lug", "", "R.M. (typed, not on record)", (2, 2)),
        ("Lug", "", "x" * 60, (2, 4)),
        ("Lug", "", "ABCDEFGHIJ-ABCDEFGHIJ-ABCDEFGHIJ", (2, 3)),
    ],
)
def test_rows_of_the_title_block_grow_with_their_texts(
    title: str, owner: str, reviewed: str, rows: tuple[int, int]
) -> None:
    css = title_block_strings(
        TitleBlock(owner, title, "Sub", "1", "A", "T.S.", reviewed, "", "2026-01-01", "made"), ()
    )
    assert css.endswith(f"--tb-lines-1:{rows[0]};--tb-lines-2:{rows[1]}}}")


# --- what a reader finds ------------------------------------------------------------------------------------


@pytest.mark.parametrize("path", CALCSHEETS, ids=lambda p: p.name.removesuffix(".sheet.md"))
def test_every_value_and_verdict_is_on_the_page(path: Path) -> None:
    trace = audited(read_input(path))
    root = as_xml(render(issued(path)))
    rows = {e.attrib["id"]: e for e in root.iter("div") if e.get("id", "").startswith("s")}
    for step in trace:
        shown = texts.display(step)
        if shown is not None and not shown.word:
            row = "".join("".join(rows[f"s{step.number}"].itertext()).split())
            assert "".join(quantity(shown.number, shown.unit).split()) in row
    for block in issued(path).blocks:
        if hasattr(block, "verdict"):
            assert block.verdict.replace("_", "") in words(rows[f"s{block.head.number}"])


def test_the_page_in_order() -> None:
    text = words(next(page("everything").iter("main")))
    order = [
        "Everything", "Every kind of step", "SB-1, revision B, for review · Slip renewal", "Not for use",
        "Not checked",
        "Conclusion", "not satisfied", "It does, with", "Objective", "Show that 50.00 MPa holds.",
        "Method", "Governing",
        "To confirm", "no review on record", "Before any section", "4496 lbf", "Design inputs", "Assumptions",
        "Sources", "Criteria", "Findings", "Revisions", "Codes and drawings", "Caution.", "Legal owner",
        "loadpath 9.9.9",
    ]  # fmt: skip
    at = 0
    for phrase in order:
        found = text.find(phrase.replace("\u202f", " "), at)
        assert found >= 0, phrase
        at = found
    assert CAUTION in text
    assert "R.M. (typed, not on record)" in text
    assert "numbered when printed" in text


def test_a_document_that_is_not_for_use_says_so_in_its_head_and_on_each_printed_sheet() -> None:
    text = source("everything")
    root = as_xml(text)
    alerts = [words(e) for e in root.iter("p") if e.get("class") == "alert"]
    assert alerts[0] == "Not for use: 2 errors (listed below)"
    assert '--tb-state:"Not for use: 2 errors"' in text


def test_a_finding_stands_in_place_with_its_line_and_its_mend() -> None:
    root = page("everything")
    faulty = [e for e in root.iter("div") if "error" in e.get("class", "").split()]
    mismatch, open_ = (words(e) for e in faulty)
    assert mismatch.startswith(
        "Error, line 66. `+` joins a force and a length: `3 kN` and `2 m` unit-mismatch 66 x = 3 kN + 2 m"
    )
    assert mismatch.endswith("look for one that is missing or too many.")
    assert [e.text for e in faulty[0].iter("span") if e.get("class") == "at"] == ["+"]
    assert open_.startswith("Error, line 69.") and "never closed" in open_


def test_a_finding_in_another_file_names_it() -> None:
    root = as_xml(
        render(built("---\ntitle: T\n---\n", files={"project.yaml": b"owner: Yard\nowmer: Yard\n"}))
    )
    (finding,) = (e for e in root.iter("div") if "error" in e.get("class", ""))
    assert words(finding).startswith("Error, line 2 of project.yaml.")
    assert words(finding).endswith("Did you mean `owner`?")


@pytest.mark.parametrize("path", MISTAKES, ids=lambda p: p.stem)
def test_every_mistyped_sheet_gives_a_whole_page_with_its_findings_in_place(path: Path) -> None:
    sheet = path.read_text(encoding="utf-8").split("=====\n")[1]
    document = built(sheet)
    root = as_xml(render(document))
    text = words(root)
    for finding, _ in document.registers.findings:
        assert text.count(words_of(finding.message)) >= (1 if finding.severity == "note" else 2), finding.slug
    links = {a.attrib["href"][1:] for a in root.iter("a") if a.attrib.get("href", "").startswith("#")}
    assert links <= set(ids(root))
    assert markdown(document, "case")[0].count(f"({document.registers.findings[0][0].slug})") >= 1


def words_of(text: str) -> str:
    return " ".join(re.sub("[\u202a-\u202e\u2066-\u2069]", "\ufffd", text).split())


def test_paper_and_language_are_those_of_the_sheet() -> None:
    root = as_xml(render(built("---\ntitle: T\npage: Letter\nlanguage: de\n---\n")))
    assert root.attrib == {"lang": "de", "class": "Letter"}
    assert page("bare").attrib == {"lang": "en", "class": "A4"}


# --- tables, algebra, figures -------------------------------------------------------------------------------


def step(number: str, name: str = "several") -> ElementTree.Element:
    return next(e for e in page(name).iter("div") if e.get("id") == f"s{number}")


def of_class(root: ElementTree.Element, name: str) -> list[ElementTree.Element]:
    return [e for e in root.iter() if name in e.get("class", "").split()]


def plain(element: ElementTree.Element) -> str:
    """Its words, without the sign that says "of" in a formula."""
    return words(element).replace("\u2061", "")


def rows_of(element: ElementTree.Element) -> list[list[str]]:
    return [[plain(cell) for cell in row] for row in element.iter("tr")]


def markup(name: str, start: str, end: str) -> str:
    text = source(name)
    at = text.index(start)
    return text[at : text.index(end, at) + len(end)]


def test_a_table_of_data_in_full() -> None:
    assert markup("several", '<div class="step data" id="s1.2">', "</table>") == (
        '<div class="step data" id="s1.2"><a class="num" href="#s1.2">1.2</a>\n'
        '<div class="caption"><b>Table plates</b> <span class="note">of the girder '
        '<a class="cite" href="#src-s">[s]</a> <a class="cite" href="#a-A1">[A1]</a></span></div>\n'
        '<div class="scroll"><table class="data">\n'
        '<thead><tr><th scope="col">plate</th>'
        '<th scope="col" id="s1.2a"><a class="num" href="#s1.2a">1.2a</a> '
        '<math displaystyle="true"><mi>b</mi></math> <span class="unit">in mm</span></th>'
        '<th scope="col" id="s1.2b"><a class="num" href="#s1.2b">1.2b</a> '
        '<math displaystyle="true"><mi>h</mi></math> <span class="unit">in mm</span></th>'
        '<th scope="col" id="s1.2c"><a class="num" href="#s1.2c">1.2c</a> '
        '<math displaystyle="true"><mi>k</mi></math></th></tr></thead>\n'
        "<tbody>\n"
        '<tr><th scope="row">lower flange</th><td>220</td><td style="--d:2.5">20</td>'
        '<td style="--d:3.5">1</td></tr>\n'
        '<tr><th scope="row">web</th><td>10</td><td>400.25</td><td><math displaystyle="true"><mi>P</mi>'
        '<mo form="infix" lspace="0.06em" rspace="0.06em">/</mo><mrow>'
        '<mo form="prefix" stretchy="false">(</mo><mrow><mn>10</mn><mspace width="0.2em"/><mtext>kN</mtext>'
        '</mrow><mo form="postfix" stretchy="false">)</mo></mrow></math> = 3.000</td></tr>\n'
        "</tbody>\n</table>"
    )


def test_each_column_has_a_trail_of_its_own() -> None:
    trails = [e for e in step("1.2").iter("div") if e.get("data-of")]
    assert [e.get("data-of") for e in trails] == ["s1.2a", "s1.2b", "s1.2c"]
    assert words(trails[2]) == "k 1.2c from P 1.1 · used in σ 1.7"


def test_a_result_goes_row_by_row_with_its_values_at_the_right() -> None:
    assert markup("several", '<table class="byrow">', "</table>") == (
        '<table class="byrow">\n<tbody>\n'
        '<tr><th scope="row">lower flange</th><td><div class="flow"><math displaystyle="true">'
        '<mo form="infix">=</mo><mrow><mn>220</mn><mspace width="0.2em"/><mtext>mm</mtext></mrow><mo>×</mo>'
        '<mrow><mn>20</mn><mspace width="0.2em"/><mtext>mm</mtext></mrow></math></div></td>'
        '<td class="res">4400\u202fmm²</td></tr>\n'
        '<tr><th scope="row">web</th><td><div class="flow"><math displaystyle="true">'
        '<mo form="infix">=</mo><mrow><mn>10</mn><mspace width="0.2em"/><mtext>mm</mtext></mrow><mo>×</mo>'
        '<mrow><mn>400.25</mn><mspace width="0.2em"/><mtext>mm</mtext></mrow></math></div></td>'
        '<td class="res">4002\u202fmm²</td></tr>\n'
        "</tbody></table>"
    )


def test_a_criterion_is_judged_row_by_row_beside_its_own_verdict() -> None:
    box = step("1.8")
    (table,) = of_class(box, "judged")
    assert rows_of(table) == [
        ["lower flange", "2×6.818MPa≤20MPa", "13.64MPa≤20MPa", "0.682",
         "satisfied, conditional on A1"],
        ["web", "2×22.49MPa≤20MPa", "44.97MPa>20MPa", "2.249", "not satisfied, governs"],
    ]  # fmt: skip
    assert [e.get("class") for e in table.iter("tr")] == [None, "strong"]
    assert [words(e) for e in of_class(box, "judge")] == ["2.249not satisfied"]
    assert "strength, plates, row web" in words(next(page("several").iter("section")))


def test_a_two_way_table_and_the_rows_read() -> None:
    assert rows_of(step("1.10")) == [["r", "0.1", "0.2"], ["1", "1.68", "1.53"], ["2", "1.71", "1.55"]]
    assert "read in rows 1 and 2" in words(step("1.11"))


def test_what_algebra_made_is_marked() -> None:
    assert [words(e) for e in of_class(step("2.5"), "how")] == ["worked out"]
    assert of_class(step("2.4"), "how") == []
    (side,) = [e for e in of_class(step("2.14"), "flow") if of_class(e, "how")]
    assert words(side) == "worked out q⋅L=q⋅L"


def test_the_side_that_algebra_made_of_a_result_is_marked() -> None:
    document = built(SEVERAL)
    blocks = tuple(
        replace(b, derived=1) if isinstance(b, ResultRow) and b.head.number == "2.7" else b
        for b in document.blocks
    )
    root = as_xml(render(replace(document, blocks=blocks)))
    (area,) = [e for e in root.iter("div") if e.get("id") == "s2.7"]
    assert [bool(of_class(side, "how")) for side in of_class(area, "side")] == [False, True, False]
    text, _ = markdown(replace(document, blocks=blocks), "several")
    assert "\\mathrm{d}x\n$$\n\nworked out\n\n$$\n{} = \\dfrac{q \\cdot L}{2}" in text


def test_a_solution_shows_equations_value_and_proof() -> None:
    first, last, numeric = step("2.9"), step("2.10"), step("2.11")
    assert [words(e) for e in of_class(first, "left")] == ["RA+RB", "RB⋅L"]
    assert "solved as a linear system of 2 equations" in words(first)
    assert words(of_class(last, "trail")[0]) == "from the equations of 2.9"
    (table,) = of_class(last, "putback")
    assert rows_of(table) == [
        ["put back", "left", "right", "left less right"],
        ["RA+RB=P", "30.0000 kN", "30.0000 kN", "0 kN"],
        ["RB⋅L=P⋅1m", "30.0000 kN⋅m", "30.0000 kN⋅m", "0 kN⋅m"],
    ]
    assert "between bounds" in words(numeric) and "Brent" in words(numeric)
    assert words(of_class(numeric, "work")[0]) == "d= 1.011 m"


def test_an_unknown_is_one_line() -> None:
    said = "2.3Runknown: reaction used in V 2.4, R 2.6in kN, solved for in 2.6"
    assert words(step("2.3")) == said


def test_a_plot_is_a_figure_with_caption_and_alternative() -> None:
    figure = next(step("2.12").iter("figure"))
    image = next(figure.iter("img"))
    assert image.attrib["src"].startswith("data:image/svg+xml;base64,")
    assert image.attrib["alt"].startswith("Plot of V(x) in kN and M(x) in kN⋅m against x in m")
    assert plain(next(figure.iter("figcaption"))) == "Figure 1shear and moment: V(x), M(x) for x from 0m to L"


def test_a_table_of_values() -> None:
    assert rows_of(step("2.13")) == [
        ["x in m", "M(x) in kN⋅m", "V(x) in kN"],
        ["0", "0", "4.000"], ["1", "3.000", "2.000"], ["2", "4.000", "0"], ["3", "3.000", "−2.000"],
        ["4", "0", "−4.000"],
    ]  # fmt: skip
    assert plain(of_class(step("2.13"), "caption")[0]) == "Values of M(x), V(x) for x from 0m to L"


@pytest.mark.parametrize("label", LABELS)
def test_a_row_label_is_shown_as_typed_wherever_it_stands(label: str) -> None:
    root = page(f"label {LABELS.index(label)}")
    shown = " ".join(label.split())
    heads = [words(th) for th in root.iter("th")]
    assert heads.count(shown) == 5, "corner, table, result, criterion, validity"
    assert f"row {shown}: min: governed by" in words(root)
    assert {e.tag for e in root.iter()} <= TAGS and {a for e in root.iter() for a in e.attrib} <= ATTRIBUTES
    assert skeleton(source(f"label {LABELS.index(label)}"))[0] == ("html", ("class", "lang"))


@pytest.mark.parametrize(
    ("column", "room"),
    [
        (["1", "2.5", "12.25"], ["2.5", "1", ""]),
        (["1", "2", "30"], ["", "", ""]),
        (["12345.678", "0.5"], ["", "2"]),
        (["0.123456", "1"], ["", "6.84"]),
        (["1.5e-9", "2.25", "3"], ["", "", "2.5"]),
        (["-1.5", "2"], ["", "1.5"]),
        ([None, "1", "1.5"], ["", "1.5", ""]),
        ([], []),
    ],
)
def test_decimal_points_of_a_column_stand_in_line(column: list[str | None], room: list[str]) -> None:
    assert hung([None if n is None else Shown(n, "") for n in column]) == room


def test_more_rows_than_a_few_have_a_head_that_is_repeated_and_may_be_broken() -> None:
    few, many = (
        as_xml(render(built(
            "---\ntitle: Bars\n---\n\nTable bars: b\n\n| bar | F [kN] |\n|---|---|\n"
            + "".join(f"| {i}a | {i} |\n" for i in range(rows))
            + "\n    G = 2*bars.F -- g\n    limit bars: G <= 99 kN\n"
        )))
        for rows in (TALL, TALL + 1)
    )  # fmt: skip
    assert len(of_class(few, "tall")) == 0 and len(of_class(many, "tall")) == 3
    assert len([t for t in of_class(few, "byrow") if list(t.iter("thead"))]) == 0
    assert len([t for t in of_class(many, "byrow") if list(t.iter("thead"))]) == 2
