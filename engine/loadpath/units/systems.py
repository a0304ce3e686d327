"""Which unit a result is shown in when its line doesn't ask for one."""

from __future__ import annotations

from dataclasses import dataclass
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
"""Kinds that front matter's `units` may name. An energy, which is no moment, is asked for by its unit."""

Table = dict[Dimension, str]
_METRIC: Table = {
    d.LENGTH: "mm", d.AREA: "mm^2", d.VOLUME: "mm^3", d.FOURTH: "mm^4", d.STRESS: "MPa",
    d.TEMPERATURE: "K", d.MASS: "kg", d.DENSITY: "kg/m^3", d.MASS_PER_LENGTH: "kg/m", d.TIME: "s",
    d.VELOCITY: "m/s", d.ACCELERATION: "m/s^2", d.POWER: "kW", d.UNIT_WEIGHT: "kN/m^3",
    d.HEAT_FLUX: "kW/m^2", d.HEAT_TRANSFER: "W/(m^2*K)", d.CONDUCTIVITY: "W/(m*K)",
    d.SPECIFIC_HEAT: "J/(kg*K)",
}  # fmt: skip
_MACHINE: Table = _METRIC | {
    d.FORCE: "N", d.MOMENT: "N*m", d.LINE_LOAD: "N/mm", d.BENDING_STIFFNESS: "N*mm^2", d.DAMPING: "N*s/mm",
}  # fmt: skip
_CUSTOMARY: Table = {
    d.TEMPERATURE: STEP_OF_DEGF,
    d.LENGTH: "in", d.AREA: "in^2", d.VOLUME: "in^3", d.FOURTH: "in^4", d.MASS: "lb", d.DENSITY: "lb/ft^3",
    d.MASS_PER_LENGTH: "lb/ft", d.TIME: "s", d.VELOCITY: "ft/s", d.ACCELERATION: "ft/s^2", d.POWER: "hp",
    d.UNIT_WEIGHT: "pcf", d.HEAT_FLUX: "Btu/(h*ft^2)", d.HEAT_TRANSFER: "Btu/(h*ft^2*degF)",
    d.CONDUCTIVITY: "Btu/(h*ft*degF)", d.SPECIFIC_HEAT: "Btu/(lb*degF)",
}  # fmt: skip
SYSTEMS: dict[str, Table] = {
    "SI": _METRIC | {
        d.FORCE: "kN", d.MOMENT: "kN*m", d.LINE_LOAD: "kN/m", d.BENDING_STIFFNESS: "kN*m^2",
        d.DAMPING: "kN*s/m",
    },
    "SI machine": _MACHINE,
    "SI pressure": _MACHINE,
    "US": _CUSTOMARY | {
        d.FORCE: "kip", d.MOMENT: "kip*ft", d.LINE_LOAD: "kip/ft", d.STRESS: "ksi",
        d.BENDING_STIFFNESS: "kip*in^2", d.DAMPING: "kip*s/in",
    },
    "US machine": _CUSTOMARY | {
        d.FORCE: "lbf", d.MOMENT: "lbf*in", d.LINE_LOAD: "lbf/in", d.STRESS: "psi",
        d.BENDING_STIFFNESS: "lbf*in^2", d.DAMPING: "lbf*s/in",
    },
}  # fmt: skip


@dataclass(frozen=True)
class UnitSystem:
    """A named system with the sheet's own choices by kind."""

    name: str = "SI"
    overrides: tuple[tuple[str, str], ...] = ()

    def knows(self, dimension: Dimension) -> bool:
        """True for a kind that has a unit of its own; others are shown in products of the system's units."""
        return dimension.is_plain or dimension in SYSTEMS[self.name]

    def unit_for(self, dimension: Dimension, absolute: bool = False, bar: bool = False) -> Unit:
        """The unit for results of a dimension; `bar` says that the value comes from something typed in bar.

        Raises `BadUnit` for a dimension that is not within reach.
        """
        return _unit_for(self, dimension, absolute, bar)


@lru_cache(maxsize=4096)
def _unit_for(system: UnitSystem, dimension: Dimension, absolute: bool, bar: bool) -> Unit:
    if dimension.is_plain:
        return ONE
    chosen = {KINDS[kind]: unit for kind, unit in system.overrides if kind in KINDS and kind != "energy"}
    scale = chosen.get(d.TEMPERATURE, "degF" if system.name.startswith("US") else "degC")
    if absolute:
        return parse_unit(scale)
    if d.TEMPERATURE in chosen:
        chosen[d.TEMPERATURE] = {"degC": "K", "degF": STEP_OF_DEGF}.get(scale, scale)
    if bar and system.name == "SI pressure" and dimension == d.STRESS and dimension not in chosen:
        return parse_unit("bar")
    table = SYSTEMS[system.name] | chosen
    return parse_unit(table[dimension] if dimension in table else _product(table, dimension))


def _product(table: Table, of: Dimension) -> str:
    """A product of the system's units that an engineer would write: `kN*s`, `MPa*mm^0.5`, `MPa^2`."""
    degree = "degF" if table[d.TEMPERATURE] == STEP_OF_DEGF else table[d.TEMPERATURE]
    short, long = _length_in(table, d.LENGTH), "ft" if table[d.VELOCITY] == "ft/s" else "m"
    if of.mass == 0:
        return d.product(d.by_mass(of, ("", long if of.time else short, "s", degree)))
    force = d.by_force(of, (table[d.FORCE], _length_with_force(table, of), "s", degree))
    rest = d.by_mass(of.over(d.STRESS.power(of.mass)), ("", short, "s", degree))
    mass = d.by_mass(of, (table[d.MASS], long, "s", degree))
    return d.product(d.simplest(force, [(table[d.STRESS], of.mass), *rest], mass))


def _length_with_force(table: Table, of: Dimension) -> str:
    """Lengths that multiply forces are those of the moments, lengths that divide them of the line loads."""
    power = of.length - of.mass
    if power > 0 and of.mass < 0:
        return _length_in(table, d.LENGTH)
    return _length_in(table, d.LINE_LOAD if power < 0 < of.mass else d.MOMENT)


def _length_in(table: Table, kind: Dimension) -> str:
    """The named length in the table's unit of a kind: `m` of `kN/m`."""
    atoms = parse_unit(table[kind]).atoms
    return next((name for name, _ in atoms if parse_unit(name).dimension == d.LENGTH), table[d.LENGTH])
