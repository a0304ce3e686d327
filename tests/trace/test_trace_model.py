"""The trace: what feeds a step and what it feeds, its value, its words, its digest."""

from __future__ import annotations

import pytest

import loadpath
from loadpath.findings import finding
from loadpath.project import MemoryWorld
from loadpath.sheet import read_sheet
from loadpath.text import Source, Span
from loadpath.trace import Trace, Verdict, criterion_kind, criterion_name

SHEET = """---
title: T
sources: {s: A source}
---

    P = 20 kN -- pull, factored [s]
    A = 4 cm^2 -- area
        -- measured twice
    T = 20 degC -- temperature

## One

    sigma = P/A
    f(x [MPa]) = x/sigma
    u = f(100 MPa)
    q = 3*P
    strength: sigma <= 60 MPa
    stability buckling: sigma + 1 kPa <= 60 MPa
    valid: u <= 3 for q
    check: sigma*A = P within 1 %
    stiffness nonsense: sigma <=
"""


@pytest.fixture(scope="module")
def trace() -> Trace:
    return loadpath.evaluate(loadpath.read_text(SHEET))


# --- what feeds what ----------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("id", "feeds", "fed_by"),
    [
        (
            "P",
            set(),
            {
                "sigma",
                "f",
                "u",
                "q",
                "strength: sigma <= 60 MPa",
                "stability buckling",
                "valid: u <= 3",
                "check: sigma*A = P",
            },
        ),
        (
            "sigma",
            {"P", "A"},
            {
                "f",
                "u",
                "strength: sigma <= 60 MPa",
                "stability buckling",
                "valid: u <= 3",
                "check: sigma*A = P",
            },
        ),
        ("u", {"f", "sigma", "P", "A"}, {"valid: u <= 3"}),
        ("strength: sigma <= 60 MPa", {"sigma", "P", "A"}, set()),
        ("T", set(), set()),
    ],
)
def test_closure_both_ways(trace: Trace, id: str, feeds: set[str], fed_by: set[str]) -> None:
    assert trace.feeds(id) == feeds
    assert trace.fed_by(id) == fed_by


def test_closures_mirror_each_other(trace: Trace) -> None:
    for step in trace:
        for other in trace.feeds(step.id):
            assert step.id in trace.fed_by(other)


def test_direct_links_stand_in_reading_order(trace: Trace) -> None:
    assert trace["sigma"].uses == ("P", "A")
    assert trace["P"].used_by == ("sigma", "q", "check: sigma*A = P")


def test_steps_by_id_and_by_name(trace: Trace) -> None:
    assert trace["sigma"] is trace.by_name["sigma"]
    assert [step.id for step in trace] == [step.id for step in trace.steps]
    for missing in (lambda: trace["no such step"], lambda: trace.feeds("no such step")):
        with pytest.raises(KeyError):
            missing()


# --- one step -----------------------------------------------------------------------------------------------


def test_values_in_their_units(trace: Trace) -> None:
    assert (trace["P"].value, trace["P"].si, trace["P"].unit.text) == (20.0, 20_000.0, "kN")
    assert trace["sigma"].value == pytest.approx(50)
    assert trace["T"].value == pytest.approx(20)
    assert trace["T"].si == pytest.approx(293.15)
    assert trace["f"].value is None


def test_notes_and_sources(trace: Trace) -> None:
    assert (trace["P"].note, trace["P"].sources) == ("pull, factored [s]", ("s",))
    assert trace["A"].note == "area; measured twice"
    assert trace["sigma"].note == ""


def test_lines_and_numbers(trace: Trace) -> None:
    assert [(s.number, s.line) for s in trace][:5] == [
        ("0.1", 6),
        ("0.2", 7),
        ("0.3", 9),
        ("1.1", 13),
        ("1.2", 14),
    ]
    assert trace.sections == ((1, "One"),)


def test_criteria_are_those_that_could_not_be_read_too(trace: Trace) -> None:
    assert [(criterion_kind(s), criterion_name(s)) for s in trace.criteria] == [
        ("strength", "sigma <= 60 MPa"), ("stability", "buckling"), ("stiffness", "nonsense"),
    ]  # fmt: skip
    unread = trace.criteria[-1]
    assert unread.kind == "faulty"
    assert unread.verdict is not None and unread.verdict.satisfied is None
    assert unread.why == "not computed because of line 21"


# --- verdicts in words --------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("verdict", "why", "words"),
    [
        (Verdict(True), "", "satisfied"),
        (Verdict(False), "", "not satisfied"),
        (Verdict(True, conditional_on=("A1", "A3")), "", "satisfied, conditional on A1, A3"),
        (Verdict(False, conditional_on=("A1",)), "", "not satisfied"),
        (Verdict(True, one_sided=True), "", "satisfied on one side only"),
        (
            Verdict(True, one_sided=True, conditional_on=("A1",)),
            "",
            "satisfied on one side only, conditional on A1",
        ),
        (Verdict(None, outside=("chi",)), "", "not shown: outside the range of chi"),
        (Verdict(None, outside=("chi", "phi")), "", "not shown: outside the range of chi, phi"),
        (Verdict(None), "not computed because of line 12", "not shown: not computed because of line 12"),
        (
            Verdict(None, conditional_on=("A1",)),
            "not computed because of line 12",
            "not shown: not computed because of line 12",
        ),
    ],
)
def test_words_of_a_verdict(verdict: Verdict, why: str, words: str) -> None:
    assert verdict.words(why) == words


# --- findings -----------------------------------------------------------------------------------------------


def test_further_findings_are_put_in_their_place(trace: Trace) -> None:
    source = trace.sheet.source
    early = finding("no-note", "an early one", source, Span(0, 3))
    more = trace.with_findings((early,))
    assert more.findings == (early, *trace.findings)
    assert trace.with_findings(trace.findings).findings == trace.findings


@pytest.mark.parametrize(
    ("line", "errors"), [("x = 1 mm -- a", False), ("x = 1 mm + 2 s -- a", True), ("limit x: 1 <= 2", False)]
)
def test_errors_make_a_document_unfit_for_use(line: str, errors: bool) -> None:
    assert loadpath.evaluate(loadpath.read_text(f"---\ntitle: T\n---\n\n    {line}\n")).has_errors is errors


# --- digest -------------------------------------------------------------------------------------------------

PNG = bytes.fromhex(
    "89504e470d0a1a0a0000000d494844520000000100000001080000000003a7e9"
    "9b0000000a49444154789c63600000000200015c2bdcb40000000049454e44ae426082"
)


def digest(
    text: str = SHEET, project: str = "owner: Yard\n", image: bytes = PNG, path: str = "a.sheet.md"
) -> str:
    world = MemoryWorld({"project.yaml": project.encode(), "s.png": image})
    return loadpath.evaluate(read_sheet(Source(path, text + "\n\n![A sketch](s.png)\n"), world)).digest


def test_the_digest_covers_text_project_and_images_and_nothing_else() -> None:
    own = digest()
    assert len(own) == 64
    assert own == digest()
    assert own == digest(path="elsewhere/b.sheet.md")
    others = {
        digest(SHEET.replace("20 kN", "21 kN")),
        digest(project="owner: Yards\n"),
        digest(image=PNG + b"\0"),
        digest(SHEET + " "),
    }
    assert len(others | {own}) == 5
