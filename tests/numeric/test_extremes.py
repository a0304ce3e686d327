"""Largest and smallest values: exact for piecewise polynomials, sampled and refined for other curves."""

from __future__ import annotations

import math

import numpy as np
import pytest
from curves import Formula, cases
from hypothesis import given
from scipy.optimize import minimize_scalar
from test_pieces import texts

from loadpath.numeric import Extremes, NotDefined, extremes, pieces, sample
from loadpath.numeric.pieces import bracket_places


def of(f: Formula, low: float, high: float) -> Extremes:
    return extremes(f, f.left, f.node, f.x, low, high, f.value)


def seen(found: Extremes) -> list[tuple[float, float, str]]:
    return [(round(s.x, 9), round(s.y, 6), s.where) for s in found.looked_at]


def test_every_place_that_was_looked_at_is_listed() -> None:
    """source: propped cantilever under uniform load, beam tables (from memory): M_max = 9 w L^2/128 at
    3L/8 from the simple support, -w L^2/8 at the fixed end."""
    f = Formula("3*w*L/8*x - w*x^2/2", w=8e3, L=5.0)
    found = of(f, 0, 5)
    assert found.method == "exact"
    assert found.largest.x == pytest.approx(3 * 5 / 8) and found.largest.where == "turning point"
    assert found.largest.y == pytest.approx(9 * 8e3 * 25 / 128)
    assert (found.smallest.x, found.smallest.where) == (5, "end")
    assert found.smallest.y == pytest.approx(-8e3 * 25 / 8)
    assert [s.where for s in found.looked_at] == ["end", "turning point", "end"]
    assert not found.flat


def test_a_jump_counts_on_both_sides() -> None:
    f = Formula("R*<x>^0 - P*<x - a>^0 + Q*<x - L>^0", R=6e3, P=10e3, Q=4e3, a=4.0, L=10.0)
    found = of(f, 0, 10)
    assert seen(found) == [
        (0, 6e3, "end"), (4, 6e3, "left of a jump"), (4, -4e3, "right of a jump"),
        (10, -4e3, "left of a jump"), (10, 0, "end"),
    ]  # fmt: skip
    assert (found.largest.x, found.largest.where, found.largest_over) == (0, "end", (0, 4))
    assert (found.smallest.x, found.smallest.where, found.smallest_over) == (4, "right of a jump", (4, 10))
    assert found.flat


def test_a_largest_value_just_left_of_a_jump() -> None:
    """Shear that grows to a support: at the place itself the reaction already counts."""
    f = Formula("w*x - R*<x - a>^0", w=2e3, R=15e3, a=5.0)
    for left in (f.left, None):
        found = extremes(f, left, f.node, "x", 0, 8, f.value)
        assert (found.largest.x, found.largest.y, found.largest.where) == (5, 10e3, "left of a jump")
        assert (found.smallest.x, found.smallest.y, found.smallest.where) == (5, -5e3, "right of a jump")


def test_a_bracket_that_ends_jumps_on_its_right() -> None:
    found = of(Formula("5*<a - x>^0 + x", a=2.0), 0, 4)
    assert seen(found) == [
        (0, 5, "end"), (2, 7, "left of a jump"), (2, 2, "right of a jump"), (4, 4, "end"),
    ]  # fmt: skip
    at_start = of(Formula("5*<a - x>^0 + x", a=2.0), 2, 4)
    assert seen(at_start) == [(2, 7, "end"), (2, 2, "right of a jump"), (4, 4, "end")]
    assert at_start.smallest.y == 2


def test_a_jump_of_nothing_is_a_break() -> None:
    assert [s.where for s in of(Formula("<x - 1>^0*<x - 1>^1"), 0, 3).looked_at] == ["end", "break", "end"]


def test_equal_extremes_are_taken_at_the_first_place() -> None:
    """Four-point loading with rounding on: the middle third is level, deflection is 0 at both supports."""
    f = Formula("P*x - P*<x - L/3>^1 - P*<x - 2*L/3>^1", P=7.7e3, L=2.3)
    found = of(f, 0, 2.3)
    assert found.largest.x == pytest.approx(2.3 / 3) and found.largest.where == "break"
    assert found.largest_over == pytest.approx((2.3 / 3, 4.6 / 3))
    assert found.smallest.x == 0 and found.smallest_over is None
    waves = of(Formula("sin(x)"), 0, 30)
    assert waves.largest.x == pytest.approx(math.pi / 2) and waves.smallest.x == pytest.approx(1.5 * math.pi)


def deflection() -> Formula:
    """Simple beam, load off the middle, downwards positive, times 6 E I L/P."""
    return Formula("(L - a)*(L^2 - (L - a)^2)*x - (L - a)*x^3 + L*<x - a>^3", L=10.0, a=6.0)


def test_deflection_by_the_tables() -> None:
    """source: beam tables (from memory): at x = sqrt((L^2 - b^2)/3), b the shorter part, it is
    P b (L^2 - b^2)^1.5/(9 sqrt(3) E I L)."""
    found = of(deflection(), 0, 10)
    b = 4.0
    assert found.largest.x == pytest.approx(math.sqrt((100 - b * b) / 3), rel=1e-14)
    assert found.largest.y == pytest.approx(6 * b * (100 - b * b) ** 1.5 / (9 * math.sqrt(3)), rel=1e-14)


@given(texts)
def test_random_piecewise_polynomials(text: str) -> None:
    """source: a dense grid, and scipy's bounded minimiser on each piece from the best grid point."""
    f = Formula(text)
    found = of(f, 0, 5)
    assert found.method == "exact"
    noise = 2 * max(p.rounding(t) for p in pieces(f.node, "x", 0, 5, f.value) or () for t in (0.0, 1.0))
    grid = [float(v) for v in np.linspace(0, 5, 2001)]
    values = [f(v) for v in grid] + [f.left(v) for v in bracket_places(f.node, "x", f.value) if 0 < v <= 5]
    assert found.largest.y >= max(values) - noise - 1e-300
    assert found.smallest.y <= min(values) + noise + 1e-300
    step = 5 / 2000
    for sign, spot in ((1, found.smallest), (-1, found.largest)):
        if spot.where == "turning point":
            a, b = max(spot.x - step, 0.0), min(spot.x + step, 5.0)
            reference = minimize_scalar(lambda v, s=sign: s * f(v), bounds=(a, b), options={"xatol": 1e-10})
            assert sign * spot.y <= reference.fun + noise + 1e-300
        assert 0 <= spot.x <= 5
        # it is a value of the curve, on one side of the place at least
        assert spot.y in (f(spot.x), f.left(spot.x)) or spot.where == "right of a jump"
    assert found.largest in found.looked_at and found.smallest in found.looked_at


@given(texts)
def test_plotted_extremes_are_these(text: str) -> None:
    f = Formula(text)
    found = of(f, 0, 5)
    places = bracket_places(f.node, "x", f.value)
    points = sample(f, f.left, 0, 5, places, (found.largest.x, found.smallest.x))
    noise = 2 * max(p.rounding(t) for p in pieces(f.node, "x", 0, 5, f.value) or () for t in (0.0, 1.0))
    spread = found.largest.y - found.smallest.y
    assert max(y for _, y in points) == pytest.approx(found.largest.y, abs=noise + 1e-9 * spread)
    assert min(y for _, y in points) == pytest.approx(found.smallest.y, abs=noise + 1e-9 * spread)
    assert {found.largest.x, found.smallest.x} <= {x for x, _ in points}


def test_twenty_spans() -> None:
    """source: three-moment equation solved by numpy (from memory); the largest sagging moment is in the first
    span, at V = 0: R_1^2/(2 w)."""
    spans, w, length = 20, 9e3, 4.0
    band = 4 * np.eye(spans - 1) + np.eye(spans - 1, k=1) + np.eye(spans - 1, k=-1)
    moments = np.zeros(spans + 1)
    moments[1:-1] = np.linalg.solve(band, np.full(spans - 1, -w * length**2 / 2))
    steps = np.diff(moments) / length
    reactions = np.full(spans + 1, w * length) + np.append(steps, 0) - np.append(0, steps)
    reactions[[0, -1]] -= w * length / 2
    values = {f"R_{i}": float(r) for i, r in enumerate(reactions)}
    f = Formula(
        " + ".join(f"R_{i}*<x - {i}*L>^1" for i in range(spans + 1)) + " - w*x^2/2", w=w, L=length, **values
    )
    found = of(f, 0, spans * length)
    assert found.method == "exact" and len(found.looked_at) == 2 * spans + 1
    assert found.largest.x == pytest.approx(reactions[0] / w)
    assert found.largest.y == pytest.approx(reactions[0] ** 2 / 2 / w)
    assert (found.smallest.x, found.smallest.where) == (length, "break")
    assert found.smallest.y == pytest.approx(moments.min())


# --- sampled ------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("text", "largest", "smallest"),
    [
        ("sin(x)*exp(-x/3)", (math.atan(3), None), (math.atan(3) + math.pi, None)),
        ("x/(1 + x^2)", (1, 0.5), (0, 0)),
        ("abs(x - 2.345678)", (9, 6.654322), (2.345678, 0)),
        ("sqrt(abs(x - 2.345678))", (9, math.sqrt(6.654322)), (2.345678, 0)),
        ("max(x*(1 - x), 0 - 2*<x - 3>^0)", (0.5, 0.25), (2, -2)),
        ("cos(x) + <x - 2>^0*3", (2 * math.pi, 4), (2, math.cos(2))),
    ],
)
def test_other_curves(
    text: str, largest: tuple[float, float | None], smallest: tuple[float, float | None]
) -> None:
    """source: calculus by hand; a smooth turning point is sharp to the root of rounding."""
    f = Formula(text)
    found = of(f, 0, 9)
    assert found.method == "numeric, 200 points"
    for spot, (x, y) in ((found.largest, largest), (found.smallest, smallest)):
        if text.startswith("max") and spot is found.smallest:
            assert spot.y == pytest.approx(-2) and found.smallest_over is not None
            continue
        assert spot.x == pytest.approx(x, abs=1e-6)
        assert spot.y == pytest.approx(f(x) if y is None else y, abs=1e-7)
        assert spot in found.looked_at


def test_a_jump_of_a_sampled_curve_counts_on_both_sides() -> None:
    f = Formula("exp(x)*(1 - <x - a>^0)", a=1.2345)
    found = of(f, 0, 2)
    assert (found.largest.x, found.largest.where) == (1.2345, "left of a jump")
    assert found.largest.y == pytest.approx(math.exp(1.2345), rel=1e-15)
    assert found.smallest.x == 1.2345 and found.smallest_over == pytest.approx((1.2345, 2))


def test_cases_jump_on_both_sides() -> None:
    for lines in (("x^2 when x < a", "0 - x otherwise"), ("x^2 when x <= a", "0 - x otherwise")):
        f = Formula(cases(*lines), a=2.0)
        found = of(f, 0, 3)
        assert found.largest.x == 2 and found.largest.where == "left of a jump"
        assert found.largest.y == pytest.approx(4, rel=1e-12)
        assert found.smallest.x == 3 and found.smallest.y == -3
        assert (2, -2, "right of a jump") in seen(found)


def test_level_stretches_of_a_sampled_curve() -> None:
    found = of(Formula("min(x, 1.5)"), 0, 4)
    assert found.largest.x == pytest.approx(1.5, abs=1e-9) and found.largest.y == pytest.approx(1.5)
    assert found.largest_over == pytest.approx((1.5, 4), abs=1e-9)
    assert found.smallest_over is None


@pytest.mark.parametrize(
    "text",
    [
        "1/(x - 1.2345)",
        "1/(x - 1.2345)^2",
        "tan(x)",
        "ln(abs(x - 1.2345))",
        "sqrt(x - 1)",
        "1/x",
        "x/(x - 2)",
    ],
)
def test_no_extreme_is_told_of_a_curve_that_has_none(text: str) -> None:
    f = Formula(text)
    with pytest.raises(NotDefined) as caught:
        of(f, 0, 4)
    assert 0 <= caught.value.x <= 4


def test_bounds_that_are_none() -> None:
    f = Formula("x")
    for low, high in ((1, 1), (2, 1), (0, math.inf)):
        with pytest.raises(ValueError):
            of(f, low, high)


def test_the_same_bits_each_time() -> None:
    for text in ("x^5 - 3*<x - 1.1>^3 + <x - 2.2>^0", "sin(3*x)*<x - 1.1>^0"):
        f = Formula(text)
        assert of(f, 0, 3.3) == of(f, 0, 3.3)
