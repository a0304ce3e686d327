"""Texts inside formulas: what both notations need to know of numbers and typed words."""

from __future__ import annotations

import re

MIXED = re.compile(r"(-?)(?:([^ /]+) )?([^ /]+)/([^ /]+)")
"""A number with a fraction: sign, whole number, numerator, denominator."""

_UNPRINTABLE = re.compile("[\x00-\x1f\x7f-\x9f\u202a-\u202e\u2066-\u2069\ud800-\udfff\ufffe\uffff]")


def mantissa_and_exponent(number: str) -> tuple[str, int | None]:
    """`1_200e06` as `1200` and 6; None where there is no power of ten."""
    mantissa, _, exponent = number.replace("_", "").replace("E", "e").partition("e")
    return mantissa, int(exponent) if exponent else None


def printable(text: str) -> str:
    """The text, controls and signs that turn the direction of writing replaced."""
    return _UNPRINTABLE.sub("\ufffd", text)
