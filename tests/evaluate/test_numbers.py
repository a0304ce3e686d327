"""The compiled plan: the number that each tree comes to, and what is said where it comes to none."""

from __future__ import annotations

import math
from fractions import Fraction

import pytest
from hypothesis import assume, given
from hypothesis import strategies as st

import loadpath
from loadpath.evaluate.explain import run
from loadpath.evaluate.failure import Failure
from loadpath.evaluate.numbers import Compiler
from loadpath.formula.lines import Item
from loadpath.formula.parser import parse_block
from loadpath.formula.reader import Reader
from loadpath.formula.signs import holds, nearly
from loadpath.formula.statements import FunctionDefinition
from loadpath.formula.tree import Binary, Negative, Node, Number
from loadpath.text import Source, Span

VALUES = {"P": 20e3, "L": 3.0, "n": 2.0, "zero": 0.0, "minus": -2.0, "curve": "b"}


def functions(*lines: str) -> dict[str, FunctionDefinition]:
    source = Source("", "\n".join("    " + line for line in lines))
    statements, found = parse_block(source, Span(0, len(source.text)))
    assert found == ()
    return {s.name: s for s in statements if isinstance(s, FunctionDefinition)}


FUNCTIONS = functions("f(x) = 2*x", "g(x, y) = f(x) + y*n", "h(x) = 1/x")


def value(text: str, **own: object) -> object:
    compiler = Compiler(FUNCTIONS)
    reader = Reader(Item(text, 0, ()))
    node = (
        reader.condition()
        if any(sign in text for sign in "<>=") and "<x" not in text
        else reader.expression()
    )
    return run(compiler.compile_tree(node, frozenset(own)), node, VALUES, own, compiler)


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("12_000", 12000),
        ("1.2e3", 1200),
        ("12 kN/m", 12e3),
        ("5/8 in", 0.015875),
        ("2 1/2 in", 0.0635),
        ("12 ft 6 in", 3.81),
        ("12 ft 6 1/2 in", 3.8227),
        ("20 degC", 293.15),
        ("-20 degC", 253.15),
        ("12 %", 0.12),
        ("180 deg", math.pi),
        ("P*L/4", 15e3),
        ("-n^2", -4),
        ("(-n)^2", 4),
        ("n^-1", 0.5),
        ("2^n^2", 16),
        ("P - L - n", 20e3 - 5),
        ("sqrt(P)", math.sqrt(20e3)),
        ("min(P, L, n)", 2),
        ("max(P, L, n)", 20e3),
        ("pi*n", 2 * math.pi),
        ("(P as kN)", 20),
        ("(20 degC as degF)", 68),
        ("round_up(L, 2)", 4),
        ("round_down(L, 2)", 2),
        ("f(3)", 6),
        ("g(3, n)", 10),
        ("g(f(3), f(1))", 16),
    ],
)
def test_values(text: str, expected: float) -> None:
    """In coherent SI. source: NIST SP 811 (2008), appendix B, for the inch and the foot (from memory)."""
    assert value(text) == pytest.approx(expected, rel=1e-14)


def test_the_parameters_of_a_function_hide_nothing_of_the_sheet() -> None:
    assert value("x + n", x=5.0) == 7


# --- exact arithmetic, worked in another way ----------------------------------------------------------------


def exact(node: Node) -> Fraction:
    match node:
        case Number(text=text):
            return Fraction(text)
        case Negative(operand=operand):
            return -exact(operand)
        case Binary(operator="+", left=left, right=right):
            return exact(left) + exact(right)
        case Binary(operator="-", left=left, right=right):
            return exact(left) - exact(right)
        case Binary(operator="*", left=left, right=right):
            return exact(left) * exact(right)
        case Binary(left=left, right=right):
            return exact(left) / exact(right)
    raise TypeError(node)


arithmetic: st.SearchStrategy[Node] = st.recursive(
    st.sampled_from(("0.5", "2", "3", "7.25", "12000")).map(Number),
    lambda inner: st.builds(Negative, inner) | st.builds(Binary, st.sampled_from("+-*/"), inner, inner),
    max_leaves=8,
)


@given(arithmetic)
def test_arithmetic_against_exact_fractions(tree: Node) -> None:
    try:
        expected = float(exact(tree))
    except ZeroDivisionError:
        assume(False)
    compiler = Compiler({})
    assert float(compiler.compile_tree(tree)({}, {})) == pytest.approx(expected, rel=1e-9, abs=1e-6)


# --- relations ----------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("L <= 3", True),
        ("L < 3", False),
        ("L < 3.0000001", True),
        ("2 < L <= 3", True),
        ("2 < L < 3", False),
        ("n = 2", True),
        ('curve = "b"', True),
        ('curve = "a"', False),
        ("L < 3 or n = 2", True),
        ("L < 3 and n = 2", False),
        ("zero = 0 or h(zero) < 1", True),
        ("zero > 0 and h(zero) < 1", False),
    ],
)
def test_conditions(text: str, expected: bool) -> None:
    assert value(text) is expected


@given(st.floats(-1e9, 1e9), st.floats(-1e9, 1e9))
def test_of_two_values_one_relation_holds(a: float, b: float) -> None:
    assert [holds("<", a, b), nearly(a, b), holds(">", a, b)].count(True) == 1
    assert holds("<=", a, b) == (holds("<", a, b) or nearly(a, b)) == holds(">=", b, a)


# --- Macaulay brackets --------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("x", "power", "expected"),
    [(5.0, 1, 2), (5.0, 2, 4), (5.0, 0, 1), (2.0, 0, 0), (2.0, 1, 0), (2.0, 3, 0), (3.0, 0, 1), (3.0, 1, 0)],
)
def test_a_macaulay_bracket(x: float, power: int, expected: float) -> None:
    """source: the contract of the language, section 3: `<0>^0 = 1`."""
    assert value(f"<x - 3>^{power}", x=x) == expected


def test_within_a_bracket_a_difference_within_rounding_is_zero() -> None:
    other = 0.1 + 0.2
    assert other > 0.3
    assert value("<x - y>^0", x=0.3, y=other) == 1
    assert value("<x - y>^1", x=other, y=0.3) == 0
    assert value("<x - y>^0", x=0.3, y=0.3 + 1e-9) == 0


# --- failures -----------------------------------------------------------------------------------------------


def failure(*lines: str) -> tuple[str, str, str]:
    """Slug, the part that it points at, and the message of the only finding of a sheet."""
    text = "---\ntitle: t\n---\n\n" + "\n".join("    " + line for line in lines)
    (found,) = loadpath.evaluate(loadpath.read_text(text)).findings
    assert found.span is not None and found.help
    return found.slug, found.source.cut(found.span), found.message


@pytest.mark.parametrize(
    ("expression", "slug", "place", "says"),
    [
        ("P/(t - t)", "division-by-zero", "/", ("`t - t` is 0", "`P` (20 kN)")),
        ("1/h(t)", "division-by-zero", "/", ("`h(t)` is 0",)),
        ("(t - t)^-1", "division-by-zero", "^", ("`t - t` is 0",)),
        ("sqrt(t - 2*t)", "root-of-negative", "sqrt", ("`t - 2*t` is -6 mm",)),
        ("(n - 3)^0.5", "root-of-negative", "^", ("-1", "0.5")),
        ("acos(n)", "outside-domain", "acos", ("`n` is 2", "-1 to 1")),
        ("ln(n - 2)", "outside-domain", "ln", ("`n - 2` is 0",)),
        ("tan(90 deg)", "outside-domain", "tan", ("cosine",)),
        ("round_up(t, 0 mm)", "outside-domain", "round_up", ("above 0",)),
        ("atan2(t - t, t - t)", "outside-domain", "atan2", ("both",)),
        ("exp(1000*n)", "not-finite", "exp", ("`1000*n` is 2000",)),
        ("1e200*n*1e200", "not-finite", "*", ("too large",)),
        ("(1e10*n)^200", "not-finite", "^", ("too large",)),
    ],
)
def test_a_number_that_cannot_be_had(expression: str, slug: str, place: str, says: tuple[str, ...]) -> None:
    given_ = ("P = 20 kN", "t = 6 mm", "n = 2", "h(x [mm]) [1] = (t - x)/P*(1 kN/mm)")
    got = failure(*given_, f"r = {expression}")
    assert got[:2] == (slug, place)
    for words in says:
        assert words in got[2]


def test_the_first_operation_that_fails_is_named() -> None:
    assert failure("a = 0", "r = 1/a + sqrt(a - 1)")[1] == "/"
    assert failure("a = 0", "r = sqrt(a - 1)/a")[1] == "sqrt"


def test_a_failure_within_a_function_says_for_which_line_it_was_worked() -> None:
    text = "---\ntitle: t\n---\n\n    f(x) = 1/x\n    a = 0\n    b = f(a)\n    c = 2*b\n"
    trace = loadpath.evaluate(loadpath.read_text(text))
    (found,) = trace.findings
    assert (found.slug, found.line) == ("division-by-zero", 5)
    assert [remark.text for remark in found.remarks] == ["worked for line 7"]
    assert trace["c"].why == trace["b"].why == "not computed because of line 5"


def test_no_branch_holds() -> None:
    slug, place, message = failure(
        "r = 6", 'w = "a" of "a"', "c = cases", "    1  when r < 3", '    2  when r > 9 and w = "a"'
    )
    assert (slug, place) == ("no-branch", "cases")
    assert "`r` is 6" in message and '`w` is "a"' in message


def test_a_failure_is_no_exception_that_a_user_sees() -> None:
    with pytest.raises(Failure):
        value("1/zero")
