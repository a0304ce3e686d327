"""Where a numerical method cannot go on, and the guarded working of a function."""

from __future__ import annotations

import math
from collections.abc import Callable

Curve = Callable[[float], float]
"""A function of one name, coherent SI in and out; may raise ArithmeticError or ValueError off its domain."""


class NotDefined(Exception):
    """A function has no value at a place that the method must look at."""

    def __init__(self, x: float, what: str = "has no value") -> None:
        super().__init__(f"{what} at {x!r}")
        self.x = x
        """The place, coherent SI."""
        self.what = what
        """`has no value`, or what it does there: `grows without settling`."""


class NoConvergence(Exception):
    """A method that goes nearer step by step did not arrive."""

    def __init__(self, what: str, low: float, high: float) -> None:
        super().__init__(f"{what} between {low!r} and {high!r}")
        self.what = what
        self.low = low
        self.high = high
        """The stretch in which it failed, coherent SI."""


def check_bounds(low: float, high: float) -> tuple[float, float]:
    """Both as floats; raises ValueError unless they are finite and the first is below the second."""
    if not (math.isfinite(low) and math.isfinite(high) and low < high):
        raise ValueError(f"bounds {low!r} and {high!r}")
    return float(low), float(high)


def tried(f: Curve, x: float) -> float:
    """The value, nan where there is none."""
    try:
        y = float(f(x))
    except (ArithmeticError, ValueError):
        return math.nan
    return y if math.isfinite(y) else math.nan


def signed(f: Curve, sign: float) -> Curve:
    """The curve, or for a sign of -1 its mirror image."""
    return lambda x: sign * f(x)


def worked(f: Curve, x: float) -> float:
    """The value; raises `NotDefined` where there is none."""
    y = tried(f, x)
    if math.isnan(y):
        raise NotDefined(x)
    return y
