"""The plain functions of the language, by family."""

from __future__ import annotations

import math

from loadpath.functions.model import Function


def _sqrt(x: float) -> float:
    if x < 0:
        raise ValueError("a square root takes a value of 0 or more")
    return math.sqrt(x)


def _ln(x: float) -> float:
    if x <= 0:
        raise ValueError("a logarithm takes a value above 0")
    return math.log(x)


def _log10(x: float) -> float:
    if x <= 0:
        raise ValueError("a logarithm takes a value above 0")
    return math.log10(x)


ROUNDING = 1e-15
"""What rounding, in parts of the angle, can leave of a sine or cosine that is 0: `sin(180 deg)` is 0."""
OVER_ONE = 1e-12
"""How far rounding may carry a ratio beyond 1 before its arc sine is refused."""


def _sin(x: float) -> float:
    value = math.sin(x)
    return 0.0 if abs(x) > 1 and abs(value) <= ROUNDING * abs(x) else value


def _cos(x: float) -> float:
    value = math.cos(x)
    return 0.0 if abs(value) <= ROUNDING * abs(x) else value


def _tan(x: float) -> float:
    if _cos(x) == 0:
        raise ValueError("tan is not defined where the cosine is 0")
    return 0.0 if _sin(x) == 0 else math.tan(x)


def _sec(x: float) -> float:
    if _cos(x) == 0:
        raise ValueError("sec is not defined where the cosine is 0")
    return 1 / math.cos(x)


def _ratio(x: float, function: str) -> float:
    if not abs(x) <= 1 + OVER_ONE:
        raise ValueError(f"{function} takes a value from -1 to 1")
    return max(-1.0, min(x, 1.0))


def _asin(x: float) -> float:
    return math.asin(_ratio(x, "asin"))


def _acos(x: float) -> float:
    return math.acos(_ratio(x, "acos"))


def _atan2(y: float, x: float) -> float:
    if x == 0 and y == 0:
        raise ValueError("atan2 is not defined where both arguments are 0")
    return math.atan2(y + 0.0, x)  # a zero has no sign


NEAR = 1e-9
"""A value within this much of a whole number of steps counts as that number."""


def _steps(x: float, step: float) -> tuple[float, float]:
    if step <= 0:
        raise ValueError("the step to round to must be above 0")
    count = x / step
    return count, round(count)


def _round_up(x: float, step: float) -> float:
    count, whole = _steps(x, step)
    return (whole if abs(count - whole) <= NEAR * max(1.0, abs(count)) else math.ceil(count)) * step


def _round_down(x: float, step: float) -> float:
    count, whole = _steps(x, step)
    return (whole if abs(count - whole) <= NEAR * max(1.0, abs(count)) else math.floor(count)) * step


ROOTS = (
    Function("sqrt", "root", 1, 1, _sqrt, "x = sqrt(16 mm^2) | 4 mm", root=2),
    Function("cbrt", "root", 1, 1, math.cbrt, "x = cbrt(27 mm^3) | 3 mm", root=3),
)
MAGNITUDE = (Function("abs", "same", 1, 1, abs, "x = abs(0 kN - 3 kN) | 3 kN"),)
POWERS = (
    Function("exp", "plain", 1, 1, math.exp, "x = exp(0) | 1"),
    Function("ln", "plain", 1, 1, _ln, "x = ln(1) | 0"),
    Function("log10", "plain", 1, 1, _log10, "x = log10(1000) | 3"),
)
ANGLES = (
    Function("sin", "plain", 1, 1, _sin, "x = sin(30 deg) | 0.5", angle=True),
    Function("cos", "plain", 1, 1, _cos, "x = cos(60 deg) | 0.5", angle=True),
    Function("tan", "plain", 1, 1, _tan, "x = tan(45 deg) | 1", angle=True),
    Function("sec", "plain", 1, 1, _sec, "x = sec(60 deg) | 2", angle=True),
    Function("asin", "plain", 1, 1, _asin, "x = asin(0.5) | 30 deg"),
    Function("acos", "plain", 1, 1, _acos, "x = acos(0.5) | 60 deg"),
    Function("atan", "plain", 1, 1, math.atan, "x = atan(1) | 45 deg"),
    Function("atan2", "like-first", 2, 2, _atan2, "x = atan2(3 kN, 3 kN) | 45 deg"),
    Function("sinh", "plain", 1, 1, math.sinh, "x = sinh(0) | 0"),
    Function("cosh", "plain", 1, 1, math.cosh, "x = cosh(0) | 1"),
    Function("tanh", "plain", 1, 1, math.tanh, "x = tanh(0) | 0"),
)
CHOOSING = (
    Function("min", "choose", 1, 50, min, "x = min(3 kN, 2 kN) | 2 kN"),
    Function("max", "choose", 1, 50, max, "x = max(3 kN, 2 kN) | 3 kN"),
    Function("round_up", "steps", 2, 2, _round_up, "x = round_up(7.1 mm, 2 mm) | 8 mm"),
    Function("round_down", "steps", 2, 2, _round_down, "x = round_down(7.1 mm, 2 mm) | 6 mm"),
)
