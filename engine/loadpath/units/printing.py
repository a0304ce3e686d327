"""Numbers and quantities in print, after ISO 80000-1 and the SI Brochure.

A *plain* number is ASCII and reads back: `-12345.6`, `12.50e6`, `2 1/2`. `typeset` turns it into what is
printed: thin-space groups of three, a true minus, `× 10` with a superscript. Nothing else formats numbers.
"""

from __future__ import annotations

import math
import re
from decimal import ROUND_HALF_EVEN, Decimal
from functools import lru_cache

from loadpath.units.unit import PREFIXED

THIN = "\u2009"
NARROW = "\u202f"
"""Between a number and its unit; doesn't break."""
MINUS = "−"
LOW, HIGH = Decimal("0.001"), Decimal(99_999)
"""A magnitude within these is printed without a power of ten."""
MOST_DIGITS = 15
_SUPER = str.maketrans("0123456789-./()", "⁰¹²³⁴⁵⁶⁷⁸⁹⁻·ᐟ⁽⁾")


# --- plain numbers ------------------------------------------------------------------------------------------


def plain(value: float, digits: int) -> str:
    """A value to so many significant digits: trailing zeros, and powers of ten outside 0.001 to 99 999.

    A value half-way between two goes to the even one (ISO 80000-1, annex B, rule A).
    """
    if value == 0:
        return "0"
    if not math.isfinite(value):
        return str(value)
    exact = Decimal(repr(value))
    rounded = exact.quantize(Decimal(1).scaleb(exact.adjusted() - digits + 1), ROUND_HALF_EVEN)
    if LOW <= abs(rounded) <= HIGH:
        return _fixed(rounded, digits)
    thousands = rounded.adjusted() // 3 * 3
    return f"{_fixed(rounded.scaleb(-thousands), digits)}e{thousands}"


def _fixed(value: Decimal, digits: int) -> str:
    return f"{value:.{max(digits - 1 - value.adjusted(), 0)}f}"


def step_of(number: str, digits: int = 0) -> float:
    """One unit in the last digit that counts of a plain number: 0.01 for `56.10`, 1e4 for `12.50e6`.

    In a whole number that ends in zeros that is the last other digit (1000 for `12000`), unless the
    significant `digits` that it was printed to are given (10 for `12000`, 4). 0 for a fraction.
    """
    mantissa, _, exponent = number.lstrip("-").partition("e")
    if "/" in mantissa:
        return 0.0
    whole, _, part = mantissa.partition(".")
    counting = digits if digits and not part else len(whole.rstrip("0") or "0")
    place = -len(part) if part else max(len(whole) - counting, 0)
    return float(f"1e{place + int(exponent or 0)}")


def read_plain(number: str) -> float:
    """The value of a plain number, mixed fractions included."""
    total, sign = 0.0, -1.0 if number.startswith("-") else 1.0
    for piece in number.lstrip("-").replace("_", "").split():
        over, _, under = piece.partition("/")
        total += float(over) / float(under or 1)
    return sign * total


def feet_and_inches(inches: float, denominator: int) -> str:
    """A length as `12 ft 6 1/2 in`, to the nearest fraction of an inch."""
    total = round(abs(inches) * denominator)
    feet, rest = divmod(total, 12 * denominator)
    whole, over = divmod(rest, denominator)
    common = math.gcd(over, denominator)
    parts = [f"{feet} ft"] if feet else []
    parts += [str(whole)] if whole or not over else []
    parts += [f"{over // common}/{denominator // common}"] if over else []
    return ("-" if inches < 0 and total else "") + " ".join(parts) + " in"


# --- running text -------------------------------------------------------------------------------------------


@lru_cache(maxsize=65536)
def typeset(number: str) -> str:
    """A plain number as printed in running text."""
    mantissa, _, exponent = number.replace("_", "").replace("E", "e").partition("e")
    power = f"{NARROW}×{NARROW}10" + superscript(str(int(exponent))) if exponent else ""
    return grouped(mantissa) + power


def grouped(mantissa: str) -> str:
    """Thin-space groups of three on each side of the point that has more than four digits; a true minus."""
    sign = MINUS if mantissa.startswith("-") else ""
    body = mantissa.lstrip("-")
    whole, point, part = body.partition(".")
    if not (whole + part).isdigit():
        return sign + body
    if len(whole) > 4:
        head = len(whole) % 3
        groups = [whole[:head], *(whole[i : i + 3] for i in range(head, len(whole), 3))]
        whole = THIN.join(group for group in groups if group)
    if len(part) > 4:
        part = THIN.join(part[i : i + 3] for i in range(0, len(part), 3))
    return sign + whole + point + part


def superscript(text: str) -> str:
    """Digits and signs as superscripts."""
    return text.translate(_SUPER)


_SHOWN = {
    "deg": "°", "degC": "°C", "degF": "°F", "delta_degF": "°F", "litre": "L", "tonne": "t",
    "hp_metric": "hp (metric)", "US_gal": "US gal", "short_ton": "short ton", "short_tonf": "short tonf",
}  # fmt: skip


_POWER = re.compile(r"\^(?:\((-?\d+(?:\.\d+)?(?:/\d+)?)\)|(-?\d+(?:\.\d+)?))")


@lru_cache(maxsize=4096)
def unit_symbol(unit: str) -> str:
    """A typed unit as printed in running text: `kN⋅m`, `mm⁴`, `J/(kg⋅K)`, `°C`."""
    text = re.sub(r"[^\W\d]\w*", lambda match: _name_symbol(match.group()), unit)
    text = _POWER.sub(lambda m: superscript(m.group(1) or m.group(2)), text)
    return text.replace("*", "⋅")


def _name_symbol(name: str) -> str:
    if name[0] in "uμ" and name[1:] in PREFIXED:
        return "µ" + name[1:]
    return _SHOWN.get(name, name)


def quantity(number: str, unit: str) -> str:
    """Number and unit in running text; no space before the degree sign of a plane angle."""
    if not unit:
        return typeset(number)
    if unit == "deg":
        return typeset(number) + "°"
    return typeset(number) + NARROW + unit_symbol(unit)
