"""Units within formulas: read, or refused at the part that is wrong."""

from __future__ import annotations

import re
from collections.abc import Callable, Iterator

from loadpath.formula.mistake import Mistake
from loadpath.formula.quantities import LONGEST_UNIT
from loadpath.formula.tree import Branch, Call, Node, Quantity, children
from loadpath.functions import FUNCTIONS
from loadpath.resolve.mismatches import MASS_UNITS
from loadpath.resolve.model import Flavour, Type
from loadpath.text import Span
from loadpath.units import BadUnit, Unit, parse_unit
from loadpath.units.dimension import FREQUENCY

_TURNING = ("rpm", "rad")


def read_unit(unit: str, place: Span, is_name: Callable[[str], bool] = lambda _: False) -> Unit:
    """The unit, or the mistake at the part of it that is wrong."""
    if len(unit) > LONGEST_UNIT:
        raise Mistake(
            "over-limit", place, f"a unit of more than {LONGEST_UNIT} characters", "write it shorter"
        )
    try:
        return parse_unit(unit)
    except BadUnit as bad:
        start = place.start + bad.at
        span = Span(start, min(start + max(len(bad.part), 1), max(place.end, start + 1)))
        if bad.slug == "unknown-unit" and is_name(bad.part):
            raise _name_in_unit(unit, bad, span) from None
        raise Mistake(bad.slug, span, bad.message, bad.help or _FORM) from None


_FORM = "a unit is written as in `kN/m^2` or `J/(kg*K)`"


def _name_in_unit(unit: str, bad: BadUnit, span: Span) -> Mistake:
    """A product typed without `*`, or without spaces round it."""
    name = bad.part
    if name == unit:
        message = f"no operator stands before `{name}`, which is a name of this sheet and no unit"
        return Mistake("implied-multiplication", span, message, f"a product is typed with `*`: `...*{name}`")
    before = unit[: bad.at].rstrip("*/(")
    sign = next((c for c in reversed(unit[: bad.at]) if c in "*/"), "*")
    if not before:
        message = f"no operator stands before `{name}`, which is a name of this sheet and no unit"
        return Mistake("implied-multiplication", span, message, f"a product is typed with `*`: `...*{unit}`")
    help = (
        f"`{name}` is a name of this sheet: put spaces round the `{sign}`, as in `12 {before} {sign} {name}`"
    )
    return Mistake(bad.slug, span, bad.message, help)


def type_of_unit(unit: Unit, place: Span) -> Type:
    """The type of a value typed in a unit."""
    names = {name for name, _ in unit.atoms}
    flavour: Flavour = ""
    if unit.dimension == FREQUENCY:
        counts_turns = any(name.endswith("Hz") for name in names)
        flavour = "cycles" if counts_turns else "turning" if names & set(_TURNING) else ""
    elif names == {"bar"}:
        flavour = "bar"
    mass = next(((place, name) for name in sorted(names) if name in MASS_UNITS), None)
    return Type(unit.dimension, unit.absolute, flavour=flavour, mass=mass)


def names_behind_operators(unit: Unit, place: Span, is_name: Callable[[str], bool]) -> list[Mistake]:
    """A name of the sheet behind a `*` or `/` in a unit may have been meant as that name."""
    found = []
    behind = list(re.finditer(r"(?<=[*/(])[^\W\d]\w*", unit.text))
    for match in behind[1:] if unit.text.startswith("1/") else behind:
        name, at = match.group(), place.start + match.start()
        if is_name(name):
            message = f"`{name}` in `{unit.text}` is read as the unit, and is also a name of this sheet"
            help = f"where the name is meant put spaces round the operator before it; else rename `{name}`"
            found.append(Mistake("unit-or-name", Span(at, at + len(name)), message, help))
    return found


def _outside_calls(node: Node | Branch) -> Iterator[Node | Branch]:
    """The node and what is below it, but nothing inside a call that does not give back what it is given."""
    yield node
    if not isinstance(node, Call) or node.function in FUNCTIONS:
        for child in children(node):
            yield from _outside_calls(child)


def typed_unit(value: Node, found: Type) -> Unit | None:
    """The unit that a typed value already has: of its first quantity of the right dimension."""
    for node in _outside_calls(value):
        if isinstance(node, Quantity):
            unit = parse_unit(node.parts[-1].unit)
            if unit.dimension == found.dimension and unit.absolute == found.absolute:
                return unit
    return None
