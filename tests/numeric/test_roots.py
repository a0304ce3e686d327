"""Roots between bounds: all of them, and nothing that only looks like one."""

from __future__ import annotations

import math

import mpmath
import numpy as np
import pytest
from curves import Formula, cases
from hypothesis import assume, given
from hypothesis import strategies as st
from scipy import special

from loadpath.numeric import NotDefined, Roots, bracket_places, roots_between


def between(f: Formula, low: float, high: float) -> Roots:
    return roots_between(f, low, high, bracket_places(f.node, f.x, f.value))


@given(st.lists(st.integers(1, 59), min_size=1, max_size=6, unique=True))
def test_roots_of_a_product(sixtieths: list[int]) -> None:
    """source: the roots that it was multiplied from. Put back they leave rounding."""
    roots = sorted(i / 60 for i in sixtieths)
    f = Formula("*".join(f"(x - {i}/60)" for i in sixtieths))
    found = between(f, 0, 1)
    assert found.found == pytest.approx(roots, abs=1e-14)
    assert found.method == "bracketing (Brent), between the bounds in 400 steps"
    for residual in found.residuals:
        assert abs(residual) <= 1e-15
    assert found.over == () and found.gaps == () and found.poles == ()


@given(st.lists(st.floats(0.01, 0.99), min_size=2, max_size=4), st.floats(0.5, 2))
def test_polynomials_as_numpy_has_them(roots: list[float], factor: float) -> None:
    """source: numpy.roots on the polynomial multiplied out, on roots that stand apart."""
    roots.sort()
    assume(min(np.diff(roots)) > 0.02)
    c = np.poly(roots) * factor
    f = Formula(" + ".join(f"({v!r})*x^{len(c) - 1 - k}" for k, v in enumerate(map(float, c))))
    found = roots_between(f, 0, 1).found
    assert found == pytest.approx(sorted(np.roots(c).real.tolist()), abs=1e-9)


def test_bessel_functions() -> None:
    """source: scipy.special.jn_zeros."""
    expected = special.jn_zeros(0, 9).tolist()
    assert roots_between(special.j0, 0.1, 30).found == pytest.approx(expected, rel=1e-14)


def test_the_buckling_equation_of_a_fixed_and_pinned_column() -> None:
    """tan(k) = k; source: mpmath.findroot; poles of the tangent are none of them."""
    found = between(Formula("tan(x) - x"), 1, 15)
    expected = [float(mpmath.findroot(lambda k: mpmath.tan(k) - k, x)) for x in (4.49, 7.72, 10.9, 14.066)]
    assert found.found == pytest.approx(expected, rel=1e-14)
    assert found.poles == pytest.approx([math.pi * (i + 0.5) for i in range(5)], rel=1e-6)


def test_an_eccentric_column() -> None:
    """The secant formula solved for the load; source: mpmath.findroot."""
    f = Formula(
        "P/A*(1 + e*c/r^2*sec(L/(2*r)*sqrt(P/(E*A)))) - f_y",
        "P", A=5.38e-3, e=0.02, c=0.15, r=0.0335, L=4.0, E=210e9, f_y=275e6,
    )  # fmt: skip

    def exact(p: mpmath.mpf) -> mpmath.mpf:
        angle = (
            mpmath.mpf("4")
            / (2 * mpmath.mpf("0.0335"))
            * mpmath.sqrt(p / (mpmath.mpf("210e9") * mpmath.mpf("5.38e-3")))
        )
        first = 1 + mpmath.mpf("0.02") * mpmath.mpf("0.15") / mpmath.mpf("0.0335") ** 2 * mpmath.sec(angle)
        return p / mpmath.mpf("5.38e-3") * first - mpmath.mpf("275e6")

    found = between(f, 0, 700e3)
    assert len(found.found) == 1
    assert found.found[0] == pytest.approx(float(mpmath.findroot(exact, 300e3)), rel=1e-13)
    assert abs(found.residuals[0]) <= 1e-14 * 275e6 * 10


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("(x - 1.2345)^2", [1.2345]),
        ("(x - 1.2345)^2*(x - 3)", [1.2345, 3]),
        ("(x - 1.2345)^3", [1.2345]),
        ("x^3 - 3.7035*x^2 + 4.57197075*x - 1.881365963625", [1.2345]),
        ("(x - 1.2345)^4", [1.2345]),
        ("1 - cos(x)", [0, 2 * math.pi]),
        ("abs(x - 2.5)", [2.5]),
        ("cbrt(x - 2.54321)", [2.54321]),
        ("(x - 2)*(x - 2.0001)", [2, 2.0001]),
        ("(x - 2)^2 + 1e-9", []),
        ("x*(7 - x)", [0, 7]),
        ("1/(x - 2)", []),
        ("1/(x - 2.1234)^3", []),
        ("1/(x - 2.1234)^2", []),
        ("<x - 2.1234>^0 - 0.5", []),
        ("<x - 2.1234>^0 - 1e-3", []),
        ("x - 3 - 2*<x - 2.1234>^0 + 4*<x - 4>^0", []),
        ("x - 3 + 2*<x - 3.9995>^0 - 4*<x - 4>^0", [3, 5]),
        ("x - 3.9999 - 2*<x - 4>^0 + 4*<x - 4.5>^0", [3.9999]),
        ("exp(5*x) - 1e9", [math.log(1e9) / 5]),
    ],
)
def test_which_roots(text: str, expected: list[float]) -> None:
    """source: by hand. A root of multiplicity m is sharp to the m-th root of rounding."""
    found = between(Formula(text), 0, 7)
    assert found.found == pytest.approx(expected, abs=2e-5)
    assert all(abs(residual) <= 1e-5 for residual in found.residuals)


def test_close_to_a_jump_but_before_it() -> None:
    """Between the last step and the place the curve goes through zero, and the jump takes it back."""
    found = between(Formula("x - 1.9999 - 2*<x - 2>^0"), 0, 3)
    assert found.found == pytest.approx([1.9999])
    assert found.poles == pytest.approx([2])


def test_cases_that_jump_over_zero() -> None:
    found = between(Formula(cases("0 - 1 when x < a", "x otherwise"), a=1.5), 0, 3)
    assert found.found == () and found.poles == pytest.approx([1.5])


def test_a_stretch_of_zeros() -> None:
    found = between(Formula("<x - a>^2", a=1.2345), 0, 3)
    assert found.found == pytest.approx([0, 1.2345])
    assert list(found.over[0]) == pytest.approx([0, 1.2345]) and len(found.over) == 1
    everywhere = between(Formula("0*x"), 0, 3)
    assert everywhere.over == ((0, 3),) and everywhere.found == (0, 3)


def test_places_without_a_value_are_told() -> None:
    found = between(Formula("sqrt(x - 1) - 1"), 0, 4)
    assert found.found == (2,)
    assert found.gaps[0] == 0 and found.gaps[-1] == pytest.approx(0.99)
    with pytest.raises(NotDefined):
        between(Formula("sqrt(x - 9)"), 0, 4)


def test_far_from_zero() -> None:
    """A narrow stretch a long way out: a million times its length."""
    found = roots_between(lambda x: x - 1_000_000.3, 1e6, 1e6 + 1)
    assert found.found == pytest.approx([1_000_000.3], rel=1e-15)


@pytest.mark.parametrize(("low", "high"), [(1, 1), (2, 1), (0, math.inf), (math.nan, 1)])
def test_bounds_that_are_none(low: float, high: float) -> None:
    with pytest.raises(ValueError):
        roots_between(math.sin, low, high)
