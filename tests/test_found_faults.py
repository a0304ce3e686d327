"""What a newcomer and a hostile user of sheets with algebra found: one small test each, so that it stays
mended.

Letters and numbers are those of the list they were told in. Values are held against something else than the
engine: arithmetic by hand, scipy, or a definition that is named.
"""

from __future__ import annotations

import json
import math
import re
import warnings
from typing import Any

import pytest
from scipy.integrate import quad
from scipy.optimize import brentq

import loadpath
from loadpath.pipeline import render
from loadpath.trace import Trace

FIRST = 5
"""The line at which the body of a sheet begins."""


def sheet(*parts: str) -> str:
    """A sheet of tables and lines of formulas, each part apart from the others."""
    return "---\ntitle: T\n---\n\n" + "\n\n".join(parts) + "\n"


def lines(*formulas: str) -> str:
    return "\n".join(f"    {formula}" for formula in formulas)


def table(name: str, head: str, *rows: str) -> str:
    dashes = "|" + "---|" * head.count("|")
    cells = [f"| {row} |" for row in rows]
    return "\n".join([f"Table {name}: rows of the test", "", f"| {head} |", f"{dashes}---|", *cells])


def audited(text: str) -> Trace:
    trace = loadpath.evaluate(loadpath.read_text(text))
    return trace.with_findings(loadpath.audit(trace))


def worked(*parts: str) -> Trace:
    """The trace of a sheet without errors."""
    trace = audited(sheet(*parts))
    assert [f.message for f in trace.findings if f.severity == "error"] == []
    return trace


def documents(trace: Trace) -> dict[str, str]:
    return {name: data.decode() for name, data in render(trace, "t").items()}


def errors(*parts: str) -> list[tuple[str, int, str]]:
    """Slug, line and message of each error of a sheet; each of its documents can be written."""
    trace = audited(sheet(*parts))
    assert documents(trace)
    return [(f.slug, f.line, f.message) for f in trace.findings if f.severity == "error"]


def value(trace: Trace, id: str) -> float:
    found = trace[id].si
    assert isinstance(found, float)
    return found


WHEELS = table("w", "wheel | P [kN] | d [m]", "front | 10 | 0", "rear | 20 | 3")
STRENGTHS = table("s", "t [mm] | f [MPa]", "0 | 355", "16 | 345", "40 | 335")
PLATES = table("p", "plate | t [mm]", "thin | 10", "thick | 50")
TEMPERATURES = table("T", "place | t [degC]", "deck | -20", "keel | 4")


# --- A: what came to nothing, or to an exception ------------------------------------------------------------


def test_a1_a_sum_over_a_column_is_looked_over() -> None:
    """Wheel loads as rows of a table. source: M = 10*x + 20*<x - 3>, by hand."""
    trace = worked(
        WHEELS,
        lines(
            "M(x [m]) [kN*m] = sum(w.P*<x - w.d>^1)",
            "M_max = largest(M(x), x, 0 m, 5 m)",
            "x_max = where_largest(M(x), x, 0 m, 5 m)",
            "A [kN*m^2] = integral(M(x), x, 0 m, 5 m)",
            "B(x [m]) [kN*m^2] = integral(M(x), x)",
            "B_5 = B(5 m)",
            "V(x [m]) [kN] = derivative(M(x), x)",
            "V_4 = V(4 m)",
            "plot M(x) for x from 0 m to 5 m",
            "solve for x_0 [m] between 0 m and 10 m",
            "    M(x_0) = 100 kN*m",
        ),
    )
    assert value(trace, "M_max") == pytest.approx(10e3 * 5 + 20e3 * 2)
    assert value(trace, "x_max") == pytest.approx(5)
    area, _ = quad(lambda x: 10e3 * x + 20e3 * max(x - 3, 0), 0, 5, points=[3])
    assert value(trace, "A") == pytest.approx(area) == pytest.approx(value(trace, "B_5"))
    assert value(trace, "V_4") == pytest.approx(30e3)
    assert value(trace, "x_0") == pytest.approx((100 + 60) / 30)
    curves = trace["plot M(x)"].curves
    assert curves is not None and curves.curves[0].largest is not None
    assert curves.curves[0].largest.y == pytest.approx(value(trace, "M_max"))


@pytest.mark.parametrize("function", ["interp", "lookup"])
def test_a2_a_look_up_outside_names_its_row(function: str) -> None:
    plates = PLATES.replace("50", "-50") if function == "lookup" else PLATES
    ((slug, _, message),) = errors(STRENGTHS, plates, lines(f"f_i = {function}(p.t, s.t, s.f)"))
    assert slug == "outside-table"
    assert 'in row "thick"' in message and "50 mm" in message


def test_a3_a_table_of_values_outside_a_table() -> None:
    text = "tabulate interp(u, s.t, s.f) for u from 0 mm to 80 mm, 4 steps"
    ((slug, _, message),) = errors(STRENGTHS, lines(text))
    assert slug == "outside-table"
    assert "60 mm" in message and "0 mm to 40 mm" in message
    assert [slug for slug, _, _ in errors(STRENGTHS, lines(text.replace("80", "40")))] == []


def test_a4_a_sum_too_large_to_hold() -> None:
    """10^400 is beyond what a double holds, 1.8e308 (IEEE 754)."""
    assert [(s, n) for s, n, _ in errors(lines("y = sum(10^k, k, 1, 400)"))] == [("not-finite", FIRST)]


@pytest.mark.parametrize("function", ["tan", "sin", "sqrt", "max", "sum", "interp", "integral", "largest"])
def test_a5_a_call_without_arguments(function: str) -> None:
    assert [(s, n) for s, n, _ in errors(lines(f"y = {function}()"))] == [("wrong-arguments", FIRST)]


def test_a6_words_down_a_two_way_table() -> None:
    two_way = table("C", "height [m] | 1 m | 2 m", "low | 1 | 2", "high | 2 | 3")
    ((slug, line, message),) = errors(two_way, lines("y = interp(1 m, 1 m, C)"))
    assert (slug, line) == ("table-cell", FIRST + 4)
    assert "`low` is no number" in message


def test_a7_a_cell_below_zero_degrees() -> None:
    """source: 0 °C is 273.15 K (SI Brochure, 9th edition, 2.3.1, from memory)."""
    trace = worked(TEMPERATURES, lines('t_1 = T.t at "deck"', 'd = (T.t at "keel") - (T.t at "deck")'))
    assert trace["T.t"].si == pytest.approx((253.15, 277.15))
    assert value(trace, "t_1") == pytest.approx(253.15)
    assert value(trace, "d") == pytest.approx(24)
    assert "−20" in documents(trace)["t.html"]


# --- B: what said more than was shown -----------------------------------------------------------------------


@pytest.mark.parametrize("formula", ["sum(T.t)", "sum(t_0, k, 1, 3)", "sum(T.t + 0 K)"])
def test_b8_absolute_temperatures_are_not_added_up(formula: str) -> None:
    found = errors(TEMPERATURES, lines("t_0 = 20 degC -- a day in May", f"y = {formula}"))
    assert [slug for slug, _, _ in found] == ["absolute-temperature"]


def test_b8_differences_of_temperatures_are() -> None:
    trace = worked(TEMPERATURES, lines("t_0 = 20 degC -- a day in May", "y = sum(T.t - t_0)"))
    assert value(trace, "y") == pytest.approx(-40 - 16)


def test_b9_rows_of_a_criterion_that_is_not_shown_show_nothing() -> None:
    trace = worked(
        PLATES, lines("r = p.t/(12 mm)", "valid: r <= 3 for r", "strength rows: r <= 5 -- above each r")
    )
    assert trace["strength rows"].verdict is not None
    assert trace["strength rows"].verdict.satisfied is None
    said = documents(trace)
    (criterion,) = json.loads(said["t.trace.json"])["criteria"]
    assert [row["satisfied"] for row in criterion["rows"]] == [None, None]
    assert [row["utilisation"] for row in criterion["rows"]] == [None, None]
    boxes = {
        "t.html": said["t.html"].partition('id="s0.4"')[2].partition('id="inputs"')[0],
        "t.md": said["t.md"].partition('id="s0.4"')[2].partition("## Design inputs")[0],
    }
    for name, box in boxes.items():
        assert box.count("not shown") >= 2, name
        assert "satisfied" not in box, name


def test_b11_a_simplified_form_says_where_it_is_the_same() -> None:
    """At x = a the typed form is 0/0, the simplified one 2*a."""
    trace = worked(
        lines(
            "a = 2 mm -- a", "f(x [mm]) [mm] = simplified((x^2 - a^2)/(x - a))", "y = f(3 mm)", "z = f(2 mm)"
        )
    )
    assert value(trace, "y") == pytest.approx((9 - 4) / (3 - 2) * 1e-3)
    for name in ("t.html", "t.md"):
        said = documents(trace)[name]
        assert "the same as" in said and "wherever that has a value" in said, name


@pytest.mark.parametrize("curve", ["tan(x)", "1/(x - 1.5)", "1/(x - 1.00013)^2"])
def test_b12_a_plot_with_poles_claims_no_extremes(curve: str) -> None:
    said = documents(worked(lines(f"plot {curve} for x from 0 to 3")))
    alts = [*re.findall(r'<img alt="([^"]*)"', said["t.html"]), *re.findall(r"!\[([^\]]*)\]", said["t.md"])]
    assert len(alts) == 2
    for alt in [*alts, said["t.figure-1.svg"]]:
        assert "Plot of" in alt
        assert "largest" not in alt and "smallest" not in alt, alt
    assert "its extremes were not sought" in said["t.md"]


# --- C: what algebra and numbers came to --------------------------------------------------------------------


@pytest.mark.parametrize(("n", "m"), [(2, 2), (5, 5), (1, 3)])
def test_c13_products_of_sines(n: int, m: int) -> None:
    """The closed form for n and m in general is 0/0 where they are the same. source: scipy's quad."""
    trace = worked(
        lines(
            f"n = {n} -- n", f"m = {m} -- m", "L = 3 m -- L",
            "y [m] = integral(sin(n*pi*x/L)*sin(m*pi*x/L), x, 0 m, L)",
        )
    )  # fmt: skip
    expected, _ = quad(lambda x: math.sin(n * math.pi * x / 3) * math.sin(m * math.pi * x / 3), 0, 3)
    assert value(trace, "y") == pytest.approx(expected, abs=1e-12)


@pytest.mark.parametrize(
    ("formulas", "where"),
    [
        (["f(x [1]) [1] = derivative(ln(x), x)", "y = f(0)"], {0, 1}),
        (["f(a [1]) [1] = integral(exp(a*x), x, 0, 2)", "b = 3", "y = f(0)"], {0, 2}),
        (["a = 0 -- a", "f(x [1]) [1] = simplified(x*x/a)", "y = f(2)"], {1, 2}),
        (["a = 0 -- a", "y = integral(1/(a + u), u, 0, 2)"], {1}),
        (["f(x [1]) [1] = integral(sqrt(x - 2)/(x - 2), x)", "y = f(1)"], {0, 1}),
    ],
)
def test_c14_errors_in_what_was_derived_have_a_place(formulas: list[str], where: set[int]) -> None:
    found = errors(lines(*formulas))
    assert all(line - FIRST in where for _, line, _ in found), found
    if not found:  # a closed form that has a value there must have the right one: here only exp(0*x)
        assert value(worked(lines(*formulas)), "y") == pytest.approx(2.0)


def test_c16_limits_where_nothing_is_the_matter() -> None:
    trace = worked(
        lines(
            "a = 3 mm -- a", "y = limit_of(u^2 + 1, u, 2)", "z = limit_of(u^2/a, u, a)",
            "b = limit_of(<u - 1>^0, u, 2)", "c = limit_of(cos(u)/(1 + u), u, 0)",
        )
    )  # fmt: skip
    assert value(trace, "y") == pytest.approx(5)
    assert value(trace, "z") == pytest.approx(3e-3)
    assert value(trace, "b") == 1
    assert value(trace, "c") == pytest.approx(1)
    assert [s for s, _, _ in errors(lines("y = limit_of(<u - 1>^0, u, 1)"))] == ["no-closed-form"]


def test_c17_two_equations_that_are_not_linear() -> None:
    """source: y = ln(50)/x put into the second, whose root scipy's brentq finds."""
    trace = worked(
        lines(
            "solve for x [1] between 0 and 10, y [1] between 0 and 10",
            "    exp(x*y) = 50",
            "    x^2 + sin(y) = 3",
        )
    )
    x = value(trace, "x")
    expected = brentq(lambda x: x**2 + math.sin(math.log(50) / x) - 3, x - 0.1, x + 0.1)
    assert x == pytest.approx(expected, rel=1e-9)
    assert value(trace, "y") == pytest.approx(math.log(50) / expected, rel=1e-9)
    assert "that there is no other solution is not shown" in documents(trace)["t.md"]


def test_c18_a_search_says_what_was_found_and_no_more() -> None:
    ((slug, _, message),) = errors(lines("solve for x [1] between 0 and 1", "    cos(x) + 2 = x"))
    assert slug == "no-solution"
    assert "was found between 0 and 1" in message
    trace = worked(lines("f(t [1]) [1] = integral(exp(-u^2)*sin(u^3), u, 0, t)", "y = f(1)"))
    expected, _ = quad(lambda u: math.exp(-(u**2)) * math.sin(u**3), 0, 1)
    assert value(trace, "y") == pytest.approx(expected, rel=1e-9)
    assert "has no closed form that was found" in documents(trace)["t.md"]


def test_c20_a_table_of_five_thousand_rows() -> None:
    """source: the sum of 1 to n is n*(n + 1)/2."""
    trace = loadpath.evaluate(
        loadpath.read_text(
            sheet(
                table("b", "bar | d [mm]", *(f"r{i} | {i}" for i in range(1, 5001))),
                lines("s = sum(b.d)", "n = count(b.d)", "A = b.d^2", 'A_7 = A at "r7"'),
            )
        )
    )
    assert [f.message for f in trace.findings if f.severity == "error"] == []
    assert value(trace, "s") == pytest.approx(5000 * 5001 / 2 * 1e-3)
    assert value(trace, "n") == 5000
    assert value(trace, "A_7") == pytest.approx(49e-6)
    many = table("b", "bar | d [mm]", *(f"r{i} | {i}" for i in range(5001)))
    assert [s for s, _, _ in errors(many, lines("s = sum(b.d)"))] == ["over-limit"]


# --- D: what a reader missed on paper -----------------------------------------------------------------------


@pytest.mark.parametrize(("function", "expected"), [("interp", [351.875, 341.25]), ("lookup", [355, 345])])
def test_d22_what_is_looked_up_stands_in_its_row(function: str, expected: list[float]) -> None:
    """source: by hand, 5 mm and 25 mm between the rows at 0, 16 and 40 mm."""
    trace = worked(STRENGTHS, PLATES, lines(f"f_i = {function}(p.t/2, s.t, s.f)"))
    found = trace["f_i"].si
    assert isinstance(found, tuple)
    assert [each / 1e6 for each in found] == pytest.approx(expected)
    said = documents(trace)["t.md"].partition('id="s0.3"')[2]
    rows = {
        row: next(line for line in said.splitlines() if f"| {row} |" in line) for row in ("thin", "thick")
    }
    assert r"10\thinspace \mathrm{mm}" in rows["thin"]
    assert r"50\thinspace \mathrm{mm}" in rows["thick"]


def test_d24_a_sum_of_nothing_but_rounding_is_nothing() -> None:
    """0.1 + 0.2 - 0.3 is 5.6e-17 in doubles (IEEE 754)."""
    cells = table("q", "row | a", "one | 0.1", "two | 0.2", "three | -0.3")
    trace = worked(cells, lines("y = sum(q.a)", "z = sum(q.a*(1 kN))", "u = sum(q.a^2)"))
    assert value(trace, "y") == 0
    assert value(trace, "z") == 0
    assert value(trace, "u") == pytest.approx(0.14)
    small = table("q", "row | a", "one | 1", "two | -0.999999999999")
    assert value(worked(small, lines("y = sum(q.a)")), "y") == pytest.approx(1e-12, rel=1e-3)


# --- E: messages --------------------------------------------------------------------------------------------


def helped(*parts: str) -> list[tuple[str, int, str]]:
    """Slug, line and mend of each error."""
    found: Any = audited(sheet(*parts)).findings
    return [(f.slug, f.line, f.help) for f in found if f.severity == "error"]


@pytest.mark.parametrize(
    ("typed", "mend"),
    [
        ("12 kN/m*(L - a)", "`12 kN/m * ...`"),
        ("2.5 kN*2", "`2.5 kN * ...`"),
        ("L*3 kN*sin(a/L)", "`3 kN * ...`"),
        ("12 kN/(L + a)", "`12 kN / ...`"),
    ],
)
def test_e27_a_unit_that_runs_into_a_product(typed: str, mend: str) -> None:
    ((slug, line, help),) = helped(lines("L = 3 m -- L", "a = 1 m -- a", f"w = {typed}"))
    assert (slug, line) == ("bad-unit", FIRST + 2)
    assert "put spaces round the" in help and mend in help


@pytest.mark.parametrize(
    "head",
    ["solve for C [mm", "solve for C between 0 mm", "solve fro C", "solve for C, C", "solve for C [kN]"],
)
def test_e30_a_faulty_solve_is_one_finding(head: str) -> None:
    found = errors(
        lines(
            "unknown C [mm]",
            "f(x [mm]) [mm] = C + x",
            head,
            "    f(3 mm) = 4 mm",
            "y = f(3 mm)",
            "z = 2*C",
            "limit: y <= 5 mm",
        )
    )
    assert [line for _, line, _ in found] == [FIRST + 2], found


# --- F: what campaigns/fuzz.py found ------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("cell", "slug", "line"),
    [
        ("round_up(a, 0 %)", "outside-domain", 9),
        ("1/b", "division-by-zero", 9),
        ("nowhere", "unknown-name", 9),
        ("c", "", 7),
    ],
)
def test_f_a_cell_of_a_two_way_table_that_has_no_value(cell: str, slug: str, line: int) -> None:
    """It is one finding, and what looks up in the table is not computed."""
    two_way = table("C", "h | 1 | 2", f"1 | {cell} | 2", "2 | 2 | 3")
    trace = audited(
        sheet(lines("a = 3 deg -- a", "b = 0 -- b", "c = 1/b"), two_way, lines("y = interp(1, 1, C)"))
    )
    found = [(f.slug, f.line) for f in trace.findings if f.severity == "error"]
    own = [(s, n) for s, n in found if n > FIRST + 2]
    assert [s for s, _ in own] == ([slug] if slug else [])
    assert ("division-by-zero", 7) in found
    assert trace["y"].si is None
    assert trace["y"].why == f"not computed because of line {line if not slug else own[0][1]}"
    assert documents(trace)


@pytest.mark.parametrize(
    ("head", "equation", "slug"),
    [
        ("x [kN]", "x = P/b", "division-by-zero"),
        ("x [1]", "2*(x/(0))^2 = 3", "division-by-zero"),
        ("x [1]", "2*(x/b)^0*x = 3", "division-by-zero"),
        ("x [1] between 0 and 2/b", "sin(x) = 0.3*x", "division-by-zero"),
        ("x [1]", "x*exp(exp(exp(9))) = 3", "not-finite"),
        ("x [1]", "x + sqrt(b - 1) = 3", "root-of-negative"),
        ("x [1] between 1 and 2", "1/sqrt(x) = log10(P/((-2)*b*(1 kN))/sqrt(x))", "division-by-zero"),
        ("x [1] between 1 and 2", "sqrt(x - 10) = sin(x)", "outside-domain"),
    ],
)
def test_f_equations_with_a_part_that_has_no_value(head: str, equation: str, slug: str) -> None:
    found = errors(lines("P = 3 kN -- P", "b = 0 -- b", f"solve for {head}", f"    {equation}", "y = 2*x"))
    assert [(s, n - FIRST in (2, 3)) for s, n, _ in found] == [(slug, True)], found


def test_f_unknowns_of_several_equations_that_divide_by_zero_between_bounds() -> None:
    """No warning of numpy's either. source: x*y = 2 and x = 2*y, by hand."""
    with warnings.catch_warnings():
        warnings.simplefilter("error")
        trace = worked(
            lines("solve for x [1] between 0 and 4, y [1] between 0 and 4", "    y = 2/x", "    x/y = 2")
        )
    assert value(trace, "x") == pytest.approx(2)
    assert value(trace, "y") == pytest.approx(1)


@pytest.mark.parametrize(
    ("formula", "slug", "said"),
    [
        ("sum(w.P/b)", "division-by-zero", 'in row "front"'),
        ("max(w.P/(w.d + b*(1 m)))", "division-by-zero", 'in row "front"'),
        ("sum(sqrt(w.d - 2 m))", "root-of-negative", 'in row "front"'),
        ("interp(1 m, w.d, w.P/b)", "division-by-zero", 'in row "front"'),
        ("sum(1/(k - 200), k, 0, 300)", "division-by-zero", "`k - 200` is 0"),
        ("sum(10^k, k, 1, 400)", "not-finite", "`k` is 309"),
    ],
)
def test_f_the_row_or_term_that_has_no_value_is_named(formula: str, slug: str, said: str) -> None:
    """10^308 can be held, 10^309 cannot (IEEE 754)."""
    ((found, _, message),) = errors(lines("b = 0 -- b"), WHEELS, lines(f"y = {formula}"))
    assert found == slug
    assert said in message


@pytest.mark.parametrize(
    "formulas",
    [
        ["y = largest(interp(u, s.t, s.f), u, 0 mm, 80 mm)"],
        ["g(u [m]) [MPa] = interp(u, s.t, s.f)", "y = g(80 mm)"],
        ["plot interp(u, s.t, s.f) for u from 60 mm to 80 mm"],
    ],
)
def test_f_messages_show_a_name_of_their_own_in_a_unit(formulas: list[str]) -> None:
    ((slug, _, message),) = errors(STRENGTHS, lines(*formulas))
    assert slug == "outside-table"
    assert "0 mm to 40 mm" in message and "SI units" not in message


def test_f_a_function_that_fails_alike_for_two_steps_is_one_finding() -> None:
    found = errors(lines("f(x [1]) [1] = 3*x/0", "a = f(2)", "b = f(2)", "c = a + b"))
    assert [(s, n) for s, n, _ in found] == [("division-by-zero", FIRST)]
    alike = errors(lines("f(x [1]) [1] = 3/x", "a = f(0)", "b = f(0) + 1", "c = f(1 - 1)"))
    assert [(s, n) for s, n, _ in alike] == [("division-by-zero", FIRST)]


def test_f_what_hangs_on_equations_with_a_mistake_is_not_worked() -> None:
    """Two unknowns at once, of which the second was worked although the first was not."""
    found = errors(
        lines(
            "unknown C [kN]",
            "f(x [m]) [kN] = C + x*(1 kN/m)",
            "solve for C",
            "    f(0 m) = b_1",
            "solve for s [m], t [m]",
            "    f(s) = 12 kN",
            "    t = s",
            "y = f(2 m) + t*(1 kN/m)",
        )
    )
    assert [(s, n - FIRST) for s, n, _ in found] == [("unknown-name", 3)]


def test_f_bounds_that_are_equal_in_one_term_of_a_sum() -> None:
    found = errors(lines("y = sum(smallest(u, u, 0, k), k, 0, 1)"))
    assert [(s, n) for s, n, _ in found] == [("bad-interval", FIRST)]


def test_f_more_curves_than_rows_in_a_table_of_values() -> None:
    """source: x^2 and x^3 at 0 and 2, by hand."""
    said = documents(worked(lines("tabulate x^2, x^3, x^4 for x from 0 to 2, 1 steps")))["t.html"]
    listed = said.partition('<table class="data')[2].partition("</table>")[0]
    assert re.findall(r">(\d[\d.]*)<", listed)[-3:] == ["4.000", "8.000", "16.00"]


def test_columns_bear_the_number_of_their_table_beside_one_that_cannot_be_read() -> None:
    table = "| n | a [mm] | b [mm] |\n|---|---|---|\n| p | 1,5 | 2 |"
    text = f"---\ntitle: T\n---\n\nTable t: x\n\n{table}\n\n    y = t.b*2\n"
    trace = loadpath.evaluate(loadpath.read_text(text))
    assert trace["table t"].number == "0.1"
    assert trace["t.b"].number == "0.1b"
