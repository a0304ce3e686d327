"""Linear systems, roots and the real roots of polynomials, each put back or held against NumPy and mpmath."""

from __future__ import annotations

import math
from fractions import Fraction

import pytest
from algebra_trees import relation, text, worth
from hypothesis import given, settings
from hypothesis import strategies as st

from loadpath import algebra
from loadpath.formula.tree import Relation

VALUES = {"P": 2.5, "w": 0.8, "L": 5.0, "a": 1.7, "b": 3.1, "c": -2.3, "E": 3.0, "I": 1.3, "k": 0.9, "A": 1.1,
          "h": 0.7, "Q": 1.4}  # fmt: skip


def equations(*typed: str) -> tuple[Relation, ...]:
    return tuple(relation(t) for t in typed)


def residual(equation: Relation, values: dict[str, float]) -> float:
    left, right = (worth(o, values) for o in equation.operands)
    return abs(left - right) / max(1.0, abs(left), abs(right))


SYSTEMS = [
    (("R_A + R_B = P", "R_B*L = P*a"), ("R_A", "R_B")),
    (("R_A + R_B + R_C = P + w*L", "R_B*L/2 + R_C*L = P*a + w*L^2/2", "5*w*L^4/(384*E*I) = R_B*L^3/(48*E*I)"),
     ("R_A", "R_B", "R_C")),
    (("C_1*L + C_2 = w*L^4/24", "C_2 = 0"), ("C_1", "C_2")),
    (("R_A + R_B = P", "R_A*a/(E*A) = R_B*b/(E*A) + 0.002"), ("R_A", "R_B")),
    (("x/a + y/b = 1", "x/b - y/a = min(P, Q)"), ("x", "y")),
    (("R*<L - a>^1 = P*L",), ("R",)),
    (("x = 2*y + 1", "3*(x - y) = k", "z = x + y"), ("x", "y", "z")),
]  # fmt: skip


@pytest.mark.parametrize(("typed", "unknowns"), SYSTEMS)
def test_solutions_put_back_leave_nothing(typed: tuple[str, ...], unknowns: tuple[str, ...]) -> None:
    found = algebra.solve_linear(equations(*typed), unknowns)
    assert found is not None
    assert tuple(found) == unknowns
    solved = {**VALUES, **{name: worth(node, VALUES) for name, node in found.items()}}
    for equation in equations(*typed):
        assert residual(equation, solved) < 1e-12


@pytest.mark.parametrize(
    ("typed", "unknowns"),
    [
        (("x*y = 1", "x = 2"), ("x", "y")),
        (("x^2 = 4",), ("x",)),
        (("sin(x) = k",), ("x",)),
        (("x + y = 1", "x + y = 2"), ("x", "y")),
        (("x + y = 1", "2*x + 2*y = 2"), ("x", "y")),
        (("x + y = 1",), ("x", "y")),
        (("max(x, a) = 1",), ("x",)),
        (("<x - a>^1 = 1",), ("x",)),
    ],
)
def test_what_is_not_linear_or_not_regular(typed: tuple[str, ...], unknowns: tuple[str, ...]) -> None:
    assert algebra.solve_linear(equations(*typed), unknowns) is None


def test_an_inequality_is_no_equation() -> None:
    (equation,) = equations("x = 1")
    assert algebra.roots(Relation(equation.operands, ("<=",)), "x") is None


ROOTS: list[tuple[str, list[str] | None]] = [
    ("x + 2*a = b", ["b - 2*a"]),
    ("P*L/(E*x) = a", ["P*L/(E*a)"]),
    ("x^2 = a^2", ["a", "-a"]),
    ("x^3 = c", ["cbrt(c)"]),
    ("x^2 + 1 = 0", []),
    ("x + 1 = x", []),
    ("x = x", None),
    ("x^3 - 6*x^2 + 11*x - 6 = 0", ["1", "2", "3"]),
    ("x^3 - 2*x = 5", None),
    ("tan(x) = x", None),
    ("max(x, a) = 2", None),
    ("exp(k*x) = P", ["ln(P)/k"]),
    ("x*(x - a)^2 = 0", ["0", "a"]),
    ("2*x^2 = 3*x + 7", ["(3 - sqrt(65))/4", "(3 + sqrt(65))/4"]),
]


@pytest.mark.parametrize(("typed", "wanted"), ROOTS)
def test_roots(typed: str, wanted: list[str] | None) -> None:
    found = algebra.roots(relation(typed), "x")
    assert (None if found is None else [text(n) for n in found]) == wanted


PUT_BACK = [
    "a*x^2 + b*x + c = 0", "a*x^4 - b*x^2 + h/9 = 0", "sqrt(x + 1) = a", "P = k*x + c", "x^2/(x + a) = b",
    "k*x^2/2 = P*(h + x)", "exp(x/a) = b", "ln(x/a) = k", "x^4 = b", "(x - a)*(x^2 - b) = 0", "a/x + x = b",
    "x^2*pi = A", "1.25*x^2 - 0.3*x = 2.4",
]  # fmt: skip


@pytest.mark.parametrize("typed", PUT_BACK)
def test_roots_put_back_leave_nothing(typed: str) -> None:
    found = algebra.roots(relation(typed), "x")
    assert found
    for root in found:
        value = worth(root, VALUES)
        assert residual(relation(typed), {**VALUES, "x": value}) < 1e-10, text(root)


@settings(max_examples=60)
@given(st.lists(st.fractions(-20, 20, max_denominator=12), min_size=1, max_size=5))
def test_real_roots_of_a_product_are_those_it_was_made_from(wanted: list[Fraction]) -> None:
    coefficients = [Fraction(1), Fraction(0), Fraction(1)]  # x^2 + 1 has none
    for root in wanted:
        higher = [Fraction(0), *coefficients]
        lower = [-root * c for c in coefficients] + [Fraction(0)]
        coefficients = [h + v for h, v in zip(higher, lower, strict=True)]
    found = algebra.real_roots(tuple(coefficients))
    assert found == tuple(sorted(float(r) for r in set(wanted)))


@settings(max_examples=40)
@given(
    st.lists(st.one_of(st.just(0.0), st.floats(1e-6, 1e6), st.floats(-1e6, -1e-6)), min_size=3, max_size=6)
)
def test_real_roots_against_mpmath(coefficients: list[float]) -> None:
    import mpmath

    exact = tuple(Fraction(c) for c in coefficients)
    if not any(exact):
        return
    found = algebra.real_roots(exact)
    assert list(found) == sorted(set(found))
    mpmath.mp.dps = 60
    for root in found:
        # the polynomial changes sign, or touches zero, within one part in 1e15 of the root
        values = [
            sum(mpmath.mpf(c.numerator) / c.denominator * x**i for i, c in enumerate(exact))
            for x in (
                mpmath.mpf(root) * (1 - mpmath.mpf(10) ** -15),
                mpmath.mpf(root) * (1 + mpmath.mpf(10) ** -15),
            )
        ]
        slack = sum(abs(mpmath.mpf(float(c))) * abs(mpmath.mpf(root)) ** i for i, c in enumerate(exact))
        assert (
            root == 0 or values[0] * values[1] <= 0 or min(map(abs, values)) <= slack * mpmath.mpf(10) ** -12
        )


def test_real_roots_close_together_and_far_apart() -> None:
    # (x - 1)*(x - 1 - 1e-9)*(x - 1e9)
    first, second, third = Fraction(1), 1 + Fraction(1, 10**9), Fraction(10**9)
    coefficients = (
        -first * second * third,
        first * second + first * third + second * third,
        -(first + second + third),
        Fraction(1),
    )
    assert algebra.real_roots(coefficients) == (1.0, 1 + 1e-9, 1e9)
    small = (Fraction(-1), Fraction(0), Fraction(10**40))
    found = algebra.real_roots(small)
    assert len(found) == 2
    assert all(math.isclose(abs(root), 1e-20, rel_tol=1e-15) for root in found)


def test_a_polynomial_without_roots_of_its_own() -> None:
    assert algebra.real_roots((Fraction(3),)) == ()
    with pytest.raises(ValueError, match="0 everywhere"):
        algebra.real_roots((Fraction(0), Fraction(0)))


def test_a_root_beyond_any_number_is_said() -> None:
    with pytest.raises(algebra.AlgebraFailure) as failure:
        algebra.real_roots((Fraction(-1), Fraction(1, 10**400)))
    assert failure.value.slug == "derived-too-large"
