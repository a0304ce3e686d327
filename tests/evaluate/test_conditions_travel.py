"""Open assumptions and ranges of validity travel through functions, unknowns, solutions, tables and columns
to every criterion that hangs on them."""

from __future__ import annotations

import re

import pytest

import loadpath
from loadpath.document import build
from loadpath.document.model import CriterionBox
from loadpath.trace import Trace, Verdict

FRONT = """---
title: T
sources: {s: A source}
assumptions:
  A1: {text: Something, confirm: true}
  A2: {text: Something else, confirm: true}
  A3: {text: Confirmed, confirmed: {by: R.M., on: 2026-11-01, document: SB-1}}
---

"""


def evaluated(body: str) -> Trace:
    trace = loadpath.evaluate(loadpath.read_text(f"{FRONT}{body}\n"))
    assert [f.message for f in trace.findings if f.severity == "error"] == []
    return trace


def verdict(body: str, id: str = "limit x") -> Verdict:
    found = evaluated(body)[id].verdict
    assert found is not None
    return found


def table(caption: str, second: str = "2") -> str:
    rows = f"| row | b [mm] | h [mm] |\n|---|---|---|\n| top | 1 | 3 |\n| web | {second} | 4 |\n"
    return f"\nTable t: a table {caption}\n\n{rows}\n"


TWO_WAY = """
Table w: two ways [A1]

| x [m] | 1 mm | 2 mm |
|-------|------|------|
| 1     | 3 kN | 4 kN |
| 2     | 5 kN | 6 kN |

"""


def cases(text: str) -> dict[str, str]:
    """Small sheets by the line that names them; TABLE and TWO-WAY stand for tables of data."""
    found = {}
    for each in text.strip().split("# ")[1:]:
        name, _, body = each.partition("\n")
        lines = "".join(f"    {line}\n" for line in body.splitlines())
        lines = lines.replace("    TABLE [s] with a\n", table("[s]", "a")).replace(
            "    TWO-WAY [A1]\n", TWO_WAY
        )
        found[name] = re.sub(r"    TABLE (.*)\n", lambda m: table(m[1]), lines)
    return found


BEAM = """    L = 4 m -- span [s]
    P = 3 kN -- load {P}
    E = 210 GPa -- steel {E}
    I = 1000 cm^4 -- section [s]
    unknown R_A [kN], R_B [kN], C_1 [rad]
    V(x [m]) [kN] = R_A - P*<x - L/3>^0 -- {V}
    M(x [m]) [kN*m] = integral(V(x), x)
    theta(x [m]) [rad] = C_1 - integral(M(x), x)/(E*I)
    v(x [m]) [mm] = integral(theta(x), x)
    solve for R_A, R_B, C_1
        M(L) = 0
        V(L) = -R_B
        v(L) = 0 -- {eq}
"""

CASES = cases("""
# an input through a function
a = 3 mm -- a [A1]
f(x [mm]) = x*a
y = f(2 mm)
limit x: y <= 9 cm^2
# a function's own note
f(x [mm]) = 2*x -- [A1]
limit x: f(2 mm) <= 9 mm
# a function of a function
f(x [mm]) = 2*x -- [A1]
g(x [mm]) = integral(f(x), x)
limit x: g(2 mm) <= 9 cm^2
# an argument of a call
a = 3 mm -- a [A1]
f(x [mm]) = 2*x
limit x: f(a) <= 9 mm
# within an integral
a = 3 mm -- a [A1]
limit x: integral(u*a, u, 0 mm, 2 mm) <= 9 cm^3
# a bound of an integral
a = 3 mm -- a [A1]
limit x: integral(u, u, 0 mm, a) <= 9 cm^2
# a bound of largest
a = 3 mm -- a [A1]
limit x: largest(u, u, 0 mm, a) <= 9 mm
# a bound of a sum
n = 3 -- a [A1]
limit x: sum(k^2, k, 1, n) <= 99
# an equation's own note
a = 3 mm -- a
solve for q [mm]
    2*q = a -- [A1]
limit x: q <= 9 mm
# a solve's own note
a = 3 mm -- a
solve for q [mm] -- [A1]
    2*q = a
limit x: q <= 9 mm
# a name in an equation
a = 3 mm -- a [A1]
solve for q [mm]
    2*q = a
limit x: q <= 9 mm
# the other equation
a = 3 mm -- a
b = 1 mm -- b [A1]
solve for q [mm], r [mm]
    q = a
    r = b
limit x: q <= 9 mm
# a bound of solve
a = 9 mm -- a [A1]
solve for q [mm] between 0 mm and a
    q^2 = 9 mm^2
limit x: q <= 9 mm
# an unknown's own note
unknown q [mm] -- [A1]
f(x [mm]) = x + q
solve for q
    f(2 mm) = 3 mm
limit x: f(1 mm) <= 9 mm
# a caption, by a column
TABLE [A1]
limit x: t.b <= 9 mm
# a caption, by one cell
TABLE [A1]
limit x: (t.b at "top") <= 9 mm
# a caption, by a sum
TABLE [A1]
limit x: sum(t.b) <= 9 mm
# a caption, by count
TABLE [A1]
limit x: count(t.b) <= 9
# a caption, by a derived column
TABLE [A1]
A = t.b*t.h
limit x: A <= 9 cm^2
# a caption, by interp
TABLE [A1]
limit x: interp(1.5 mm, t.b, t.h) <= 9 mm
# a caption, by lookup
TABLE [A1]
limit x: lookup(1.5 mm, t.b, t.h) <= 9 mm
# a cell's name
a = 2 mm -- a [A1]
TABLE [s] with a
limit x: t.b <= 9 mm
# a cell's name, by a cell of another row
a = 2 mm -- a [A1]
TABLE [s] with a
limit x: (t.b at "top") <= 9 mm
# the choice that picks a row
TABLE [s]
c = "top" of "top", "web" -- [A1]
limit x: (t.b at c) <= 9 mm
# the number looked up
TABLE [s]
a = 1.5 mm -- a [A1]
limit x: interp(a, t.b, t.h) <= 9 mm
# a two-way table
TWO-WAY [A1]
limit x: interp(1.5 m, 1.5 mm, w) <= 9 kN
""")


@pytest.mark.parametrize("body", CASES.values(), ids=CASES.keys())
def test_an_open_assumption_makes_what_hangs_on_it_conditional(body: str) -> None:
    found = verdict(body)
    assert (found.satisfied, found.conditional_on) == (True, ("A1",))


@pytest.mark.parametrize("body", CASES.values(), ids=CASES.keys())
def test_a_confirmed_assumption_leaves_no_condition(body: str) -> None:
    assert verdict(body.replace("[A1]", "[A3]")).conditional_on == ()


@pytest.mark.parametrize("where", ["P", "E", "V", "eq"])
def test_conditions_travel_through_unknowns_and_their_functions(where: str) -> None:
    notes = dict.fromkeys(("P", "E", "V", "eq"), "[s]") | {where: "[A1]"}
    body = BEAM.format(**notes) + (
        "    limit x: largest(v(x), x, 0 m, L) <= 9 m\n"
        "    limit force: R_A <= 99 kN\n"
        "    limit other: P*1 <= 99 kN\n"
    )
    trace = evaluated(body)
    found = {id: trace[id].verdict.conditional_on for id in ("limit x", "limit force", "limit other")}  # type: ignore[union-attr]
    assert found == {
        "limit x": ("A1",),
        "limit force": ("A1",),
        "limit other": ("A1",) if where == "P" else (),
    }


def test_two_assumptions_by_two_ways() -> None:
    body = (
        table("[A2]")
        + "    a = 3 -- a [A1]\n    A = a*t.b\n    limit x: A <= 99 mm\n    limit y: t.h*1 <= 99 mm"
    )
    trace = evaluated(body)
    assert trace["limit x"].verdict.conditional_on == ("A1", "A2")  # type: ignore[union-attr]
    assert trace["limit y"].verdict.conditional_on == ("A2",)  # type: ignore[union-attr]
    assert [r.verdict.conditional_on for r in trace["limit x"].rows] == [("A1", "A2")] * 2  # type: ignore[union-attr]


def test_a_failed_criterion_stays_failed_with_a_condition() -> None:
    found = verdict(table("[A1]") + "    limit x: t.b <= 1.5 mm")
    assert found.satisfied is False


# --- ranges of validity -------------------------------------------------------------------------------------

RANGES = cases("""
# a function
a = 3 mm -- a
f(x [mm]) = 2*x
valid: a <= 2 mm for f
y = f(1 mm)
limit x: y <= 9 mm
# a function within a function
a = 3 mm -- a
f(x [mm]) = 2*x
valid: a <= 2 mm for f
g(x [mm]) = integral(f(x), x)
limit x: g(1 mm) <= 9 cm^2
# an integral of a function
a = 3 mm -- a
f(x [mm]) = 2*x
valid: a <= 2 mm for f
limit x: integral(f(u), u, 0 mm, 1 mm) <= 9 cm^2
# a solution
a = 3 mm -- a
solve for q [mm]
    2*q = a
valid: q <= 1 mm for q
limit x: q <= 9 mm
# a name in an equation
a = 3 mm -- a
valid: a <= 1 mm for a
solve for q [mm]
    2*q = a
limit x: q <= 9 mm
# an unknown, by a function
unknown q [mm]
f(x [mm]) = x + q
solve for q
    f(2 mm) = 3 mm
valid: q <= 0.5 mm for q
limit x: f(1 mm) <= 9 mm
# a column
TABLE [s]
A = t.b*t.h
valid: t.b <= 1.5 mm for A
limit x: A <= 9 cm^2
# a sum of a column
TABLE [s]
A = t.b*t.h
valid: t.b <= 1.5 mm for A
limit x: sum(A) <= 9 cm^2
# a cell of a column
TABLE [s]
A = t.b*t.h
valid: t.b <= 1.5 mm for A
limit x: (A at "web") <= 9 cm^2
# a column of the table
TABLE [s]
valid: t.b <= 1.5 mm for t.b
limit x: t.b*2 <= 9 cm
# a cell that names it
a = 2 mm -- a
valid: a <= 1 mm for a
TABLE [s] with a
limit x: t.b*2 <= 9 cm
""")


@pytest.mark.parametrize("body", RANGES.values(), ids=RANGES.keys())
def test_outside_its_range_nothing_is_shown(body: str) -> None:
    found = verdict(body)
    assert found.satisfied is None
    assert found.outside != ()


@pytest.mark.parametrize("body", RANGES.values(), ids=RANGES.keys())
def test_inside_its_range_all_is_shown(body: str) -> None:
    """The same sheets with the bound drawn wider."""
    for bound in ("<= 2 mm", "<= 1 mm", "<= 0.5 mm", "<= 1.5 mm"):
        body = body.replace(f"{bound} for", "<= 99 mm for")
    assert verdict(body).satisfied is True


def test_a_range_for_a_table_holds_for_its_columns() -> None:
    found = verdict(table("[s]") + "    valid: t.b <= 1.5 mm for t\n    limit x: t.h <= 9 mm")
    assert found.satisfied is None


def test_rows_say_no_more_than_the_criterion() -> None:
    """Outside its range no row reads "satisfied" beneath a criterion that is not shown."""
    trace = evaluated(table("[s]") + "    valid: t.b <= 1.5 mm for t.h\n    limit x: t.h <= 9 mm")
    (box,) = [b for b in build(trace, "1").blocks if isinstance(b, CriterionBox)]
    assert box.verdict == "not shown: outside the range of t.h"
    assert [row.verdict for row in box.rows if row.verdict.startswith("satisfied")] == []


def test_a_criterion_whose_name_could_not_be_solved_for_is_not_shown() -> None:
    body = "    a = 3 mm -- a\n    solve for q [mm]\n        q = q + a\n    limit x: q <= 9 mm"
    trace = loadpath.evaluate(loadpath.read_text(FRONT + body + "\n"))
    found = trace["limit x"].verdict
    assert found is not None and found.satisfied is None
    assert trace["limit x"].why.startswith("not computed because of line")


def test_a_criterion_row_by_row_is_not_shown_where_one_row_cannot_be_computed() -> None:
    body = table("[s]") + "    y = 1 mm^2 / (t.b - 1 mm)\n    limit x: y <= 9 mm"
    trace = loadpath.evaluate(loadpath.read_text(FRONT + body + "\n"))
    found = trace["limit x"].verdict
    assert found is not None and found.satisfied is None
    assert "division-by-zero" in {f.slug for f in trace.findings}
