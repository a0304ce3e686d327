"""Which unit a result is shown in when its line doesn't ask for one."""

from __future__ import annotations

from dataclasses import dataclass
from fractions import Fraction
from functools import lru_cache

from loadpath.units import dimension as d
from loadpath.units.dimension import Dimension
from loadpath.units.unit import ONE, STEP_OF_DEGF, Unit, parse_unit

KINDS: dict[str, Dimension] = {
    "force": d.FORCE,
    "length": d.LENGTH,
    "area": d.AREA,
    "stress": d.STRESS,
    "pressure": d.STRESS,
    "moment": d.MOMENT,
    "energy": d.MOMENT,
    "section_modulus": d.VOLUME,
    "second_moment": d.FOURTH,
    "line_load": d.LINE_LOAD,
    "temperature": d.TEMPERATURE,
    "power": d.POWER,
    "mass": d.MASS,
}
"""Kinds that front matter's `units` may name. An energy has the dimension of a moment and is asked for by its unit."""

_METRIC = {
    d.LENGTH: "mm", d.AREA: "mm^2", d.VOLUME: "mm^3", d.FOURTH: "mm^4", d.STRESS: "MPa", d.TEMPERATURE: "K", d.MASS: "kg",
    d.DENSITY: "kg/m^3", d.MASS_PER_LENGTH: "kg/m", d.VELOCITY: "m/s", d.ACCELERATION: "m/s^2", d.POWER: "kW", d.TIME: "s",
    d.UNIT_WEIGHT: "kN/m^3",
}  # fmt: skip
_CUSTOMARY = {
    d.LENGTH: "in", d.AREA: "in^2", d.VOLUME: "in^3", d.FOURTH: "in^4", d.TEMPERATURE: STEP_OF_DEGF, d.MASS: "lb",
    d.DENSITY: "lb/ft^3", d.MASS_PER_LENGTH: "lb/ft", d.VELOCITY: "ft/s", d.ACCELERATION: "ft/s^2", d.POWER: "hp", d.TIME: "s",
    d.UNIT_WEIGHT: "pcf",
}  # fmt: skip
SYSTEMS: dict[str, dict[Dimension, str]] = {
    "SI": _METRIC | {d.FORCE: "kN", d.MOMENT: "kN*m", d.LINE_LOAD: "kN/m"},
    "SI machine": _METRIC | {d.FORCE: "N", d.MOMENT: "N*m", d.LINE_LOAD: "N/mm"},
    "SI pressure": _METRIC | {d.FORCE: "N", d.MOMENT: "N*m", d.LINE_LOAD: "N/mm"},
    "US": _CUSTOMARY | {d.FORCE: "kip", d.MOMENT: "kip*ft", d.LINE_LOAD: "kip/ft", d.STRESS: "ksi"},
    "US machine": _CUSTOMARY | {d.FORCE: "lbf", d.MOMENT: "lbf*in", d.LINE_LOAD: "lbf/in", d.STRESS: "psi"},
}


@dataclass(frozen=True)
class UnitSystem:
    """A named system with the sheet's own choices by kind."""

    name: str = "SI"
    overrides: tuple[tuple[str, str], ...] = ()

    def unit_for(self, dimension: Dimension, absolute: bool = False, bar: bool = False) -> Unit:
        """The unit for results of a dimension; `bar` says that the value comes from something typed in bar."""
        return _unit_for(self, dimension, absolute, bar)


@lru_cache(maxsize=4096)
def _unit_for(system: UnitSystem, dimension: Dimension, absolute: bool, bar: bool) -> Unit:
    if dimension.is_plain:
        return ONE
    chosen = {KINDS[kind]: unit for kind, unit in system.overrides if kind in KINDS and kind != "energy"}
    if absolute:
        return parse_unit(_absolute_scale(system, chosen.get(d.TEMPERATURE, "")))
    if bar and system.name == "SI pressure" and dimension == d.STRESS and dimension not in chosen:
        return parse_unit("bar")
    if dimension == d.TEMPERATURE and chosen.get(dimension) in ("degC", "degF"):
        return parse_unit("K" if chosen[dimension] == "degC" else STEP_OF_DEGF)
    table = SYSTEMS[system.name] | chosen
    return parse_unit(table[dimension]) if dimension in table else _product(table, dimension)


def _absolute_scale(system: UnitSystem, chosen: str) -> str:
    if chosen in ("degC", "degF", "K"):
        return chosen
    return "degF" if system.name.startswith("US") else "degC"


def _product(table: dict[Dimension, str], of: Dimension) -> Unit:
    """Products of the system's force, length, second and degree."""
    degree = "degF" if table[d.TEMPERATURE] == STEP_OF_DEGF else "K"
    if of == d.TEMPERATURE:
        return parse_unit(table[d.TEMPERATURE])
    powers = [(table[d.FORCE], of.mass), (table[d.LENGTH], of.length - of.mass), ("s", of.time + 2 * of.mass), (degree, of.temperature)]
    if of.mass and of.time + 2 * of.mass:
        plain = [("kg" if "mm" in table[d.LENGTH] or "m" == table[d.LENGTH] else "lb", of.mass), (table[d.LENGTH], of.length), ("s", of.time), (degree, of.temperature)]
        powers = min((powers, plain), key=lambda p: sum(abs(e) for _, e in p))
    above = "*".join(_power(name, e) for name, e in powers if e > 0)
    below = [_power(name, -e) for name, e in powers if e < 0]
    if not below:
        return parse_unit(above)
    bottom = below[0] if len(below) == 1 else f"({'*'.join(below)})"
    return parse_unit(f"{above or '1'}/{bottom}")


def _power(name: str, exponent: Fraction) -> str:
    if exponent == 1:
        return name
    return f"{name}^{exponent}" if exponent.denominator == 1 else f"{name}^({exponent})"
