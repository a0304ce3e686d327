"""The values of a curve on both sides of a place where it may jump."""

from __future__ import annotations

import math
from dataclasses import dataclass

from loadpath.numeric.trouble import Curve, tried

BESIDE = 4e-9
"""How far beside a place, in parts of it or of the stretch: conditions see nearer values as equal (1e-9)."""
JUMP = 1e-6
"""A change across a place above this share of all values is a jump."""


@dataclass(frozen=True, slots=True)
class Sides:
    """nan where the curve has no value, or where the side is outside the stretch."""

    left: float
    here: float
    right: float


def beside(place: float, low: float, high: float) -> float:
    """A distance that is certainly off a place."""
    return BESIDE * max(abs(place), high - low)


def sides(f: Curve, f_left: Curve | None, place: float, low: float, high: float, spread: float) -> Sides:
    """Just left, at, and just right of a place.

    `f_left` knows the brackets that begin there; any other jump shows in the values beside the place.
    `spread` is the range of the values, against which a jump is told from a slope.
    """
    apart, here = beside(place, low, high), tried(f, place)
    left = tried(f_left, place) if f_left is not None else here
    return Sides(
        _limit(f, left, place, -apart, spread) if place - 2 * apart > low else math.nan,
        here,
        _limit(f, here, place, apart, spread) if place + 2 * apart < high else math.nan,
    )


def _limit(f: Curve, expected: float, place: float, step: float, spread: float) -> float:
    """The value expected on a side; where the values there are others, a line through two of them."""
    near, next_to_it = tried(f, place + step), tried(f, place + 2 * step)
    if abs(near - expected) <= JUMP * spread:
        return expected
    return 2 * near - next_to_it if abs(near - next_to_it) <= JUMP * spread else near


def spread_of(values: list[float]) -> float:
    """The range of the values that there are."""
    there = [v for v in values if not math.isnan(v)]
    return max(there) - min(there) if there else 0.0


def evenly(low: float, high: float, count: int) -> list[float]:
    """Places from low to high, both exactly."""
    step = high - low
    return [low, *(low + step * i / (count - 1) for i in range(1, count - 1)), high]
