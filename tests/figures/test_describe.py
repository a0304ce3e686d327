"""What the words say about a plot: worked out from the points, so the expected values here are by hand."""

from __future__ import annotations

import math

import pytest

from loadpath.figures import MOST_CURVES, MOST_PEAKS, MOST_POINTS, Curve, Peak, Picture, describe
from loadpath.figures.picture import normal

NAN = math.nan


def words(*points: tuple[float, float], unit: str = "kN", x_unit: str = "m") -> str:
    return describe(Picture("x", x_unit, (Curve("V(x)", "V", unit, points, ()),), ""))


def test_range_extremes_and_jump() -> None:
    # simply supported span of 5 m, one load of 20 kN at 2 m: V = 12 kN, then -8 kN
    assert words((0, 12), (2, 12), (2, -8), (5, -8)) == (
        "Plot of V(x) in kN against x in m, from 0 to 5\u202fm. V(x): largest 12\u202fkN at x = 0\u202fm and "
        "x = 2\u202fm; smallest −8\u202fkN at x = 2\u202fm and x = 5\u202fm; "
        "jump at x = 2\u202fm from 12 to −8\u202fkN."
    )


def test_gaps_are_told() -> None:
    told = words((0, NAN), (1, 1), (2, 3), (3, NAN), (4, 2), (5, NAN))
    assert "no value between x = 2\u202fm and x = 4\u202fm" in told
    assert "no value after x = 4\u202fm" in told
    assert "no value from x = 0\u202fm on, up to the first point drawn" in told


def test_infinity_is_a_gap() -> None:
    assert "no value between" in words((0, 1), (1, math.inf), (2, 1))


def test_no_value_at_all() -> None:
    assert words((0, NAN), (1, NAN)).endswith("V(x) has no value here.")


def test_constant() -> None:
    assert words((0, 40), (5, 40)).endswith("V(x): 40\u202fkN throughout.")


def test_plain_numbers_degrees_and_a_single_place() -> None:
    assert (
        words((1, 0.25), unit="", x_unit="°")
        == "Plot of V(x) against x in °, at 1° only. V(x): 0.25 throughout."
    )


def test_many_jumps_are_counted() -> None:
    points = tuple((float(x), float(y)) for x in range(1, 8) for y in (x - 1, x))
    assert "7 jumps in all" in words(*points)


def test_many_places_are_counted() -> None:
    assert "largest 1\u202fkN at 5 plotted places from x = 1\u202fm to 9\u202fm" in words(
        *((float(x), float(x % 2)) for x in range(11))
    )


def test_names_units_and_peaks() -> None:
    a = Curve("σ_b(x)", "sigma_b", "MPa", ((0, 0), (1, 2)), (Peak(1, 2, "2.00 MPa at 1 m"),))
    b = Curve("τ(x)", "tau", "MPa", ((0, 1), (1, 0)), ())
    c = Curve("v(x)", "v", "mm", ((0, 1), (1, 0)), ())
    told = describe(Picture("sigma_0", "m", (a, b, c), "not used"))
    assert told.startswith("Plot of σ_b(x) and τ(x) in MPa and v(x) in mm against σ_0 in m, from 0 to 1")
    assert "marked: 2.00 MPa at 1 m." in told
    assert told.count("not used") == 0


# --- limits -------------------------------------------------------------------------------------------------


def curve(*points: tuple[float, float], peaks: tuple[Peak, ...] = ()) -> Curve:
    return Curve("y", "y", "", points, peaks)


@pytest.mark.parametrize(
    "curves",
    [
        (),
        (curve(),),
        (curve((0, 0)),) * (MOST_CURVES + 1),
        (curve(*((float(i), 0.0) for i in range(MOST_POINTS + 1))),),
        (curve((math.inf, 0)),),
        (curve((NAN, 0)),),
        (curve((0, 0), peaks=(Peak(0, NAN, "x"),)),),
        (curve((0, 0), peaks=(Peak(0, 0, "x"),) * (MOST_PEAKS + 1)),),
        (curve((0, 0), peaks=(Peak(0, 0, "x" * 301),)),),
    ],
    ids=["none", "no points", "curves", "points", "infinite x", "x not a number", "peak", "peaks", "text"],
)
def test_what_is_refused(curves: tuple[Curve, ...]) -> None:
    with pytest.raises(ValueError):
        normal(Picture("x", "m", curves, ""))


def test_the_limits_themselves_are_allowed() -> None:
    many = tuple(
        curve(*((float(i), 0.0) for i in range(MOST_POINTS // MOST_CURVES))) for _ in range(MOST_CURVES)
    )
    normal(Picture("x", "m", many, ""))


def test_equal_pictures_are_equal_keys() -> None:
    one, two = (normal(Picture("x", "", (curve((0, z), (1, float("nan"))),), "")) for z in (0, -0.0))
    assert one == two
    assert hash(one) == hash(two)
