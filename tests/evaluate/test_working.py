"""What a reader must see beneath a step: the branch taken, the calls worked, what governed."""

from __future__ import annotations

import pytest

import loadpath
from loadpath.evaluate.working import MOST_CALLS
from loadpath.formula.canonical import text
from loadpath.trace import Called, Trace, Working


def worked(*lines: str) -> Trace:
    body = "\n".join("    " + line for line in lines)
    trace = loadpath.evaluate(loadpath.read_text(f"---\ntitle: A sheet\n---\n\n{body}\n"))
    assert trace.findings == ()
    return trace


def working(trace: Trace, id: str) -> Working:
    found = trace[id].working
    assert found is not None
    return found


def call(trace: Trace, id: str) -> Called:
    (found,) = working(trace, id).calls
    return found


def test_a_plain_formula_is_its_own_working() -> None:
    trace = worked("a = 2", "b = 3*a")
    assert text(working(trace, "b").tree) == "3*a"
    assert working(trace, "b").calls == () and working(trace, "b").asides == ()
    assert trace["a"].working is None


@pytest.mark.parametrize(("r", "index", "tree"), [("1", 0, "a*r"), ("3", 1, "a/r"), ("9", 2, "a")])
def test_the_branch_taken(r: str, index: int, tree: str) -> None:
    trace = worked(
        "a = 2", f"r = {r}", "b = cases", "    a*r  when r <= 1", "    a/r  when r <= 4", "    a    otherwise"
    )
    found = working(trace, "b")
    assert found.taken is not None and found.taken.index == index
    assert text(found.tree) == tree


def test_a_call_shows_its_arguments_and_its_body() -> None:
    trace = worked("P = 20 kN", "L = 3 m", "M(x [m]) [kN*m] = P*x/2", "r = M(L/2)")
    found = call(trace, "r")
    ((name, argument),) = found.arguments
    assert (name, argument.si, argument.unit.text) == ("x", 1.5, "m")
    assert (found.value.si, found.value.unit.text) == (15e3, "kN*m")
    assert text(found.working.tree) == "P*x/2"
    assert dict(found.working.scope)["x"].si == 1.5


@pytest.mark.parametrize(
    ("argument", "typed", "unit"),
    [("2 m", "2", "m"), ("200 cm", "200", "cm"), ("L", "3", "m"), ("L_mm", "", "m"), ("2*L", "", "m")],
)
def test_an_argument_stands_as_typed_where_it_can(argument: str, typed: str, unit: str) -> None:
    trace = worked("L = 3 m", "L_mm [mm] = 2*L", "f(x [m]) [m] = 2*x", f"r = f({argument})")
    ((_, found),) = call(trace, "r").arguments
    assert (found.typed, found.unit.text) == (typed, unit)


def test_calls_within_calls_and_within_branches() -> None:
    trace = worked(
        "a = 2", "f(x) = 2*x", "g(x) = cases", "    f(x)    when f(x) <= 3", "    f(2*x)  otherwise",
        "r = g(a) + g(a) + f(a)",
    )  # fmt: skip
    g, f = working(trace, "r").calls
    assert (text(g.call), text(f.call)) == ("g(a)", "f(a)")
    assert g.working.taken is not None and g.working.taken.index == 1
    assert [text(c.call) for c in g.working.calls] == ["f(2*x)"]
    assert g.working.calls[0].value.si == 8


def test_a_call_in_a_criterion() -> None:
    trace = worked("f(x [kN]) [MPa] = x/(400 mm^2)", "P = 20 kN", "limit x: f(P) <= 60 MPa")
    assert text(call(trace, "limit x").call) == "f(P)"
    assert call(trace, "limit x").value.unit.text == "MPa"


def test_what_a_condition_passes_over_need_not_have_a_value() -> None:
    trace = worked("f(x) = 1/x", "r = 0", "a = cases", "    1  when r = 0 or f(r) > 2", "    2  otherwise")
    assert trace["a"].value == 1
    assert working(trace, "a").calls == ()


@pytest.mark.parametrize(
    ("expression", "before", "tree", "after"),
    [
        ("min(a, b)", "min: governed by", "a", ""),
        ("max(a, b, 2*a)", "max: governed by", "2*a", ""),
        ("round_up(b, 2)", "rounded up to 2 steps of", "2", ""),
        ("round_down(b, 2)", "rounded down to 1 step of", "2", ""),
        ("2*(c as mm)", "", "c", "taken as a number of mm: 1000"),
    ],
)
def test_asides(expression: str, before: str, tree: str, after: str) -> None:
    trace = worked("a = 2", "b = 3", "c = 1 m", f"r = {expression}")
    (aside,) = working(trace, "r").asides
    assert (aside.before, text(aside.tree), aside.after) == (before, tree, after)


def test_the_calls_beneath_one_step_are_limited() -> None:
    trace = worked("f(x) = 2*x", "r = " + " + ".join(f"f({i})" for i in range(MOST_CALLS + 10)))
    assert len(working(trace, "r").calls) == MOST_CALLS
