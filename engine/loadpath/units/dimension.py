"""Dimensions: the powers of length, mass, time and temperature in a quantity. An angle is a plain number."""

from __future__ import annotations

from fractions import Fraction
from functools import lru_cache
from typing import NamedTuple

MOST_POWER, MOST_PARTS = 24, 1000
"""The largest exponent that a quantity of a sheet may have, and the largest denominator of one."""


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

    @property
    def is_within_reach(self) -> bool:
        """False where an exponent is too large, or too fine, for a unit that could be printed."""
        return all(abs(e) <= MOST_POWER and e.denominator <= MOST_PARTS for e in self)


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
BENDING_STIFFNESS = FORCE.times(AREA)
DAMPING = FORCE.over(VELOCITY)
HEAT_FLUX = POWER.over(AREA)
HEAT_TRANSFER = HEAT_FLUX.over(TEMPERATURE)
CONDUCTIVITY = HEAT_TRANSFER.times(LENGTH)
SPECIFIC_HEAT = MOMENT.over(MASS).over(TEMPERATURE)

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
    BENDING_STIFFNESS: "bending stiffness",
    TEMPERATURE.power(Fraction(-1)): "1/temperature",
    LENGTH.power(Fraction(-1)): "1/length",
}


def say(d: Dimension) -> str:
    """A dimension in the words of the trade: `stress`, `force`, else a product such as `force/length^2`."""
    return _NAMES[d] if d in _NAMES else product(simplest(by_force(d), by_mass(d)))


Powers = list[tuple[str, Fraction]]
"""Words or units, each with its exponent."""


Words = tuple[str, str, str, str]
"""For force or mass, for length, time and temperature."""


def by_force(of: Dimension, words: Words = ("force", "length", "time", "temperature")) -> Powers:
    """A dimension in powers of force, length, time and temperature."""
    powers = (of.mass, of.length - of.mass, of.time + 2 * of.mass, of.temperature)
    return list(zip(words, powers, strict=True))


def by_mass(of: Dimension, words: Words = ("mass", "length", "time", "temperature")) -> Powers:
    """A dimension in powers of mass, length, time and temperature."""
    return list(zip(words, (of.mass, of.length, of.time, of.temperature), strict=True))


def simplest(*ways: Powers) -> Powers:
    """The way with the smallest exponents in all; the first of equal ones."""
    return min(ways, key=lambda powers: sum(abs(exponent) for _, exponent in powers))


def product(powers: Powers) -> str:
    """`kN*s`, `J/(kg*K)`, `1/s^2`."""
    above = [_factor(word, e) for word, e in powers if e > 0]
    below = [_factor(word, -e) for word, e in powers if e < 0]
    top = "*".join(above) or "1"
    if not below:
        return top
    return f"{top}/{below[0]}" if len(below) == 1 else f"{top}/({'*'.join(below)})"


def _factor(word: str, exponent: Fraction) -> str:
    base = word if word.replace("_", "").isalpha() else f"({word})"
    if exponent == 1:
        return base
    if exponent.denominator == 1:
        return f"{base}^{exponent}"
    return f"{base}^{float(exponent):g}" if 100 % exponent.denominator == 0 else f"{base}^({exponent})"
