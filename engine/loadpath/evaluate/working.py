"""What a reader must see of how a value came about: branches taken, calls worked, what governed."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from typing import Any

from loadpath.evaluate.looking import Looking
from loadpath.evaluate.numbers import ROW, Compiler, Values
from loadpath.formula.binding import free_names
from loadpath.formula.statements import Column, Definition, FunctionDefinition, Parameter
from loadpath.formula.tree import As, At, Branch, Call, Cases, Name, Node, Number, Quantity, children, walk
from loadpath.functions import FUNCTIONS
from loadpath.resolve import Entry, Resolved, Type, is_looking
from loadpath.trace.digits import exact_digits, typed_number
from loadpath.trace.model import Aside, Called, Operand, Taken, Working
from loadpath.units import ONE, Unit, parse_unit
from loadpath.units.printing import plain, typeset

AS_DIGITS = 6
"""Significant digits of a number taken with `as`, where no fewer hold it exactly."""
MOST_CALLS = 40
"""Calls shown beneath one step; a formula with more says so."""


@dataclass
class Observer:
    """Goes over a tree that was worked and notes what the substitution alone doesn't show."""

    resolved: Resolved
    compiler: Compiler
    values: Values
    left: int = MOST_CALLS
    """Calls that may still be shown beneath the step at hand."""

    def __post_init__(self) -> None:
        self.looking = Looking(self)

    def working(
        self,
        tree: Node,
        given: Mapping[str, Operand] | None = None,
        types: dict[str, Type] | None = None,
        row: int | None = None,
    ) -> Working:
        """How the value of a tree came about; `given` are the parameters of the enclosing function, `row` is
        the row of its columns."""
        if given is None:
            self.left = MOST_CALLS
        scope = dict(given or {})
        parameters: dict[str, Any] = {name: operand.si for name, operand in scope.items()}
        if row is not None:
            parameters[ROW] = row
            scope |= self._cells(tree, row)
        if not any(isinstance(n, Call | Cases | As) for n in walk(tree)):
            return Working(tree, tuple(scope.items()))
        taken = self._taken(tree, parameters) if isinstance(tree, Cases) else None
        worked = taken.branch.value if taken else tree
        seen = [worked, *([taken.branch.condition] if taken and taken.branch.condition is not None else [])]
        calls = tuple(self._calls(seen, parameters, scope, types or {}))
        return Working(worked, tuple(scope.items()), taken, calls, tuple(self._asides(worked, parameters)))

    def _cells(self, tree: Node, row: int) -> Iterator[tuple[str, Operand]]:
        """The cells that stand for the names of columns in one row."""
        for name in self.compiler.columns_in(tree):
            if row < self.compiler.columns[name].count:
                yield name, self.cell(name, row)

    def cell(self, column: str, row: int) -> Operand:
        """One cell of a column, as printed."""
        entry = self.resolved.entries[self.resolved.by_name[column]]
        return cell_operand(entry, self.values[column][row], row, self.resolved.sheet.front.digits)

    def _value(self, node: Node, parameters: Values) -> Any:
        return self.compiler.compile_tree(node, frozenset(parameters))(self.values, parameters)

    def _taken(self, cases: Cases, parameters: Values) -> Taken:
        for index, branch in enumerate(cases.branches):
            if branch.condition is None or self._value(branch.condition, parameters):
                return Taken(cases, index)
        raise AssertionError("a value was worked, so a branch was taken")

    # --- calls of the sheet's own functions ---

    def _calls(
        self, trees: list[Node], parameters: Values, scope: Mapping[str, Operand], types: dict[str, Type]
    ) -> Iterator[Called]:
        found = (node for tree in trees for node in _calls_in(tree))
        for call in dict.fromkeys(found):
            if self.left <= 0:
                return
            self.left -= 1
            try:
                called = (
                    self.looking.called(call, parameters, scope, types)
                    if is_looking(call)
                    else self._called(call, parameters, scope, types)
                )
            except (ArithmeticError, ValueError):
                # what a condition passes over (`when x = 0 or f(x) <= 3`) need not have a value
                continue
            yield called

    def _called(
        self, call: Call, parameters: Values, scope: Mapping[str, Operand], types: dict[str, Type]
    ) -> Called:
        definition = self.compiler.function(call.function)
        assert definition is not None
        arguments: dict[str, Operand] = {}
        inner_types: dict[str, Type] = {}
        for parameter, argument in zip(definition.parameters, call.arguments, strict=True):
            found = self.resolved.checker.type_of(argument, types)
            inner_types[parameter.name] = found if parameter.unit is None else _type_of(parameter, found)
            arguments[parameter.name] = self._argument(parameter, argument, found, parameters, scope)
        working = self.working(definition.body, arguments, inner_types)
        value = self._value(call, parameters)
        unit = self._unit_of_call(definition, inner_types)
        return Called(
            call, tuple(arguments.items()), working, Operand(value, unit, self.resolved.sheet.front.digits)
        )

    def _argument(
        self, parameter: Parameter, node: Node, found: Type, parameters: Values, scope: Mapping[str, Operand]
    ) -> Operand:
        si = float(self._value(node, parameters))
        operand = self.operand(node, si, found, scope)
        if parameter.unit is None or operand.unit.text == parameter.unit.text:
            return operand
        unit = parse_unit(parameter.unit.text)
        if operand.unit.dimension == unit.dimension and operand.typed and not isinstance(node, Name):
            return operand
        return Operand(
            si,
            unit,
            exact_digits(unit.from_si(si), self.resolved.sheet.front.digits)
            if operand.typed
            else operand.digits,
        )

    def operand(self, node: Node, si: float, found: Type, scope: Mapping[str, Operand]) -> Operand:
        """How the value of an argument is printed."""
        digits = self.resolved.sheet.front.digits
        if isinstance(node, Name):
            if node.name in scope:
                return scope[node.name]
            index = self.resolved.by_name.get(node.name)
            if index is not None:
                entry = self.resolved.entries[index]
                return Operand(si, entry.unit, digits, _typed(entry))
        unit = _unit_typed(node) or self.resolved.system.unit_for(found.dimension, found.absolute)
        return Operand(si, unit, digits, typed_number(node, unit))

    def _unit_of_call(self, definition: FunctionDefinition, types: dict[str, Type]) -> Unit:
        if definition.unit is not None:
            return parse_unit(definition.unit.text)
        found = self.resolved.checker.type_of(definition.body, types)
        return self.resolved.system.unit_for(found.dimension, found.absolute, found.flavour == "bar")

    # --- what governed ---

    def _asides(self, tree: Node, parameters: Values) -> Iterator[Aside]:
        read_as: set[As] = set()
        for node in _seen(tree):
            if isinstance(node, As):
                if node not in read_as:
                    read_as.add(node)
                    number = parse_unit(node.unit).from_si(self._value(node.operand, parameters))
                    said = plain(number, exact_digits(number, AS_DIGITS))
                    yield Aside("", node.operand, f"taken as a number of {node.unit}: {typeset(said)}")
            elif isinstance(node, Call) and node.function in ("min", "max") and len(node.arguments) > 1:
                values = [self._value(a, parameters) for a in node.arguments]
                governing = node.arguments[values.index(FUNCTIONS[node.function].work(*values))]
                yield Aside(f"{node.function}: governed by", governing, "")
            elif isinstance(node, Call) and node.function in ("round_up", "round_down"):
                value, step = (self._value(a, parameters) for a in node.arguments)
                times = round(FUNCTIONS[node.function].work(value, step) / step)
                way = node.function.removeprefix("round_")
                yield Aside(
                    f"rounded {way} to {times} step{'' if times == 1 else 's'} of", node.arguments[1], ""
                )


def _seen(node: Node | Branch) -> Iterator[Node | Branch]:
    """The nodes that are worked once, where the tree stands: not those inside what is looked over."""
    yield node
    if not (isinstance(node, At) or (isinstance(node, Call) and is_looking(node))):
        for child in children(node):
            yield from _seen(child)


def _calls_in(tree: Node) -> Iterator[Call]:
    """Calls whose value stands in a substitution."""
    for node in _seen(tree):
        if isinstance(node, Call) and (node.function not in FUNCTIONS or is_looking(node)):
            yield node


def cell_operand(entry: Entry, si: float, row: int, digits: int) -> Operand:
    """One cell of a column as it stands in a substitution: as typed, or to the digits of a result."""
    statement = entry.statement
    if isinstance(statement, Column):
        typed = typed_number(statement.cells[row], entry.unit)
        exact = not free_names(statement.cells[row])
        digits = exact_digits(entry.unit.from_si(si), digits) if exact else digits
        return Operand(si, entry.unit, digits, typed, exact=exact)
    return Operand(si, entry.unit, digits)


def _typed(entry: Entry) -> str:
    """The number of an input as typed, "" where it was not typed as one."""
    if entry.kind != "input" or not isinstance(entry.statement, Definition):
        return ""
    return typed_number(entry.statement.value, entry.unit)


def _type_of(parameter: Parameter, found: Type) -> Type:
    assert parameter.unit is not None
    unit = parse_unit(parameter.unit.text)
    return Type(unit.dimension, unit.absolute, flavour=found.flavour)


def _unit_typed(node: Node) -> Unit | None:
    if isinstance(node, Quantity):
        return parse_unit(node.parts[-1].unit)
    return ONE if isinstance(node, Number) else None
