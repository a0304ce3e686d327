"""Points of a curve for a plot."""

from __future__ import annotations

import math

import pytest
from curves import Formula, cases
from hypothesis import given
from test_pieces import texts

from loadpath.numeric import bracket_places, sample


def of(f: Formula, low: float, high: float, *peaks: float, count: int = 201) -> list[tuple[float, float]]:
    return list(sample(f, f.left, low, high, bracket_places(f.node, f.x, f.value), peaks, count))


def test_a_shear_diagram_has_its_jumps_at_one_place() -> None:
    f = Formula("R*<x>^0 - P*<x - a>^0 + Q*<x - L>^0", R=6e3, P=10e3, Q=4e3, a=4.0, L=10.0)
    assert of(f, 0, 10, count=5) == [
        (0, 6e3), (2.5, 6e3), (4, 6e3), (4, -4e3), (5, -4e3), (7.5, -4e3), (10, -4e3), (10, 0),
    ]  # fmt: skip


def test_even_steps_breaks_and_peaks_exactly() -> None:
    f = Formula("x*(L - x) - <x - a>^1", L=3.0, a=1.23456789)
    points = of(f, 0, 3, 1.5000001)
    places = [x for x, _ in points]
    assert 1.23456789 in places and 1.5000001 in places and places == sorted(places)
    assert len(points) == 201 + 2 and places[0] == 0 and places[-1] == 3
    assert all(y == f(x) for x, y in points)


def test_a_step_gives_way_to_a_break_or_a_peak_beside_it() -> None:
    points = of(Formula("<x - a>^1", a=0.5 + 1e-13), 0, 1, 0.25 + 1e-13, count=5)
    assert [x for x, _ in points] == [0, 0.25 + 1e-13, 0.5 + 1e-13, 0.75, 1]


@pytest.mark.parametrize("condition", ["x < a", "x <= a"])
def test_cases_are_drawn_with_both_sides(condition: str) -> None:
    points = of(Formula(cases(f"x when {condition}", "5 otherwise"), a=2.0), 0, 4, count=5)
    at_break = [y for x, y in points if x == 2]
    assert at_break == pytest.approx([2, 5], rel=1e-12)


def test_a_bracket_that_ends() -> None:
    assert [y for x, y in of(Formula("3*<a - x>^0 + 1", a=2.0), 0, 4) if x == 2] == [4, 1]
    both = of(Formula("3*<a - x>^0 + 5*<x - a>^0", a=2.0), 0, 4)
    assert [y for x, y in both if x == 2] == [3, 8, 5]


def test_gaps_where_there_is_no_value() -> None:
    points = of(Formula("sqrt(x - 1)/(x - 2)"), 0, 4, count=5)
    assert [x for x, y in points if math.isnan(y)] == [0, 2]
    assert [x for x, _ in points] == [0, 1, 2, 3, 4]


@given(texts)
def test_points_lie_on_the_curve(text: str) -> None:
    f = Formula(text)
    points = of(f, 0, 5)
    places = [x for x, _ in points]
    assert places == sorted(places) and places[0] == 0 and places[-1] == 5
    for x, y in points:
        if places.count(x) == 1:
            assert y == f(x)
        else:
            assert f(x) in [v for at, v in points if at == x]


def test_refused() -> None:
    for low, high, count in ((1, 1, 5), (0, math.inf, 5), (0, 1, 1)):
        with pytest.raises(ValueError):
            sample(math.sin, None, low, high, (), (), count)
