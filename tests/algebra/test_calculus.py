"""Integrals, derivatives and limits against numbers, against SciPy and against SymPy's own brackets."""

from __future__ import annotations

import math
from collections.abc import Callable

import pytest
from algebra_trees import text, tree, worth
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from loadpath import algebra
from loadpath.formula.tree import Binary, Bracket, Call, Name, Negative, Node, Number

VALUES = {"L": 5.0, "a": 1.7, "b": 3.1, "c": 2.3, "P": 2.5, "w": 0.8, "E": 3.0, "I": 1.3, "I_1": 2.0,
          "I_2": 4.0, "I_3": 2.0, "k": 0.9, "R": 1.9, "M_0": -2.2}  # fmt: skip
BREAKS = (1.0, 1.7, 2.0, 2.3, 3.1, 4.0)
"""Every place that a bracket of the tests begins at."""
AWAY = (0.31, 1.33, 1.86, 2.61, 3.57, 4.49)
"""Between the breaks."""


def truly(node: Node) -> bool:
    """The callback, from the values."""
    return worth(node, VALUES) > 0


def at(node: Node, x: float) -> float:
    return worth(node, {**VALUES, "x": x})


def close(a: float, b: float, scale: float = 1.0) -> bool:
    return abs(a - b) <= 1e-7 * max(scale, abs(a), abs(b))


# --- random integrands with brackets ------------------------------------------------------------------------

x = Name("x")
numbers = st.sampled_from(("2", "3", "0.5", "1.25", "12")).map(Number)
names = st.sampled_from(("P", "w", "a", "L")).map(Name)
marks = st.sampled_from((Name("a"), Name("b"), Name("c"), Number("1"), Number("2"), Number("4")))
brackets = st.builds(
    lambda mark, power, falling: Bracket(
        Binary("-", mark, x) if falling else Binary("-", x, mark), power
    ),
    marks, st.integers(0, 2), st.booleans(),
)  # fmt: skip
lines = st.builds(lambda m: Binary("+", m, x), marks)
powers = st.integers(1, 3).map(lambda n: Binary("^", x, Number(str(n))))
leaves: st.SearchStrategy[Node] = st.one_of(numbers, names, st.just(x), powers, brackets, brackets, lines)


def _grown(inner: st.SearchStrategy[Node]) -> st.SearchStrategy[Node]:
    return st.one_of(
        st.builds(Binary, st.sampled_from(("+", "-", "*")), inner, inner),
        st.builds(Negative, inner),
        st.builds(lambda n, d: Binary("/", n, d), inner, st.one_of(names, numbers)),
    )


polynomials: st.SearchStrategy[Node] = st.recursive(leaves, _grown, max_leaves=5)
"""Sums and products of powers and brackets, rising and falling."""
stepped = st.builds(
    lambda f, mark: Binary(
        "/", f, tree(f"E*(I_1 + (I_2 - I_1)*<x - {text(mark)}>^0)")
    ),
    polynomials, marks,
)  # fmt: skip
waves = st.builds(
    lambda p, f: Binary("*", p, f), st.one_of(st.just(Number("1")), powers, brackets),
    st.sampled_from([tree(t) for t in (
        "sin(pi*x/L)", "exp(-k*x)", "sqrt(a + x)", "1/(a + x)", "1/(a + x)^2", "cos(k*x)", "ln((a + x)/a)",
    )]),
)  # fmt: skip


@settings(max_examples=150)
@given(st.one_of(polynomials, stepped))
def test_the_derivative_of_an_antiderivative_is_the_function(f: Node) -> None:
    F = algebra.antiderivative(f, "x", truly)
    assert F is not None
    back = algebra.derivative(F, "x")
    for place in AWAY:
        assert close(at(back, place), at(f, place)), text(F)


@settings(max_examples=150)
@given(st.one_of(polynomials, stepped))
def test_an_antiderivative_is_continuous_and_vanishes_at_zero(f: Node) -> None:
    F = algebra.antiderivative(f, "x", truly)
    assert F is not None
    assert close(at(F, 0.0), 0.0)
    assert algebra.vanishes_at_zero(F, "x", truly)
    for place in BREAKS:
        scale = 10 * (abs(at(f, place)) + abs(at(f, place - 1e-9)) + 1)
        assert abs(at(F, place + 1e-9) - at(F, place - 1e-9)) <= 1e-6 * scale


def quad(f: Node, low: float, high: float) -> float:
    from scipy import integrate

    inside = [p for p in BREAKS if low < p < high]
    value, _ = integrate.quad(lambda t: at(f, t), low, high, points=inside or None, limit=200)
    return float(value)


@settings(max_examples=100)
@given(st.one_of(polynomials, stepped), st.sampled_from(("0", "a")), st.sampled_from(("L", "b", "4")))
def test_definite_integrals_against_scipy(f: Node, low: str, high: str) -> None:
    found = algebra.definite(f, "x", tree(low), tree(high), truly)
    assert found is not None
    wanted = quad(f, worth(tree(low), VALUES), worth(tree(high), VALUES))
    assert close(worth(found, VALUES), wanted, 1 + abs(wanted)), text(found)


@settings(max_examples=25)
@given(waves)
def test_functions_against_scipy(f: Node) -> None:
    found = algebra.definite(f, "x", Number("0"), Name("L"), truly)
    assume(found is not None)
    assert found is not None
    assert close(worth(found, VALUES), quad(f, 0.0, VALUES["L"])), text(found)
    F = algebra.antiderivative(f, "x", truly)
    assert F is not None
    assert close(at(F, 4.49) - at(F, 0.31), quad(f, 0.31, 4.49)), text(F)


CLOSED = [
    "sin(pi*x/L)", "x*sin(pi*x/L)", "x^2*cos(k*x)", "exp(-k*x)*cos(k*x)", "sqrt(a + b*x)", "x/(a + x)^3",
    "1/(a^2 + x^2)", "x*ln(1 + x/a)", "cosh(x/c)", "tanh(k*x)", "sin(k*x)^2", "sin(k*x)*cos(k*x)",
    "w*<x - a>^1*sin(k*x)", "exp(-k*x)*<x - b>^0", "(a + x)^1.5", "cbrt(a + x)",
    "x^2/(I_1 + (I_2 - I_1)*x/L)^3",
    "P*x*<x - a>^0/sqrt(b + x)", "1/(1 + exp(k*x))", "atan(x/a)", "x*<L - x>^2", "<k*x - 1>^2*x", "1/(b + x)",
    "log10(1 + x)", "x/(E*(I_1 + (I_2 - I_1)*<x - 2>^0 + (I_3 - I_2)*<x - 4>^0))",
    "(P*x - w*<x - a>^2/2)^2/(2*E*I)", "(P*x - w*<x - a>^1)*(x - <x - b>^1)/(E*I)",
    "1/(I_1 + (I_2 - I_1)*<x - L/3>^0 + (I_3 - I_2)*<x - 2*L/3>^0)",
]  # fmt: skip


@pytest.mark.parametrize("typed", CLOSED)
def test_closed_forms_against_scipy(typed: str) -> None:
    from scipy import integrate

    f = tree(typed)
    found = algebra.definite(f, "x", Number("0"), Name("L"), truly)
    F = algebra.antiderivative(f, "x", truly)
    assert found is not None
    assert F is not None
    inside = [*BREAKS, 5 / 3, 10 / 3, 1 / 0.9]
    wanted, _ = integrate.quad(lambda t: at(f, t), 0, 5, points=inside, limit=200)
    assert close(worth(found, VALUES), wanted), text(found)
    assert close(at(F, 5.0) - at(F, 0.0), wanted), text(F)
    assert algebra.vanishes_at_zero(F, "x", truly) == (abs(at(F, 0.0)) < 1e-12)


@pytest.mark.parametrize(
    "typed", ["exp(-x^2)", "sin(x)/x", "min(x, a)", "sqrt(1 + x^4)", "abs(x)", "<x^2 - a>^1"]
)
def test_without_a_closed_form_there_is_none(typed: str) -> None:
    assert algebra.antiderivative(tree(typed), "x") is None
    assert algebra.definite(tree(typed), "x", Number("0"), Name("L")) is None


@pytest.mark.parametrize(("f", "vanishes"), [("w*x", True), ("1/x", False), ("x^n", True), ("cos(x)", True),
                                             ("1/x^2", False), ("x^(-0.5)", True)])  # fmt: skip
def test_whether_one_vanishes_at_zero(f: str, vanishes: bool) -> None:
    F = algebra.antiderivative(tree(f), "x")
    assert F is not None
    if f != "x^n":
        assert algebra.vanishes_at_zero(F, "x") is vanishes
    else:
        assert algebra.vanishes_at_zero(F, "x") is False  # 0^(n + 1) has no value for every n


def test_the_caller_says_which_brackets_are_on_at_zero() -> None:
    f = tree("w*<x + a>^1")
    assert printed(algebra.antiderivative(f, "x")) == "w*<x + a>^2/2"
    opened = algebra.antiderivative(f, "x", lambda node: node == Name("a"))
    assert opened is not None
    assert close(at(opened, 0.0), 0.0)
    asked: list[str] = []

    def ask(node: Node) -> bool:
        asked.append(text(node))
        return False

    algebra.definite(tree("P*<x - a>^1"), "x", Number("0"), Name("L"), ask)
    assert "-a" in asked


def test_typed_brackets_need_no_word() -> None:
    assert printed(algebra.antiderivative(tree("<x + 2>^1"), "x")) == "<x + 2>^2/2 - 2"
    assert printed(algebra.definite(tree("<x - 2 m>^1"), "x", tree("0 m"), tree("5 m"))) == "(3 m)^2 / 2"


def printed(node: Node | None) -> str | None:
    return None if node is None else text(node)


# --- SymPy's own brackets -----------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("typed", "places"),
    [
        ("P*<x - a>^0", [("P", "a", 0)]),
        ("P*<x - a>^1", [("P", "a", 1)]),
        ("w*<x - a>^2/2 - w*<x - b>^2/2", [("w/2", "a", 2), ("-w/2", "b", 2)]),
        ("R*<x - 0>^1 - P*<x - a>^1 + M_0*<x - b>^0", [("R", "0", 1), ("-P", "a", 1), ("M_0", "b", 0)]),
        ("w*<x - a>^3/(6*L)", [("w/(6*L)", "a", 3)]),
    ],
)  # fmt: skip
def test_brackets_against_sympy(typed: str, places: list[tuple[str, str, int]]) -> None:
    import sympy

    symbols = {n: sympy.Symbol(n, real=True) for n in (*VALUES, "x")}
    theirs = sympy.integrate(
        sum(
            sympy.sympify(factor, locals=symbols)
            * sympy.SingularityFunction(symbols["x"], sympy.sympify(place, locals=symbols), order)
            for factor, place, order in places
        ),
        symbols["x"],
    )
    ours = algebra.antiderivative(tree(typed), "x")
    assert ours is not None
    values = {symbols[n]: v for n, v in VALUES.items()}
    for place in AWAY:
        known = float(theirs.subs({**values, symbols["x"]: place}).evalf())
        assert close(at(ours, place), known)


# --- derivatives --------------------------------------------------------------------------------------------

DIFFERENTIABLE = [
    "x^2*sin(k*x)", "x/(a + x)", "sqrt(a + b*x)", "exp(-k*x)*(P*cos(k*x) + w*sin(k*x))", "ln((a + x)/a)",
    "log10(a + x)", "tan(x/L)", "sec(x/L)", "asin(x/(2*L))", "acos(x/(2*L))", "atan(x)", "sinh(k*x)",
    "cosh(k*x)", "tanh(k*x)", "abs(x - b)", "cbrt(a + x)", "x^k", "k^x", "x^x", "(L^2 - x^2)^1.5",
    "1/(a + x)^2",
    "x*<x - a>^2*<b - x>^1", "<x - a>^2/(E*I)", "sin(<x - a>^2)", "(P*x - w*<x - a>^2/2)^2/(2*E*I)",
    "1/(1 + <x - a>^1)", "sqrt(x^2)", "(x + a)*(x + b)*(x + c)", "P/(E*I)*(x^3/6 - L*x^2/2)",
]  # fmt: skip


@pytest.mark.parametrize("typed", DIFFERENTIABLE)
def test_derivatives_against_differences(typed: str) -> None:
    f = tree(typed)
    slope = algebra.derivative(f, "x")
    for place in AWAY:
        step = 1e-4
        values = [at(f, place + i * step) for i in (-2, -1, 1, 2)]
        wanted = (values[0] - 8 * values[1] + 8 * values[2] - values[3]) / (12 * step)
        assert abs(at(slope, place) - wanted) <= 1e-7 * max(1.0, abs(wanted)), text(slope)


def test_a_jump_is_left_out_and_can_be_told() -> None:
    f = tree("R*x - P*<x - a>^0 + w*<x - b>^1 - P*<2*x - 3 m>^0")
    assert text(algebra.derivative(f, "x")) == "R + w*<x - b>^0"
    assert [text(n) for n in algebra.jumps_in(f, "x")] == ["a", "3 m / 2"]
    assert [text(n) for n in algebra.breaks_in(f, "x")] == ["a", "b", "3 m / 2"]


@pytest.mark.parametrize("typed", ["min(x, a)", "round_up(x, 2)"])
def test_no_rule_no_derivative(typed: str) -> None:
    with pytest.raises(algebra.AlgebraFailure) as failure:
        algebra.derivative(tree(typed), "x")
    assert failure.value.slug == "no-closed-form"


def test_opaque_parts_without_the_variable_pass_through() -> None:
    found = algebra.definite(tree("min(P, w)*x/round_up(a, 2)"), "x", Number("0"), Name("L"))
    assert printed(found) == "L^2*min(P, w)/(2*round_up(a, 2))"


# --- brackets -----------------------------------------------------------------------------------------------


@settings(max_examples=150)
@given(st.one_of(polynomials, stepped))
def test_single_brackets_have_the_same_values(f: Node) -> None:
    found = algebra.single_brackets(f, "x")
    for place in AWAY:
        assert close(at(found, place), at(f, place)), text(found)


@settings(max_examples=100)
@given(polynomials)
def test_each_term_holds_one_bracket(f: Node) -> None:
    from loadpath.algebra.terms import expanded, read

    for term in expanded(read(algebra.single_brackets(f, "x"))):
        held = [e for n, e in term.factors if isinstance(n, Bracket) and algebra.depends_on(n, "x")]
        assert held in ([], [1])


def test_an_order_is_never_guessed() -> None:
    found = text(algebra.single_brackets(tree("<x - a>^0*<x - b>^0 + <x - 2 m>^0*<x - 30 mm>^0"), "x"))
    assert found == "<x - max(a, b)>^0 + <x - max(2 m, 30 mm)>^0"


# --- limits -------------------------------------------------------------------------------------------------

LIMITS: list[tuple[str, str, str | None]] = [
    # source: standard limits, from memory
    ("sin(x)/x", "0", "1"), ("tan(x)/x", "0", "1"), ("(1 - cos(x))/x^2", "0", "1/2"),
    ("(exp(x) - 1)/x", "0", "1"), ("ln(1 + x)/x", "0", "1"), ("(x^2 - a^2)/(x - a)", "a", "2*a"),
    ("sinh(x)/x", "0", "1"), ("(cosh(x) - 1)/x^2", "0", "1/2"), ("(sec(x) - 1)/x^2", "0", "1/2"),
    ("tan(x*L)/x", "0", "L"), ("sin(x*L)/sin(x*a)", "0", "L/a"), ("x*ln(x)", "0", "0"),
    ("1/x", "0", None), ("abs(x)/x", "0", None), ("<x - a>^0", "a", None), ("<x - a>^1", "a", "0"),
    ("<x - a>^2/(x - a)", "a", "0"), ("w*x^2/2", "L", "w*L^2/2"), ("P*<x - a>^1", "L", "P*<L - a>^1"),
    ("(x^3 - 8)/(x - 2)", "2", "12"), ("sqrt(x)", "a", "sqrt(a)"), ("(sqrt(1 + x) - 1)/x", "0", "1/2"),
    ("(x - sin(x))/x^3", "0", "1/6"), ("3*(tan(x) - x)/x^3", "0", "1"), ("exp(x)", "a", "exp(a)"),
    ("(1 + x)^(1/x)", "0", "exp(1)"),
    ("atan(1/x)", "0", None), ("x/sin(x)", "0", "1"),
    # source: amplification of a beam column tends to 1 without thrust, from memory
    ("12*(2*sec(x) - x^2 - 2)/(5*x^4)", "0", "1"), ("6*(1/sin(2*x) - 1/(2*x))/(2*x)", "0", "1"),
    ("(1 - x*L/tan(x*L))/x^2", "0", "L^2/3"), ("k*cos(x)", "0", "k"), ("<x - a>^1/x", "0", None),
]  # fmt: skip


@pytest.mark.parametrize(("typed", "place", "wanted"), LIMITS)
def test_limits(typed: str, place: str, wanted: str | None) -> None:
    assert printed(algebra.limit(tree(typed), "x", tree(place))) == wanted


# --- simpler forms ------------------------------------------------------------------------------------------

SIMPLE = [
    "(x^2 - a^2)/(x - a)", "P*L/4 + P*L/8", "1/(1/a + 1/b)", "sqrt(x^2)", "(a + b)^2 - 2*a*b",
    "sin(x)^2 + cos(x)^2",
    "a*<x - b>^1 + 2*a*<x - b>^1", "P/(E*I)*x + w*x/(E*I)", "(E*I)^0.5*(E*I)^0.5", "exp(ln(a))", "x - x + 0",
    "abs(x)^2", "sqrt(4*a)", "cbrt(8*a)", "0.658^(a/b)*c", "(a/b)^(1/3)", "2/3*a - a/6", "-(-x)",
    "a - (b - c)",
]  # fmt: skip


@pytest.mark.parametrize("typed", SIMPLE)
def test_simplified_has_the_same_value_and_is_no_longer(typed: str) -> None:
    f = tree(typed)
    found = algebra.simplified(f)
    for place in AWAY:
        assert close(at(found, place), at(f, place)), text(found)
    assert len(text(found)) <= len(text(f))


def test_no_sign_is_assumed() -> None:
    assert text(algebra.simplified(tree("sqrt(a^2)"))) == "abs(a)"
    found = algebra.derivative(tree("sqrt(x^2)"), "x")
    assert worth(found, {"x": -2.0}) == -1


def test_results_are_typed_nowhere() -> None:
    from loadpath.formula.tree import span_of, walk

    found = algebra.antiderivative(tree("P*x*max(a, b) + <x - a>^1/L + 12 kN"), "x")
    assert found is not None
    assert {span_of(n) for n in walk(found) if isinstance(n, Node)} == {(0, 0)}


def test_denominators_tell_where_an_integrand_is_unbounded() -> None:
    found = algebra.denominators(tree("1/(x - a) + (b - x)^(-2) + ln(c*x) + x^2 + tan(k*x)"), "x")
    assert [text(n) for n in found] == ["x - a", "b - x", "c*x", "cos(k*x)"]


WAYS: list[Callable[[Node], object]] = [
    lambda f: algebra.antiderivative(f, "x"),
    lambda f: algebra.derivative(f, "x"),
    lambda f: algebra.simplified(f),
]


@pytest.mark.parametrize("work", WAYS)
def test_nothing_is_left_undefined_without_a_finding(work: Callable[[Node], object]) -> None:
    """Dividing by 0 ends in None, in the failure, or in the tree as it was."""
    f = tree("x/(a - a)")
    try:
        found = work(f)
    except algebra.AlgebraFailure as failure:
        assert failure.slug == "no-closed-form"
    else:
        assert found in (None, f)


def test_pi_is_exact() -> None:
    found = algebra.definite(tree("sin(pi*x)"), "x", Number("0"), Number("1"))
    assert printed(found) == "2/pi"
    assert math.isclose(worth(found, {}), 2 / math.pi) if found else False


def test_a_call_of_an_unknown_function_of_x_has_no_form() -> None:
    assert algebra.antiderivative(Call("M", (x,)), "x") is None
