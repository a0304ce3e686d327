"""What an audit asks beyond mistakes: each finding where it is due, and nowhere else.

source: the finding's line in the registry, and what practice requires of inputs, limits and criteria.
"""

from __future__ import annotations

import pytest

import loadpath
from loadpath.findings import SLUGS, Finding, ordered
from loadpath.project import MemoryWorld
from loadpath.sheet.reader import read_sheet
from loadpath.text import Source

NO_KINDS = "not_applicable: {strength: a, stiffness: b, stability: c}"


def audit(*lines: str, front: str = NO_KINDS, prose: str = "", project: str = "") -> tuple[Finding, ...]:
    body = "\n".join("    " + line for line in lines)
    text = f"---\ntitle: A sheet\n{front}\n---\n\n{body}\n\n{prose}\n"
    files = {"project.yaml": project.encode()} if project else {}
    return loadpath.audit(loadpath.evaluate(read_sheet(Source("a.sheet.md", text), MemoryWorld(files))))


def asked(*lines: str, slug: str, front: str = NO_KINDS, prose: str = "", project: str = "") -> list[str]:
    """What the findings of one slug point at."""
    found = [f for f in audit(*lines, front=front, prose=prose, project=project) if f.slug == slug]
    assert all(f.message and f.help and f.severity == SLUGS[slug][0] for f in found)
    return [f.source.cut(f.span) if f.span else "" for f in found]


CITED = NO_KINDS + "\nsources: {k: A table}\nassumptions: {A1: light}"


# --- inputs -------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("line", "no_note", "no_source"),
    [
        ("P = 20 kN", ["P"], []),
        ("P = 20 kN -- load", [], ["P"]),
        ("P = 20 kN -- load [k]", [], []),
        ("P = 20 kN -- load [A1]", [], []),
        ("P = 20 kN -- [k]", [], []),
        ("P = 2*pi", ["P"], []),
        ('P = "b" of "a", "b"', ["P"], []),
        ('P = "b" of "a", "b" -- curve', [], ["P"]),
        ("P [kN] = 20 kN", ["P"], []),
        ("P = 20 Kn", [], []),
        ("P = 20 Kn -- load", [], []),
        ("f(x) = 2*x", [], []),
    ],
)
def test_the_origin_of_inputs(line: str, no_note: list[str], no_source: list[str]) -> None:
    assert asked(line, slug="no-note", front=CITED) == no_note
    assert asked(line, slug="no-source", front=CITED) == no_source


def test_a_result_needs_no_note() -> None:
    assert asked("P = 20 kN -- [k]", "Q = 2*P", slug="no-note", front=CITED) == []


@pytest.mark.parametrize(
    ("lines", "prose", "front", "unused"),
    [
        (("P = 2",), "", "", ["P"]),
        (('w = "b" of "b"',), "", "", ["w"]),
        (("P = 2", "Q = 2*P"), "", "", []),
        (("P = 2", "f(x) = P*x"), "", "", []),
        (("P = 2", "limit: P <= 3"), "", "", []),
        (("P = 2", "valid: P <= 3 for P"), "", "", []),
        (("P = 2", "check: P = 3 within 2"), "", "", []),
        (("P = 2",), "It is {P}.", "", []),
        (("P = 2",), "# It is {P}", "", []),
        (("P = 2",), "", "conclusion: It is {P}.", []),
        (("P = 2",), "It is P.", "", ["P"]),
        (("P = 2", "Q = 3*(P"), "", "", []),
        (("P = 2", "Q = 3 kN/P"), "", "", []),
        (("P = 20 kN", "Q = 3 kN + p"), "", "", []),
        (("P = 2", "P = 3"), "", "", ["P"]),
        (("P = 2",), "Q = P/2", "", []),
        (("f(x) = 2*x",), "", "", []),
    ],
)
def test_inputs_that_nothing_uses(lines: tuple[str, ...], prose: str, front: str, unused: list[str]) -> None:
    assert asked(*lines, slug="unused-input", prose=prose, front=f"{NO_KINDS}\n{front}") == unused


@pytest.mark.parametrize(
    ("lines", "typed"),
    [
        (("a = sin(45)",), ["45"]),
        (("a = cos(-30)",), ["30"]),
        (("a = tan(2*45 + 10)",), ["10"]),
        (("a = sec(90)",), ["90"]),
        (("a = sin(0.5)",), []),
        (("a = sin(45 deg)",), []),
        (("a = asin(0.5) + exp(45)",), []),
        (("theta = 30",), ["30"]),
        (("theta = -30",), ["30"]),
        (("θ_1 = 30",), ["30"]),
        (("alpha_max = 120",), ["120"]),
        (("theta = 30 deg",), []),
        (("theta = 0.5",), []),
        (("phi = 1.25",), []),
        (("n = 30",), []),
        (("n = 30", "a = sin(n)"), ["30"]),
        (("n = 30", "a = sin(2*n)"), ["30"]),
        (("n = 30", "a = sin(n*pi/180)"), []),
        (("n = 30", "m = 2", "a = sin(n*m)"), []),
        (("n = 30", "a = n*sin(1)"), []),
        (("n = 30", "f(x) = sin(x) + cos(n)"), ["30"]),
        (("theta = 30", "a = sin(theta) + cos(theta)"), ["30"]),
    ],
)
def test_angles_that_look_like_degrees(lines: tuple[str, ...], typed: list[str]) -> None:
    assert asked(*lines, slug="angle-without-unit") == typed


# --- sources and assumptions --------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("lines", "prose", "unused"),
    [
        (("P = 2",), "", ["k"]),
        (("P = 2 -- load [k]",), "", []),
        (("Q = 2*P -- load [k]",), "", []),
        (("limit: 2 <= 3 -- [k]",), "", []),
        (("P = 2 -- load [K]",), "", []),
        (("P = 2",), "As in [k].", []),
        (("P = 2",), "As in k.", ["k"]),
        (("P = 2 + -- load [k]",), "", []),
    ],
)
def test_sources_that_nothing_cites(lines: tuple[str, ...], prose: str, unused: list[str]) -> None:
    front = NO_KINDS + "\nsources: {k: A table}"
    assert asked(*lines, slug="unused-source", front=front, prose=prose) == unused
    assert (
        asked(*lines, slug="unused-assumption", front=front.replace("sources", "assumptions"), prose=prose)
        == unused
    )


def test_what_a_project_declares_for_all_its_sheets_is_not_asked_for() -> None:
    project = "sources: {k: A table}\nassumptions: {A1: light}"
    assert asked("P = 2", slug="unused-source", project=project) == []
    assert asked("P = 2", slug="unused-assumption", project=project) == []
    assert asked("P = 2", slug="unused-source", project=project, front="sources: {m: B}") == ["m"]


@pytest.mark.parametrize(
    ("codes", "source", "place"),
    [
        ("[]", "EN 1993-1-1:2005", ["ec"]),
        ("[EN 1993-1-1:2005]", "EN 1993-1-1:2005", ["ec"]),
        ("[EN 1993-1-1:2005]", "A table", ["EN 1993-1-1:2005"]),
        ("[EN 1993-1-1:2005 with its national annex]", "EN 1993-1-1:2005", []),
        ("[NA to BS EN 1993-1-1]", "EN 1993-1-1:2005", []),
        ("[DIN EN 1993-1-1/NA]", "DIN EN 1993-1-1", []),
        ("[]", "EN 10365:2017", []),
        ("[]", "EN 10025-2", []),
        ("[]", "AISC 360-16", []),
        ("EN 1993-1-1", "EN 1993-1-1", []),
    ],
)
def test_a_eurocode_comes_with_its_national_annex(codes: str, source: str, place: list[str]) -> None:
    front = f"{NO_KINDS}\ncodes: {codes}\nsources: {{ec: '{source}'}}"
    assert asked("P = 2 -- [ec]", slug="no-national-annex", front=front) == place


# --- criteria -----------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("line", "place"),
    [
        ("limit: 8 mm >= 6 mm", [">="]),
        ("limit: 2*3 <= pi", ["<="]),
        ("limit: 1 <= 2 <= 3", ["<="]),
        ("limit: 1 <= 2 or 2 >= 3", ["<="]),
        ("limit: 1 <= 2 or P >= 3", []),
        ("limit: P <= 3", []),
        ("limit: f(2) <= 3", []),
        ("limit: sqrt(4) <= 3", ["<="]),
    ],
)
def test_criteria_that_cannot_fail(line: str, place: list[str]) -> None:
    assert asked("P = 2", "f(x) = P*x", line, slug="cannot-fail") == place


@pytest.mark.parametrize(
    ("line", "place"),
    [
        ("strength: P <= 30 kN", ["strength"]),
        ("strength: P <= 30 kN -- yield", ["strength"]),
        ("strength: P <= 30 kN -- yield [k]", []),
        ("strength: P <= 30 kN -- [A1]", []),
        ("strength: P <= R", []),
        ("strength: P <= Q", ["strength"]),
        ("strength: P <= R/1.5", ["strength"]),
        ("strength: R <= P", ["strength"]),
        ("limit: R <= P <= R_2", []),
        ("limit: Q <= P <= R_2", ["limit"]),
        ("limit: P <= R or P >= R_2", []),
        ("limit: P <= R or P >= Q", ["limit"]),
        ("strength: P <= 30 Kn", []),
    ],
)
def test_limits_say_where_they_come_from(line: str, place: list[str]) -> None:
    """A citation of its own, or a limit that is one name whose own line cites."""
    given = ("P = 2 kN", "Q = 3*P", "R = 3*P -- resistance, 6.2.3 [k]", "R_2 = 60 kN -- [k]")
    assert asked(*given, line, slug="limit-without-source", front=CITED) == place


@pytest.mark.parametrize(
    ("line", "front", "missing"),
    [
        ("P = 2", "", {"strength", "stiffness", "stability"}),
        ("strength: P <= 3", "", {"stiffness", "stability"}),
        ("limit: P <= 3", "not_applicable: {stiffness: none}", {"strength", "stability"}),
        ("stability a: P <= 3", "not_applicable: {strength: a, stiffness: b}", set()),
        ("strength: P <=", "not_applicable: {stability: a, stiffness: b}", set()),
        ("strengh lower flange: P <= 3", "not_applicable: {stability: a, stiffness: b}", set()),
        ("P = 2", "not_applicable: none of them", set()),
        ("P = 2", "owner: [", set()),
    ],
)
def test_each_of_the_three_kinds_has_a_criterion_or_a_reason(
    line: str, front: str, missing: set[str]
) -> None:
    found = [f for f in audit("P = 2", line, front=front) if f.slug == "no-criterion"]
    assert {
        kind for kind in ("strength", "stiffness", "stability") for f in found if kind in f.message
    } == missing
    assert all((f.severity, f.span) == ("note", None) and "not_applicable" in f.help for f in found)


# --- prose --------------------------------------------------------------------------------------------------

RESULTS = (
    "P = 22.5 kN", "A = 400 mm^2", "sigma = P/A", "N = -P", "e [%] = P/(36 kN)", "k = P/(40 kN)",
    "m = P/(7.5 kN)", "T_0 = 20 degC", "T = T_0 + 41.5 K", "L = 152.5 in", "i [ft-in 1/16] = L*2",
)  # fmt: skip


@pytest.mark.parametrize(
    ("prose", "typed"),
    [
        ("It works at 56.25 MPa.", ["56.25"]),
        ("It works at **56.25** MPa.", ["56.25"]),
        ("It works at (56.25 MPa), no more.", ["56.25"]),
        ("It works at 56.25\nMPa.", ["56.25"]),
        ("It works at 56.25 N/mm².", ["56.25"]),
        ("It works at 8.158 ksi.", ["8.158"]),
        ("It works at 56.2 MPa.", []),
        ("It works at 56.25 kN.", []),
        ("It works at {sigma}.", []),
        ("It works at `56.25 MPa`.", []),
        ("```\n56.25 MPa\n```", []),
        ("[56.25 MPa](a.html#x) and [here](56.25)", ["56.25"]),
        ("It carries 22.5 kN.", []),
        ("It pulls −22.50 kN.", []),
        ("It uses 62.50 %.", ["62.50"]),
        ("It uses 62.5%.", ["62.5"]),
        ("The ratio is 0.5625.", ["0.5625"]),
        ("The ratio is 0.56250.", []),
        ("The ratio is 3.000.", ["3.000"]),
        ("The ratio is 3.", []),
        ("There are 3 of them.", []),
        ("It warms to 61.50 °C.", ["61.50"]),
        ("Table 10.5625 and 0.5625-3 and v0.5625", []),
        ("## 0.5625 Stresses", []),
        ("## At 56.25 MPa", ["56.25"]),
        ("- at 56.25 MPa\n- at 56.25 MPa", ["56.25", "56.25"]),
        ("| a |\n|---|\n| 56.25 MPa |", ["56.25"]),
    ],
)
def test_numbers_in_prose_that_repeat_a_result(prose: str, typed: list[str]) -> None:
    assert asked(*RESULTS, slug="stale-number", prose=prose) == typed


def test_the_mend_names_the_value_with_its_unit() -> None:
    (found,) = (f for f in audit(*RESULTS, prose="It works at 8.158 ksi.") if f.slug == "stale-number")
    assert "`{sigma [ksi]}`" in found.help


@pytest.mark.parametrize("key", ["objective", "method", "conclusion"])
def test_numbers_in_the_front_matter_that_repeat_a_result(key: str) -> None:
    front = f"{NO_KINDS}\nsubtitle: At 56.25 MPa\n{key}: >\n  It works\n  at 56.25 MPa, not {{sigma}}."
    (found,) = (f for f in audit(*RESULTS, front=front) if f.slug == "stale-number")
    assert found.span is not None and found.source.cut(found.span) == "56.25"
    assert found.line == 7


def test_prose_against_many_results_takes_no_long_time() -> None:
    lines = ["a = 1.5"] + [f"b_{i} = a*{i + 3}.25" for i in range(1500)]
    prose = " ".join(f"It is {i}.125 kN and {i}.375." for i in range(1500))
    assert asked(*lines, slug="stale-number", prose=prose)


# --- the whole ----------------------------------------------------------------------------------------------


def test_the_findings_of_the_trace_come_along_in_order_of_place() -> None:
    found = audit("P = 20 kN", "Q = 2*p", "limit: 2 <= 3")
    assert [f.slug for f in found] == ["no-note", "unknown-name", "limit-without-source", "cannot-fail"]
    assert found == ordered(found)


@pytest.mark.parametrize("text", ["", "\0", "---\ntitle: x\n---\n"])
def test_a_sheet_that_says_nothing_is_asked_nothing(text: str) -> None:
    trace = loadpath.evaluate(loadpath.read_text(text))
    assert loadpath.audit(trace) == trace.findings
