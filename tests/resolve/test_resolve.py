"""Names, order, and what hangs on what: every mistake once, at its cause."""

from __future__ import annotations

import gc
import time
from importlib import import_module

import pytest
from sheets import entry, findings, resolve, slugs

import loadpath


def blocked(*lines: str, **more: str) -> dict[str, int]:
    """Line that keeps each step from being computed, counted from the first formula line; 0 for none."""
    resolved = resolve(*lines, **more)
    first = 6
    return {e.id: max(e.blocked_by - first + 1, 0) for e in resolved.entries}


# --- names --------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("lines", "slug", "place", "mend"),
    [
        (("a = b", "b_1 = 2"), "unknown-name", "b", "define"),
        (("force = 2", "a = froce"), "unknown-name", "froce", "did you mean `force`?"),
        (("P = 2", "a = p"), "unknown-name", "p", "did you mean `P`?"),
        (("a = zeta_9",), "unknown-name", "zeta_9", "define"),
        (("a = sqr(2)",), "unknown-function", "sqr", "did you mean `sqrt`?"),
        (("a = foobar(2)",), "unknown-function", "foobar", "foobar*(...)"),
        (("a = b", "b = 2"), "used-before-defined", "b", "above"),
        (("a = 2*a",), "used-before-defined", "a", "name"),
        (("f(x) = f(x - 1)",), "used-before-defined", "f", "name"),
        (("a = f(2)", "f(x) = x"), "used-before-defined", "f", "above"),
        (("a = 2", "a = 3"), "defined-twice", "a", "a_2"),
        (("sigma = 2", "σ = 3"), "defined-twice", "σ", "name"),
        (("a = 2", "a(x) = x"), "defined-twice", "a", "name"),
        (("F_1 = 2", "F__1 = 3"), "alike-names", "F__1", "name"),
        (("pi = 3",), "reserved-word", "pi", "name"),
        (("x = 2", "f(x) = x"), "shadowed-name", "x", "name"),
        (("f(x) = x", "x = 2"), "shadowed-name", "x", "name"),
        (("f(pi) = pi",), "shadowed-name", "pi", "name"),
        (("a = sqrt",), "wrong-arguments", "sqrt", "sqrt(...)"),
        (("a = interp(2, 3, 4)",), "needs-column", "3", "curve.x"),
        (("limit a: 2 <= b",), "unknown-name", "b", "define"),
        (("valid: 2 <= 3 for chi",), "unknown-name", "chi", "define"),
    ],
)
def test_names_that_are_not_there(lines: tuple[str, ...], slug: str, place: str, mend: str) -> None:
    (found,) = findings(*lines)
    assert found.slug == slug
    assert found.span is not None and found.source.cut(found.span) == place
    assert mend in found.help


def test_one_finding_for_a_name_that_is_missing_several_times_on_a_line() -> None:
    assert slugs("a = b*b + b") == ["unknown-name"]
    assert slugs("a = b + c") == ["unknown-name", "unknown-name"]


def test_the_parameter_of_a_function_lives_only_there() -> None:
    assert slugs("f(x) = 2*x", "g(x) = f(x) + x", "a = g(2)") == []
    assert slugs("f(x) = 2*x", "a = x") == ["unknown-name"]


def test_a_name_that_lives_only_in_a_call_is_unknown_beside_it() -> None:
    assert slugs("w = 2", "W = integral(w*x, x, 0, 2)") == []
    assert slugs("w = 2", "W = sum(w*k, k, 0, 5)") == []
    assert slugs("w = 2", "W = sum(w*k, k, 0, 5) + k") == ["unknown-name"]
    assert slugs("w = 2", "W = integral(w*x, x, 0, x)") == ["unknown-name"]


def test_units_and_words_are_no_names() -> None:
    assert slugs('c = "a" of "a", "b"', "r = cases", '    3 kN  when c = "a"', "    0  otherwise") == []


# --- what hangs on what -------------------------------------------------------------------------------------


def test_what_hangs_on_a_mistake_names_its_line_down_the_whole_chain() -> None:
    assert blocked("P = 20 Kn", "A = 2 mm^2", "s = P/A", "t = 2*s", "limit x: t <= 3 MPa") == {
        "P": 1, "A": 0, "s": 1, "t": 1, "limit x": 1,
    }  # fmt: skip


def test_an_unreadable_line_blocks_by_the_line_of_its_mistake() -> None:
    lines = ("r = 2", "f = cases", "    1  when r <= 2", "    2", "g = 2*f")
    assert blocked(*lines) == {"r": 0, "f": 4, "g": 4}


def test_a_mistake_of_its_own_goes_before_that_of_what_it_uses() -> None:
    assert blocked("P = 20 Kn", "s = P + 3 Mpa") == {"P": 1, "s": 2}


def test_a_result_of_unknown_kind_fits_everything() -> None:
    assert slugs("P = 20 Kn", "s = P + 3 MPa", "t = P + 2 kN", "limit a: s <= t") == ["unknown-unit"]


def test_a_refused_definition_makes_no_second_finding_where_it_is_used() -> None:
    assert slugs("count = 4", "a = 8/count") == ["reserved-word"]
    assert slugs("a = 2", "a [kN] = 3 kN", "b = 2*a") == ["defined-twice"]
    assert slugs("use section IPE 300 as b", "W = b.W_el_y", "V = b.A") == ["not-available"]


def test_below_a_second_definition_a_name_means_neither() -> None:
    assert blocked("a = 2", "b = 2*a", "a = 3", "c = 2*a") == {"a": 0, "b": 0, "a#2": 3, "c": 3}


def test_uses_are_listed_once_in_the_order_typed() -> None:
    resolved = resolve("a = 1", "b = 2", "f(x) = a*x", "c = b + f(b) + b")
    assert entry(resolved, "c").uses == ("b", "f")
    assert entry(resolved, "f").uses == ("a",)


# --- what counts as used or cited ---------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("lines", "prose"),
    [
        (("P = 2", "a = p"), ""),
        (("P = 2", "a = 3*(P"), ""),
        (("P = 2", "a = 3 kN*P"), ""),
        (("a = P", "P = 2"), ""),
        (("P = 2",), "The load is {P}."),
        (("P = 2",), "The load is {Pp}."),
    ],
)
def test_what_was_meant_counts_as_used(lines: tuple[str, ...], prose: str) -> None:
    assert "P" in resolve(*lines, prose=prose).meant


def test_a_note_on_a_line_that_cannot_be_read_uses_nothing() -> None:
    assert "P" not in resolve("P = 2", "a = 3 + -- as for P").meant


def test_citations() -> None:
    front = "sources: {hoist: Data sheet}\nassumptions: {A1: light}"
    assert slugs("a = 2 -- load [hoist] [A1]", front=front) == []
    (found,) = findings("a = 2 -- load [hosit]", front=front)
    assert (found.slug, found.help) == ("unknown-citation", "did you mean `hoist`?")
    assert "hoist" in resolve("a = 2 -- load [hosit]", front=front).meant
    assert slugs("a = 2 -- load [hoist]", front="sources: Data sheet") == ["front-matter-value"]


# --- ids ----------------------------------------------------------------------------------------------------


def test_ids_are_names_and_never_counters() -> None:
    lines = (
        "a = 2", "f(x) = x", "strength bending: a<=3", "limit: a <=  3", "valid: 1<=a for f",
        "check: a=2 within 1", "check: a=2 within 2",
    )  # fmt: skip
    assert [e.id for e in resolve(*lines).entries] == [
        "a", "f", "strength bending", "limit: a <= 3", "valid: 1 <= a", "check: a = 2", "check: a = 2#2",
    ]  # fmt: skip


def test_two_criteria_of_one_id_are_a_mistake() -> None:
    assert slugs("a = 2", "limit: a <= 3", "limit: a<=3") == ["duplicate-criterion"]
    assert slugs("a = 2", "limit x: a <= 3", "strength x: a <= 3") == []


def test_kinds() -> None:
    lines = ("a = 2*3 mm", "b = pi/2", "c = sqrt(2)", "d = 2*a", "f(x) = x", "e = f(2)", 'w = "a" of "a"')
    assert [e.kind for e in resolve(*lines).entries] == [
        "input", "input", "input", "result", "function", "result", "choice",
    ]  # fmt: skip


# --- prose --------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("prose", "slug", "place"),
    [
        ("At {sigm}.", "unknown-name", "sigm"),
        ("At {sigma [kN]}.", "unit-mismatch", "kN"),
        ("At {sigma [Mpa]}.", "unknown-unit", "Mpa"),
        ("At {f}.", "wrong-arguments", "f"),
        ("# At {sigm}", "unknown-name", "sigm"),
    ],
)
def test_values_in_prose_that_cannot_be_printed(prose: str, slug: str, place: str) -> None:
    (found,) = findings("P = 2 kN", "sigma = P/(3 mm^2)", "f(x) = x", prose=prose)
    assert found.slug == slug and found.help
    assert found.span is not None and found.source.cut(found.span) == place


def test_values_in_prose_may_stand_above_the_definition_and_ask_for_a_unit() -> None:
    resolved = resolve("P = 2 kN", front="conclusion: It carries {P [lbf]} and {P}.")
    assert sorted(unit.text for unit in resolved.values.values()) == ["kN", "lbf"]
    assert resolved.findings == ()


# --- units of the sheet -------------------------------------------------------------------------------------


def test_units_by_kind() -> None:
    resolved = resolve("a = 2 kN", "b = 2*a/(3 mm^2)", front="units: {system: SI, stress: N/mm^2}")
    assert entry(resolved, "b").unit.text == "N/mm^2"
    assert slugs("a = 2", front="units: {stress: kN}") == ["front-matter-value"]
    assert slugs("a = 2", front="units: {stress: foo}") == ["front-matter-value"]


# --- limits -------------------------------------------------------------------------------------------------


def test_functions_of_functions_that_ask_for_too_much_are_refused() -> None:
    lines = ["f_0(x) = x + x"] + [f"f_{i + 1}(x) = f_{i}(x) + f_{i}(x + 1)" for i in range(60)]
    assert slugs(*lines, "a = f_60(1)") == ["over-limit"]


def test_the_number_of_statements_is_limited(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(import_module("loadpath.resolve.resolve"), "MOST_STATEMENTS", 20)
    resolved = resolve(*(f"a_{i} = {i}" for i in range(21)))
    assert [f.slug for f in resolved.findings] == ["over-limit"]
    assert resolved.entries == (), "a sheet over the limit is not worked at all"


def chain(count: int) -> list[str]:
    """Steps of which each hangs on the one above, with units and a criterion now and then."""
    lines = ["P_0 = 20 kN -- load [s]", "A = 400 mm^2 -- area [s]", "f(x [kN]) [MPa] = x/A"]
    for i in range(count):
        lines.append(f"P_{i + 1} = 0.999*P_{i} + 1 N")
        if i % 10 == 0:
            lines.append(f"limit step_{i}: f(P_{i + 1}) <= 355 MPa -- [s]")
    return lines


def seconds(lines: list[str]) -> float:
    sheet = loadpath.read_text(
        "---\ntitle: t\nsources: {s: a}\n---\n\n" + "\n".join("    " + x for x in lines)
    )
    assert sheet.findings == ()
    gc.collect()
    gc.disable()  # the collector's own work would hide the engine's
    try:
        start = time.process_time()
        trace = loadpath.evaluate(sheet)
        taken = time.process_time() - start
    finally:
        gc.enable()
    assert trace.findings == ()
    return taken


def test_the_work_is_linear_in_the_steps() -> None:
    """Eight times the steps take less than sixteen times as long: nothing is quadratic."""
    seconds(chain(200))
    few, many = min(seconds(chain(500)) for _ in range(2)), seconds(chain(4000))
    assert many < 16 * few


@pytest.mark.parametrize(
    "line", ["a_{i} = b_{i}", "a_{i} = 2 -- x [c_{i}]", "a = {i}", "limit x: 1 <= {i}", "m = 3 kN/m"]
)
def test_a_sheet_of_mistakes_alone_ends_soon(line: str) -> None:
    resolved_in = time.process_time()
    resolve(*(line.format(i=i) for i in range(2000)))
    assert time.process_time() - resolved_in < 6
