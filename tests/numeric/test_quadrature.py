"""Definite integrals in numbers."""

from __future__ import annotations

import math

import mpmath
import pytest
from curves import Formula, cases
from hypothesis import given
from scipy import special
from test_pieces import texts

from loadpath.numeric import NoConvergence, NotDefined, Quadrature, bracket_places, pieces, quadrature


def of(f: Formula, low: float, high: float) -> Quadrature:
    return quadrature(f, low, high, bracket_places(f.node, f.x, f.value))


@pytest.mark.parametrize(
    ("text", "low", "high", "exact"),
    [
        ("sin(x)", 0, 2, lambda: 1 - mpmath.cos(2)),
        ("exp(-x^2)", 0, 3, lambda: mpmath.sqrt(mpmath.pi) / 2 * mpmath.erf(3)),
        ("sin(x)", 0 - math.pi, math.pi, lambda: 0),
        ("sqrt(x)", 0, 2, lambda: mpmath.mpf(2) ** 1.5 / 1.5),
        ("1/sqrt(x)", 0, 4, lambda: 4),
        ("ln(x)", 0, 1, lambda: -1),
        ("sin(x)/x", 0, 10, lambda: mpmath.si(10)),
        ("<x - 1.2345>^0*exp(x)", 0, 3, lambda: mpmath.exp(3) - mpmath.exp("1.2345")),
        ("1e-9*cos(x)", 0, 1, lambda: mpmath.mpf("1e-9") * mpmath.sin(1)),
        ("1e12*cos(x)", 0, 1, lambda: mpmath.mpf("1e12") * mpmath.sin(1)),
        ("sqrt(1 - 0.36*sin(x)^2)", 0, math.pi / 2, lambda: mpmath.ellipe(mpmath.mpf("0.36"))),
    ],
)
def test_against_mpmath(text: str, low: float, high: float, exact: object) -> None:
    """source: mpmath's closed forms. The error estimate covers the error."""
    found, value = of(Formula(text), low, high), float(exact())  # type: ignore[operator]
    size = max(abs(value), 1e-6)
    assert abs(found.value - value) <= max(1e-10 * size, 1e-20)
    assert abs(found.value - value) <= found.error + 1e-15 * size
    assert found.method == "adaptive Gauss-Kronrod quadrature"


@given(texts)
def test_piecewise_polynomials_come_out_exactly(text: str) -> None:
    """source: the antiderivative of each piece."""
    f = Formula(text)
    found = pieces(f.node, "x", 0, 5, f.value) or ()
    exact = math.fsum(
        (p.end - p.start) * math.fsum(c / (k + 1) for k, c in enumerate(p.coefficients)) for p in found
    )
    size = math.fsum((p.end - p.start) * sum(p.sizes) for p in found)
    assert abs(of(f, 0, 5).value - exact) <= 1e-11 * size


def test_strain_energy_of_a_tapered_bar() -> None:
    """source: P^2 L/(2 E A_0) ln(2) for an area from A_0 to 2 A_0 (calculus)."""
    f = Formula("P^2/(2*E*A*(1 + x/L))", P=30e3, E=210e9, A=8e-4, L=2.0)
    assert of(f, 0, 2).value == pytest.approx(30e3**2 * 2 / (2 * 210e9 * 8e-4) * math.log(2), rel=1e-13)


def test_a_curve_that_swings() -> None:
    """source: scipy.special.fresnel."""
    found = of(Formula("sin(pi*x^2/2)"), 0, 12)
    assert found.value == pytest.approx(float(special.fresnel(12)[0]), rel=1e-9)


def test_cases_break() -> None:
    f = Formula(cases("x^2 when x < a", "7*x otherwise"), a=1.2345)
    assert of(f, 0, 3).value == pytest.approx(1.2345**3 / 3 + 3.5 * (9 - 1.2345**2), rel=1e-12)


@pytest.mark.parametrize(
    "text",
    ["1/x", "1/x^2", "1/(x - 0.3)", "1/(x - 0.3)^3", "1/(x - 0.31415)", "1/(x - 1.5)", "1/(x - 0.31415)^2",
     "tan(x)", "1/(3 - x)", "sin(x)/(x - 2)", "sin(1/x)/x",
     "x^-1.01", "x^-1.1", "x^-1.5", "x^-3", "x^-4.5", "1/(3 - x)^2", "1/(3 - x)^1.2", "1/abs(x - 1.1)^1.5"],
)  # fmt: skip
def test_what_does_not_converge_is_said(text: str) -> None:
    """The two sides of a pole must not cancel to a value."""
    with pytest.raises((NoConvergence, NotDefined)) as caught:
        of(Formula(text), 0, 3)
    assert str(caught.value)


def test_outside_the_domain() -> None:
    with pytest.raises(NotDefined) as caught:
        of(Formula("sqrt(x - 1)"), 0, 3)
    assert 0 <= caught.value.x < 1


@pytest.mark.parametrize(("low", "high"), [(1, 1), (2, 1), (0, math.inf), (math.nan, 1)])
def test_bounds_that_are_none(low: float, high: float) -> None:
    with pytest.raises(ValueError):
        quadrature(math.sin, low, high)
