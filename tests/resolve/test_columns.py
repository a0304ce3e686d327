"""Columns and calls that look at whole expressions: rows, cells, types, and what is refused."""

from __future__ import annotations

import pytest

import loadpath
from loadpath.findings import Finding
from loadpath.resolve import Resolved, Rows
from loadpath.resolve import resolve as resolve_sheet
from loadpath.trace import Trace
from loadpath.trace.file import record
from loadpath.units import dimension as d

TABLES = """Table t: two rows

| r | a [m] | b [kN] | n |
|---|-------|--------|---|
| p | 1     | 4      | 1 |
| q | 2     | 5      | 2 |

Table u: the same labels

| r | a [m] |
|---|-------|
| p | 3     |
| q | 4     |

Table v: the labels the other way round

| r | a [m] |
|---|-------|
| q | 3     |
| p | 4     |

Table w: no labels

| k | a [m] |
|---|-------|
| 1 | 3     |
| 2 | 4     |

Table w_2: no labels either

| k | a [m] |
|---|-------|
| 1 | 3     |
| 2 | 4     |

Table z: two-way

| h [m] | 1 kN | 3 kN |
|-------|------|------|
| 1     | 10   | 20   |
| 3     | 30   | 60   |
"""


def sheet(*lines: str, prose: str = "", tables: str = TABLES) -> str:
    body = "\n".join("    " + line for line in lines)
    return f"---\ntitle: T\n---\n\n{tables}\n{body}\n\n{prose}\n"


def resolved(*lines: str, prose: str = "", tables: str = TABLES) -> Resolved:
    return resolve_sheet(loadpath.read_text(sheet(*lines, prose=prose, tables=tables)))


def rows(*lines: str) -> Rows | None:
    """Of the last line, which is about `y`."""
    found = resolved(*lines)
    assert [f.message for f in found.sheet.findings + found.findings if f.severity == "error"] == []
    return found.entries[-1].rows


def the_finding(*lines: str, prose: str = "", tables: str = TABLES) -> tuple[str, str]:
    found = resolved(*lines, prose=prose, tables=tables)
    (only,) = [f for f in found.sheet.findings + found.findings if f.severity == "error"]
    assert isinstance(only, Finding) and only.span is not None
    return only.slug, only.source.cut(only.span)


def worked(*lines: str, tables: str = TABLES) -> Trace:
    trace = loadpath.evaluate(loadpath.read_text(sheet(*lines, tables=tables)))
    assert [f.message for f in trace.findings if f.severity == "error"] == []
    return trace


# --- which rows an expression goes over ---------------------------------------------------------------------

T = Rows("t", ("p", "q"), 2)


@pytest.mark.parametrize(
    ("value", "count"),
    [
        ("t.a", 2), ("2*t.a + 1 m", 2), ("t.a*t.b", 2), ("t.a + u.a", 2), ("-t.a", 2), ("sqrt(t.a)", 2),
        ("max(t.a, 1 m)", 2), ("<t.a - 1 m>^1", 2), ("(t.a as mm)", 2), ("w.a + w.k*1 m", 2),
        ("f(t.a)", 2), ("g(t.a, 3 kN)", 2), ("integral(x, x, 0 m, t.a)", 2), ("sum(k, k, 0, t.n)", 2),
        ("largest(x, x, 0 m, t.a)", 2), ("interp(t.a, u.a, u.a)", 2), ("lookup(t.a, w.k*1 m, w.a)", 2),
        ("interp(t.a, 2 kN, z)", 2), ("interp(2 m, t.b, z)", 2), ("interp(2 m, t.a, t.b) + t.b", 2),
        ("sum(t.a)", 0), ("count(t.a)", 0), ("min(t.a)", 0), ("max(t.a + u.a)", 0),
        ("interp(2 m, t.a, t.b)", 0),
        ('t.a at "p"', 0), ('2*t.a at "p" + t.a at "q"', 0), ('f(t.a at "p")', 0),
        ("interp(2 m, 2 kN, z)", 0),
        ("sum(t.a)*sum(v.a)", 0), ('t.a at "p" + v.a at "q"', 0), ("integral(x*sum(t.a), x, 0, 1)", 0),
    ],
)  # fmt: skip
def test_what_is_a_column(value: str, count: int) -> None:
    found = rows("f(x [m]) = 2*x", "g(x [m], P [kN]) = P*x", f"y = {value}")
    assert (found.count if found else 0) == count


def test_labels_go_with_derived_columns() -> None:
    assert rows("y = 2*t.a + u.a") == T
    assert rows("c = t.a*t.b", "e = c/(1 m)", "y = e + t.b") == T
    assert rows("limit: t.a <= 3 m") == T
    assert rows("check: t.a = t.a within 1 mm") == T
    assert rows("c = cases", "    t.a when t.a > 1 m", "    0 m otherwise") == T
    assert rows("valid: t.a > 0 m for t.b") == T
    assert rows("check: 1 m = 1 m within t.a") == T


@pytest.mark.parametrize(
    ("value", "slug", "place"),
    [
        ("t.a + v.a", "mixed-tables", "+"),
        ("t.a*2 - w.a", "mixed-tables", "-"),
        ("w.a + w_2.a", "mixed-tables", "+"),
        ("max(t.a, v.a)", "mixed-tables", "v.a"),
        ("g(t.a, v.a*1 kN/m)", "mixed-tables", "v.a*1 kN/m"),
        ("interp(t.a, t.a, v.a)", "mixed-tables", "v.a"),
        ("t.a + u.a + v.a", "mixed-tables", "+"),
        ("f(t.a)*v.a", "mixed-tables", "*"),
        ('t.a at "s"', "unknown-row", '"s"'),
        ('t.a at "P"', "unknown-row", '"P"'),
        ("t.a at which", "unknown-row", "which"),
        ("t.a at f_1", "unknown-row", "f_1"),
        ('w.a at "1"', "unknown-row", '"1"'),
        ('f_1 at "p"', "needs-column", "f_1"),
        ('t at "p"', "column-not-number", "t"),
        ("2*t", "column-not-number", "t"),
        ("z + 1", "column-not-number", "z"),
        ("sum(t)", "needs-column", "t"),
        ("count(z)", "needs-column", "z"),
        ("sum(f_1)", "needs-column", "f_1"),
        ('max(t.a at "p")', "needs-column", 't.a at "p"'),
        ("interp(2 m, f_1, t.a)", "needs-column", "f_1"),
        ("lookup(2 m, 1 kN, z)", "needs-column", "z"),
        ("interp(2 kN, t.a, t.b)", "unit-mismatch", "2 kN"),
        ("interp(2 kN, 2 kN, z)", "unit-mismatch", "2 kN"),
        ("t.a + t.b", "unit-mismatch", "+"),
        ("t.c", "unknown-name", "t.c"),
        ("sum(t.a, t.b)", "wrong-arguments", "sum"),
    ],
)
def test_what_does_not_go_together(value: str, slug: str, place: str) -> None:
    given = (
        "f(x [m]) = 2*x", "g(x [m], P [kN]) = P*x", 'which = "p" of "p", "s"', "f_1 = 3 m", f"y = {value}",
    )  # fmt: skip
    assert the_finding(*given) == (slug, place)


@pytest.mark.parametrize(
    ("lines", "place"),
    [
        (("h(x [1]) = x*t.a", "y = h(2)"), "t.a"),
        (("h(x [1]) = cases", "    x*1 m when x < 2", "    t.a otherwise", "y = h(2)"), "t.a"),
        (("plot x*t.a for x from 0 m to 1 m",), "t.a"),
        (("plot x for x from 0 m to t.a",), "t.a"),
        (("tabulate x for x from t.a to 9 m, 2 steps",), "t.a"),
        (("solve for x [m]", "    2*x = t.a"), "t.a"),
        (("solve for x [m] between 0 m and t.a", "    x^2 = 1 m^2"), "t.a"),
    ],
)
def test_columns_where_one_value_is_needed(lines: tuple[str, ...], place: str) -> None:
    assert the_finding(*lines) == ("column-not-number", place)


@pytest.mark.parametrize("name", ["t.a", "y", "t"])
def test_prose_prints_one_value(name: str) -> None:
    slug, place = the_finding("y = 2*t.a", prose=f"It is {{{name}}} long.")
    assert slug == "column-not-number" and name in place


def test_functions_of_the_sheet_may_bring_columns_back() -> None:
    assert worked("h(x [1]) = x*sum(t.a)", "y = h(2)")["y"].si == 6
    assert worked('h(x [1]) = x*t.a at "q"', "y = h(2)")["y"].si == 4


# --- cells --------------------------------------------------------------------------------------------------


def test_a_cell_by_its_word_and_by_a_choice() -> None:
    trace = worked(
        'which = "q" of "p", "q"', "c = t.a*t.b", "y = c at which", 'x = c at "p"', "w_1 = u.a at which"
    )
    assert (trace["y"].si, trace["x"].si, trace["w_1"].si) == (10e3, 4e3, 4)
    uses = {step.id: list(step.uses) for step in record(trace, "0").steps}
    assert uses["y"] == ["c", "which"]
    assert uses["x"] == ["c"]
    assert uses["c"] == ["t.a", "t.b"]


def test_trails_of_columns() -> None:
    trace = worked("y = t.a + u.a", "s = sum(y)", "limit: y <= 9 m", "i = interp(2 m, 2 kN, z)")
    steps = {step.id: step for step in record(trace, "0").steps}
    assert list(steps["y"].uses) == ["t.a", "u.a"]
    assert list(steps["t.a"].used_by) == ["y"]
    assert sorted(steps["y"].used_by) == ["limit: y <= 9 m", "s"]
    assert list(steps["i"].uses) == ["table z"]
    assert list(steps["table z"].used_by) == ["i"]
    assert trace["i"].si == pytest.approx(30)  # in the middle of 10, 20, 30 and 60


# --- types of calls that look at whole expressions ----------------------------------------------------------


@pytest.mark.parametrize(
    ("value", "dimension"),
    [
        ("integral(x^2, x, 0 m, 2 m)", d.LENGTH.power(3)),
        ("integral(3 kN, x, 0, 2 m)", d.FORCE.times(d.LENGTH)),
        ("integral(x, x, -2 m, 0)", d.LENGTH.power(2)),
        ("integral(x^2, x, 0, 0)", d.PLAIN),
        ("largest(x*2 kN, x, 0, 3 m)", d.FORCE.times(d.LENGTH)),
        ("where_smallest(x*2 kN, x, 0, 3 m)", d.LENGTH),
        ("sum(k*1 m, k, 0, 3)", d.LENGTH),
        ("sum(t.b)", d.FORCE),
        ("count(t.b)", d.PLAIN),
        ("limit_of(sin(x/(1 m))/x, x, 0 m)", d.LENGTH.power(-1)),
        ("lookup(2 m, t.a, t.b)", d.FORCE),
        ("interp(2 m, 2 kN, z)", d.PLAIN),
        ("q(2 m)", d.LENGTH.power(2)),
        ("q(2 kN)", d.FORCE.power(2)),
        ("p(2 m)", d.LENGTH.power(4)),
        ("simplified(t.a at \"p\"*t.b at \"p\")", d.FORCE.times(d.LENGTH)),
    ],
)  # fmt: skip
def test_dimensions(value: str, dimension: d.Dimension) -> None:
    found = resolved("q(x) = derivative(x^3, x)", "p(x) = integral(x^3, x)", f"y = {value}")
    assert [f.message for f in found.findings if f.severity == "error"] == []
    assert found.entries[-1].type.dimension == dimension


@pytest.mark.parametrize(
    ("value", "slug", "place"),
    [
        ("integral(x, x, 0 m, 2 kN)", "unit-mismatch", "2 kN"),
        ("largest(x, x, 1, 2 kN)", "unit-mismatch", "2 kN"),
        ("largest(x + 1 m, x, 0 kN, 2 kN)", "unit-mismatch", "+"),
        ("integral(exp(x), x, 0 m, 2 m)", "needs-plain-number", "x"),
        ("sum(k, k, 0, 3 m)", "needs-plain-number", "3 m"),
        ("sum(k + 1 m, k, 0, 3)", "unit-mismatch", "+"),
        ("integral(3 kN, 2, 0, 1)", "bad-syntax", "2"),
        ("largest(2*x, 2*x, 0, 1)", "bad-syntax", "2*x"),
        ("integral(a^2, b)", "not-a-parameter", "b"),
        ("derivative(a^2, a)", "not-a-parameter", "a"),
        ("f(2 m)", "unit-mismatch", "2 m"),
        # absolute temperatures have no multiples and no sums
        ("integral(T_1, x, 0, 1)", "absolute-temperature", "integral"),
        ("integral(2 kN, x, T_1, T_2)", "absolute-temperature", "integral"),
        ("largest(2*x, x, T_1, T_2)", "absolute-temperature", "*"),
        ("sum(T_1 + k*1 K, k, 0, 3)", "absolute-temperature", "sum"),
        ("sum(c.T)", "absolute-temperature", "sum"),
        ("sum(k, k, T_1, T_2)", "needs-plain-number", "T_1"),
        ("interp(20 K, c.T, c.T)", "absolute-temperature", "20 K"),
    ],
)
def test_types_that_do_not_go(value: str, slug: str, place: str) -> None:
    warm = "Table c: temperatures\n\n| r | T [degC] |\n|---|---|\n| p | 20 |\n| q | 30 |\n\n"
    given = ("T_1 = 20 degC", "T_2 = 30 degC", "a = 3", "f(x [1]) = derivative(x, x)", f"y = {value}")
    assert the_finding(*given, tables=warm + TABLES) == (slug, place)


def test_absolute_temperatures_may_be_looked_over_and_looked_up() -> None:
    warm = (
        "Table c: temperatures\n\n| r | T [degC] | d [K] |\n|---|---|---|\n| p | 20 | 1 |\n| q | 30 | 2 |\n"
    )
    trace = worked(
        "y = largest(x - 10 degC, x, 20 degC, 30 degC)",
        "x_1 = where_largest(x - 10 degC, x, 20 degC, 30 degC)",
        "m = max(c.T)", "i = interp(25 degC, c.T, c.d)", "e = c.T - 20 degC", tables=warm,
    )  # fmt: skip
    assert trace["y"].si == pytest.approx(20)
    assert trace["x_1"].si == pytest.approx(303.15)
    assert trace["m"].si == pytest.approx(303.15)
    assert trace["i"].si == pytest.approx(1.5)
    assert list(trace["e"].si) == pytest.approx([0, 10])


def test_a_frost_in_a_column_of_degrees() -> None:
    """The minus belongs to the number, as it does in `-5 degC`."""
    cold = "Table c: temperatures\n\n| r | T [degC] |\n|---|---|\n| p | 20 |\n| q | -5 |\n"
    assert worked('y = c.T at "q"', tables=cold)["y"].si == pytest.approx(268.15)


def test_pi_in_a_cell_is_no_name() -> None:
    """source: the contract of the language: `pi` is not a name where it is asked what an input names."""
    round_bars = "Table c: round bars\n\n| r | u [mm] |\n|---|---|\n| p | pi*20 |\n"
    assert worked('y = c.u at "p"', tables=round_bars)["y"].si == pytest.approx(0.0628318530718)
