"""Units as typed: `kN*m`, `J/(kg*K)`, `degC`, each to its exact factor and dimension. pint holds the definitions."""

from __future__ import annotations

import re
from dataclasses import dataclass, field
from difflib import get_close_matches
from fractions import Fraction
from functools import cached_property, lru_cache
from importlib.resources import files
from math import isfinite
from typing import Any

from loadpath.units.dimension import PLAIN, Dimension

PREFIXES = ("da", "n", "u", "µ", "μ", "m", "c", "d", "h", "k", "M", "G", "T")
PREFIXED = ("m", "g", "N", "Pa", "J", "W", "s", "Hz", "bar")
"""Units that take an SI prefix."""
ABSOLUTE = ("degC", "degF")
_PLAIN_NAMES = {"%": "percent"}
_HIDDEN = {"percent", "metre", "kilogram", "second", "kelvin", "radian", "degree", "gram", "newton", "pascal", "joule", "watt", "hertz", "minute", "hour"}
_GAUGE = {"psig": "psi", "psia": "psi", "barg": "bar", "bara": "bar", "kPag": "kPa", "ksig": "ksi"}
_USUAL = {
    "kn": "kN", "KN": "kN", "Kn": "kN", "mpa": "MPa", "MPA": "MPa", "Mpa": "MPa", "gpa": "GPa", "GPA": "GPa", "pa": "Pa", "PA": "Pa",
    "n": "N", "nm": "N*m", "Nm": "N*m", "kNm": "kN*m", "Nmm": "N*mm", "KPA": "kPa", "kpa": "kPa", "KPa": "kPa", "kips": "kip",
    "lbs": "lb", "lbsf": "lbf", "PSI": "psi", "KSI": "ksi", "inch": "in", "inches": "in", "feet": "ft", "foot": "ft", "MM": "mm",
    "sec": "s", "hr": "h", "Kg": "kg", "KG": "kg", "t": "tonne", "T": "tonne", "l": "litre", "L": "litre", "°C": "degC", "°F": "degF",
    "°": "deg", "C": "degC", "F": "degF", "RPM": "rpm", "kft": "kip*ft", "gal": "US_gal", "kw": "kW", "KW": "kW", "HP": "hp", "PS": "hp_metric",
    "BTU": "Btu", "ton": "short_ton", "hz": "Hz", "µε": "microstrain", "degrees": "deg", "in2": "in^2", "mm2": "mm^2", "mm3": "mm^3",
    "mm4": "mm^4", "m2": "m^2", "m3": "m^3", "cm2": "cm^2", "cm3": "cm^3", "cm4": "cm^4", "in3": "in^3", "in4": "in^4",
    "lb-ft": "lbf*ft", "ftlb": "ft*lbf", "inlb": "in*lbf",
}  # fmt: skip
STEP_OF_DEGF = "delta_degF"
"""A difference in degrees Fahrenheit: what US results of that kind are shown in; never typed."""
FEET_AND_INCHES = re.compile(r"ft-in +1/(2|4|8|16|32|64)")
"""`[ft-in 1/16]`: a length in feet, inches and fractions of an inch; its number counts inches."""
_ATOM = re.compile(r"[^\W\d]\w*|%")


class BadUnit(Exception):
    """A unit that cannot be read; carries what a finding needs."""

    def __init__(self, slug: str, message: str, help: str = "", part: str = "", at: int = 0) -> None:
        super().__init__(message)
        self.slug, self.message, self.help, self.part, self.at = slug, message, help, part, at


@dataclass(frozen=True)
class Unit:
    """A unit as typed, with what it is in coherent SI."""

    text: str
    """As typed, without spaces: `kN*m`; "" for a plain number."""
    factor: Fraction
    """SI value of one; for `degC` and `degF` of one step."""
    dimension: Dimension
    offset: Fraction = Fraction(0)
    """Kelvins at the zero of an absolute scale."""
    absolute: bool = False
    atoms: tuple[tuple[str, Fraction], ...] = field(default=(), compare=False)
    """Each named unit in it with its power."""

    @cached_property
    def _parts(self) -> tuple[float, float, float]:
        return float(self.factor.numerator), float(self.factor.denominator), float(self.offset)

    def to_si(self, value: float) -> float:
        """A number of this unit in coherent SI: multiplied first, then divided."""
        if self.absolute:
            return float(Fraction(value) * self.factor + self.offset) if isfinite(value) else value
        over, under, _ = self._parts
        return value * over / under

    def from_si(self, si: float) -> float:
        """A coherent SI value as a number of this unit."""
        if self.absolute:
            return float((Fraction(si) - self.offset) / self.factor) if isfinite(si) else si
        over, under, _ = self._parts
        return si * under / over

    @property
    def size(self) -> float:
        """The factor as a float."""
        return float(self.factor)


ONE = Unit("", Fraction(1), PLAIN)


@lru_cache(maxsize=1)
def _registry() -> Any:
    from pint import UnitRegistry

    return UnitRegistry(str(files("loadpath.units") / "units.txt"), non_int_type=Fraction)


@lru_cache(maxsize=1)
def known_names() -> frozenset[str]:
    """Every unit name of the curated set, without prefixes."""
    names = _registry()._units
    return frozenset(n for n in names if n not in _HIDDEN and not n.startswith(("delta_", "Δ"))) | {"%"}


def is_unit(name: str) -> bool:
    """True for one named unit, prefix included: `kN`, not `kN*m`."""
    if name in known_names():
        return True
    return any(name.startswith(p) and name[len(p) :] in PREFIXED for p in PREFIXES)


@lru_cache(maxsize=1024)
def _atom(name: str) -> tuple[Fraction, Dimension, Fraction]:
    """Factor, dimension and offset of one named unit."""
    registry = _registry()
    pint_name = _PLAIN_NAMES.get(name, name)
    if pint_name in ABSOLUTE:
        converter = registry._units[pint_name].converter
        return Fraction(converter.scale), Dimension(Fraction(0), Fraction(0), Fraction(0), Fraction(1)), Fraction(converter.offset)
    factor, root = registry.get_root_units(pint_name)
    powers = {base: Fraction(power) for base, power in root._units.items()}
    dimension = Dimension(*(powers.get(base, Fraction(0)) for base in ("metre", "kilogram", "second", "kelvin")))
    return Fraction(factor), dimension, Fraction(0)


@lru_cache(maxsize=4096)
def parse_unit(text: str) -> Unit:
    """The unit that a text names. Raises `BadUnit` with slug, message, mend and the part that is wrong."""
    if text in ("", "1"):
        return ONE
    if text == STEP_OF_DEGF:
        return Unit(text, Fraction(5, 9), _atom("degF")[1], atoms=((text, Fraction(1)),))
    if feet := FEET_AND_INCHES.fullmatch(text):
        inch = parse_unit("in")
        return Unit(f"ft-in 1/{feet.group(1)}", inch.factor, inch.dimension, atoms=inch.atoms)
    for match in _ATOM.finditer(text):
        if not is_unit(match.group()):
            raise unknown_unit(match.group(), text, match.start())
    reader = _UnitReader(text)
    atoms = reader.product()
    if reader.at < len(text):
        raise reader.stray()
    factor, dimension = Fraction(1), PLAIN
    for name, power in atoms:
        size, of, offset = _atom(name)
        if len(atoms) == 1 and power == 1 and name in ABSOLUTE:
            return Unit(text, size, of, offset, True, ((name, power),))
        factor *= _power_of(size, power)
        dimension = dimension.times(of.power(power))
    return Unit(text, factor, dimension, atoms=tuple(atoms))


def _power_of(size: Fraction, power: Fraction) -> Fraction:
    if power.denominator == 1:
        return size ** int(power)
    return Fraction(float(size) ** float(power))


class _UnitReader:
    """Reads `a*b^2/(c*d)`; at most one `/` outside parentheses."""

    def __init__(self, text: str) -> None:
        self.text, self.at = text, 0

    def product(self) -> list[tuple[str, Fraction]]:
        atoms, slashes = self._factor(), 0
        while self.at < len(self.text) and self.text[self.at] in "*/":
            over = self.text[self.at] == "/"
            slashes += over
            if slashes > 1:
                raise self._two_slashes()
            self.at += 1
            sign = Fraction(-1) if over else Fraction(1)
            if not over and slashes:
                raise BadUnit(
                    "bad-unit", f"in `{self.text}` it is not plain what stands under the `/`",
                    f"write the denominator in parentheses: `{self._grouped()}`", self.text, self.at - 1,
                )  # fmt: skip
            atoms += [(name, power * sign) for name, power in self._factor()]
        return atoms

    def _two_slashes(self) -> BadUnit:
        head, *below = self.text.split("/")
        bottom = f"{below[0]}^{len(below)}" if len(set(below)) == 1 and "^" not in below[0] else f"({'*'.join(below)})"
        return BadUnit("bad-unit", f"the unit `{self.text}` has two `/`", f"write `{head}/{bottom}`", self.text, self.at)

    def _grouped(self) -> str:
        head, _, tail = self.text.partition("/")
        return f"{head}/({tail})"

    def _factor(self) -> list[tuple[str, Fraction]]:
        if self.text.startswith("(", self.at):
            self.at += 1
            atoms = self.product()
            if not self.text.startswith(")", self.at):
                raise BadUnit("bad-unit", f"a parenthesis in the unit `{self.text}` is never closed", "", self.text, self.at)
            self.at += 1
        elif self.text.startswith("1/", self.at) and self.at == 0:
            self.at += 1
            return []
        else:
            atoms = [(self._name(), Fraction(1))]
        power = self._exponent()
        return [(name, p * power) for name, p in atoms]

    def _name(self) -> str:
        match = _ATOM.match(self.text, self.at)
        if match is None:
            raise self.stray()
        name = match.group()
        if not is_unit(name):
            raise unknown_unit(name, self.text, self.at)
        self.at = match.end()
        return name

    def _exponent(self) -> Fraction:
        if not self.text.startswith("^", self.at):
            return Fraction(1)
        match = re.compile(r"\^(-?\d{1,2}(?:\.\d+)?|\(-?\d{1,2}(?:/\d{1,2})?\))").match(self.text, self.at)
        if match is None:
            raise BadUnit("bad-unit", f"the power in the unit `{self.text}` is not a number", "a power is typed as in `mm^2` or `s^-1`", self.text, self.at)
        self.at = match.end()
        value = Fraction(match.group(1).strip("()"))
        if value.denominator > 12:
            raise BadUnit("bad-unit", f"the power in the unit `{self.text}` is out of range", "", self.text, self.at)
        return value

    def stray(self) -> BadUnit:
        rest = self.text[self.at :]
        part = re.match(r"[^*/()^]+", rest)
        shown = part.group() if part else rest[:1]
        if shown and not shown[0].isalpha() and rest[:1] in "*/()^":
            return BadUnit("bad-unit", f"the unit `{self.text}` is not well formed", "a unit is written as in `kN/m^2` or `J/(kg*K)`", self.text, self.at)
        return unknown_unit(shown or self.text, self.text, self.at)


def unknown_unit(name: str, text: str, at: int) -> BadUnit:
    """The finding for a part of a unit that is no unit, with the nearest one that is."""
    if name in _GAUGE:
        plain = _GAUGE[name]
        return BadUnit(
            "gauge-unit", f"`{name}` says gauge or absolute, which a unit cannot",
            f"write `{plain}` and say gauge or absolute in the note", name, at,
        )  # fmt: skip
    mend = _USUAL.get(name)
    if mend is None:
        close = get_close_matches(name, sorted(known_names() | {p + u for p in ("k", "M", "G", "m", "c") for u in PREFIXED}), 1, 0.6)
        mend = close[0] if close else None
    said = f"did you mean `{mend}`? " if mend else ""
    apart = "a product of a quantity and a name takes spaces round its `*`: `12 kN/m * L`" if len(text) > len(name) else "the guide's page on units lists those that are known"
    return BadUnit("unknown-unit", f"`{name}` is not a unit that loadpath knows", said + apart, name, at)
