"""Axes: round values, the numbers at them, and the ends."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from loadpath.figures.scale import Scale, scale


def labels(s: Scale) -> list[str]:
    return [label for _, label in s.ticks]


@pytest.mark.parametrize(
    ("low", "high", "most", "power", "expected"),
    [
        (0, 31.25, 8, 0, ["0", "5", "10", "15", "20", "25", "30"]),
        (-12, 0, 7, 0, ["−12", "−10", "−8", "−6", "−4", "−2", "0"]),
        (0, 1e-6, 6, -6, ["0", "0.2", "0.4", "0.6", "0.8", "1.0"]),
        (0, 3e7, 4, 6, ["0", "10", "20", "30"]),
        (0, 20_000, 5, 0, ["0", "5000", "10\u2009000", "15\u2009000", "20\u2009000"]),
        (40, 40, 5, 0, ["0", "10", "20", "30", "40"]),
        (0, 0, 5, 0, ["−1.0", "−0.5", "0", "0.5", "1.0"]),
        (101.3, 101.35, 6, 0, ["101.30", "101.31", "101.32", "101.33", "101.34", "101.35"]),
    ],
)
def test_round_values(low: float, high: float, most: int, power: int, expected: list[str]) -> None:
    s = scale(low, high, most, values_axis=True)
    assert labels(s) == expected
    assert s.power == power


def test_zero_is_on_the_axis_of_values_unless_they_are_close() -> None:
    assert scale(60, 100, 5, values_axis=True).low == 0
    assert scale(-100, -60, 5, values_axis=True).high == 0
    assert scale(90, 100, 5, values_axis=True).low == 90


def test_the_other_axis_ends_where_the_values_end() -> None:
    s = scale(1.5, 6.24, 9, values_axis=False)
    assert (s.low, s.high) == (1.5, 6.24)


@given(st.floats(-1.7e308, 1.7e308), st.floats(-1.7e308, 1.7e308), st.integers(3, 11), st.booleans())
def test_any_range(a: float, b: float, most: int, values_axis: bool) -> None:
    low, high = min(a, b), max(a, b)
    s = scale(low, high, most, values_axis=values_axis)
    assert 2 <= len(s.ticks) <= most
    assert s.low < s.high
    values = [v for v, _ in s.ticks]
    assert values == sorted(set(values))
    assert len(set(labels(s))) == len(values)
    for value, label in s.ticks:
        read = float(label.replace("−", "-").replace("\u2009", ""))
        assert read == pytest.approx(value, rel=1e-12, abs=1e-12 * (s.high - s.low))
        assert s.low - 1e-6 * (s.high - s.low) <= value <= s.high + 1e-6 * (s.high - s.low)
    for end in (low, high):
        assert -1e-6 <= s.place(end) <= 1 + 1e-6
