"""Canonical text reads back to an equal tree."""

from __future__ import annotations

import pytest
from hypothesis import given
from trees import conditions, trees

from loadpath.formula.canonical import statement_text, text
from loadpath.formula.lines import Item
from loadpath.formula.parser import parse_block
from loadpath.formula.reader import Reader
from loadpath.formula.tree import Binary, Factor, Name, Negative, Node, Number, Shown
from loadpath.text import Source, Span


def expression(typed: str) -> Node:
    reader = Reader(Item(typed, 0, ()))
    node = reader.expression()
    reader.expect_end()
    return node


@given(trees)
def test_canonical_text_reads_back_equal(tree: Node) -> None:
    assert expression(text(tree)) == tree


@given(conditions)
def test_canonical_conditions_read_back_equal(tree: Node) -> None:
    typed = text(tree)
    reader = Reader(Item(typed, 0, ()))
    assert reader.condition() == tree
    assert reader.done()


@given(trees)
def test_canonical_text_is_its_own_canonical_text(tree: Node) -> None:
    assert text(expression(text(tree))) == text(tree)


@pytest.mark.parametrize(
    ("typed", "canonical"),
    [
        ("a+b*c", "a + b*c"),
        ("( a + b ) * c", "(a + b)*c"),
        ("a/(b*c)", "a/(b*c)"),
        ("a/b*c", "a/b*c"),
        ("-x^2", "-x^2"),
        ("(-x)^2", "(-x)^2"),
        ("a^b^c", "a^b^c"),
        ("(a^b)^c", "(a^b)^c"),
        ("a-(b-c)", "a - (b - c)"),
        ("12 kN/m * L", "12 kN/m * L"),
        ("W/(1/2 in)", "W / (1/2 in)"),
        ("pi*d^2/4", "pi*d^2/4"),
        ("< x-a >^1", "<x - a>^1"),
        ("min( a,b )", "min(a, b)"),
        ("(f_c as psi)", "(f_c as psi)"),
        ("-20 degC", "-20 degC"),
        ("-(20 degC)", "-(20 degC)"),
    ],
)
def test_spacing(typed: str, canonical: str) -> None:
    assert text(expression(typed)) == canonical


def test_what_is_printed_keeps_its_brackets() -> None:
    """A printed negative or a quantity that is the base of a power stands in brackets."""
    assert text(Binary("^", Shown("-3", "mm"), Number("2"))) == "(-3 mm)^2"
    assert text(Binary("*", Name("a"), Shown("-3", ""))) == "a*(-3)"
    assert text(Binary("^", Shown("3", "mm"), Number("2"))) == "(3 mm)^2"
    assert text(Factor(Binary("+", Name("a"), Name("b")), "12", "in/ft")) == "(a + b) * 12 in/ft"
    assert text(Negative(Shown("-3", "mm"))) == "-(-3 mm)"


@pytest.mark.parametrize(
    ("typed", "canonical"),
    [
        ("P=20 kN", "20 kN"),
        ('curve = "b" of "a","b"', '"b" of "a", "b"'),
        ("M(x [m],n) = n*x", "M(x [m], n) = n*x"),
        ("strength bending: s<=f_y", "s <= f_y"),
        ("valid: 3<=t/d<=12 for chi,a", "3 <= t/d <= 12 for chi, a"),
        ("check: a=b within 0.1 %", "a = b within 0.1 %"),
        ("sigma = P/", "sigma = P/"),
    ],
)
def test_statements(typed: str, canonical: str) -> None:
    source = Source("", "    " + typed)
    (statement,), _ = parse_block(source, Span(0, len(source.text)))
    assert statement_text(statement) == canonical
