"""Unknowns and equations: declared, solved, too early, and what hangs on them."""

from __future__ import annotations

import pytest
from sheets import entry, findings, resolve, slugs

import loadpath
from loadpath.trace.file import record


def the_finding(*lines: str) -> tuple[str, int, str]:
    """Slug, line among the lines, and place of the one finding."""
    (found,) = findings(*lines)
    assert found.span is not None
    return found.slug, (found.line or 0) - 5, found.source.cut(found.span)


# --- declared and solved ------------------------------------------------------------------------------------


def test_an_unknown_is_solved_once_and_keeps_its_unit() -> None:
    resolved = resolve(
        "unknown R [kN], C [mm]", "solve for R, C", "    R = 3 kN", "    C*R = 6 kN*mm", "y = R*C"
    )
    assert resolved.findings == ()
    assert [(e.id, e.kind, e.blocked_by) for e in resolved.entries] == [
        ("unknown R", "unknown", 0), ("unknown C", "unknown", 0), ("R", "solution", 0), ("C", "solution", 0),
        ("y", "result", 0),
    ]  # fmt: skip
    assert (entry(resolved, "R").unit.text, entry(resolved, "C").unit.text) == ("kN", "mm")


@pytest.mark.parametrize(
    ("lines", "slug", "line", "place"),
    [
        # never solved
        (("unknown R [kN]",), "unsolved-unknown", 1, "R"),
        (("unknown R [kN], Q [kN]", "solve for R", "    R = 2 kN"), "unsolved-unknown", 1, "Q"),
        # too early
        (("unknown R [kN]", "y = 2*R", "solve for R", "    R = 2 kN"), "unsolved-unknown", 2, "R"),
        (("unknown R [kN]", "limit: R <= 3 kN", "solve for R", "    R = 2 kN"), "unsolved-unknown", 2, "R"),
        (("unknown R [kN]", "check: R = 3 kN within 1 N", "solve for R", "    R = 2 kN"),
         "unsolved-unknown", 2, "R"),
        (("unknown R [kN]", "plot R*x for x from 0 to 1", "solve for R", "    R = 2 kN"),
         "unsolved-unknown", 2, "R"),
        (("unknown R [kN]", "tabulate x for x from 0 kN to R, 3 steps", "solve for R", "    R = 2 kN"),
         "unsolved-unknown", 2, "R"),
        (("unknown R [kN], Q [kN]", "solve for R", "    R = Q", "solve for Q", "    Q = 2 kN"),
         "unsolved-unknown", 3, "Q"),
        (("unknown R [kN], Q [kN]", "solve for R [kN] between 0 kN and Q", "    R^2 = 4 kN^2", "solve for Q",
          "    Q = 2 kN"), "unsolved-unknown", 2, "Q"),
        # too early through functions of functions
        (("unknown R [kN]", "f(x [1]) = x*R", "g(x [1]) = 2*f(x)", "h(x [1]) = integral(g(x), x)", "y = h(2)",
          "solve for R", "    R = 2 kN"), "unsolved-unknown", 5, "h"),
        (("unknown R [kN]", "f(x [1]) = x*R", "y = largest(f(t), t, 0, 1)", "solve for R", "    R = 2 kN"),
         "unsolved-unknown", 3, "f"),
        (("unknown R [kN], Q [kN]", "f(x [1]) = x*Q", "solve for R", "    R = f(2)", "solve for Q",
          "    Q = 2 kN"), "unsolved-unknown", 4, "f"),
        # a name twice
        (("R = 3 kN", "solve for R [kN]", "    R = 2 kN"), "defined-twice", 2, "R"),
        (("solve for R [kN]", "    R = 2 kN", "unknown R [kN]"), "defined-twice", 3, "R"),
        (("solve for R [kN]", "    R = 2 kN", "R = 3 kN"), "defined-twice", 3, "R"),
        (("solve for R [kN]", "    R = 2 kN", "solve for R [kN]", "    R = 3 kN"), "defined-twice", 3, "R"),
        # units
        (("solve for R", "    R = 2 kN"), "bad-syntax", 1, "R"),
        (("unknown R [kN]", "solve for R [N]", "    R = 2 kN"), "unit-mismatch", 2, "N"),
        (("unknown R [kn]", "solve for R", "    R = 2 kN"), "unknown-unit", 1, "kn"),
        (("solve for R [kn]", "    R = 2 kN"), "unknown-unit", 1, "kn"),
        (("solve for R [kN]", "    R = 2 m"), "unit-mismatch", 2, "="),
        (("solve for R [kN], Q [kN]", "    R + Q = 3 kN", "    R*Q = 2 kN"), "unit-mismatch", 3, "="),
        (("solve for R [kN] between 0 kN and 1 m", "    R = 2 kN"), "unit-mismatch", 1, "1 m"),
        # the problem as stated
        (("solve for R [kN], Q [kN]", "    R = 2 kN"), "equation-count", 1, "solve for R [kN], Q [kN]"),
        (("solve for R [kN]", "    R = 2 kN", "    R = 3 kN"), "equation-count", 1, "solve for R [kN]"),
        (("solve for R [kN] between 0 kN and 2*R", "    R = 2 kN"), "used-before-defined", 1, "2*R"),
        (("solve for R [kN], Q [kN] between R and 9 kN", "    R = 2 kN", "    Q = 3 kN"),
         "used-before-defined", 1, "R"),
        (("solve for R [kN]", "    R = S"), "unknown-name", 2, "S"),
        (("solve for R [kN]", "    R = S", "S = 3 kN"), "used-before-defined", 2, "S"),
    ],
)  # fmt: skip
def test_one_finding_at_its_cause(lines: tuple[str, ...], slug: str, line: int, place: str) -> None:
    assert the_finding(*lines) == (slug, line, place)


def test_an_unknown_solved_twice_is_one_mistake() -> None:
    lines = ("unknown R [kN]", "solve for R", "    R = 2 kN", "solve for R", "    R = 3 kN")
    assert the_finding(*lines) == ("defined-twice", 4, "R")


def test_the_unit_may_be_said_again_where_it_is_the_same() -> None:
    assert slugs("unknown R [kN]", "solve for R [kN]", "    R = 2 kN") == []


def test_functions_may_hold_what_is_not_solved_yet() -> None:
    lines = ("unknown R [kN]", "f(x [1]) = x*R", "g(x [1]) = integral(f(x), x) + R")
    assert slugs(*lines, "solve for R", "    g(2) = 8 kN", "y = g(1)") == []


def test_what_hangs_on_an_unknown_used_too_early_names_that_line() -> None:
    resolved = resolve("unknown R [kN]", "y = 2*R", "z = 2*y", "solve for R", "    R = 2 kN", "w = 2*R")
    assert {e.id: bool(e.blocked_by) for e in resolved.entries} == {
        "unknown R": False, "y": True, "z": True, "R": False, "w": False,
    }  # fmt: skip
    assert entry(resolved, "z").blocked_by == entry(resolved, "y").blocked_by == entry(resolved, "y").line


def test_unknowns_of_a_faulty_solve_block_what_uses_them() -> None:
    resolved = resolve("solve for R [kN], Q [kN]", "    R <= 2 kN", "y = R + Q", "z = 2 kN")
    assert [f.slug for f in resolved.sheet.findings + resolved.findings] == ["bad-syntax"]
    assert entry(resolved, "y").blocked_by == 7  # where the mistake stands
    assert entry(resolved, "z").blocked_by == 0


# --- names that live only within a call ---------------------------------------------------------------------


@pytest.mark.parametrize(
    ("lines", "place"),
    [
        (("x = 3 m", "I = integral(x^2, x, 0 m, 2 m)"), "x"),
        (("I = integral(x^2, x, 0 m, 2 m)", "x = 3 m"), "x"),
        (("m = largest(x^2, x, 0 m, 2 m)", "x = 3 m"), "x"),
        (("s = sum(k, k, 0, 3)", "k = 3"), "k"),
        (("l = limit_of(1 + x, x, 0)", "x = 3"), "x"),
        (("plot x for x from 0 to 1", "x = 3"), "x"),
        (("tabulate x for x from 0 to 1, 2 steps", "x(y) = y"), "x"),
        (("f(x [1]) = x", "I = integral(f, f, 0, 1)"), "f"),
        (("f(x [m]) = integral(x^2, x, 0 m, 2 m)",), "x"),
        (("I = integral(integral(t, t, 0, 1)*t, t, 0, 1)",), "t"),
        (("unknown x [m]", "f(x [m]) = 2*x", "solve for x", "    x = 2 m"), "x"),
        (("f(x [m]) = 2*x", "solve for x [m]", "    x = 2 m"), "x"),
        (("I = integral(pi*2, pi, 0, 1)",), "pi"),
    ],
)
def test_a_bound_name_that_means_something_else_too(lines: tuple[str, ...], place: str) -> None:
    slug, _, where = the_finding(*lines)
    assert (slug, where) == ("shadowed-name", place)


def test_a_bound_name_may_be_used_again_elsewhere() -> None:
    lines = ("I = integral(t^2, t, 0, 1) + integral(t, t, 0 m, 1 m)/(1 m^2)", "f(t [kN]) = 2*t")
    assert slugs(*lines, "plot t for t from 0 to 1", "s = sum(integral(u*t, u, 0, 1), t, 0, 3)") == []


# --- trails -------------------------------------------------------------------------------------------------


def trail(*lines: str) -> tuple[dict[str, list[str]], dict[str, list[str]]]:
    """`uses` and `used_by` of each step, as the trace file says them."""
    body = "\n".join("    " + line for line in lines)
    trace = loadpath.evaluate(loadpath.read_text(f"---\ntitle: T\n---\n\n{body}\n"))
    assert [f.message for f in trace.findings if f.severity == "error"] == []
    steps = record(trace, "0").steps
    return {s.id: sorted(s.uses) for s in steps}, {s.id: sorted(s.used_by) for s in steps}


def test_trails_of_unknown_functions_and_solution() -> None:
    uses, used_by = trail(
        "w = 3 kN/m", "unknown R [kN], C [kN]", "V(x [m]) = R - w*x", "M(x [m]) = integral(V(x), x)",
        "solve for R", "    M(4 m) = 0", "solve for C", "    C = 2*R", "y = M(1 m)", "z = R/2", "u = 2*w",
        "limit: y <= 30 kN*m",
    )  # fmt: skip
    assert uses["unknown R"] == []
    assert used_by["unknown R"] == ["R", "V"]
    assert uses["V"] == ["unknown R", "w"]
    assert uses["M"] == ["V"]
    assert uses["R"] == ["M", "unknown R"]
    # what evaluates such a function below the solution hangs on the function and on the solution
    assert uses["y"] == ["M", "R"]
    assert uses["z"] == ["R"]
    assert uses["u"] == ["w"]
    assert uses["C"] == ["R", "unknown C"]
    assert used_by["R"] == ["C", "y", "z"]
    assert used_by["y"] == ["limit: y <= 30 kN*m"]


def test_trails_of_several_solutions_share_their_equations() -> None:
    uses, used_by = trail(
        "P = 3 kN", "L = 2 m", "solve for A [kN], B [kN]", "    A + B = P", "    B*L = P*1 m", "y = A"
    )
    assert uses["A"] == uses["B"] == ["L", "P"]
    assert used_by["P"] == used_by["L"] == ["A", "B"]
    assert uses["y"] == ["A"]


def test_uses_and_used_by_mirror_each_other() -> None:
    uses, used_by = trail(
        "D_max = 9 kN", "unknown C [kN]", "f(x [m]) = C*x/(1 m)", "solve for C between 0 kN and D_max",
        "    f(1 m)^2 = 4 kN^2", "plot f(x) for x from 0 m to 2 m",
        "tabulate f(x) for x from 0 m to 2 m, 2 steps",
    )  # fmt: skip
    for step, names in uses.items():
        for name in names:
            assert step in used_by[name]
    assert uses["C"] == ["D_max", "f", "unknown C"]
    assert uses["plot f(x)"] == uses["tabulate f(x)"] == ["C", "f"]
