"""Units of measure: definitions, conversion, and quantities in print."""

from loadpath.units.dimension import PLAIN, Dimension, say
from loadpath.units.systems import KINDS, SYSTEMS, UnitSystem
from loadpath.units.unit import ONE, BadUnit, Unit, is_unit, parse_unit

__all__ = [
    "KINDS",
    "ONE",
    "PLAIN",
    "SYSTEMS",
    "BadUnit",
    "Dimension",
    "Unit",
    "UnitSystem",
    "is_unit",
    "parse_unit",
    "say",
]
