"""An axis: its ends, its round values, the power of ten taken out of its numbers."""

from __future__ import annotations

import math
from dataclasses import dataclass
from decimal import ROUND_CEILING, ROUND_FLOOR, Decimal

from loadpath.units.printing import grouped

LARGEST, SMALLEST = 99_999.0, 0.01
"""Axes whose largest magnitude is outside have a power of ten beside the unit."""
NOTHING = 1e-290
"""Magnitudes below are drawn as zero."""
FLAT = 1e-9
"""A range smaller than this part of its values is rounding: the curve is drawn level."""
NEAR = 0.03
"""An axis goes on to a round value that is nearer to its end than this part of it."""


@dataclass(frozen=True, slots=True)
class Scale:
    """An axis in units of 10^power."""

    low: float
    high: float
    power: int
    ticks: tuple[tuple[float, str], ...]
    """Round values between the ends, rising, with their labels."""

    def place(self, value: float) -> float:
        """0 at the low end, 1 at the high end; for a value in the unit itself."""
        return (self.value(value) - self.low) / (self.high - self.low)

    def value(self, value: float) -> float:
        """In units of 10^power."""
        return value / 10.0**self.power


def scale(low: float, high: float, most: int, *, values_axis: bool) -> Scale:
    """The axis for values from low to high with at most so many ticks (3 or more), and two of them at least.

    That of the values has zero on it, unless they differ by less than a quarter of themselves.
    The other one ends where the values end.
    """
    largest = max(abs(low), abs(high))
    power = _power(largest)
    low, high = (0.0 if largest < NOTHING else v / 10.0**power for v in (low, high))
    largest = max(abs(low), abs(high))
    flat = high - low <= FLAT * largest
    if values_axis and (flat or high - low > 0.25 * largest):
        low, high = min(low, 0.0), max(high, 0.0)
    elif flat:
        low, high = low - 0.05 * largest, high + 0.05 * largest
    if low == high:
        low, high = (-1.0, 1.0) if values_axis else (low - 0.5, low + 0.5)
    for step, exponent in _steps(high - low):  # noqa: B007
        ends = _snapped(low, high, float(step)) if values_axis else (low, high)
        values = _multiples(*ends, step)
        if len(values) <= most:
            break
    low, high = ends
    if len(values) < 2:
        values = [(Decimal(low) / step).to_integral_value(ROUND_FLOOR) + i for i in range(3)]
        values = values[:2] if float(values[1] * step) >= high else values
        low, high = min(low, float(values[0] * step)), max(high, float(values[-1] * step))
    return Scale(low, high, power, tuple((float(k * step), _label(k * step, exponent)) for k in values))


def _label(value: Decimal, exponent: int) -> str:
    return grouped(f"{value:.{max(-exponent, 0)}f}") if value else "0"


def _snapped(low: float, high: float, step: float) -> tuple[float, float]:
    """The ends, drawn out to a round value that is near enough."""
    near = NEAR * (high - low)
    below, above = math.floor(low / step) * step, math.ceil(high / step) * step
    return (below if low - below < near else low), (above if above - high < near else high)


def _power(largest: float) -> int:
    if largest < NOTHING or SMALLEST <= largest <= LARGEST:
        return 0
    return math.floor(math.log10(largest)) // 3 * 3


def _steps(span: float) -> list[tuple[Decimal, int]]:
    """Steps of 1, 2, 2.5 and 5 times a power of ten, rising, with the exponent of their last digit."""
    start = math.floor(math.log10(span)) - 2
    digits = ("1", "2", "2.5", "5")
    return [(Decimal(d).scaleb(e), e - (d == "2.5")) for e in range(start, start + 5) for d in digits]


def _multiples(low: float, high: float, step: Decimal) -> list[Decimal]:
    """k for every k times step within the ends, a hair beyond them included."""
    hair = Decimal("1e-9") * Decimal(high - low) / step
    first = (Decimal(low) / step - hair).to_integral_value(ROUND_CEILING)
    last = (Decimal(high) / step + hair).to_integral_value(ROUND_FLOOR)
    return [first + i for i in range(int(last - first) + 1)]
