"""Numbers and quantities in print, after ISO 80000-1 and the SI Brochure.

A *plain* number is ASCII and reads back: `-12345.6`, `12.50e6`, `2 1/2`. `typeset` turns it into what is printed:
thin-space groups of three, a true minus, `× 10` with a superscript. Nothing else in the package formats numbers.
"""

from __future__ import annotations

import math
import re
from decimal import ROUND_HALF_EVEN, Decimal
from functools import lru_cache

THIN = "\u2009"
NARROW = "\u202f"
"""Between a number and its unit; doesn't break."""
MINUS = "−"
_SUPER = str.maketrans("0123456789-./()", "⁰¹²³⁴⁵⁶⁷⁸⁹⁻·ᐟ⁽⁾")
LOW, HIGH = Decimal("0.001"), Decimal(99_999)
MOST_DIGITS = 15


def plain(value: float, digits: int) -> str:
    """A value to so many significant digits, trailing zeros kept, powers of ten by threes outside 0.001 to 99 999."""
    if value == 0:
        return "0"
    if not math.isfinite(value):
        return str(value)
    rounded = _round(Decimal(repr(value)), digits)
    if LOW <= abs(rounded) <= HIGH:
        return _fixed(rounded, digits)
    exponent = rounded.adjusted()
    thousands = exponent - exponent % 3
    mantissa = _fixed(rounded.scaleb(-thousands), digits)
    return f"{mantissa}e{thousands}"


def _round(value: Decimal, digits: int) -> Decimal:
    place = value.adjusted() - digits + 1
    return value.quantize(Decimal(1).scaleb(place), ROUND_HALF_EVEN) if value.adjusted() < 400 else value


def _fixed(value: Decimal, digits: int) -> str:
    places = max(digits - 1 - value.adjusted(), 0)
    return f"{value:.{places}f}"


def step_of(number: str) -> float:
    """One unit in the last printed digit of a plain number: 0.01 for `56.10`, 1e4 for `12.50e6`."""
    mantissa, _, exponent = number.partition("e")
    if "/" in mantissa:
        return 0.0
    body = mantissa.lstrip("-")
    places = len(body.partition(".")[2])
    if not places:
        kept = len(body.rstrip("0")) or 1
        return 1.0 * 10 ** int(exponent or 0) if kept == len(body) else 10.0 ** (len(body) - kept + int(exponent or 0))
    return float(10.0 ** (int(exponent or 0) - places))


def read_plain(number: str) -> float:
    """The value of a plain number, mixed fractions included."""
    total, sign = 0.0, -1.0 if number.startswith("-") else 1.0
    for piece in number.lstrip("-").replace("_", "").split():
        if "/" in piece:
            over, under = piece.split("/")
            total += float(over) / float(under)
        else:
            total += float(piece)
    return sign * total


@lru_cache(maxsize=65536)
def typeset(number: str) -> str:
    """A plain number as printed in running text."""
    mantissa, _, exponent = number.replace("_", "").replace("E", "e").partition("e")
    text = grouped(mantissa)
    if exponent:
        text += f"{NARROW}×{NARROW}10" + superscript(str(int(exponent)))
    return text


def grouped(mantissa: str) -> str:
    """Groups of three by thin spaces on both sides of the point, where there are more than four digits; a true minus."""
    sign = MINUS if mantissa.startswith("-") else ""
    body = mantissa.lstrip("-")
    if "/" in body:
        return sign + body
    whole, point, part = body.partition(".")
    if len(whole) > 4:
        head = len(whole) % 3
        whole = THIN.join(filter(None, [whole[:head], *(whole[i : i + 3] for i in range(head, len(whole), 3))]))
    if len(part) > 4:
        part = THIN.join(part[i : i + 3] for i in range(0, len(part), 3))
    return sign + whole + point + part


def superscript(text: str) -> str:
    """Digits and signs as superscripts."""
    return text.translate(_SUPER)


_SHOWN = {"deg": "°", "degC": "°C", "degF": "°F", "delta_degF": "°F", "litre": "L", "tonne": "t", "hp_metric": "hp (metric)", "US_gal": "US gal", "short_ton": "short ton", "short_tonf": "short tonf", "h": "h", "um": "µm", "us": "µs"}  # fmt: skip


@lru_cache(maxsize=4096)
def unit_symbol(unit: str) -> str:
    """A typed unit as printed in running text: `kN⋅m`, `mm⁴`, `J/(kg⋅K)`, `°C`."""
    text = re.sub(r"[^\W\d]\w*", lambda m: _SHOWN.get(m.group(), m.group()), unit)
    text = re.sub(r"\^\(?(-?[\d./]+)\)?", lambda m: superscript(m.group(1)), text)
    return text.replace("*", "⋅")


def quantity(number: str, unit: str) -> str:
    """Number and unit in running text; no space before the degree sign of a plane angle."""
    if not unit:
        return typeset(number)
    if unit == "deg":
        return typeset(number) + "°"
    return typeset(number) + NARROW + unit_symbol(unit)


def feet_and_inches(inches: float, denominator: int) -> str:
    """A length as `12 ft 6 1/2 in`, to the nearest fraction of an inch."""
    total = round(abs(inches) * denominator)
    feet, rest = divmod(total, 12 * denominator)
    whole, over = divmod(rest, denominator)
    common = math.gcd(over, denominator)
    parts = [str(whole)] if whole or not over else []
    if over:
        parts.append(f"{over // common}/{denominator // common}")
    text = (f"{feet} ft " if feet else "") + " ".join(parts) + " in"
    return "-" + text if inches < 0 and total else text
