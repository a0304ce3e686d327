"""The page in a real browser: on a screen, on a telephone, in the dark, by keyboard and on paper.

Skipped where Chromium is missing, never where LOADPATH_CI is 1; likewise what needs `pdftotext`.
"""

from __future__ import annotations

import html
import os
import re
import shutil
import subprocess
from collections import Counter
from collections.abc import Iterator
from dataclasses import dataclass
from functools import cache
from itertools import chain, pairwise
from pathlib import Path
from typing import TYPE_CHECKING, Any

import pytest
from pages import CALCSHEETS, EVERYTHING, HOSTILE, LABELS, ROOT, SEVERAL, built, everywhere, issued, labelled

from loadpath.document import Document
from loadpath.pipeline import audited, read_input
from loadpath.render.html import render
from loadpath.trace import Trace, texts
from loadpath.units.printing import quantity

if TYPE_CHECKING:
    from playwright.sync_api import Browser, Page

CHROMIUM = next(
    (
        p
        for p in ("/usr/bin/chromium", *map(shutil.which, ("chromium", "chromium-browser", "google-chrome")))
        if p and Path(p).exists()
    ),
    None,
)
PDFTOTEXT = shutil.which("pdftotext")
IN_CI = os.environ.get("LOADPATH_CI") == "1"
FLAGS = [
    "--no-sandbox", "--disable-gpu", "--disable-quic", "--no-first-run", "--disable-background-networking",
    "--disable-component-update", "--disable-sync",
]  # fmt: skip

pytestmark = pytest.mark.skipif(
    CHROMIUM is None and not IN_CI, reason="Chromium is not installed (Debian: apt-get install chromium)"
)
needs_pdftotext = pytest.mark.skipif(
    PDFTOTEXT is None and not IN_CI,
    reason="pdftotext is not installed (Debian: apt-get install poppler-utils)",
)

SCREEN, TELEPHONE = 1000, 360


# --- sheets -------------------------------------------------------------------------------------------------

LONG = "a_name_that_somebody_made_out_of_words_because_letters_were_not_enough"
LONG_NAMES = f"""---
title: A title of many words, as they are given where a number alone would tell nobody what the sheet is about
subtitle: And a subtitle that goes on for as long again, so that the title block has to grow by several lines
number: SB-1234-5678-PRELIMINARY-STRUCTURAL-CALCULATION-0001
owner: Tern Slip boatyard and engine works, successors to the ropewalk of the estuary
created_by: Somebody with a name of several parts
reviewed_by: Donaudampfschifffahrtselektrizitätenhauptbetriebswerkbauunterbeamter
---

## A_heading_without_a_single_space_that_is_wider_than_any_telephone_has_ever_been

    {LONG} = 12.5 kN -- an input with a name that fills the line
    {LONG}_too = 12.5 kN*m -- another
    resistance_of_the_whole_cross_section_in_bending_about_the_strong_axis = {LONG}_too*2
    x = ({LONG} + {LONG})*{LONG}/({LONG} - 2*{LONG}) -- with_a_word_that_cannot_be_broken_anywhere
    strength the-criterion-that-has-the-longest-name-of-all-criteria: x <= {LONG}*1000
    limit: {LONG}_too/resistance_of_the_whole_cross_section_in_bending_about_the_strong_axis <= 1
    valid: 1 N <= {LONG} <= 100_000_000 N for x
"""
MANY_STEPS = "---\ntitle: Two hundred steps\nnumber: SB-200\n---\n\n" + "".join(
    f"## Part {part}\n\nWhat part {part} is about.\n\n    a_{part} = {part}.5 kN -- load\n"
    + "".join(f"    b_{part}_{i} = a_{part}*{i}/(1 + a_{part}/(3 kN))\n" for i in range(1, 19))
    + f"    strength part-{part}: b_{part}_18 <= 100 kN\n\n"
    for part in range(1, 11)
)
MANY_ROWS = (
    "---\ntitle: Sixty rows\nnumber: SB-60\n---\n\n## Bars\n\nTable bars: of a truss\n\n"
    "| bar | F [kN] | A [cm^2] |\n|---|---|---|\n"
    + "".join(f"| bar {i} | {i}.5 | 4.25 |\n" for i in range(1, 61))
    + "\n    s = bars.F/bars.A -- stress\n    strength bars: s <= 100 MPa -- each\n"
)
OTHER_WRITINGS = """---
title: 吊耳计算书 · Расчёт проушины
subtitle: حساب عروة الرفع
number: SB-吊-107
owner: 燕子船坞 · Верфь
created_by: מהנדס
language: zh
---

## 荷载与几何

吊耳承受发动机的重量，两根吊索承担全部荷载。本节给出设计荷载，并说明所用的假定。

تحمل العروة وزن المحرك، ويحمل حبلان الحمولة كلها.

האוזן נושאת את משקל המנוע.

    σ_荷载 = 20 MPa -- 设计应力，见图纸
    Δ = 3 mm -- смещение опоры
    ψ_max = σ_荷载*Δ -- произведение
    strength 强度: σ_荷载 <= 30 MPa -- 规范第三条
"""


def sheets() -> dict[str, Document]:
    return {
        **{path.name.removesuffix(".sheet.md"): issued(path) for path in CALCSHEETS},
        "everything": built(EVERYTHING),
        "several": built(SEVERAL),
        "labels": built(labelled(LABELS[-1])),
        "many rows": built(MANY_ROWS),
        "long names": built(LONG_NAMES),
        "many steps": built(MANY_STEPS),
        "other writings": built(OTHER_WRITINGS),
        "hostile": built(everywhere(HOSTILE[1])),
    }


NAMES = [
    *(path.name.removesuffix(".sheet.md") for path in CALCSHEETS),
    "everything",
    "several",
    "labels",
    "many rows",
    "long names",
    "many steps",
    "other writings",
    "hostile",
]
PRINTED = [
    *("hoist-beam", "lifting-lug", "cradle-beam", "keel-girder"),
    *("everything", "several", "many rows", "long names", "many steps", "other writings"),
]


# --- the browser --------------------------------------------------------------------------------------------


@pytest.fixture(scope="module")
def browser() -> Iterator[Browser]:
    from playwright.sync_api import sync_playwright

    assert CHROMIUM, "LOADPATH_CI asks for Chromium"
    with sync_playwright() as playwright:
        opened = playwright.chromium.launch(executable_path=CHROMIUM, args=FLAGS)
        yield opened
        opened.close()


@cache
def documents() -> dict[str, Document]:
    return sheets()


@pytest.fixture(scope="module")
def folder(tmp_path_factory: pytest.TempPathFactory) -> Path:
    return tmp_path_factory.mktemp("pages")


@pytest.fixture
def show(browser: Browser, folder: Path) -> Iterator[Any]:
    """Opens a document, or HTML of a test's own, in a window of a width."""
    contexts = []

    def opened(page: str, width: int = SCREEN, *, own: str = "", checks: bool = True, **how: Any) -> Page:
        path = folder / f"{page}.html"
        path.write_text(own or render(documents()[page]), encoding="utf-8")
        context = browser.new_context(viewport={"width": width, "height": 900}, **how)
        contexts.append(context)
        shown = context.new_page()
        shown.goto(path.as_uri())
        if how.get("java_script_enabled", True):
            shown.evaluate("document.fonts.ready")
            if checks:
                shown.add_script_tag(path=str(ROOT / "tests" / "render" / "page_checks.js"))
        return shown

    yield opened
    for context in contexts:
        context.close()


# --- the checks themselves ----------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("check", "body"),
    [
        ("beyondThePage", "<p style='width:1200px'>wide</p>"),
        ("beyondThePage", "<p style='position:absolute;left:-9px'>left of the page</p>"),
        ("beyondThePage", "<p style='white-space:nowrap'>" + "long " * 300 + "</p>"),
        ("cutOff", "<p style='overflow:hidden;height:6px'>cut</p>"),
        ("cutOff", "<p style='overflow:hidden;width:20px;white-space:nowrap'>cut at the side</p>"),
        ("overlaps", "<p>one</p><p style='margin-top:-2.2em'>over the other</p>"),
        ("lowContrast", "<p style='color:#999'>grey</p>"),
        ("lowContrast", "<p style='background:#222;color:#333'>dark</p>"),
    ],
)
def test_the_checks_find_what_they_look_for(show: Any, check: str, body: str) -> None:
    page = show("own", own=f"<!doctype html><meta charset=utf-8><body style='margin:8px'>{body}")
    assert page.evaluate(f"{check}()")


def test_the_checks_pass_what_is_in_order(show: Any) -> None:
    page = show("own", own="<!doctype html><meta charset=utf-8><p>one</p><p>and <b>another</b></p>")
    for check in ("beyondThePage", "cutOff", "overlaps", "lowContrast"):
        assert page.evaluate(f"{check}()") == []


# --- on a screen --------------------------------------------------------------------------------------------


@pytest.mark.parametrize("width", [SCREEN, TELEPHONE])
@pytest.mark.parametrize("name", NAMES)
def test_nothing_leaves_the_page_is_cut_off_or_lies_over_another(show: Any, name: str, width: int) -> None:
    page = show(name, width)
    assert {check: page.evaluate(f"{check}()")[:6] for check in ("beyondThePage", "cutOff", "overlaps")} == {
        "beyondThePage": [], "cutOff": [], "overlaps": [],
    }  # fmt: skip


@pytest.mark.parametrize("scheme", ["light", "dark"])
@pytest.mark.parametrize("name", ["hoist-beam", "everything"])
def test_every_text_stands_out_from_its_background(show: Any, name: str, scheme: str) -> None:
    page = show(name, color_scheme=scheme)
    assert page.evaluate("lowContrast()")[:6] == []
    paper = page.evaluate("luminance(behind(document.querySelector('main')))")
    assert paper < 0.1 if scheme == "dark" else paper > 0.9


def test_a_step_that_is_pointed_at_stands_out_in_the_dark_too(show: Any) -> None:
    page = show("hoist-beam", color_scheme="dark")
    page.evaluate("location.hash = 's4.6'")
    page.hover("[id='s3.1']")
    assert page.locator(".feeds").count() >= 3 and page.locator(".fed").count() >= 2
    assert page.evaluate("lowContrast()")[:6] == []
    page.mouse.move(0, 0)
    assert page.locator(".feeds, .fed").count() == 0


def test_nothing_is_fetched_but_the_page_itself(browser: Browser, folder: Path) -> None:
    asked: list[str] = []
    context = browser.new_context()
    page = context.new_page()
    page.on("request", lambda request: asked.append(request.url))
    path = folder / "hostile-requests.html"
    path.write_text(render(built(everywhere(HOSTILE[8]))), encoding="utf-8")
    page.goto(path.as_uri(), wait_until="networkidle")
    context.close()
    assert {url for url in asked if not url.startswith("data:")} == {path.as_uri()}


def test_no_hostile_text_runs(browser: Browser) -> None:
    said: list[str] = []
    page = browser.new_page()
    page.on("dialog", lambda dialog: (said.append(dialog.message), dialog.dismiss()))
    for text in HOSTILE:
        page.set_content(render(built(everywhere(text))))
        assert page.evaluate("document.querySelectorAll('script').length") == 1
        assert page.evaluate("getComputedStyle(document.querySelector('h1')).color") == "rgb(17, 17, 17)"
        assert page.evaluate("getComputedStyle(document.querySelector('.crit')).display") == "grid"
    page.close()
    assert said == []


def test_the_page_is_the_same_without_script(show: Any) -> None:
    with_script = show("everything", checks=False).inner_text("main")
    without = show("everything", java_script_enabled=False).inner_text("main")
    assert with_script == without
    assert "satisfied" in without


def test_the_fonts_inside_are_used(show: Any) -> None:
    page = show("hoist-beam")
    loaded = page.evaluate(
        "[...document.fonts].filter(f => f.status === 'loaded').map(f => f.family.replaceAll('\"', ''))"
    )
    assert {"Loadpath Text", "Loadpath Math"} <= set(loaded)
    assert page.evaluate("getComputedStyle(document.querySelector('math')).fontFamily").startswith(
        '"Loadpath Math"'
    )


def test_formulas_are_set_as_formulas(show: Any) -> None:
    """A fraction is high, exponents stand above and indices below, and a root has its sign in front."""
    page = show("hoist-beam")
    fraction = page.evaluate("fractionShape()")
    assert fraction["apart"] > -8 and fraction["height"] > 1.4 and fraction["covers"]
    for tag, sign in (("msup", 1), ("msub", -1)):
        rises = page.evaluate(f"rises('{tag}')")
        assert rises and all(rise * sign > 0 for rise in rises)
    roots = page.evaluate("signsOfRoots()")
    assert roots and all(over > 2 for over in roots)


def test_results_stand_one_below_the_other_at_the_right_edge(show: Any) -> None:
    edges = show("hoist-beam").evaluate("rightEdgesOfResults()")
    assert len(edges) > 10
    assert max(edges) - min(edges) <= 1


def test_writing_from_right_to_left(show: Any) -> None:
    first, last, edge = show("other writings").evaluate("ends('האוזן')")
    assert first > last
    assert edge - first < 40, "a paragraph from right to left begins at the right"


# --- by keyboard --------------------------------------------------------------------------------------------


def test_the_keyboard_reaches_the_summary_and_then_the_steps(show: Any) -> None:
    page = show("hoist-beam")
    page.keyboard.press("Tab")
    assert page.evaluate("focused()") == {"href": "#summary", "outline": "solid", "visible": True}
    page.keyboard.press("Enter")
    assert page.evaluate("location.hash") == "#summary"
    for _ in range(12):
        page.keyboard.press("Tab")
        reached = page.evaluate("focused()")
        assert reached["outline"] == "solid" and reached["visible"]
        assert re.match(r"#(s\d|a-|sec)", reached["href"])


def test_the_skip_link_is_out_of_sight_until_it_is_reached(show: Any) -> None:
    page = show("hoist-beam")
    assert page.evaluate("document.querySelector('.skip').getBoundingClientRect().right") <= 0


# --- on paper -----------------------------------------------------------------------------------------------

PAPER = {"A4": (594.96, 841.92), "Letter": (612.0, 792.0)}


@dataclass(frozen=True)
class Word:
    """A word where it stands on a sheet, in points from the upper left corner."""

    left: float
    top: float
    right: float
    bottom: float
    text: str


@dataclass(frozen=True)
class Sheet:
    width: float
    height: float
    words: tuple[Word, ...]

    @property
    def text(self) -> str:
        """All of it without white space."""
        return "".join(word.text for word in self.words)


@pytest.fixture(scope="module")
def printed(browser: Browser, folder: Path) -> Any:
    """The sheets of a document as Chromium prints it."""

    @cache
    def on_paper(name: str, paper: str = "") -> list[Sheet]:
        text = render(documents()[name])
        if paper:
            text = re.sub(r'(<html lang="[\w-]+" class=")\w+"', rf'\1{paper}"', text)
        source, target = folder / f"{name}-{paper}-print.html", folder / f"{name}-{paper}.pdf"
        source.write_text(text, encoding="utf-8")
        page = browser.new_page()
        page.goto(source.as_uri())
        page.evaluate("document.fonts.ready")
        page.pdf(path=str(target), prefer_css_page_size=True)
        page.close()
        return sheets_of(target)

    return on_paper


def sheets_of(pdf: Path) -> list[Sheet]:
    assert PDFTOTEXT, "LOADPATH_CI asks for pdftotext"
    found = subprocess.run(
        [PDFTOTEXT, "-bbox", str(pdf), "-"], capture_output=True, text=True, check=True
    ).stdout
    out = []
    for width, height, inside in re.findall(
        r'<page width="([\d.]+)" height="([\d.]+)">(.*?)</page>', found, re.DOTALL
    ):
        words = re.findall(
            r'<word xMin="([-\d.]+)" yMin="([-\d.]+)" xMax="([-\d.]+)" yMax="([-\d.]+)">(.*?)</word>', inside
        )
        out.append(
            Sheet(
                float(width),
                float(height),
                tuple(Word(*map(float, w[:4]), html.unescape(w[4])) for w in words),
            )
        )
    return out


def squeezed(text: str) -> str:
    return "".join(text.split())


@needs_pdftotext
@pytest.mark.parametrize(
    ("name", "paper"), [(n, "") for n in PRINTED] + [("hoist-beam", "Letter"), ("lifting-lug", "A4")]
)
def test_every_sheet_carries_the_title_block_and_its_number(printed: Any, name: str, paper: str) -> None:
    document = documents()[name]
    found = printed(name, paper)
    width, height = PAPER[paper or document.page]
    for number, sheet in enumerate(found, 1):
        assert (sheet.width, sheet.height) == (pytest.approx(width, abs=0.5), pytest.approx(height, abs=0.5))
        assert cells(sheet) == [
            Counter(squeezed(text)) for text in fields(document, f"{number} of {len(found)}")
        ]
        assert squeezed(document.title_block.made) in sheet.text
        if number > 1:
            assert squeezed(document.alerts[0].rstrip(".")) in sheet.text


def fields(document: Document, number: str) -> list[str]:
    """What the cells of the title block say, each behind its label."""
    block = document.title_block
    return [
        f"Legal owner {block.owner}", f"Title, supplementary title {block.title} {block.subtitle}",
        f"Identification number {block.number}", f"Rev., status {block.revision}",
        f"Created by {block.created_by}", f"Reviewed by {block.reviewed_by}",
        f"Approved by {block.approved_by}", f"Date of issue {block.date}", f"Sheet {number}",
    ]  # fmt: skip


def cells(sheet: Sheet) -> list[Counter[str]]:
    """The letters in each cell of the title block; in no order, for writing may run either way."""
    rows = [
        ["Legal", "Title,", "Identification", "Rev.,"],
        ["Created", "Reviewed", "Approved", "Date", "Sheet"],
    ]
    labels = [
        [max((w for w in sheet.words if w.text == label), key=lambda w: w.top) for label in row]
        for row in rows
    ]
    ends = [
        labels[1][0].top - 2,
        min(w.top for w in sheet.words if w.text == "loadpath" and w.top > labels[1][0].top) - 2,
    ]
    out = []
    for row, end in zip(labels, ends, strict=True):
        inside = [w for w in sheet.words if row[0].top - 2 <= w.top < end and w.left > row[0].left - 3]
        for label, following in zip(row, [*row[1:], None], strict=True):
            right = following.left - 3 if following else sheet.width
            out.append(
                Counter(
                    "".join(w.text for w in inside if label.left - 3 <= w.left < right).replace("\u200b", "")
                )
            )
    return out


@needs_pdftotext
@pytest.mark.parametrize(
    ("name", "paper"), [(n, "") for n in PRINTED] + [("hoist-beam", "Letter"), ("lifting-lug", "A4")]
)
def test_nothing_on_paper_leaves_the_sheet_or_lies_over_another(printed: Any, name: str, paper: str) -> None:
    for number, sheet in enumerate(printed(name, paper), 1):
        outside = [
            w.text
            for w in sheet.words
            if w.left < 25 or w.right > sheet.width - 20 or w.top < 5 or w.bottom > sheet.height - 15
        ]
        assert outside == [], f"sheet {number}"
        assert [f"{a.text} over {b.text}" for a, b in _overlapping(sheet.words)] == [], f"sheet {number}"


def _overlapping(words: tuple[Word, ...]) -> Iterator[tuple[Word, Word]]:
    """Pairs of words whose letters share room; boxes are higher than letters."""
    ordered = sorted(words, key=lambda w: w.top)
    for i, a in enumerate(ordered):
        inset = 0.3 * (a.bottom - a.top)
        for b in ordered[i + 1 :]:
            if b.top >= a.bottom:
                break
            other = 0.3 * (b.bottom - b.top)
            wide = min(a.right, b.right) - max(a.left, b.left)
            high = min(a.bottom - inset, b.bottom - other) - max(a.top + inset, b.top + other)
            if wide > 1.2 and high > 1:
                yield a, b


@needs_pdftotext
@pytest.mark.parametrize("name", ["hoist-beam", "lifting-lug", "many steps"])
def test_every_printed_value_and_every_step_is_on_paper(printed: Any, name: str) -> None:
    trace: Trace = (
        audited(read_input("-", MANY_STEPS))
        if name == "many steps"
        else audited(read_input(ROOT / "calcsheets" / f"{name}.sheet.md"))
    )
    paper = "".join(sheet.text for sheet in printed(name))
    shown = [(step.number, texts.display(step)) for step in trace]
    gone = [
        (number, v.number)
        for number, v in shown
        if v and not v.word and squeezed(quantity(v.number, v.unit)) not in paper
    ]
    assert gone == []
    everywhere_on_paper = {w.text for sheet in printed(name) for w in sheet.words}
    assert [number for number, _ in shown if number not in everywhere_on_paper] == []


@needs_pdftotext
def test_a_row_of_a_step_is_never_torn_apart(printed: Any) -> None:
    """Each step number of the sheet of 200 steps stands on the same sheet of paper as its result."""
    trace = audited(read_input("-", MANY_STEPS))
    for step in trace:
        shown = texts.display(step)
        if step.kind == "result" and shown is not None:
            (sheet,) = (
                s
                for s in printed("many steps")
                if any(w.text == step.number and w.left < 110 for w in s.words)
            )
            assert squeezed(quantity(shown.number, shown.unit)) in sheet.text


# --- tables -------------------------------------------------------------------------------------------------


def test_a_column_that_is_pointed_at_marks_what_feeds_it_and_what_it_feeds(show: Any) -> None:
    page = show("several")
    marked = "[...document.querySelectorAll('.{}')].map(e => e.id).sort()"
    page.hover("[id='s1.2c']")
    assert page.evaluate(marked.format("feeds")) == ["s1.1"]
    assert page.evaluate(marked.format("fed")) == ["s1.7"]
    page.hover("[id='s1.2'] tbody tr:last-child td:nth-of-type(1)")
    assert page.evaluate(marked.format("fed")) == ["s1.3", "s1.4", "s1.5"]
    page.hover("[id='s1.7'] .work")
    assert page.evaluate(marked.format("feeds")) == ["s1.1", "s1.2c", "s1.3"]
    assert page.evaluate("lowContrast()")[:6] == []


def test_columns_of_numbers_and_results_by_row_end_at_one_edge(show: Any) -> None:
    page = show("keel-girder")
    edges = "s => [...document.querySelectorAll(s)].map(e => Math.round(e.getBoundingClientRect().right))"
    assert len(set(page.evaluate(edges, "[id='s3.7'] .res, [id='s3.7'] table"))) == 1
    assert len(set(page.evaluate(edges, "[id='s2.10'] .work .val, [id='s3.7'] .res"))) == 1
    point = """s => [...document.querySelectorAll(s)].map(cell => {
      const text = cell.lastChild, at = text.textContent.indexOf('.'), range = document.createRange()
      range.setStart(text, at < 0 ? text.length - 1 : at - 1)
      range.setEnd(text, at < 0 ? text.length : at)
      return range.getBoundingClientRect().right
    })"""
    units = page.evaluate(point, "[id='s1.1'] tbody td:nth-of-type(3)")
    assert len(units) == 4 and max(units) - min(units) < 1, "units digits stand one below the other"


def test_a_wide_table_scrolls_on_a_telephone(show: Any) -> None:
    page = show("keel-girder", TELEPHONE)
    inner, outer = page.evaluate(
        "(e => [e.scrollWidth, e.clientWidth])(document.querySelector(\"[id='s3.6'] .scroll\"))"
    )
    assert inner > outer > 300


@needs_pdftotext
def test_a_long_table_is_broken_between_rows_under_its_repeated_head(printed: Any) -> None:
    sheets = printed("many rows", "")
    rows = [[b.text for a, b in pairwise(s.words) if a.text == "bar" and b.text.isdigit()] for s in sheets]
    expected = {str(n): 3 for n in range(1, 60)} | {"60": 6}
    assert Counter(chain.from_iterable(rows)) == expected, (
        "in data, result and criterion; the one that governs twice at the front and once in the register too"
    )
    data = [sheet for sheet in sheets if "inkN" in sheet.text]
    assert len(data) >= 2, "the head of the data stands on each sheet that the table goes on to"
    assert len([sheet for sheet in sheets if "eachside" in sheet.text]) >= 2
    alone = [s for s, labels in zip(sheets, rows, strict=True) if len(labels) == 1]
    assert all("Criteria" in sheet.text for sheet in alone), "no row alone on a sheet"


@needs_pdftotext
def test_a_figure_keeps_its_caption_and_a_table_of_a_few_rows_its_rows(printed: Any) -> None:
    sheets = printed("keel-girder", "")
    for label in ("doubler", "lowerflange", "upperflange", "web"):
        assert any("Tableplates" in s.text and label in s.text for s in sheets)
    captions = [a for s in sheets for a, b in pairwise(s.words) if (a.text, b.text) == ("Figure", "2")]
    assert captions and all(word.top > 200 for word in captions), "the picture stands above it"
