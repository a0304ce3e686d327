"""Breaks, and the polynomials between them."""

from __future__ import annotations

import math

import numpy as np
import pytest
from curves import Formula, cases, tree
from hypothesis import given
from hypothesis import strategies as st

from loadpath.formula.canonical import text as canonical
from loadpath.numeric import bracket_places, coefficients, degree_in, left_of, pieces
from loadpath.numeric.polynomial import at, roots_in_unit


def places(f: Formula) -> tuple[float, ...]:
    return bracket_places(f.node, f.x, f.value)


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("R*x - P*<x - a>^1 + w*<x - 3 m>^2/2", (2.0, 3.0)),
        ("<a - x>^0", (2.0,)),
        ("<2*x - a>^1", (1.0,)),
        ("<x - a - 1 m>^1", (3.0,)),
        ("<x>^1", (0.0,)),
        ("<L - a>^1*x", ()),
        ("<x - 3*a/3>^0 + <x - a>^1", (2.0,)),
        ("<x^2 - a^2>^1", (-2.0, 2.0)),
        ("sin(x)*<x - a>^1", (2.0,)),
        ("<sin(x)>^1", ()),
        ("sum(P*<x - k*a>^1, k, 1, 3)", (2.0, 4.0, 6.0)),
        ("sum(P*<x - k*a>^1, k, 0 - 1, 1)", (-2.0, 0.0, 2.0)),
        ("integral(w*<t - a>^0, t, 0 m, x) + <x - 5 m>^0", (5.0,)),
    ],
)
def test_places(text: str, expected: tuple[float, ...]) -> None:
    assert places(Formula(text, R=1.0, P=1.0, a=2.0, w=1.0, L=6.0)) == pytest.approx(expected)


def test_places_of_conditions() -> None:
    f = Formula(cases("x^2 when 0 m <= x and x < a", "3*x when a <= x <= 2*a", "7 otherwise"), a=2.0)
    assert places(f) == (0.0, 2.0, 4.0)
    assert pieces(f.node, "x", 0, 6, f.value) is None


@pytest.mark.parametrize(
    "text",
    ["sin(x)", "1/x", "x^0.5", "x^(1/2)", "2^x", "sqrt(x)", "abs(x - a)", "max(x, a)", "<sin(x)>^1", "x^-1",
     "x^25", "<x - a>^13*<x>^12", "(x as mm)"],
)  # fmt: skip
def test_what_is_no_piecewise_polynomial(text: str) -> None:
    f = Formula(text, a=2.0)
    assert pieces(f.node, "x", 0.5, 6, f.value) is None


def test_the_pieces_of_a_simple_beam() -> None:
    """source: M = 3 P x/5 up to the load at 2/5 of the span, then falling to 0 (statics)."""
    f = Formula("R*x - P*<x - a>^1", R=6e3, P=10e3, a=4.0)
    first, second = pieces(f.node, "x", 0, 10, f.value) or ()
    assert (first.start, first.end, first.coefficients) == (0, 4, (0.0, 24e3))
    assert (second.start, second.end) == (4, 10)
    assert second.coefficients == pytest.approx((24e3, -24e3))


def test_a_stretch_without_shear_is_constant_to_the_last_bit() -> None:
    """Third-point loading with thirds that don't add up in floats."""
    f = Formula("0.1*P*x/0.3 - P*<x - L/3>^1/3", P=3.3e3, L=1.7)
    _, middle = pieces(f.node, "x", 0, 1.7, f.value) or ()
    assert len(middle.coefficients) == 1


numbers = st.integers(-20, 20).map(lambda i: i / 4)
terms = st.one_of(
    st.builds(lambda c, n: f"({c})*x^{n}", numbers, st.integers(0, 5)),
    st.builds(lambda c, a, n: f"({c})*<x - {abs(a)}>^{n}", numbers, numbers, st.integers(0, 4)),
    st.builds(lambda c, a, n: f"({c})*<{abs(a)} - x>^{n}", numbers, numbers, st.integers(0, 3)),
    st.builds(lambda a, b, n: f"<x - {abs(a)}>^{n}*<x - {abs(b)}>^1", numbers, numbers, st.integers(0, 2)),
    st.builds(lambda a, n: f"((x - {abs(a)})/4)^{n}", numbers, st.integers(0, 4)),
    st.builds(lambda a, n: f"<x^2 - {a * a}>^{n}", numbers, st.integers(0, 1)),
)
texts = st.lists(terms, min_size=1, max_size=6).map(" + ".join)
"""Random piecewise polynomials of x with breaks between 0 and 5."""


@given(texts)
def test_pieces_have_the_values_of_the_tree(text: str) -> None:
    f = Formula(text)
    found = pieces(f.node, "x", 0, 5, f.value)
    assert found is not None
    assert [p.start for p in found[1:]] == [p.end for p in found[:-1]]
    for piece in found:
        for t in (1e-6, 0.2, 0.5, 0.77, 1 - 1e-6):
            x = piece.start + t * (piece.end - piece.start)
            t = (x - piece.start) / (piece.end - piece.start)  # of the place as rounded
            assert at(piece.coefficients, t) == pytest.approx(f(x), abs=max(4 * piece.rounding(t), 1e-300))


def test_twenty_spans_lose_no_digits() -> None:
    """A cubic per span far from the origin; source: the same in numpy's longer floats."""
    text = " + ".join(f"({(-1) ** k * (k + 1)})*<x - {6 * k}>^3" for k in range(20))
    f = Formula(text)
    last = (pieces(f.node, "x", 0, 120, f.value) or ())[-1]
    for t in np.linspace(0, 1, 7):
        x = np.longdouble(114) + np.longdouble(t) * 6
        exact = sum((-1) ** k * (k + 1) * (x - 6 * k) ** 3 for k in range(20))
        assert at(last.coefficients, float(t)) == pytest.approx(float(exact), rel=1e-13)


@given(st.lists(st.integers(0, 40).map(lambda i: i / 40), min_size=1, max_size=6))
def test_roots_of_polynomials(roots: list[float]) -> None:
    """source: the roots that the polynomial was multiplied from; numpy multiplies it out."""
    c = tuple(float(v) for v in np.poly(roots)[::-1])
    found = roots_in_unit(c)
    assert len(found) >= 1
    for root in (r for r in roots if roots.count(r) == 1):
        slope = math.prod(root - other for other in roots if other != root)
        sharp = 100 * 2.3e-16 * sum(abs(v) * root**k for k, v in enumerate(c)) / abs(slope)
        # as sharp as the rounding of the coefficients allows, where that tells it from the next
        assert sharp > 0.004 or min(abs(root - t) for t in found) <= sharp + 1e-16
    for t in found:
        assert abs(at(c, t)) <= 1e-12 * sum(map(abs, c))


def test_roots_of_none() -> None:
    assert roots_in_unit(()) == () == roots_in_unit((0.0, 0.0)) == roots_in_unit((3.0,))
    assert roots_in_unit((1.0, 0.0, 1.0)) == ()
    assert roots_in_unit((0.25, -1.0, 1.0)) == (0.5,)


@pytest.mark.parametrize(
    ("text", "at_place", "expected"),
    [
        ("<x - a>^0 + x", 2.0, "0 + x"),
        ("<x - a>^0 + <x - 3 m>^0", 2.0, "0 + <x - 3 m>^0"),
        ("<a - x>^0", 2.0, "<a - x>^0"),
        ("<x - a>^1", 2.0, "<x - a>^1"),
        ("sin(<x - a>^0)/2", 2.0, "sin(0)/2"),
        ("<x - a>^0", 2.5, "<x - a>^0"),
        ("<L - a>^0*x", 2.0, "<L - a>^0*x"),
        ("sum(P*<x - k*a>^0, k, 1, 2)", 2.0, "P*0 + P*<x - 2*a>^0"),
    ],
)
def test_just_left_of_a_place(text: str, at_place: float, expected: str) -> None:
    f = Formula(text, a=2.0, L=6.0, P=1.0)
    assert canonical(left_of(f.node, "x", at_place, f.value)) == expected


def test_an_untouched_tree_stays_the_same_object() -> None:
    f = Formula("R*x - P*<x - a>^1", R=1.0, P=1.0, a=2.0)
    assert left_of(f.node, "x", 2.0, f.value) is f.node


@pytest.mark.parametrize(("low", "high"), [(1, 1), (2, 1), (0, math.inf), (math.nan, 1)])
def test_bounds_that_are_none(low: float, high: float) -> None:
    with pytest.raises(ValueError):
        pieces(tree("x"), "x", low, high, lambda _: 0.0)


# --- in one unknown -----------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("text", "degree", "expected"),
    [
        ("x^2 - 5*x + 6", 2, (6.0, -5.0, 1.0)),
        ("(x - a)^3/4", 3, (-2.0, 3.0, -1.5, 0.25)),
        ("a*L", 0, (12.0,)),
        ("x*(x + 1) - x^2", 2, (0.0, 1.0, 0.0)),
        ("x^0", 0, (1.0,)),
        ("1/x", None, None),
        ("sqrt(x)", None, None),
        ("x^0.5", None, None),
        ("x^a", None, None),
        ("<x - a>^1", None, None),
        ("<L - a>^2*x", 1, (0.0, 16.0)),
        ("x^100", 100, None),
    ],
)
def test_degree_and_coefficients(text: str, degree: int | None, expected: tuple[float, ...] | None) -> None:
    f = Formula(text, a=2.0, L=6.0)
    assert degree_in(f.node, frozenset(["x", "y"])) == degree
    found = coefficients(f.node, "x", f.value)
    assert found == (None if expected is None else pytest.approx(expected))


def test_two_unknowns_have_no_degree() -> None:
    assert degree_in(tree("x*y"), frozenset(["x", "y"])) is None
    assert degree_in(tree("x*y"), frozenset(["x"])) == 1
