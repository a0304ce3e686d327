"""The trace file: what the contract names, what the schema allows, read back as it was written."""

from __future__ import annotations

import json
from functools import cache
from importlib.resources import files
from pathlib import Path
from typing import Any

import pytest
from jsonschema import Draft202012Validator

import loadpath
from loadpath.findings import Finding
from loadpath.pipeline import audited, read_input
from loadpath.text import Source, Span
from loadpath.trace import Trace
from loadpath.trace.file import TraceFile, finding_record, record

ROOT = Path(__file__).parents[2]
SHEETS = sorted(
    [*(ROOT / "calcsheets").glob("*.sheet.md"), *(ROOT / "tests" / "published").glob("*.sheet.md")]
)
SCHEMA: dict[str, Any] = json.loads(
    (files("loadpath.trace") / "trace.schema.json").read_text(encoding="utf-8")
)

ALL_KINDS = """---
title: Everything
number: SB-1
revision: A
sources: {s: A source}
assumptions: {A1: {text: Something, confirm: true}}
---

    P = 20 kN -- load [s]
    c = "a" of "a", "b" -- curve [s]
    t_0 = 20 degC -- cold
    A = 4 cm^2 -- area [A1]

# One

    f(u [mm]) [mm] = 2*u
    sigma = P/A
    k = cases
        1 when c = "a"
        2 otherwise
    e = f(3 mm)
    strength: sigma <= 60 MPa
    stability named: sigma <= 60 MPa -- [s]
    limit warm: t_0 <= 30 degC
    valid: 3 <= k <= 12 for e
    stiffness: e <= 2 mm
    check: sigma*A = P within 0.1 %
    check: sigma*A = P within 1 %
    x = 3 kN + 2 m
    y = x/A
    limit z: y <= 2
    this is no formula = = 3
"""


def file_of(text: str) -> TraceFile:
    return record(audited(loadpath.read_text(text, "everything.sheet.md")), "9.9.9")


@cache
def recorded(path: Path) -> TraceFile:
    return record(audited(read_input(path)), "9.9.9")


def strict(text: str) -> Any:
    """JSON as other programs read it: without NaN and Infinity."""

    def refuse(constant: str) -> Any:
        raise ValueError(f"{constant} is not JSON")

    return json.loads(text, parse_constant=refuse)


# --- schema -------------------------------------------------------------------------------------------------


def test_the_schema_is_one() -> None:
    Draft202012Validator.check_schema(SCHEMA)


@pytest.mark.parametrize("path", SHEETS, ids=lambda p: p.name.removesuffix(".sheet.md"))
def test_traces_are_valid_and_read_back(path: Path) -> None:
    made = recorded(path)
    raw = strict(made.to_json())
    assert list(Draft202012Validator(SCHEMA).iter_errors(raw)) == []
    assert TraceFile.from_json(made.to_json()) == made


def test_a_trace_with_every_kind_of_step_and_with_mistakes() -> None:
    made = file_of(ALL_KINDS)
    raw = strict(made.to_json())
    assert list(Draft202012Validator(SCHEMA).iter_errors(raw)) == []
    assert TraceFile.from_json(made.to_json()) == made
    kinds = {step.kind for step in made.steps}
    assert kinds == {"input", "choice", "function", "result", "criterion", "valid", "check", "faulty"}


@pytest.mark.parametrize(
    ("part", "key", "value"),
    [
        ("steps", "kind", "guess"),
        ("steps", "number", "3"),
        ("steps", "line", 0),
        ("steps", "value", True),
        ("steps", "uses", "M"),
        ("steps", "id", ""),
        ("criteria", "kind", "safety"),
        ("criteria", "satisfied", "yes"),
        ("findings", "severity", "fatal"),
    ],
)
def test_the_schema_refuses(part: str, key: str, value: object) -> None:
    raw = json.loads(file_of(ALL_KINDS).to_json())
    raw[part][0][key] = value
    assert not Draft202012Validator(SCHEMA).is_valid(raw)


def test_keys_of_the_contract() -> None:
    """source: the contract, section 7."""
    raw = json.loads(file_of(ALL_KINDS).to_json())
    assert raw["schema"] == "loadpath-trace/1"
    assert set(raw["sheet"]) >= {"file", "title", "number", "revision", "digest"}
    assert raw["engine"] == {"version": "9.9.9"}
    steps = ["id", "number", "kind", "line", "formula", "substitution", "display", "value", "unit", "si"]
    steps += ["uses", "used_by", "sources", "note"]
    criteria = ["step", "id", "kind", "relation", "demand", "limit", "unit", "utilisation", "satisfied"]
    criteria += ["verdict", "conditional_on"]
    finding = ["slug", "severity", "line", "column", "message", "help"]
    for part, keys in (("steps", steps), ("criteria", criteria), ("findings", finding)):
        assert raw[part]
        assert all(set(entry) >= set(keys) for entry in raw[part])
    for part, named in (("steps", steps), ("criteria", criteria), ("findings", finding)):
        described = SCHEMA["$defs"][{"steps": "step", "criteria": "criterion", "findings": "finding"}[part]]
        assert set(described["required"]) >= set(named)


@pytest.mark.parametrize("text", ['{"schema": "loadpath-trace/2"}', "[]", "3", "no json"])
def test_what_is_no_trace_file(text: str) -> None:
    with pytest.raises(ValueError):
        TraceFile.from_json(text)


# --- what stands in it --------------------------------------------------------------------------------------


def test_a_result() -> None:
    (step,) = [s for s in file_of(ALL_KINDS).steps if s.id == "sigma"]
    assert (step.number, step.kind, step.line) == ("1.2", "result", 17)
    assert (step.formula, step.substitution, step.display) == ("P/A", "20 kN / 4 cm^2", "50.00\u202fMPa")
    assert (step.unit, step.value, step.si) == ("MPa", pytest.approx(50), pytest.approx(50e6))
    assert step.uses == ["P", "A"]
    assert step.used_by[:2] == ["strength: sigma <= 60 MPa", "stability named"]


def test_an_input_a_choice_and_a_note() -> None:
    steps = {s.id: s for s in file_of(ALL_KINDS).steps}
    assert (steps["P"].value, steps["P"].unit, steps["P"].si) == (20.0, "kN", 20_000.0)
    assert (steps["P"].note, steps["P"].sources) == ("load [s]", ["s"])
    assert (steps["c"].value, steps["c"].si, steps["c"].formula) == ("a", None, '"a" of "a", "b"')
    assert (steps["t_0"].value, steps["t_0"].si) == (pytest.approx(20), pytest.approx(293.15))
    assert steps["k"].branch == 1


def test_criteria() -> None:
    by_id = {c.id: c for c in file_of(ALL_KINDS).criteria}
    plain = by_id["strength: sigma <= 60 MPa"]
    assert (plain.step, plain.kind, plain.relation, plain.unit) == (
        "1.5",
        "strength",
        "sigma <= 60 MPa",
        "MPa",
    )
    assert (plain.demand, plain.limit, plain.utilisation) == tuple(map(pytest.approx, (50, 60, 5 / 6)))
    assert (plain.satisfied, plain.verdict, plain.conditional_on) == (
        True,
        "satisfied, conditional on A1",
        ["A1"],
    )
    warm = by_id["limit warm"]
    assert (warm.demand, warm.limit, warm.unit) == (pytest.approx(20), pytest.approx(30), "degC")
    assert (warm.utilisation, warm.margin) == (None, pytest.approx(10))
    ranged = by_id["stiffness: e <= 2 mm"]
    assert (ranged.satisfied, ranged.utilisation, ranged.verdict) == (
        None,
        None,
        "not shown: outside the range of e",
    )
    blocked = by_id["limit z"]
    assert (blocked.satisfied, blocked.demand, blocked.verdict) == (
        None,
        None,
        "not shown: not computed because of line 29",
    )


def test_what_was_not_computed_says_why() -> None:
    steps = {s.id: s for s in file_of(ALL_KINDS).steps}
    assert (steps["y"].value, steps["y"].si, steps["y"].display) == (None, None, "")
    assert steps["y"].why == "not computed because of line 29"


def test_a_chain_tells_its_governing_part() -> None:
    made = file_of(
        "---\ntitle: T\n---\n\n    x = 9 mm -- a\n"
        "    limit a: 2 mm <= x <= 10 mm\n    limit b: 2 mm <= x/3 <= 10 mm\n"
    )
    a, b = made.criteria
    assert (a.demand, a.limit, a.utilisation) == tuple(map(pytest.approx, (9, 10, 0.9)))
    assert (b.demand, b.limit, b.utilisation) == tuple(map(pytest.approx, (2, 3, 2 / 3)))


# --- algebra and columns ------------------------------------------------------------------------------------

COLUMNS = """---
title: Columns and algebra
sources: {s: A source}
assumptions: {A1: {text: Something, confirm: true}}
---

Table t: two pieces [A1]

| piece | b [mm] | h [mm] |
|-------|--------|--------|
| top   | 10     | 2*3 mm |
| web   | 5      | 4      |

    A = t.b*t.h
    strength area: A <= 61 mm^2 -- [s]
    unknown C [kN]
    P = 6 kN -- load [s]
    V(x [m]) [kN] = C - P*<x - 1 m>^0
    M(x [m]) [kN*m] = integral(V(x), x)
    solve for C
        M(3 m) = 0
    U = largest(M(x), x, 0 m, 3 m)
    plot M(x) for x from 0 m to 3 m
    tabulate M(x) for x from 0 m to 3 m, 3 steps
    n [1] = sum(k, k, 1, 3)
    solve for q [mm] between 0 mm and 9 mm
        q^2 = 16 mm^2
    y = integral(x^2, x, 0, 3)
    s = sum(A)
"""


def test_columns_and_algebra_in_the_file() -> None:
    made = file_of(COLUMNS)
    assert [f.message for f in made.findings if f.severity == "error"] == []
    assert list(Draft202012Validator(SCHEMA).iter_errors(strict(made.to_json()))) == []
    assert TraceFile.from_json(made.to_json()) == made
    steps = {s.id: s for s in made.steps}
    kinds = {"table", "result", "criterion", "unknown", "input", "function", "solution", "plot"}
    assert {s.kind for s in made.steps} >= kinds
    area = steps["A"]
    assert (area.value, area.unit, area.rows) == (pytest.approx([60, 20]), "mm^2", ["top", "web"])
    assert area.si == pytest.approx([60e-6, 20e-6])
    assert area.display == "60.00\u202fmm², 20.00\u202fmm²"
    assert (steps["strength area"].governing, steps["t.b"].rows) == ("top", ["top", "web"])
    assert steps["M"].derived == "C*x - P*<x - 1 m>^1"
    assert (steps["C"].kind, steps["C"].value, steps["C"].method) == (
        "solution",
        pytest.approx(4),
        "as a linear equation",
    )
    assert steps["q"].derived and steps["q"].value == pytest.approx(4)
    assert (steps["y"].value, steps["n"].value, steps["s"].value) == tuple(map(pytest.approx, (9, 6, 80)))
    (criterion,) = made.criteria
    assert (criterion.demand, criterion.limit, criterion.unit) == (
        pytest.approx(60),
        pytest.approx(61),
        "mm^2",
    )
    assert (criterion.utilisation, criterion.verdict) == (
        pytest.approx(60 / 61),
        "satisfied, conditional on A1",
    )


def test_trails_of_unknowns_solutions_and_columns() -> None:
    """A function hangs on the unknown, what is evaluated with it after the solution on both."""
    steps = {s.id: s for s in file_of(COLUMNS).steps}
    assert {"unknown C", "P"} <= set(steps["V"].uses)
    assert {"M", "unknown C"} <= set(steps["C"].uses)
    assert {"M", "C"} <= set(steps["U"].uses)
    assert {"t.b", "t.h"} <= set(steps["A"].uses)
    assert {"s", "strength area"} <= set(steps["A"].used_by)
    assert {"M", "C"} <= set(steps["plot M(x)"].uses)


# --- ids ----------------------------------------------------------------------------------------------------


@pytest.mark.parametrize("path", SHEETS, ids=lambda p: p.name.removesuffix(".sheet.md"))
def test_ids_are_unique_and_trails_run_both_ways(path: Path) -> None:
    steps = recorded(path).steps
    by_id = {s.id: s for s in steps}
    assert len(by_id) == len(steps)
    assert {(a, s.id) for s in steps for a in s.uses} == {(s.id, b) for s in steps for b in s.used_by}
    for step in steps:
        assert set(step.uses) <= set(by_id)
    assert [c.id for c in recorded(path).criteria] == [s.id for s in steps if s.kind == "criterion"]
    assert {c.step for c in recorded(path).criteria} <= {s.number for s in steps}


def test_ids_are_names_and_never_counters() -> None:
    """Steps put in above leave the ids of those below as they were; a second check of one is `#2`."""
    before = file_of(ALL_KINDS)
    put_in = ALL_KINDS.replace("# One\n", "# Nought\n\nSome text.\n\n    q = 3 mm -- a [s]\n\n# One\n")
    after = file_of(put_in)
    own = [s.id for s in before.steps]
    assert own == [s.id for s in after.steps if s.id != "q"]
    assert "check: sigma*A = P" in own and "check: sigma*A = P#2" in own
    assert "valid: 3 <= k <= 12" in own
    assert [s.number for s in before.steps] != [s.number for s in after.steps if s.id != "q"]


def test_the_spacing_of_a_line_leaves_its_id_alone() -> None:
    loose = ALL_KINDS.replace("strength: sigma <= 60 MPa", "strength:sigma<=60 MPa").replace(
        "sigma = P/A", "sigma = P / A"
    )
    assert [s.id for s in file_of(loose).steps] == [s.id for s in file_of(ALL_KINDS).steps]


# --- numbers and names --------------------------------------------------------------------------------------


@pytest.mark.parametrize("path", SHEETS, ids=lambda p: p.name.removesuffix(".sheet.md"))
def test_values_are_at_full_precision_and_agree_with_si(path: Path) -> None:
    trace: Trace = loadpath.evaluate(loadpath.read(path))
    by_id = {s.id: s for s in recorded(path).steps}
    for step in trace:
        if isinstance(step.si, float):
            assert by_id[step.id].si == step.si
            value = by_id[step.id].value
            assert isinstance(value, float)
            assert step.unit.to_si(value) == pytest.approx(step.si, rel=1e-14)
        if isinstance(step.si, tuple):
            made = by_id[step.id]
            assert made.si == list(step.si)
            assert isinstance(made.value, list) and len(made.value) == len(made.rows) == len(step.si)
            for value, si in zip(made.value, step.si, strict=True):
                assert step.unit.to_si(value) == pytest.approx(si, rel=1e-14, abs=1e-300)


def test_only_the_name_of_the_file_is_told() -> None:
    trace = loadpath.evaluate(
        loadpath.read_text("---\ntitle: T\n---\n\n    x = 1 +\n", "some/folder/rod.sheet.md")
    )
    made = record(trace, "1")
    assert made.sheet["file"] == "rod.sheet.md"
    assert {f.file for f in made.findings} == {"rod.sheet.md"}
    assert "some/folder" not in made.to_json()


def test_a_finding_about_a_whole_file_stands_at_its_first_line() -> None:
    made = finding_record(Finding("no-criterion", "note", "said", None, Source("a/b.sheet.md", "x\ny\n")))
    assert (made.line, made.column, made.file, made.help) == (1, 1, "b.sheet.md", "")
    placed = finding_record(
        Finding("no-note", "warning", "said", Span(2, 3), Source("b.sheet.md", "x\ny\n"), help="mend")
    )
    assert (placed.line, placed.column, placed.help) == (2, 1, "mend")


def test_text_stays_as_typed() -> None:
    made = file_of('---\ntitle: Løfteøre 吊耳 "x"\n---\n\n    σ = 1 MPa -- Spannung “zulässig”\n')
    text = made.to_json()
    assert "Løfteøre 吊耳" in text
    assert "Spannung “zulässig”" in text
    assert text.endswith("}\n")
    assert [s.id for s in made.steps] == ["sigma"]
