"""Working a sheet: values, trails, verdicts and what hangs on what, from text to trace."""

from __future__ import annotations

import math

import pytest

import loadpath
from loadpath.sheet.model import FrontMatter
from loadpath.trace import Trace


def evaluate(body: str, front: str = "") -> Trace:
    return loadpath.evaluate(loadpath.read_text(f"---\ntitle: A sheet\n{front}\n---\n\n{body}\n"))


def worked(*lines: str, front: str = "") -> Trace:
    return evaluate("\n".join("    " + line for line in lines), front)


# --- values -------------------------------------------------------------------------------------------------


def test_a_hand_calculation() -> None:
    """A simply supported beam with a load at midspan, by hand: M = P*L/4, v = P*L^3/(48*E*I)."""
    trace = worked(
        "P = 12 kN", "L = 4 m", "E = 210 GPa", "I = 8356 cm^4", "M [kN*m] = P*L/4", "v [mm] = P*L^3/(48*E*I)",
    )  # fmt: skip
    assert trace["M"].value == pytest.approx(12)
    assert trace["v"].value == pytest.approx(12e3 * 4**3 / (48 * 210e9 * 8356e-8) * 1e3)
    assert trace["M"].si == 12e3 and trace["M"].unit.text == "kN*m"


def test_a_choice_decides_a_branch() -> None:
    trace = worked(
        'w = "b" of "a", "b"', "k = cases", '    1  when w = "a"', '    2  when w = "b"', "    3  otherwise"
    )
    assert (trace["w"].value, trace["k"].value) == ("b", 2)


def test_a_function_has_no_value_of_its_own() -> None:
    trace = worked("f(x [m]) [m] = 2*x", "a = f(3 m)")
    assert trace["f"].value is None and trace["f"].why == ""
    assert trace["a"].si == 6


def test_temperatures() -> None:
    trace = worked(
        "T = 20 degC", "d = T - (-20 degC)", "T_2 = T + 30 K", "T_K [K] = T", "r [1] = T_K/(100 K)"
    )
    assert [trace[i].value for i in ("d", "T_2", "T_K", "r")] == pytest.approx([40, 50, 293.15, 2.9315])


# --- what cannot be computed --------------------------------------------------------------------------------


def test_what_hangs_on_a_failed_number_is_not_computed_and_the_rest_goes_on() -> None:
    trace = worked("a = 0", "b = 1/a", "c = 2*b", "limit x: c <= 3", "d = 2*a", "check: c = d within 1")
    assert [s.why for s in trace] == [
        "",
        *["not computed because of line 7"] * 3,
        "",
        "not computed because of line 7",
    ]
    assert trace["limit x"].verdict is not None
    assert trace["limit x"].verdict.words(trace["limit x"].why) == "not shown: not computed because of line 7"
    assert [f.slug for f in trace.findings] == ["division-by-zero"]


def test_a_criterion_that_cannot_be_read_counts_as_not_shown() -> None:
    trace = worked("a = 2", "strength rod: a <= ")
    (step,) = trace.criteria
    assert step.id == "strength rod" and step.verdict is not None and step.verdict.satisfied is None


# --- assumptions --------------------------------------------------------------------------------------------

ASSUMED = "assumptions:\n  A1: {text: light, confirm: true}\n  A2: {text: dry, confirm: true}\n  A3: strong"


@pytest.mark.parametrize(
    ("lines", "keys"),
    [
        (("a = 2 -- [A1]", "limit x: a <= 3"), ("A1",)),
        (("a = 2 -- [A2] [A1]", "b = 2*a", "limit x: b <= 30"), ("A1", "A2")),
        (("a = 2", "limit x: a <= 3 -- [A2]"), ("A2",)),
        (("a = 2 -- [A3]", "limit x: a <= 3"), ()),
        (("a = 2 -- [A1]", "f(x) = a*x", "limit x: f(1) <= 3"), ("A1",)),
        (("a = 2 -- [A1]", "b = 3", "limit x: b <= 30"), ()),
        (("a = 2", "c = 3 -- [A1]", "valid: c <= 4 for a", "limit x: a <= 3"), ("A1",)),
    ],
)
def test_a_verdict_is_conditional_on_the_open_assumptions_that_it_hangs_on(
    lines: tuple[str, ...], keys: tuple[str, ...]
) -> None:
    trace = worked(*lines, front=ASSUMED)
    verdict = trace["limit x"].verdict
    assert verdict is not None and verdict.conditional_on == keys
    expected = f"satisfied, conditional on {', '.join(keys)}" if keys else "satisfied"
    assert verdict.words("") == expected


# --- validity -----------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    "lines",
    [
        ("chi = 2", "valid: chi >= 3 for chi", "limit x: chi <= 3"),
        ("chi = 2", "limit x: chi <= 3", "valid: chi >= 3 for chi"),
        ("chi = 2", "a = 2*chi", "valid: a >= 30 for chi", "limit x: a <= 30"),
        ("chi(t) = t", "a = chi(2)", "valid: a >= 30 for chi", "limit x: a <= 30"),
        ("chi = 2", "b = 1/0", "valid: b >= 3 for chi", "limit x: chi <= 3"),
    ],
)
def test_outside_a_range_every_criterion_downstream_shows_nothing(lines: tuple[str, ...]) -> None:
    verdict = worked(*lines)["limit x"].verdict
    assert verdict is not None
    assert (verdict.satisfied, verdict.utilisation, verdict.outside) == (None, None, ("chi",))
    assert verdict.words("") == "not shown: outside the range of chi"


def test_within_its_range_nothing_changes_and_others_are_left_alone() -> None:
    trace = worked(
        "chi = 2",
        "b = 3",
        "valid: chi >= 1 for chi",
        "valid: b >= 5 for b",
        "limit x: chi <= 3",
        "limit y: b <= 4",
    )
    assert trace["limit x"].verdict is not None and trace["limit x"].verdict.satisfied is True
    assert trace["limit y"].verdict is not None and trace["limit y"].verdict.satisfied is None


# --- cross-checks -------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("check", "holds"),
    [
        ("a = 100 within 1 %", True),
        ("a = 102 within 1 %", False),
        ("102 = a within 1.9 %", False),
        ("102 = a within 2 %", True),
        ("a = 102 within 2", True),
        ("a = 102 within 1.9", False),
        ("b = 3 kN within 1 N", True),
        ("b = 3.002 kN within 1 N", False),
        ("b - 3 kN = 0 within 1 N", True),
        ("b = -3 kN within 1 %", False),
        ("-b = -3 kN within 1 %", True),
    ],
)
def test_a_cross_check_is_of_the_right_side_or_absolute(check: str, holds: bool) -> None:
    trace = worked("a = 100", "b = 3 kN", f"check: {check}")
    assert [f.slug for f in trace.findings] == ([] if holds else ["check-failed"])
    assert trace.steps[-1].verdict is not None and trace.steps[-1].verdict.satisfied is holds
    assert trace.criteria == ()


# --- one-sided ----------------------------------------------------------------------------------------------


def test_a_one_sided_criterion_is_a_warning() -> None:
    trace = worked(
        "s = 0 MPa - 50 MPa",
        "limit x: s <= 60 MPa",
        "limit y: s >= 60 MPa or s <= 5 MPa",
        "limit z: -60 MPa <= s <= 60 MPa",
    )
    assert [(f.slug, f.severity, f.line) for f in trace.findings] == [
        ("one-sided", "warning", 7),
        ("one-sided", "warning", 8),
    ]
    assert "`abs(s) <= 60 MPa`" in trace.findings[0].help


# --- numbers of steps, trails -------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("body", "numbers"),
    [
        (
            "    a = 1\n\n## One\n\n    b = 2\n    c = 3\n\n### Part\n\n    d = 4\n\n## Two\n\n    e = 5",
            "0.1 1.1 1.2 1.3 2.1",
        ),
        ("# A sheet\n\n    a = 1\n\n## One\n\n    b = 2", "0.1 1.1"),
        ("# One\n\n    a = 1\n\n## Part\n\n    b = 2", "1.1 1.2"),
        ("    a = 1\n\ntext\n\n    b = 2", "0.1 0.2"),
        ("## One\n\n## Two\n\n    a = 1 +\n    b = 2", "2.1 2.2"),
    ],
)
def test_step_numbers(body: str, numbers: str) -> None:
    """Sections are the headings of the highest level after the title; steps before the first are `0.n`."""
    assert " ".join(step.number for step in evaluate(body)) == numbers


def test_trails_lead_both_ways() -> None:
    trace = worked("a = 1", "b = 2", "f(x) = a*x", "c = f(b) + b", "limit x: c <= 9")
    assert trace["c"].uses == ("f", "b")
    assert trace["b"].used_by == ("c",)
    assert trace["a"].used_by == ("f",)
    assert trace.feeds("limit x") == {"a", "b", "f", "c"}
    assert trace.fed_by("a") == {"f", "c", "limit x"}


def test_citations_are_kept_in_order_and_once() -> None:
    trace = worked("a = 1 -- one [k] two [m] [k]", front="sources: {k: one, m: two}")
    assert trace["a"].sources == ("k", "m")
    assert trace["a"].note == "one [k] two [m] [k]"


# --- digits -------------------------------------------------------------------------------------------------


def test_a_result_shows_the_digits_that_its_verdict_needs() -> None:
    trace = worked("a = 1", "b = 1.00004*a", "c = 2*a", "limit x: b <= 1", "limit y: c <= 1")
    assert trace["b"].digits > 4 == trace["c"].digits
    assert f"{trace['b'].value:.{trace['b'].digits - 1}f}" != "1.0000"


# --- digest -------------------------------------------------------------------------------------------------


def test_the_digest_is_of_the_text() -> None:
    assert worked("a = 1").digest == worked("a = 1").digest
    assert worked("a = 1").digest != worked("a = 2").digest
    assert len(worked("a = 1").digest) == 64


# --- sheets that say nothing --------------------------------------------------------------------------------


@pytest.mark.parametrize(
    "text", ["", "---\n", "---\ntitle: x\n---\n", "\0", "text", "    a = 1", "---\ntitle: [\n---\n    a"]
)
def test_any_text_has_a_trace(text: str) -> None:
    trace = loadpath.evaluate(loadpath.read_text(text))
    assert all(math.isfinite(s.si) for s in trace if isinstance(s.si, float))
    assert isinstance(trace.sheet.front, FrontMatter)
