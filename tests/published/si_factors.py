"""The values of the published cases in coherent SI units, by exact factors of the tests' own.

A wrong factor in the engine can't cancel itself out.
"""

import math
import re
from fractions import Fraction

# source: NIST SP 811 (2008), appendix B (from memory): the definitions, from which all other factors follow.
INCH = Fraction(254, 10_000)
FOOT = 12 * INCH
POUND = Fraction(45_359_237, 100_000_000)
GRAVITY = Fraction(980_665, 100_000)
LBF = POUND * GRAVITY
HORSEPOWER = 550 * FOOT * LBF

TO_SI: dict[str, Fraction] = {
    "1": Fraction(1),
    "N": Fraction(1),
    "kN": Fraction(1_000),
    "lbf": LBF,
    "kip": 1_000 * LBF,
    "kgf": GRAVITY,
    "ton_force": 2_000 * LBF,
    "m": Fraction(1),
    "mm": Fraction(1, 1_000),
    "cm": Fraction(1, 100),
    "in": INCH,
    "ft": FOOT,
    "Pa": Fraction(1),
    "kPa": Fraction(1_000),
    "MPa": Fraction(1_000_000),
    "GPa": Fraction(1_000_000_000),
    "psi": LBF / INCH**2,
    "ksi": 1_000 * LBF / INCH**2,
    "kg": Fraction(1),
    "lb": POUND,
    "slug": LBF / FOOT,
    "s": Fraction(1),
    "J": Fraction(1),
    "W": Fraction(1),
    "kW": Fraction(1_000),
    "hp": HORSEPOWER,
    "hp_metric": 75 * GRAVITY,
    "microstrain": Fraction(1, 1_000_000),
    "delta_degF": Fraction(5, 9),
    "delta_degC": Fraction(1),
    "rad": Fraction(1),
    "deg": Fraction(1, 180),  # times pi
    "rpm": Fraction(2, 60),  # times pi
}
TIMES_PI = ("deg", "rpm")


def si(value: float, unit: str) -> float:
    """A value of a published case in coherent SI units; an absolute temperature in kelvin."""
    if unit == "degF":
        return float((Fraction(str(value)) + Fraction(45_967, 100)) * Fraction(5, 9))
    factor, pis, sign = Fraction(1), 0, 1
    for part in re.split(r"([*/])", unit):
        if part in ("*", "/"):
            sign = 1 if part == "*" else -1
            continue
        name, _, power = part.partition("^")
        exponent = sign * int(power or 1)
        factor *= TO_SI[name] ** exponent
        pis += exponent * (name in TIMES_PI)
    return float(Fraction(str(value)) * factor) * math.pi**pis
