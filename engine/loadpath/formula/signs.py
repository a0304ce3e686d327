"""What the signs of a relation mean between two numbers or words: one rule for verdicts and for print."""

from __future__ import annotations

from collections.abc import Callable

EQUAL = 1e-9
"""Sides of a relation within this much of the larger are equal."""


def nearly(a: float, b: float) -> bool:
    """True where two sides count as equal."""
    return abs(a - b) <= EQUAL * max(abs(a), abs(b))


_COMPARE: dict[str, Callable[[float, float], bool]] = {
    "<=": lambda a, b: a < b or nearly(a, b),
    "<": lambda a, b: a < b and not nearly(a, b),
    ">=": lambda a, b: a > b or nearly(a, b),
    ">": lambda a, b: a > b and not nearly(a, b),
    "=": nearly,
}


def holds(sign: str, a: float | str, b: float | str) -> bool:
    """One relation between two values, words included."""
    if isinstance(a, str) or isinstance(b, str):
        return a == b
    return _COMPARE[sign](a, b)
