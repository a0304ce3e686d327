"""Expressions, quantities, relations: what each text means, and what is said of those that mean nothing."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from loadpath.formula.lines import Item
from loadpath.formula.mistake import Mistake
from loadpath.formula.quantities import LARGEST_EXPONENT, LONGEST_NUMBER, LONGEST_UNIT
from loadpath.formula.reader import DEEPEST, MOST_NODES, TALLEST_TREE, Reader
from loadpath.formula.tree import (
    As,
    Binary,
    Bracket,
    Call,
    Logic,
    Name,
    Negative,
    Node,
    Number,
    Part,
    Quantity,
    Relation,
    Word,
    span_of,
    walk,
)
from loadpath.text import Span

a, b, c, x = (Name(n) for n in "abcx")
one, two = Number("1"), Number("2")
half_inch = Quantity((Part("", ("1", "2"), "in"),))
five_eighths = Binary("/", Number("5"), Number("8"))
a_b, b_c, c_a = (Relation(pair, ("<",)) for pair in ((a, b), (b, c), (c, a)))


def read(text: str) -> Node:
    reader = Reader(Item(text, 0, ()))
    node = reader.expression()
    reader.expect_end()
    return node


def condition(text: str) -> Node:
    reader = Reader(Item(text, 0, ()))
    node = reader.condition()
    reader.expect_end()
    return node


def mistake(text: str) -> Mistake:
    with pytest.raises(Mistake) as caught:
        read(text)
    assert caught.value.message and caught.value.help
    return caught.value


def quantity(*parts: tuple[str, tuple[str, str] | None, str]) -> Quantity:
    return Quantity(tuple(Part(*part) for part in parts))


# --- operators ----------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("text", "tree"),
    [
        ("a + b*c", Binary("+", a, Binary("*", b, c))),
        ("a - b - c", Binary("-", Binary("-", a, b), c)),
        ("a/b/c", Binary("/", Binary("/", a, b), c)),
        ("a^b^c", Binary("^", a, Binary("^", b, c))),
        ("-x^2", Negative(Binary("^", x, two))),
        ("(-x)^2", Binary("^", Negative(x), two)),
        ("x^-2", Binary("^", x, Negative(two))),
        ("a*-b", Binary("*", a, Negative(b))),
        ("a - -b", Binary("-", a, Negative(b))),
        ("-a + b", Binary("+", Negative(a), b)),
        ("(a + b)*c", Binary("*", Binary("+", a, b), c)),
        ("<x - a>^1", Bracket(Binary("-", x, a), 1)),
        ("2*<x>^0", Binary("*", two, Bracket(x, 0))),
        ("min(a, b)", Call("min", (a, b))),
        ("f()", Call("f", ())),
        ("(a as psi)", As(a, "psi")),
        ("((a + b) as N/mm^2)", As(Binary("+", a, b), "N/mm^2")),
        ("σ_b", Name("sigma_b")),
        ("B1.M_max", Name("B1.M_max")),
    ],
)
def test_trees(text: str, tree: Node) -> None:
    """source: the contract, section 3: `^` binds tightest and to the right, `-x^2` is `-(x^2)`."""
    assert read(text) == tree


# --- numbers and quantities ---------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("text", "tree"),
    [
        ("12_000", Number("12_000")),
        ("1.2e6", Number("1.2e6")),
        ("2E-3", Number("2E-3")),
        ("12.5 kN/m", quantity(("12.5", None, "kN/m"))),
        ("9.81 m/s^2", quantity(("9.81", None, "m/s^2"))),
        ("12 %", quantity(("12", None, "%"))),
        ("0.24 J/(kg*K)", quantity(("0.24", None, "J/(kg*K)"))),
        ("12e-6 1/K", quantity(("12e-6", None, "1/K"))),
        ("3 K^-1", quantity(("3", None, "K^-1"))),
        ("3 N^(1/2)", quantity(("3", None, "N^(1/2)"))),
        ("5/8 in", quantity(("", ("5", "8"), "in"))),
        ("2 1/2 in", quantity(("2", ("1", "2"), "in"))),
        ("12 ft 6 in", quantity(("12", None, "ft"), ("6", None, "in"))),
        ("12 ft 6 1/2 in", quantity(("12", None, "ft"), ("6", ("1", "2"), "in"))),
        ("-20 degC", quantity(("-20", None, "degC"))),
        ("-20 kN", Negative(quantity(("20", None, "kN")))),
        ("12 kN/m * L", Binary("*", quantity(("12", None, "kN/m")), Name("L"))),
        ("(12 kN/m)*L", Binary("*", quantity(("12", None, "kN/m")), Name("L"))),
        ("5/8", five_eighths),
        ("5/8*a", Binary("*", five_eighths, a)),
        ("2*5/8 in", Binary("*", two, quantity(("", ("5", "8"), "in")))),
        ("a - 1/2 in", Binary("-", a, quantity(("", ("1", "2"), "in")))),
        ("max(1 kN, 2 kN)", Call("max", (quantity(("1", None, "kN")), quantity(("2", None, "kN"))))),
    ],
)
def test_numbers_and_quantities(text: str, tree: Node) -> None:
    """source: the contract of the language, section 3, the paragraph on quantities."""
    assert read(text) == tree


# --- relations ----------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("text", "tree"),
    [
        ("a <= b", Relation((a, b), ("<=",))),
        ("1 < a <= 2", Relation((one, a, two), ("<", "<="))),
        ('a = "b"', Relation((a, Word("b")), ("=",))),
        ("a < b or b < c and c < a", Logic("or", (a_b, Logic("and", (b_c, c_a))))),
        ("(a < b or b < c) and c < a", Logic("and", (Logic("or", (a_b, b_c)), c_a))),
        ("(a + b) < c", Relation((Binary("+", a, b), c), ("<",))),
        ("((a < b))", a_b),
        ("a < <x - b>^1", Relation((a, Bracket(Binary("-", x, b), 1)), ("<",))),
        ("5/8 < a or a < b", Logic("or", (Relation((five_eighths, a), ("<",)), a_b))),
        ("a/b < 1/2 in", Relation((Binary("/", a, b), half_inch), ("<",))),
        ("(1/2 in < a/b or a < b)", Logic("or", (Relation((half_inch, Binary("/", a, b)), ("<",)), a_b))),
    ],
)
def test_conditions(text: str, tree: Node) -> None:
    assert condition(text) == tree


# --- mistakes -----------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("text", "slug", "place", "mend"),
    [
        ("2(a)", "implied-multiplication", "(", "2*("),
        ("a b", "implied-multiplication", "b", "a*b"),
        ("(a)b", "implied-multiplication", "b", ")*b"),
        ("20kN", "implied-multiplication", "kN", "20 kN"),
        ("12%", "implied-multiplication", "%", "12 %"),
        ("3,5", "decimal-comma", ",", "3.5"),
        ("0,125", "decimal-comma", ",", "0.125"),
        ("200,000", "decimal-comma", ",", "200_000"),
        ("1,200,000", "decimal-comma", ",", "1_200_000"),
        ("1,200,000.5", "decimal-comma", ",", "1_200_000.5"),
        ("a**2", "bad-syntax", "**", "^"),
        ("a×b", "bad-syntax", "×", "*"),
        ("a − b", "bad-syntax", "−", "-"),
        ("a²", "bad-syntax", "²", "^2"),
        ("35°", "bad-syntax", "°", "deg"),
        ("a--b", "bad-syntax", "--", "a - (-b)"),
        ("20 kN--rated", "bad-syntax", "--", " -- "),
        ("a — b", "bad-syntax", "—", "--"),
        ("a +- b", "not-available", "+-", "a + (-b)"),
        ("(a + b", "unbalanced-bracket", "(", ")"),
        ("f(a", "unbalanced-bracket", "(", ")"),
        ("<x - a", "unbalanced-bracket", "<", ">"),
        ("a)", "unbalanced-bracket", ")", "delete"),
        ("20 [kN]", "bad-syntax", "[", "20 kN"),
        ("<x - a>", "bad-syntax", "<x - a>", "<x - a>^1"),
        ("<x - a>^n", "bad-syntax", "n", "0, 1, 2"),
        ("<x - a>^1.5", "bad-syntax", "1", "0, 1, 2"),
        (".5", "bad-syntax", ".", "0.5"),
        ("5.", "bad-syntax", ".", "5.0"),
        ("a*", "bad-syntax", "*", "write"),
        ('"b"', "unknown-choice", '"', "when"),
        ("a as psi", "bad-syntax", "as", "(f_c as psi)"),
        ("plates.b at 2", "bad-syntax", "2", "label"),
        ("when", "reserved-word", "when", "when_1"),
        ("W/1/2 in", "mixed-number", "1/2", "W/(1/2 in)"),
        ("W^1/2 in", "mixed-number", "1/2", "W^(1/2 in)"),
        ("1-1/2 in", "mixed-number", "1-1/2", "1 1/2 in"),
        ("12 kN+a", "bad-unit", "kN+", "spaces"),
        ("a = b", "bad-syntax", "=", "one `=`"),
        ("a < b", "bad-syntax", "<", "strength:"),
    ],
)
def test_mistakes(text: str, slug: str, place: str, mend: str) -> None:
    found = mistake(text)
    assert (found.slug, text[found.span.start : found.span.end]) == (slug, place)
    assert mend in found.help


def test_a_hyphen_behind_a_name_is_a_minus() -> None:
    assert read("x1-1/2 in") == Binary("-", Name("x1"), quantity(("", ("1", "2"), "in")))


def test_a_part_without_relation_is_named_from_its_start() -> None:
    with pytest.raises(Mistake) as caught:
        condition("a/b")
    assert (caught.value.slug, caught.value.span) == ("no-relation", Span(0, 3))


# --- limits -------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    "text",
    [
        "(" * 10_000,
        "-(" * 10_000,
        "f(" * 10_000,
        "<" * 10_000,
        "-" + " -" * 10_000 + "a",
        "a^" * 10_000 + "a",
        "+".join("a" * (TALLEST_TREE + 1)),
        "f(" + ", ".join("a" * MOST_NODES) + ")",
        "9" * (LONGEST_NUMBER + 1),
        f"1e{LARGEST_EXPONENT + 1}",
        "1e-" + "9" * 50,
        "3 " + "*".join("m" * LONGEST_UNIT),
        "3 " + "m/" + "(" * 5_000,
    ],
)
def test_what_is_larger_than_the_engine_works_is_said(text: str) -> None:
    assert mistake(text).slug == "over-limit"


def test_just_within_the_limits() -> None:
    assert read("(" * DEEPEST + "a" + ")" * DEEPEST) == a
    assert sum(1 for _ in walk(read("+".join("a" * TALLEST_TREE)))) == 2 * TALLEST_TREE - 1


@given(st.text("ab1 2.,()<>^*/+-=\"[]%°²kN_einas'", max_size=30))
def test_any_text_is_read_or_refused_within_itself(text: str) -> None:
    """Reading never ends in anything but a tree or a mistake, and every span lies within the text."""
    reader = Reader(Item(text, 0, ()))
    try:
        node = reader.condition()
        reader.expect_end()
        spans = [span_of(n) for n in walk(node) if isinstance(n, Node)]
    except Mistake as found:
        spans = [found.span]
        assert found.help
    assert all(0 <= span.start <= span.end <= max(len(text), 1) for span in spans)
