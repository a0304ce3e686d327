"""The words for quantities that do not go together."""

from __future__ import annotations

from loadpath.findings import Remark
from loadpath.formula.canonical import text
from loadpath.formula.mistake import Mistake
from loadpath.formula.tree import Binary, Negative, Node, Number
from loadpath.resolve.model import UNKNOWN, Type
from loadpath.text import Span
from loadpath.units import BadUnit, Dimension, UnitSystem, say
from loadpath.units.dimension import ACCELERATION, TEMPERATURE

USUAL_POWER, USUAL_PARTS = 24, (1, 2, 3, 4, 6)
"""Exponents within these, with these denominators, have a unit in every system."""
MASS_UNITS = {
    "lb": "lbf",
    "kg": "kgf",
    "g": "N",
    "tonne": "kN",
    "slug": "lbf",
    "short_ton": "short_tonf",
}
"""Units of mass, with the unit of force that is meant where one is used as a force."""
_NO_ARTICLE = ("time", "temperature", "acceleration")


def article(of: Dimension) -> str:
    """A dimension as a reader says it: `a stress`, `an area`, `force/length^2`."""
    words = say(of)
    if words.startswith("a ") or any(sign in words for sign in "/*^") or words in _NO_ARTICLE:
        return words
    return f"{'an' if words[0] in 'aeiou' else 'a'} {words}"


def mismatch(left: Type, right: Type, at: Span, message: str, help: str) -> Mistake:
    """`unit-mismatch`, or `mass-as-force` at the mass where that is the cause."""
    for mass_side, other in ((left, right), (right, left)):
        if mass_side.mass is not None and other.dimension == mass_side.dimension.times(ACCELERATION):
            place, name = mass_side.mass
            return Mistake(
                "mass-as-force", place, f"`{name}` is a mass, but is used as a force",
                f"write `{MASS_UNITS[name]}` for the force, or multiply the mass by `9.81 m/s^2`",
                remarks=(Remark("used as a force here", at),),
            )  # fmt: skip
    return Mistake("unit-mismatch", at, message, help)


def mend(left: Type, right: Type, a: Node, b: Node, system: UnitSystem) -> str:
    """How two operands of different dimension may be brought together."""
    for node, own, other in ((a, left, right), (b, right, left)):
        if _is_typed(node) and own.dimension.is_plain and not other.absolute:
            return f"give `{text(node)}` its unit: `{text(node)} {system.unit_for(other.dimension).text}`"
    return factor_between(left.dimension, right.dimension)


def factor_between(left: Dimension, right: Dimension) -> str:
    """What one of two dimensions lacks against the other."""
    apart = min(say(left.over(right)), say(right.over(left)), key=lambda words: ("/" in words, len(words)))
    return f"they differ by a factor of {apart}: look for one that is missing or too many"


def _is_typed(node: Node) -> bool:
    return isinstance(node, Number) or (isinstance(node, Negative) and isinstance(node.operand, Number))


def held(dimension: Dimension, at: Span, system: UnitSystem) -> Dimension:
    """The dimension, or a mistake where no unit can be written for it."""
    if all(abs(power) <= USUAL_POWER and power.denominator in USUAL_PARTS for power in dimension):
        return dimension
    try:
        system.unit_for(dimension)
    except BadUnit:
        mend = "check the exponents; an empirical power is taken of a plain number: `(f_c as MPa)`"
        raise Mistake("over-limit", at, "no unit can be written for what comes out here", mend) from None
    return dimension


# --- temperatures -------------------------------------------------------------------------------------------


def no_multiple(at: Span) -> Mistake:
    """An absolute temperature in a product or a power."""
    return Mistake(
        "absolute-temperature", at,
        "an absolute temperature cannot be multiplied, divided, negated or raised",
        "take a difference of two of them, or show it in absolute kelvins first: `T_K [K] = T`",
    )  # fmt: skip


def no_bare_zero(at: Span) -> Mistake:
    """A bare `0` beside an absolute temperature: of which scale?"""
    return Mistake(
        "absolute-temperature", at, "a bare `0` does not say on which scale it is a temperature",
        "write `0 degC`, `0 degF` or `0 K`",
    )  # fmt: skip


def sum_of_temperatures(node: Binary, left: Type, right: Type) -> Type:
    """The type of a sum or difference in which an absolute temperature stands, or the mistake."""
    if left.unknown or right.unknown:
        return UNKNOWN
    if left.zero or right.zero:
        raise no_bare_zero(node.at)
    for found, other in ((left, right), (right, left)):
        if found.absolute and other.dimension != TEMPERATURE:
            message = f"`{node.operator}` joins a temperature and {article(other.dimension)}"
            raise Mistake("unit-mismatch", node.at, message, factor_between(TEMPERATURE, other.dimension))
    if node.operator == "-" and left.absolute:
        return Type(TEMPERATURE, absolute=not right.absolute)
    if node.operator == "+" and left.absolute != right.absolute:
        return Type(TEMPERATURE, absolute=True)
    if node.operator == "+":
        message = "two absolute temperatures cannot be added"
        help = "add a difference, typed in K: `20 K`; the mean of two is `T_1 + (T_2 - T_1)/2`"
    else:
        message = "an absolute temperature cannot be taken from a difference"
        help = "a difference is typed in K: `20 K`"
    raise Mistake("absolute-temperature", node.at, message, help)
