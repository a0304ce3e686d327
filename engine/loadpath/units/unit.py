"""Units as typed (`kN*m`, `J/(kg*K)`, `degC`), each with factor and dimension. pint holds the definitions."""

from __future__ import annotations

import re
from dataclasses import dataclass, field
from difflib import get_close_matches
from fractions import Fraction
from functools import cached_property, lru_cache
from importlib.resources import files
from math import isfinite
from typing import Any, NoReturn

from loadpath.units.dimension import PLAIN, STRESS, TEMPERATURE, Dimension

PREFIXES = ("da", "n", "u", "µ", "μ", "m", "c", "d", "h", "k", "M", "G", "T")
PREFIXED = ("m", "g", "N", "Pa", "J", "W", "s", "K", "Hz", "rad", "bar")
"""Units that take an SI prefix."""
ABSOLUTE = ("degC", "degF")
READING = 10
"""Decimals of a reading on an absolute scale: finer than a float of so many kelvins can tell."""
STEP_OF_DEGF = "delta_degF"
"""A difference in degrees Fahrenheit: what US results of that kind are shown in."""
FEET_AND_INCHES = re.compile(r"ft-in +1/(2|4|8|16|32|64)")
"""`[ft-in 1/16]`: a length in feet, inches and fractions of an inch; its number counts inches."""
LONGEST = 200
"""Characters of one unit."""
MOST_POWER, MOST_PARTS = 99, 1000
"""The largest power in a unit, and the largest denominator of one."""
LARGEST = Fraction(10**290)
"""The largest factor, and one over the smallest."""

_HIDDEN = {
    "metre", "kilogram", "second", "kelvin", "radian", "degree", "gram", "newton", "pascal", "joule", "watt",
    "hertz", "minute", "hour", "percent",
}  # fmt: skip
"""Names that the definition file needs and sheets don't: they type the symbols."""
_ATOM = re.compile(r"[^\W\d]\w*|%")
_POWER = re.compile(r"\^(-?[0-9]+(?:\.[0-9]+)?|\(-?[0-9]+(?:\.[0-9]+|/[0-9]+)?\))")


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
    """SI value of one; for `degC` and `degF` of one step. Exact, but where a root is taken or pi is in it."""
    dimension: Dimension
    offset: Fraction = Fraction(0)
    """Kelvins at the zero of an absolute scale."""
    absolute: bool = False
    atoms: tuple[tuple[str, Fraction], ...] = field(default=(), compare=False)
    """Each named unit in it with its power."""

    @cached_property
    def _parts(self) -> tuple[float, float]:
        over, under = self.factor.numerator, self.factor.denominator
        return (float(over), float(under)) if max(over, under) < LARGEST else (self.size, 1.0)

    def to_si(self, value: float) -> float:
        """A number of this unit in coherent SI: multiplied first, then divided."""
        if self.absolute:
            return float(Fraction(value) * self.factor + self.offset) if isfinite(value) else value
        over, under = self._parts
        return value * over / under

    def from_si(self, si: float) -> float:
        """A coherent SI value as a number of this unit."""
        if self.absolute:
            return round(float((Fraction(si) - self.offset) / self.factor), READING) if isfinite(si) else si
        over, under = self._parts
        value = si * under / over
        return value if isfinite(value) else si / over * under

    @property
    def size(self) -> float:
        """The factor as a float."""
        return float(self.factor)


ONE = Unit("", Fraction(1), PLAIN)


# --- named units --------------------------------------------------------------------------------------------


@lru_cache(maxsize=1)
def _registry() -> Any:
    from pint import UnitRegistry

    return UnitRegistry(str(files("loadpath.units") / "units.txt"), non_int_type=Fraction)


@lru_cache(maxsize=1)
def known_names() -> frozenset[str]:
    """Every unit name of the curated set, without prefixes."""
    defined = {name for name in _registry()._units if not name.startswith(("delta_", "Δ"))}
    return frozenset(defined - _HIDDEN | {"%"})


def is_unit(name: str) -> bool:
    """True for one named unit, prefix included: `kN`, not `kN*m`."""
    if name in known_names() or name == STEP_OF_DEGF:
        return True
    return any(name.startswith(prefix) and name[len(prefix) :] in PREFIXED for prefix in PREFIXES)


@lru_cache(maxsize=1024)
def _atom(name: str) -> tuple[Fraction, Dimension, Fraction]:
    """Factor, dimension and offset of one named unit."""
    registry = _registry()
    if name in (*ABSOLUTE, STEP_OF_DEGF):
        scale = registry._units[name.removeprefix("delta_")].converter
        offset = Fraction(0) if name == STEP_OF_DEGF else Fraction(scale.offset)
        return Fraction(scale.scale), TEMPERATURE, offset
    factor, root = registry.get_root_units("percent" if name == "%" else name)
    powers = {base: Fraction(power) for base, power in root._units.items()}
    bases = ("metre", "kilogram", "second", "kelvin")
    return Fraction(factor), Dimension(*(powers.get(base, Fraction(0)) for base in bases)), Fraction(0)


# --- compound units -----------------------------------------------------------------------------------------


_OTHER_SIGNS = str.maketrans({"²": "^2", "³": "^3", "⁴": "^4", "·": "*", "⋅": "*", "×": "*"})


@lru_cache(maxsize=4096)
def parse_unit(text: str) -> Unit:
    """The unit that a text names. Raises `BadUnit` with slug, message, mend and the part that is wrong."""
    if text in ("", "1"):
        return ONE
    if feet := FEET_AND_INCHES.fullmatch(text):
        inch = parse_unit("in")
        return Unit(f"ft-in 1/{feet.group(1)}", inch.factor, inch.dimension, atoms=inch.atoms)
    if len(text) > LONGEST:
        raise BadUnit("bad-unit", f"a unit of more than {LONGEST} characters", "", text[:20])
    if text != (plain := text.translate(_OTHER_SIGNS)):
        raise BadUnit("bad-unit", f"`{text}` holds signs that no unit takes", f"write `{plain}`", text)
    for match in _ATOM.finditer(text):
        if not is_unit(match.group()):
            raise unknown_unit(match.group(), text, match.start())
    atoms = _UnitReader(text).whole()
    if text in ABSOLUTE:
        size, of, offset = _atom(text)
        return Unit(text, size, of, offset, True, atoms)
    factor, dimension = Fraction(1), PLAIN
    for name, power in atoms:
        size, of, _ = _atom(name)
        factor *= _power_of(size, power)
        dimension = dimension.times(of.power(power))
    if not 1 / LARGEST < factor < LARGEST:
        raise BadUnit("bad-unit", f"one `{text}` is too large or too small to compute with", "", text)
    return Unit(text, factor, dimension, atoms=atoms)


def _power_of(size: Fraction, power: Fraction) -> Fraction:
    """Exact for whole powers; of what is left over, the nearest float."""
    whole = power.numerator // power.denominator
    rest = power - whole
    return size**whole * (Fraction(float(size) ** float(rest)) if rest else 1)


class _UnitReader:
    """Reads `a*b^2/(c*d)`; at most one `/` outside parentheses, and nothing after what it divides by."""

    def __init__(self, text: str) -> None:
        self.text, self.at = text, 0

    def whole(self) -> tuple[tuple[str, Fraction], ...]:
        atoms = self._product()
        if self.at < len(self.text):
            raise self._stray()
        return tuple(atoms)

    def _product(self) -> list[tuple[str, Fraction]]:
        atoms, divided = self._factor(), False
        while self.text[self.at : self.at + 1] in ("*", "/"):
            if divided:
                raise self._two_slashes() if self.text[self.at] == "/" else self._after_slash()
            divided = self.text[self.at] == "/"
            self.at += 1
            sign = Fraction(-1) if divided else Fraction(1)
            atoms += [(name, power * sign) for name, power in self._factor()]
        return atoms

    def _factor(self) -> list[tuple[str, Fraction]]:
        if self.text.startswith("1/") and self.at == 0:
            self.at = 1
            return []
        if self.text.startswith("(", self.at):
            opened = self.at
            self.at += 1
            atoms = self._product()
            if not self.text.startswith(")", self.at):
                self._fail("a parenthesis in the unit `{}` is never closed", "close it with `)`", opened)
            self.at += 1
        else:
            match = _ATOM.match(self.text, self.at)
            if match is None:
                raise self._stray()
            self.at = match.end()
            atoms = [(match.group(), Fraction(1))]
        power = self._power()
        raised = [(name, p * power) for name, p in atoms]
        if any(abs(p) > MOST_POWER or p.denominator > MOST_PARTS for _, p in raised):
            help = f"powers up to {MOST_POWER} can be worked"
            self._fail("the power in the unit `{}` is out of range", help, self.at)
        return raised

    def _power(self) -> Fraction:
        if not self.text.startswith("^", self.at):
            return Fraction(1)
        match = _POWER.match(self.text, self.at)
        if match is None:
            help = "a power is typed as in `mm^2` or `s^-1`"
            self._fail("the power in the unit `{}` is not a number", help, self.at)
        self.at = match.end()
        over, _, under = match.group(1).strip("()").partition("/")
        if under and int(under) == 0:
            self._fail("the power in the unit `{}` divides by 0", "", match.start())
        return Fraction(over) / Fraction(under or "1")

    def _fail(self, message: str, help: str, at: int) -> NoReturn:
        raise BadUnit("bad-unit", message.format(self.text), help, self.text, min(at, len(self.text) - 1))

    def _two_slashes(self) -> BadUnit:
        head, *below = self.text.split("/")
        same = len(set(below)) == 1 and below[0].isalpha()
        bottom = f"{below[0]}^{len(below)}" if same else f"({'*'.join(below)})"
        help = "write what is divided by in one pair of parentheses: `J/(kg*K)`"
        if not re.search(r"[()]", self.text):
            help = f"write `{head}/{bottom}`"
        return BadUnit("bad-unit", f"the unit `{self.text}` has two `/`", help, self.text, self.at)

    def _after_slash(self) -> BadUnit:
        head, _, tail = self.text.partition("/")
        return BadUnit(
            "bad-unit", f"in `{self.text}` it is not plain what stands under the `/`",
            f"write the denominator in parentheses: `{head}/({tail})`", self.text, self.at,
        )  # fmt: skip

    def _stray(self) -> BadUnit:
        help = "a unit is written as in `kN/m^2` or `J/(kg*K)`"
        at = min(self.at, len(self.text) - 1)
        return BadUnit("bad-unit", f"the unit `{self.text}` is not well formed", help, self.text, at)


# --- what was meant -----------------------------------------------------------------------------------------

_USUAL = {
    "Nm": "N*m", "kNm": "kN*m", "MNm": "MN*m", "Nmm": "N*mm", "kNmm": "kN*mm", "Ncm": "N*cm",
    "kips": "kip", "lbs": "lb", "lbsf": "lbf", "lbm": "lb", "inch": "in", "inches": "in", "feet": "ft",
    "foot": "ft", "MM": "mm", "sec": "s", "hr": "h", "t": "tonne", "T": "tonne", "l": "litre",
    "L": "litre", "ml": "cm^3", "mL": "cm^3", "C": "degC", "F": "degF", "kft": "kip*ft", "kipft": "kip*ft",
    "kipin": "kip*in", "lbfft": "lbf*ft", "lbfin": "lbf*in", "lbft": "lbf*ft", "lbin": "lbf*in",
    "ftlb": "ft*lbf", "inlb": "in*lbf", "gal": "US_gal", "PS": "hp_metric", "ton": "short_ton",
    "tons": "short_ton", "µε": "microstrain", "με": "microstrain", "degrees": "deg", "kgs": "kg",
    "kpsi": "ksi", "gr": "g", "metre": "m", "meter": "m", "gram": "g", "newton": "N", "pascal": "Pa",
    "joule": "J", "watt": "W", "second": "s", "minute": "min", "hour": "h", "kelvin": "K", "degree": "deg",
    "radian": "rad", "percent": "%", "micron": "um", "mph": "mile/h",
}  # fmt: skip
"""What is commonly typed, and the unit that is meant."""


def unknown_unit(name: str, text: str, at: int) -> BadUnit:
    """The finding for a part of a unit that is no unit, with the nearest one that is."""
    if name[-1] in "ag" and is_unit(name[:-1]) and _atom(name[:-1])[1] == STRESS:
        return BadUnit(
            "gauge-unit", f"`{name}` says gauge or absolute, which a unit cannot",
            f"write `{name[:-1]}` and say gauge or absolute in the note", name, at,
        )  # fmt: skip
    help = f"did you mean `{mend}`? " if (mend := _meant(name)) else ""
    before = text[:at].rstrip("(")
    if before.endswith(("*", "/")):
        help += f"where a name is meant, its operator takes spaces: `12 {before[:-1]} {before[-1]} {name}`"
    elif before.endswith("^"):
        help = "a power in a unit is typed as a number: `mm^2`"
    elif text.startswith((f"{name}*", f"{name}/")):
        help += "a product of a quantity and a name takes spaces round its `*`: `12 kN/m * L`"
    else:
        help += "the guide's page on units lists those that are known"
    return BadUnit("unknown-unit", f"`{name}` is not a unit that loadpath knows", help, name, at)


def _meant(name: str) -> str | None:
    if name in _USUAL:
        return _USUAL[name]
    letters = name.rstrip("0123456789")
    if letters != name and is_unit(letters):
        return f"{letters}^{name[len(letters) :]}"
    usual = [*sorted(known_names()), *(p + u for p in ("k", "M", "G", "c", "m") for u in PREFIXED)]
    for unit in usual:
        if unit.lower() == name.lower():
            return unit
    return next(iter(get_close_matches(name, usual, 1, 0.6)), None)
