"""Dimensions: the powers of length, mass, time and temperature in a quantity. An angle is a plain number."""

from __future__ import annotations

from fractions import Fraction
from functools import lru_cache
from typing import NamedTuple


class Dimension(NamedTuple):
    """Exponents of metre, kilogram, second and kelvin."""

    length: Fraction = Fraction(0)
    mass: Fraction = Fraction(0)
    time: Fraction = Fraction(0)
    temperature: Fraction = Fraction(0)

    def times(self, other: Dimension) -> Dimension:
        """Of a product."""
        return _times(self, other)

    def over(self, other: Dimension) -> Dimension:
        """Of a quotient."""
        return _times(self, other.power(Fraction(-1)))

    def power(self, exponent: Fraction) -> Dimension:
        """Of a power."""
        return _power(self, exponent)

    @property
    def is_plain(self) -> bool:
        """True for a plain number."""
        return self == PLAIN


@lru_cache(maxsize=4096)
def _times(a: Dimension, b: Dimension) -> Dimension:
    return Dimension(*(x + y for x, y in zip(a, b, strict=True)))


@lru_cache(maxsize=4096)
def _power(a: Dimension, exponent: Fraction) -> Dimension:
    return Dimension(*(x * exponent for x in a))


def dimension(length: int = 0, mass: int = 0, time: int = 0, temperature: int = 0) -> Dimension:
    """From whole numbers."""
    return Dimension(Fraction(length), Fraction(mass), Fraction(time), Fraction(temperature))


PLAIN = Dimension()
LENGTH = dimension(1)
AREA = dimension(2)
VOLUME = dimension(3)
FOURTH = dimension(4)
MASS = dimension(0, 1)
TIME = dimension(0, 0, 1)
TEMPERATURE = dimension(0, 0, 0, 1)
VELOCITY = dimension(1, 0, -1)
ACCELERATION = dimension(1, 0, -2)
FREQUENCY = dimension(0, 0, -1)
FORCE = dimension(1, 1, -2)
STRESS = dimension(-1, 1, -2)
MOMENT = dimension(2, 1, -2)
LINE_LOAD = dimension(0, 1, -2)
POWER = dimension(2, 1, -3)
DENSITY = dimension(-3, 1)
MASS_PER_LENGTH = dimension(-1, 1)
UNIT_WEIGHT = dimension(-2, 1, -2)

_NAMES = {
    PLAIN: "a plain number",
    LENGTH: "length",
    AREA: "area",
    VOLUME: "volume or section modulus",
    FOURTH: "second moment of area",
    MASS: "mass",
    TIME: "time",
    TEMPERATURE: "temperature",
    VELOCITY: "velocity",
    ACCELERATION: "acceleration",
    FREQUENCY: "frequency or angular speed",
    FORCE: "force",
    STRESS: "stress",
    MOMENT: "moment",
    LINE_LOAD: "force per length",
    POWER: "power",
    DENSITY: "density",
    MASS_PER_LENGTH: "mass per length",
    UNIT_WEIGHT: "force per volume",
    FORCE.times(AREA): "bending stiffness",
    TEMPERATURE.power(Fraction(-1)): "1/temperature",
    LENGTH.power(Fraction(-1)): "1/length",
}


def say(d: Dimension) -> str:
    """A dimension in the words of the trade: `stress`, `force`, else a product such as `force/length^2`."""
    if d in _NAMES:
        return _NAMES[d]
    powers = [("force", d.mass), ("length", d.length - d.mass), ("time", d.time + 2 * d.mass), ("temperature", d.temperature)]
    if d.mass == 0 or d.time + 2 * d.mass != 0:
        plain = [("mass", d.mass), ("length", d.length), ("time", d.time), ("temperature", d.temperature)]
        powers = min((powers, plain), key=lambda p: sum(abs(e) for _, e in p))
    above = [_factor(word, e) for word, e in powers if e > 0]
    below = [_factor(word, -e) for word, e in powers if e < 0]
    bottom = below[0] if len(below) == 1 else f"({'*'.join(below)})"
    return "*".join(above) or "1" if not below else f"{'*'.join(above) or '1'}/{bottom}"


def _factor(word: str, exponent: Fraction) -> str:
    if exponent == 1:
        return word
    return f"{word}^{exponent}" if exponent.denominator == 1 else f"{word}^({exponent})"
