"""The unit that each value and each relation is shown in."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import replace

from loadpath.formula.mistake import Mistake
from loadpath.formula.statements import AskedUnit, Check, FunctionDefinition, Statement
from loadpath.formula.tree import Call, Name, Node, Quantity, Relation, Word, span_of, walk
from loadpath.resolve.dimensions import Checker
from loadpath.resolve.mismatches import article, factor_between
from loadpath.resolve.model import UNKNOWN, Entry, Type
from loadpath.resolve.names import Names
from loadpath.resolve.parts import relations_in
from loadpath.resolve.units import read_unit, typed_unit
from loadpath.units import ONE, Unit

RELATIVE = ("%", "ppm")
"""Units of a tolerance that is a share of the right side."""

Shown = tuple[Type, Unit, bool]
"""Type, unit, and whether the line asks for that unit."""


class Displays:
    """Types of whole statements with the units they are shown in. Raises `Mistake`."""

    def __init__(self, checker: Checker, names: Names, entries: list[Entry]) -> None:
        self.checker, self.names, self.entries = checker, names, entries

    def of_value(self, found: Type, asked: AskedUnit | None, value: Node, typed: bool) -> Shown:
        """Of a definition; `typed` for an input, which keeps the unit it was typed in."""
        if asked is not None:
            return *self.checker.shown(found, asked, value), True
        if found.unknown:
            return found, ONE, False
        if found.zero:  # a bare 0 fits any dimension, but a name has one
            found = replace(found, zero=False)
        if typed and (unit := typed_unit(value, found)) is not None:
            return found, unit, False
        return found, self._fitting(found), False

    def _fitting(self, found: Type) -> Unit:
        return self.checker.system.unit_for(found.dimension, found.absolute, found.flavour == "bar")

    # --- functions ---

    def of_function(self, statement: FunctionDefinition) -> Shown:
        """Of a function's value; UNKNOWN where a parameter without unit leaves it to each call."""
        for parameter in statement.parameters:
            self.checker.refuse_shadow(parameter.name, parameter.span)
        parameters = self.checker.parameter_types(statement)
        found = self.checker.type_of(statement.body, parameters)
        if found.words is not None:
            message = "a function cannot give a choice"
            raise Mistake("unknown-choice", span_of(statement.body), message, "use the choice itself")
        untyped = any(p.unit is None for p in statement.parameters)
        type_, unit, asked = self.of_value(found, statement.unit, statement.body, False)
        return (UNKNOWN if untyped and not asked else type_), unit, asked

    # --- relations ---

    def side_units(self, statement: Statement) -> tuple[Unit, ...]:
        """For each relation of a judged statement, the unit that its sides are shown in."""
        return tuple(self.common_unit(relation) for relation in relations_in(statement))

    def common_unit(self, relation: Relation) -> Unit:
        """That of a side that is a name, else that of a typed quantity, else the system's.

        Where the system has no unit for the kind, the first name in the relation that is of it decides.
        """
        types = [self.checker.type_of(o) for o in relation.operands if not isinstance(o, Word)]
        found = next((t for t in types if not t.zero and not t.unknown), None)
        if found is None or found.words is not None:
            return ONE
        alone = self._unit_of_names((o for o in relation.operands if isinstance(o, Name)), found)
        alone = alone or self._unit_of_calls(relation, found)
        typed = next((t for o in relation.operands if (t := typed_unit(o, found)) is not None), None)
        if alone or typed or self.checker.system.knows(found.dimension):
            return alone or typed or self._fitting(found)
        return self._unit_of_names(
            (n for n in walk(relation) if isinstance(n, Name)), found
        ) or self._fitting(found)

    def _unit_of_names(self, names: Iterable[Name], found: Type) -> Unit | None:
        for name in names:
            if name.name in self.names.by_name:
                unit = self.entries[self.names.by_name[name.name]].unit
                if unit.dimension == found.dimension and unit.absolute == found.absolute:
                    return unit
        return None

    def _unit_of_calls(self, relation: Relation, found: Type) -> Unit | None:
        """That of a side that is a call of a function which asks for a unit."""
        for side in relation.operands:
            definition = self.checker.function(side.function) if isinstance(side, Call) else None
            if definition is not None and definition.unit is not None:
                unit = read_unit(definition.unit.text, definition.unit.span)
                if unit.dimension == found.dimension and unit.absolute == found.absolute:
                    return unit
        return None

    def of_check(self, statement: Check) -> Shown:
        """Of the two sides of a cross-check; its tolerance is of their dimension, or a share."""
        relation = statement.relation
        left, right = (self.checker.number(o, None) for o in relation.operands)
        common = self.checker.same(left, right, relation.at[0], "`=` compares", *relation.operands)
        tolerance = self.checker.number(statement.tolerance, None)
        unit = self.common_unit(relation)
        if is_relative(statement.tolerance) or common.unknown or tolerance.unknown or tolerance.zero:
            return common, unit, False
        if tolerance.absolute or (tolerance.dimension != common.dimension and not common.zero):
            raise Mistake(
                "unit-mismatch", span_of(statement.tolerance),
                f"the tolerance is {article(tolerance.dimension)}, the sides are {article(common.dimension)}",
                "give it in the unit of the sides, or as a share of the right side: `within 0.1 %`; "
                + factor_between(tolerance.dimension, common.dimension),
            )  # fmt: skip
        return common, unit, False


def is_relative(tolerance: Node) -> bool:
    """True for a tolerance that is a share of the right side."""
    return isinstance(tolerance, Quantity) and tolerance.parts[0].unit in RELATIVE
