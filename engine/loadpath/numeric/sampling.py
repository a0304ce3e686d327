"""The points of a curve for a plot: even steps, breaks, jumps and peaks."""

from __future__ import annotations

import math

from loadpath.numeric.sides import Sides, evenly, sides, spread_of
from loadpath.numeric.trouble import Curve, check_bounds, tried

NEAR = 1e-9
"""An even step within this share of the stretch from a break or a peak gives way to it."""


def sample(
    f: Curve,
    f_left: Curve | None,
    low: float,
    high: float,
    places: tuple[float, ...],
    peaks: tuple[float, ...],
    count: int = 201,
) -> tuple[tuple[float, float], ...]:
    """Points (x, y) of a curve, coherent SI, x never falling; y is nan where the curve has no value.

    Evenly spaced, with the breaks (two points with one x at a jump, three where the value at the place is
    neither side's) and the peaks exactly. Raises ValueError for bounds that are none and fewer than two
    points.
    """
    low, high = check_bounds(low, high)
    if count < 2:
        raise ValueError(f"{count} points")
    breaks = {p for p in places if low <= p <= high}
    own = breaks | {p for p in peaks if low <= p <= high} | {low, high}
    steps = [p for p in evenly(low, high, count) if all(abs(p - q) > NEAR * (high - low) for q in own)]
    spread = spread_of([tried(f, p) for p in evenly(low, high, count)])
    points: list[tuple[float, float]] = []
    for x in sorted({*steps, *own}):
        if x in breaks:
            values = _different(sides(f, f_left, x, low, high, spread), x, high, f_left)
            points += [(x, y) for y in values]
        else:
            points.append((x, tried(f, x)))
    return tuple(points)


def _different(found: Sides, x: float, high: float, f_left: Curve | None) -> list[float]:
    """The values at a break from left to right, each once."""
    left = found.left
    if x == high and f_left is not None:
        left = tried(f_left, x)
    values = [found.here]
    if not math.isnan(left) and left != found.here:
        values.insert(0, left)
    if not math.isnan(found.right) and found.right != found.here:
        values.append(found.right)
    return values
