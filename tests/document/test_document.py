"""The document before any format: conclusion first, each step in its place, registers behind."""

from __future__ import annotations

from typing import Any

import pytest

import loadpath
from loadpath.document import Document, build
from loadpath.document.build import conclusion
from loadpath.document.model import (
    CAUTION,
    Cited,
    CriterionBox,
    FaultyRow,
    FigureBlock,
    FunctionRow,
    InputRow,
    JudgedRow,
    Line,
    ProseBlock,
    ResultRow,
    SectionHead,
)
from loadpath.formula.canonical import text
from loadpath.formula.tree import Shown
from loadpath.pipeline import audited
from loadpath.project import MemoryWorld
from loadpath.sheet import read_sheet
from loadpath.text import Source
from loadpath.trace import Trace


def traced(body: str = "", front: str = "", files: dict[str, bytes] | None = None) -> Trace:
    sheet = f"---\ntitle: Lug\n{front}---\n\n{body}\n"
    return audited(read_sheet(Source("lug.sheet.md", sheet), MemoryWorld(files or {})))


def built(body: str = "", front: str = "", files: dict[str, bytes] | None = None) -> Document:
    return build(traced(body, front, files), "9.9.9")


def block(document: Document, kind: type[Any], at: int = 0) -> Any:
    return [b for b in document.blocks if isinstance(b, kind)][at]


def words(parts: tuple[Any, ...]) -> str:
    """Inline parts as one text, values and citations in braces."""
    said = {str: str, Cited: lambda p: "{" + p.key + "}", Shown: lambda p: "{" + f"{p.number} {p.unit}" + "}"}
    return "".join(said[type(p)](p) for p in parts)


def said(line: Line) -> str:
    return "".join(p if isinstance(p, str) else text(p) for p in line.parts)


# --- conclusion first ---------------------------------------------------------------------------------------

INPUTS = """
    x = 3 mm -- a
    y = 2*x -- within its range only
    valid: x >= 5 mm for y
    z = -1 mm -- z
    w = 3 mm -- w [A1]
"""
ASSUMED = "assumptions: {A1: {text: The wall is dry, confirm: true}}\n"
CRITERIA = {
    "ok": "limit ok{n}: x <= {n}0 mm",
    "failed": "limit failed{n}: x >= {n}0 mm",
    "unshown": "limit unshown{n}: y <= {n}0 mm",
    "sided": "limit sided{n}: z <= {n}0 mm",
    "conditional": "limit conditional{n}: w <= {n}0 mm",
    "unread": "limit unread{n}: x <=",
}


def sheet_of(*outcomes: str) -> str:
    return INPUTS + "".join(f"    {CRITERIA[o].format(n=i)}\n" for i, o in enumerate(outcomes, 1))


@pytest.mark.parametrize(
    ("outcomes", "said"),
    [
        ([], "No criterion: this sheet shows nothing about strength, stiffness or stability"),
        (["ok"], "The one criterion is satisfied"),
        (["ok", "ok", "ok"], "3 of 3 criteria satisfied"),
        (["failed"], "1 of 1 criterion not satisfied"),
        (["failed", "ok", "failed"], "2 of 3 criteria not satisfied"),
        (["unshown"], "1 of 1 criterion not shown"),
        (["unread", "ok"], "1 of 2 criteria not shown"),
        (["sided", "ok"], "1 of 2 criteria satisfied on one side only"),
        (["conditional"], "The one criterion is satisfied, 1 conditional"),
        (["ok", "conditional"], "2 of 2 criteria satisfied, 1 conditional"),
        (["ok", "failed", "unshown"], "1 of 3 criteria not satisfied, 1 not shown"),
        (["unshown", "sided"], "1 of 2 criteria not shown, 1 satisfied on one side only"),
        (["conditional", "unshown"], "1 of 2 criteria not shown, 1 conditional"),
        (
            ["conditional", "sided", "unread", "failed", "unshown", "ok", "conditional"],
            "1 of 7 criteria not satisfied, 2 not shown, 1 satisfied on one side only, 2 conditional",
        ),
    ],
)
def test_the_first_line(outcomes: list[str], said: str) -> None:
    trace = traced(sheet_of(*outcomes), ASSUMED)
    document = build(trace, "9.9.9")
    unfit = "not for use, 1 error; " if "unread" in outcomes else ""
    assert conclusion(trace) == unfit + said
    assert ", ".join(phrase for phrase, _ in document.summary.conclusion) == said
    weak = [phrase for phrase, strong in document.summary.conclusion if not strong]
    all_satisfied = "conditional" in outcomes and set(outcomes) <= {"ok", "conditional"}
    assert weak == ([said.partition(",")[0]] if all_satisfied else [])


def test_every_doubt_is_listed_worst_first() -> None:
    listed = built(
        sheet_of("ok", "conditional", "sided", "unread", "failed", "unshown", "conditional", "failed"),
        ASSUMED,
    )
    names = [line.ref.name for line in listed.summary.listed if line.ref]
    assert names == ["failed8", "failed5", "unread4", "unshown6", "sided3", "conditional2", "conditional7"]
    strong = {line.ref.name for line in listed.summary.listed if line.ref and line.strong}
    assert strong == {"failed8", "failed5", "unread4", "unshown6", "sided3"}
    verdicts = {line.ref.name: (line.ratio, line.verdict) for line in listed.summary.listed if line.ref}
    assert verdicts["failed5"] == ("16.667", "not satisfied")
    assert verdicts["unshown6"] == ("", "not shown: outside the range of y")
    assert verdicts["sided3"] == ("", "satisfied on one side only")
    assert verdicts["conditional2"] == ("0.150", "satisfied, conditional on A1")
    assert verdicts["unread4"][1].startswith("not shown: not computed because of line")


def test_a_criterion_that_could_not_be_read_counts_as_not_shown() -> None:
    document = built("    x = 3 mm -- a\n    strength tension: x < = 5 mm\n")
    box = block(document, CriterionBox)
    assert (box.criterion, box.title, box.relation, box.satisfied, box.shown) == (
        "strength",
        "tension",
        None,
        None,
        False,
    )
    assert box.typed == "strength tension: x < = 5 mm"
    assert box.listed
    assert document.summary.governing[0].verdict == "not shown: not computed because of line 6"
    assert len(document.registers.criteria) == 1


# --- what governs -------------------------------------------------------------------------------------------


def governing(lines: str, front: str = "") -> dict[str, tuple[str, str]]:
    body = "    a = 9 mm -- a\n    b = 10 mm -- b\n    o = -1 mm -- o\n" + "".join(
        f"    {line}\n" for line in lines.splitlines()
    )
    found = built(body, front).summary.governing
    assert [line.criterion for line in found] == ["strength", "stiffness", "stability"]
    return {line.criterion: (line.ref.name if line.ref else "", line.verdict) for line in found}


def test_the_largest_ratio_governs_and_a_failed_one_outranks_any() -> None:
    assert governing("strength one: a <= b\nstrength two: a <= 2*b")["strength"] == ("one", "satisfied")
    assert governing("strength one: a <= b\nstrength two: 2*a <= b")["strength"] == ("two", "not satisfied")
    # a negative limit has no ratio, and is not satisfied all the same
    without_ratio = governing("strength one: a <= b\nstrength two: a <= o")
    assert without_ratio["strength"] == ("two", "not satisfied")


def test_what_is_not_shown_outranks_what_is_satisfied() -> None:
    found = governing("strength one: a <= b\nvalid: a >= b for o\nstrength two: o <= a")
    assert found["strength"] == ("two", "not shown: outside the range of o")


def test_a_limit_is_not_ranked_against_strength() -> None:
    found = governing("limit one: 2*a <= b\nstrength two: a <= b")
    assert found["strength"] == ("two", "satisfied")
    assert "one" not in {name for name, _ in found.values()}


def test_a_kind_without_a_criterion() -> None:
    found = governing("strength one: a <= b", "not_applicable: {stability: nothing is pressed}\n")
    assert found["stability"] == ("", "does not apply: nothing is pressed")
    assert found["stiffness"] == ("", "no criterion and no reason given")


# --- alerts -------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("body", "front", "alerts"),
    [
        ("", "", ("Not checked: no review on record.",)),
        ("    x = 1 +\n", "", ("Not for use: 1 error", "Not checked: no review on record.")),
        (
            "    x = 1 +\n    y = 1 mm + 2 s\n",
            "",
            ("Not for use: 2 errors", "Not checked: no review on record."),
        ),
        ("", ASSUMED, ("Not checked: no review on record. 1 assumption to be confirmed.",)),
        (
            "",
            "status: superseded by SB-131\n",
            ("Superseded by SB-131", "Not checked: no review on record."),
        ),
        ("", "reviewed_by: R.M.\n", ("Not checked: no review on record.",)),
    ],
)
def test_what_stands_against_use(body: str, front: str, alerts: tuple[str, ...]) -> None:
    assert built(body, front).alerts == alerts


def test_assumptions_to_be_confirmed_name_what_hangs_on_them() -> None:
    front = ASSUMED.replace("}\n", ", A2: {text: Nobody knows, confirm: true}, A3: Known}\n")
    document = built(sheet_of("conditional", "ok", "conditional"), front)
    assert [(a.key, a.text, [r.name for r in a.criteria]) for a in document.summary.to_confirm] == [
        ("A1", "The wall is dry", ["limit conditional1", "limit conditional3"]),
        ("A2", "Nobody knows", []),
    ]


# --- prose of the front matter ------------------------------------------------------------------------------


def test_values_in_the_front_prose() -> None:
    front = (
        "objective: 'Show that {P} \\{P} and {P [lbf]} hold.'\nmethod: 'By {q}.'\n"
        "conclusion: '{s} is enough.'\n"
    )
    summary = built("    P = 20 kN -- p\n    s = P/(3 mm)^2\n    q = s + 1 kN\n", front).summary
    assert words(summary.objective) == "Show that {20 kN} {P} and {4496 lbf} hold."
    assert words(summary.method) == "By [q not computed because of line 10]."
    assert words(summary.words) == "{2222 MPa} is enough."


@pytest.mark.parametrize(
    ("value", "printed"),
    [
        ("{P}", Shown("20", "kN")),
        ("{P [N]}", Shown("20000", "N")),
        ("{P [lbf]}", Shown("4496", "lbf")),
        ("{r}", Shown("6.667", "kN")),
        ("{r [lbf]}", Shown("1499", "lbf")),
        ("{L [ft-in 1/8]}", Shown("5 ft 3", "in")),
        ("{t [degF]}", Shown("68", "degF")),
        ("{c}", Shown("b", "", word=True)),
    ],
)
def test_a_value_in_prose(value: str, printed: Shown) -> None:
    body = (
        "    P = 20 kN -- p\n    r = P/3\n    L = 1600 mm -- l\n    t = 20 degC -- t\n"
        '    c = "b" of "a", "b" -- c\n'
    )
    document = built(f"{body}\nIt is {value}.\n")
    assert list(document.values.values()) == [printed]


# --- the body -----------------------------------------------------------------------------------------------

BODY = """
# Lug

Before any section.

    P = 20 kN -- load

## First

    b = 30 mm -- width

### Below

    t = 10 mm -- thickness

Some prose.

##### Far below

## Second

    sigma = P/(b*t) -- stress
    strength: sigma <= 100 MPa
"""


def test_sections_are_the_headings_of_the_highest_level_used_after_the_title() -> None:
    document = built(BODY)
    heads = [b for b in document.blocks if isinstance(b, SectionHead)]
    assert [(h.number, h.text) for h in heads] == [
        (1, "First"),
        (0, "Below"),
        (0, "Far below"),
        (2, "Second"),
    ]
    numbers = [b.head.number for b in document.blocks if hasattr(b, "head")]
    assert numbers == ["0.1", "1.1", "1.2", "2.1", "2.2"]


@pytest.mark.parametrize(
    ("headings", "levels"),
    [
        (["# Lug", "## A", "### B", "#### C", "## D"], [2, 3, 4, 2]),
        (["# A", "## B", "# C"], [2, 3, 2]),
        (["### A", "##### B", "#### C", "### D"], [2, 3, 3, 2]),
        (["## A", "###### B"], [2, 3]),
        (["### Early", "## A", "### B"], [3, 2, 3]),
        (["# Lug", "# A", "## Lug"], [2, 3]),
    ],
)
def test_heading_levels_never_skip_one(headings: list[str], levels: list[int]) -> None:
    document = built("\n\n".join(headings))
    assert [b.level for b in document.blocks if isinstance(b, SectionHead)] == levels


def test_blocks_stand_in_reading_order() -> None:
    kinds = [type(b) for b in built(BODY).blocks]
    assert kinds == [
        ProseBlock, InputRow, SectionHead, InputRow, SectionHead, InputRow, ProseBlock, SectionHead,
        SectionHead, ResultRow, CriterionBox,
    ]  # fmt: skip


def test_an_input_row() -> None:
    row = block(
        built(
            "    b = 2*45 mm -- width [d], measured\n    c = 3 mm -- c\n    d_2 = b + c\n",
            "sources: {d: Drawing}\n",
        ),
        InputRow,
    )
    assert (row.name, text(row.typed), row.value) == ("b", "2 * 45 mm", Shown("90", "mm"))
    assert words(row.head.note) == "width {d}, measured"
    assert [(r.number, r.name, r.is_name) for r in row.head.used_in] == [("0.3", "d_2", True)]


def test_an_input_as_typed_is_not_said_twice() -> None:
    assert block(built("    b = 1.10 -- x\n"), InputRow).typed is None
    assert block(built("    b = 29_000 ksi -- x\n"), InputRow).typed is None


def test_a_choice_row() -> None:
    row = block(built('    c = "b" of "a", "b" -- curve\n'), InputRow)
    assert (row.options, row.value) == (("a", "b"), Shown("b", "", word=True))


def test_a_result_row() -> None:
    row = block(built("    P = 20 kN -- p\n    A = 4 cm^2 -- a\n    s = P/A -- stress\n"), ResultRow)
    assert [text(side) for side in row.sides] == ["P/A", "20 kN / 4 cm^2"]
    assert (row.value, row.closes) == (Shown("50.00", "MPa"), True)
    assert [r.name for r in row.head.feeds_from] == ["P", "A"]


def test_a_result_by_branches() -> None:
    body = (
        "    a = 3 -- a\n    x = cases\n        2*a  when a <= 2 -- low\n"
        "        a/2  when a > 2 and a < 9\n        0 otherwise\n"
    )
    row = block(built(body), ResultRow)
    assert [(text(b.value), b.taken, [text(n) for n in b.numbers]) for b in row.branches] == [
        ("2*a", False, ["3 > 2"]), ("a/2", True, ["3 > 2", "3 < 9"]), ("0", False, []),
    ]  # fmt: skip
    assert [text(side) for side in row.sides] == ["3/2"]
    assert [words(b.note) for b in row.branches] == ["low", "", ""]
    assert row.head.note == ()


def test_a_call_has_lines_of_its_own_and_those_inside_it_beneath() -> None:
    body = "    q(x) = x^2\n    f(x) = q(x) + 1\n    y = f(3)\n"
    row = block(built(body), ResultRow)
    lines = [(text(c.call), [text(s) for s in c.sides], c.value.number) for c in row.calls]
    assert lines == [("f(3)", ["q(x) + 1", "9.000 + 1"], "10.00"), ("q(3)", ["x^2", "3^2"], "9.000")]


def test_a_function_row() -> None:
    row = block(built("    R = 2 kN -- r\n    M(x [m], n [1]) [kN*m] = R*x*n\n"), FunctionRow)
    assert (text(row.name), text(row.body)) == ("M(x, n)", "R*x*n")
    assert said(row.units) == "x in m, n plain, M in kN⋅m"


def test_a_criterion_box() -> None:
    body = (
        "    P = 20 kN -- p\n    A = 4 cm^2 -- a\n    f = 100 MPa -- f\n"
        "    strength tension: P/A <= f/1.1 -- clause 3 [ec]\n"
    )
    box = block(built(body, "sources: {ec: Code}\n"), CriterionBox)
    assert (box.criterion, box.title, text(box.relation)) == ("strength", "tension", "P/A <= f/1.1")
    assert [text(line) for line in box.lines] == ["20 kN / 4 cm^2 <= 100 MPa / 1.1", "50.00 MPa <= 90.91 MPa"]
    assert (box.ratio, box.bar, box.margin) == ("0.550", pytest.approx(0.55), None)
    assert (box.verdict, box.listed, box.shown, box.satisfied) == ("satisfied", False, True, True)
    assert words(box.head.note) == "clause 3 {ec}"


def test_a_criterion_without_a_ratio_shows_its_margin() -> None:
    box = block(built("    t = 20 degC -- t\n    limit warm: t <= 35 degC\n"), CriterionBox)
    assert (box.ratio, box.bar, box.margin) == ("", None, Shown("15", "K"))


def test_a_deflection_is_told_in_the_words_of_its_limit() -> None:
    box = block(built("    L = 6 m -- l\n    d = 12.003 mm -- d\n    stiffness: d <= L/500\n"), CriterionBox)
    assert text(box.lines[-1]) == "12.003 mm = L/499.9 > 12.000 mm"


def test_a_chain_and_an_excluded_band_tell_what_governs() -> None:
    document = built(
        "    x = 9 mm -- a\n    limit a: 2 mm <= x <= 10 mm\n    limit b: x <= 1 mm or x >= 3 mm\n"
    )
    asides = [block(document, CriterionBox, i).asides for i in (0, 1)]
    assert [said(lines[0]) for lines in asides] == ["governed by x <= 10 mm", "governed by x >= 3 mm"]


@pytest.mark.parametrize(
    ("line", "words_", "verdict", "holds"),
    [
        ("valid: 1 <= x/y <= 3 for z", "for z", "within the range", True),
        ("valid: x/y >= 3 for z", "for z", "outside the range of z", False),
        ("check: x + y = 9 mm within 0.1 %", "within 0.1 %", "holds", True),
        ("check: x + y = 9.1 mm within 0.1 %", "within 0.1 %", "does not hold", False),
    ],
)
def test_a_judged_row(line: str, words_: str, verdict: str, holds: bool) -> None:
    row = block(built(f"    x = 6 mm -- a\n    y = 3 mm -- b\n    z = x*y\n    {line}\n"), JudgedRow)
    assert (said(row.words), row.verdict, row.holds) == (words_, verdict, holds)


def test_a_line_that_could_not_be_read_stands_in_its_place_as_typed() -> None:
    document = built("    x = 3 mm -- a\n    y = (2*x +\n        x\n    z = y + x\n")
    row = block(document, FaultyRow)
    assert (row.head.number, row.typed) == ("0.2", "y = (2*x +\n    x")
    assert [f.slug for f in row.head.findings] == ["unbalanced-bracket"]
    assert [(r.number, r.name) for r in row.head.used_in] == [("0.3", "z")]
    blocked = block(document, ResultRow)
    assert (blocked.value, blocked.head.why) == (None, "not computed because of line 6")
    assert text(blocked.sides[0]) == "y + x"


PNG = bytes.fromhex(
    "89504e470d0a1a0a0000000d4948445200000001000000010800000000 3a7e9b55"
    "0000000a49444154789c63600000000200015c2bdcb40000000049454e44ae426082".replace(" ", "")
)


def test_figures_are_numbered_and_those_left_out_say_why() -> None:
    document = built("![One](a.png)\n\n![Two](../b.png)\n", files={"a.png": PNG})
    one, two = (b for b in document.blocks if isinstance(b, FigureBlock))
    assert (one.number, one.caption, one.media_type, one.data) == (1, "One", "image/png", PNG)
    assert (two.number, two.caption, two.data) == (2, "Two", b"")
    assert [f.slug for f in two.findings] == ["image-path"]
    assert document.figures == (one, two)


# --- findings in place --------------------------------------------------------------------------------------


def test_each_finding_stands_where_it_belongs_once() -> None:
    body = (
        "Prose with {nothing}.\n\n    x = 3 mm + 2 s\n    y = 3 mm -- a\n    z = (y +\n"
        "        2 mm\n\nx = 5 mm\n"
    )
    document = built(body, "sources: {never: Cited}\n")
    assert [f.slug for f in block(document, ProseBlock).findings] == ["unknown-name"]
    faulty = [b.head.findings[0].slug for b in document.blocks if isinstance(b, FaultyRow)]
    assert faulty == ["unbalanced-bracket", "formula-in-prose"]
    placed = [f for b in document.blocks if hasattr(b, "head") for f in b.head.findings]
    placed += [f for b in document.blocks if hasattr(b, "findings") for f in b.findings]
    everywhere = [*document.front_findings, *placed]
    told = [f for f, _ in document.registers.findings if f.severity != "note"]
    assert sorted(f.slug for f in everywhere) == sorted(f.slug for f in told)
    assert "unused-source" in [f.slug for f in document.front_findings]


def test_the_register_of_findings_points_to_steps() -> None:
    document = built("    x = 3 mm + 2 s\n")
    anchors = {f.slug: anchor for f, anchor in document.registers.findings}
    assert anchors["unit-mismatch"] == "s0.1"
    assert anchors["no-criterion"] == ""


# --- registers ----------------------------------------------------------------------------------------------

REGISTERED = """sources:
  d: Drawing SB-1
  h: {text: Hoist data sheet, file: data.pdf}
assumptions:
  A1: {text: To be seen, confirm: true}
  A2: {text: Seen, confirmed: {by: R.M., on: 2026-10-06, document: letter 4}}
  A3: Simply stated
codes: [EN 1990, EN 1991]
drawings: [SB-201]
revisions:
  A: {date: 2026-01-02, by: T.S., change: First issue}
  B: {date: 2026-02-03, by: T.S., change: Load raised}
"""


def test_registers() -> None:
    body = (
        "    P = 2*10 kN -- load [d] [A1]\n    q = 3 kN -- other\n    r = P + q -- both [h]\n"
        "    strength pull: r <= 30 kN -- [d]\n"
    )
    registers = built(body, REGISTERED).registers
    assert [(i.ref.name, words(i.note), [c.key for c in i.sources], i.open) for i in registers.inputs] == [
        ("P", "load  ", ["d", "A1"], True), ("q", "other", [], False),
    ]  # fmt: skip
    assert [(a.key, a.state, a.open, [r.number for r in a.cited_by]) for a in registers.assumptions] == [
        ("A1", "to be confirmed", True, ["0.1"]),
        ("A2", "confirmed by R.M. on 2026-10-06, letter 4", False, []),
        ("A3", "stated", False, []),
    ]
    assert [(s.key, s.text, [r.number for r in s.cited_by]) for s in registers.sources] == [
        ("d", "Drawing SB-1", ["0.1", "0.4"]), ("h", "Hoist data sheet (data.pdf)", ["0.3"]),
    ]  # fmt: skip
    (criterion,) = registers.criteria
    assert (criterion.line.criterion, criterion.line.ref, criterion.line.ratio) == (
        "strength",
        criterion.line.ref,
        "0.767",
    )
    assert criterion.relation is not None and text(criterion.relation) == "r <= 30 kN"
    assert [(r.letter, r.date, r.by, r.change) for r in registers.revisions] == [
        ("A", "2026-01-02", "T.S.", "First issue"), ("B", "2026-02-03", "T.S.", "Load raised"),
    ]  # fmt: skip
    assert (registers.codes, registers.drawings) == (("EN 1990", "EN 1991"), ("SB-201",))


# --- title block --------------------------------------------------------------------------------------------

FRONT = """subtitle: Plate and pin
number: SB-107
revision: 1.10
owner: Tern Slip boatyard
project: Slip renewal
client: The harbour
client_document: H-7
date: 2026-11-27
status: for review
created_by: T.S.
reviewed_by: R.M.
approved_by: A.B.
page: Letter
language: de
"""


def test_the_title_block_and_the_names_that_nobody_bears_out() -> None:
    document = built("", FRONT)
    block_ = document.title_block
    assert (block_.owner, block_.title, block_.subtitle, block_.number) == (
        "Tern Slip boatyard",
        "Lug",
        "Plate and pin",
        "SB-107",
    )
    assert block_.revision == "1.10, for review"
    assert (block_.created_by, block_.reviewed_by, block_.approved_by) == (
        "T.S.", "R.M. (typed, not on record)", "A.B. (typed, not on record)",
    )  # fmt: skip
    digest = traced("", FRONT).digest
    assert (
        block_.made
        == f"loadpath 9.9.9 · fingerprint {digest[:4]} {digest[4:8]} {digest[8:12]} {digest[12:16]}"
    )
    assert document.about == (
        "SB-107, revision 1.10, for review",
        "Slip renewal",
        "for The harbour, document H-7",
    )
    assert (document.page, document.language, document.caution) == ("Letter", "de", CAUTION)


def test_a_bare_sheet_has_every_part_all_the_same() -> None:
    document = built()
    assert (document.title, document.subtitle, document.about) == ("Lug", "", ())
    assert (document.page, document.language) == ("A4", "en")
    block_ = document.title_block
    assert (block_.reviewed_by, block_.approved_by, block_.revision, block_.owner) == ("", "", "", "")
    assert document.summary.review == "no review on record"


def test_a_sheet_without_a_title() -> None:
    trace = loadpath.evaluate(loadpath.read_text("no front matter\n"))
    document = build(trace, "9.9.9")
    assert document.title == "Untitled"
    assert document.alerts[0] == "Not for use: 1 error"
