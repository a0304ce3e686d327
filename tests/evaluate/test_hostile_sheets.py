"""Sheets that make algebra and numbers stumble: each ends with a right result or with an error at its own
line. Nothing here is timed.
"""

from __future__ import annotations

import math

import pytest

import loadpath
from loadpath.formula.canonical import text
from loadpath.trace import Trace, texts

START = 5
"""Line of a sheet's first formula."""


def evaluated(*lines: str) -> Trace:
    body = "".join(f"    {line}\n" for line in lines)
    return loadpath.evaluate(loadpath.read_text(f"---\ntitle: T\n---\n\n{body}"))


def errors(trace: Trace) -> list[tuple[str, int]]:
    return [(f.slug, f.line) for f in trace.findings if f.severity == "error"]


# --- roots --------------------------------------------------------------------------------------------------

TRIPLE = "    x^3 - (2*a + b)*x^2 + (a^2 + 2*a*b)*x - a^2*b = 0"


@pytest.mark.parametrize("a", ["0.1", "0.3", "0.7", "1.9"])
def test_a_double_root_is_not_passed_over(a: str) -> None:
    """Roots a, a and 1.1: rounding of the coefficients must not make the double one vanish."""
    trace = evaluated(f"a = {a} -- a", "b = 1.1 -- b", "solve for x [1]", TRIPLE)
    assert errors(trace) == [("several-roots", START + 2)]
    message = next(f.message for f in trace.findings if f.severity == "error")
    assert f"{float(a):g}"[:3] in message and "1.1" in message


@pytest.mark.parametrize("a", ["0.1", "0.3", "0.7"])
def test_a_double_root_between_bounds(a: str) -> None:
    trace = evaluated(f"a = {a} -- a", "b = 1.1 -- b", "solve for x [1] between 0 and 1", TRIPLE)
    assert errors(trace) == []
    assert trace["x"].si == pytest.approx(float(a), rel=1e-6)


def test_two_double_roots_are_not_called_none() -> None:
    trace = evaluated("a = 0.3 -- a", "b = 1.1 -- b", "solve for x [1]", "    (x - a)^2*(x - b)^2 = 0")
    assert errors(trace) == [("several-roots", START + 2)]


@pytest.mark.parametrize("b", [1e5, 1e8, 1e9, 1e12])
@pytest.mark.parametrize("named", [True, False])
def test_the_small_root_of_a_wide_quadratic(b: float, named: bool) -> None:
    """x^2 - b*x + 1: about 1/b and b. source: the product of the roots is 1."""
    term = "b" if named else f"{b:g}"
    trace = evaluated(f"b = {b:g} -- b", "solve for x [1] between 0 and 1", f"    x^2 - {term}*x + 1 = 0")
    assert errors(trace) == []
    assert trace["x"].si == pytest.approx(1 / b, rel=1e-6)


def test_a_wide_quadratic_without_bounds_has_two_roots() -> None:
    trace = evaluated("b = 1e9 -- b", "solve for x [1]", "    x^2 - b*x + 1 = 0")
    assert errors(trace) == [("several-roots", START + 1)]


def test_a_polynomial_of_a_high_degree() -> None:
    """source: x = 1 by inspection; the left side rises for x > 0."""
    trace = evaluated("solve for x [1] between 0 and 2", "    x^200 + 3*x^99 + x = 5")
    assert errors(trace) == []
    assert trace["x"].si == pytest.approx(1, rel=1e-9)


@pytest.mark.parametrize(
    ("equation", "slug"),
    [
        ("<x - 1>^0 = 0.5", "no-solution"),  # changes its sign by a jump
        ("1/(x - 1.55) = 0", "no-solution"),  # by a pole
        ("tan(x) = 5", ""),
        ("sqrt(x - 1) = 0.5", ""),  # has no value on part of the way
        ("sin(40*x) = 0.5", "several-roots"),
        ("exp((x - 1)*(x - 1.0001)) = 1", "several-roots"),
        ("max(x - 2, 0) = 0", "many-solutions"),
    ],
)
def test_roots_between_bounds(equation: str, slug: str) -> None:
    trace = evaluated("solve for x [1] between 0 and 3", f"    {equation}")
    if slug:
        assert errors(trace) == [(slug, START)]
        return
    solved, found = trace["x"].solved, trace["x"].si
    assert errors(trace) == [] or errors(trace) == [("several-roots", START)]
    assert solved is None or (solved.put_back[0].close and isinstance(found, float))


# --- integrals ----------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    "lines",
    [
        ("y = integral(1/x, x, -1, 1)",),
        ("a = 2 -- a", "y = integral(1/(x - a)^2, x, 0, 5)"),
        ("f(t [1]) [1] = integral(1/(x - 2)^2, x, 0, t)", "y = f(5)"),
        ("f(t [1]) [1] = integral(1/(x - 2)^3, x, t, 3)", "y = f(1)"),
        ("a = 2 -- a", "f(t [1]) [1] = integral(1/(x - a)^2, x, 0, t)", "y = f(5)"),
        ("f(t [1]) [1] = integral(1/(x - t)^2, x, 0, 5)", "y = f(2)"),
    ],
)
def test_an_integral_across_a_pole_has_no_value(lines: tuple[str, ...]) -> None:
    """The antiderivative alone would give a number, and a negative one for what is positive everywhere."""
    trace = evaluated(*lines)
    assert errors(trace) != []
    assert trace["y"].si is None


@pytest.mark.parametrize(
    ("lines", "value"),
    [
        # source: the integral of 1/(2 + cos) over a turn is 2*pi/sqrt(3); its antiderivative by tan jumps
        (("f(t [1]) [1] = integral(1/(2 + cos(x)), x, 0, t)", "y = f(2*pi)"), 2 * math.pi / math.sqrt(3)),
        (("f(t [1]) [1] = integral(sqrt((x - 1)^2), x, 0, t)", "y = f(3)"), 2.5),
        (("a = 0 -- a", "y = integral(exp(a*x), x, 0, 2)"), 2.0),
        (("a = 1 -- a", "b = 1 -- b", "y = integral(sin(a*x)*sin(b*x), x, 0, pi)"), math.pi / 2),
        (("y = integral(1/sqrt(x), x, 0, 1)",), 2.0),
        (("a = -3 -- a", "y = simplified(sqrt(a^2))"), 3.0),
        (("a = -3 -- a", "b = 2 -- b", "y = simplified((a^2*b)^0.5)"), 3 * math.sqrt(2)),
        (("a = 3 -- a", "y = simplified(atan(tan(a)))"), 3 - math.pi),
        (("y = integral(x, x, 2, 0)",), -2.0),
        (("a = 2 -- a", "y = integral(a*x, x, 2, 2)"), 0.0),
    ],
    ids=lambda v: v[-1] if isinstance(v, tuple) else "",
)
def test_integrals_that_closed_forms_get_wrong(lines: tuple[str, ...], value: float) -> None:
    trace = evaluated(*lines)
    assert errors(trace) == []
    assert trace["y"].si == pytest.approx(value, rel=1e-9)


@pytest.mark.parametrize(
    ("formula", "value"),
    [
        ("integral(exp(-x)*(1 + 0*sin(x^3)), x, 0, 1e6)", 1.0),
        ("integral(exp(-((x - 1.23456)/0.00001)^2)*(1 + 0*sin(x^2)), x, 0, 3)", 1e-5 * math.sqrt(math.pi)),
    ],
)
def test_a_narrow_peak_is_not_integrated_to_nothing(formula: str, value: float) -> None:
    """An error is as good as the value, or a step that says what it cannot see."""
    trace = evaluated(f"y = {formula}")
    found, working = trace["y"].si, trace["y"].working
    said = " ".join(aside.after for call in working.calls for aside in call.working.asides) if working else ""
    assert found is None or found == pytest.approx(value, rel=1e-6) or "narrower than" in said


# --- places of errors ---------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    "lines",
    [
        ("f(x [1]) [1] = derivative(abs(x - 1), x)", "y = f(1)"),
        ("f(x [1]) [1] = integral(tan(x), x)", "y = f(3)"),
        ("f(a [1]) [1] = integral(exp(a*x), x, 0, 2)", "y = f(0)"),
        ("f(x [m]) [m^2] = x*abs(x)", "g(x [m]) = derivative(f(x), x)", "y = g(0 m)"),
    ],
)
def test_an_error_in_what_was_derived_stands_at_a_line_of_the_sheet(lines: tuple[str, ...]) -> None:
    trace = evaluated(*lines)
    assert errors(trace) != []
    assert all(START <= line < START + len(lines) for _, line in errors(trace))


# --- limits of size -----------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    "lines",
    [
        ("y = sum(1/k^2, k, 1, 100000000)",),
        ("f(x [1]) [1] = derivative((1 + x)^1000*(2 - x)^1000, x)", "y = f(0.01)"),
        ("a = 3 -- a", "f(x [1]) [1] = integral((a + x)^99999, x)", "y = f(0.1)"),
        ("y = largest(tan(x), x, 0, 3)",),
        ("y = largest(1/(x - 1.00013)^2, x, 0, 3)",),
        ("y = limit_of(sin(1/x), x, 0)",),
        ("solve for x [1]", "    tan(x) = 3*x"),
        ("solve for x [1]", "    sin(x) = 0.5"),
        ("solve for x [1]", "    x*exp(x) = -0.2"),
    ],
)
def test_what_cannot_be_worked_is_an_error_at_its_line(lines: tuple[str, ...]) -> None:
    trace = evaluated(*lines)
    assert errors(trace) != []
    assert all(START <= line < START + len(lines) for _, line in errors(trace))
    assert all(f.help for f in trace.findings if f.severity == "error")


def test_a_hundred_unknowns() -> None:
    """source: a chain 4, -1, -1 of equations; each is put back."""
    n = 100
    rows = []
    for i in range(n):
        before, after = f" - x_{i - 1}" if i else "", f" - x_{i + 1}" if i < n - 1 else ""
        rows.append(f"    4*x_{i}{before}{after} = {i} kN")
    trace = evaluated("solve for " + ", ".join(f"x_{i} [kN]" for i in range(n)), *rows)
    assert errors(trace) == []
    solved = trace["x_99"].solved
    assert solved is not None
    assert max(abs(p.left - p.right) for p in solved.put_back) <= 1e-10 * 1e5


# --- what a reader must see ---------------------------------------------------------------------------------


def test_what_is_looked_up_is_shown_with_its_value() -> None:
    """`lookup(max(t.b)/2, ...)`: a reader must see which number was sought among the rows."""
    table = "Table t: rows\n\n| row | b [mm] | h [mm] |\n|---|---|---|\n| top | 1 | 3 |\n| web | 2 | 4 |\n\n"
    body = f"{table}    k = lookup(max(t.b)*0.9, t.b, t.h)\n"
    trace = loadpath.evaluate(loadpath.read_text(f"---\ntitle: T\n---\n\n{body}"))
    assert errors(trace) == []
    step = trace["k"]
    put = texts.step_substitution(trace, step)
    said = [text(put.tree)] if put else []
    assert step.working is not None
    for call in step.working.calls:
        said += [f"{a.before} {text(a.tree)} {a.after}" for a in call.working.asides]
        said += [text(call.working.written)] if call.working.written else []
    assert any("1.8" in each for each in said), said
