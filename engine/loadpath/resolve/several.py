"""Types of what holds several expressions: columns, equations, plots and tables of values."""

from __future__ import annotations

from collections.abc import Callable

from loadpath.formula.binding import free_names
from loadpath.formula.mistake import Mistake
from loadpath.formula.statements import AskedUnit, Column, Plot, Solution, Sought, Table, Tabulate
from loadpath.formula.tree import Call, Name, Node, span_of
from loadpath.resolve.dimensions import Checker, Parameters
from loadpath.resolve.displays import Displays
from loadpath.resolve.model import ONE, UNKNOWN, Entry, TwoWayTypes, Type
from loadpath.resolve.units import read_unit, type_of_unit
from loadpath.units import Unit

Shown = tuple[Type, Unit, bool]
"""Type, unit, and whether the line asks for that unit."""


class Several:
    """Checks statements that hold several expressions. Raises `Mistake`."""

    def __init__(self, checker: Checker, displays: Displays, entry_of: Callable[[str], Entry | None]) -> None:
        self.checker, self.displays, self.entry_of = checker, displays, entry_of

    # --- tables ---

    def of_column(self, statement: Column) -> Shown:
        """All cells of a column have one dimension, that of the header where it states a unit."""
        return self._common(statement.cells, statement.unit, "the column holds")

    def _common(self, cells: tuple[Node, ...], asked: AskedUnit | None, doing: str) -> Shown:
        common, first = self.checker.number(cells[0], None), cells[0]
        for cell in cells:
            found = self.checker.number(cell, None)
            if asked is not None:
                self._in_unit(found, asked, cell)
            common = self.checker.same(common, found, span_of(cell), doing, first, cell)
            first = cell if not common.zero and first is cells[0] else first
        typed = all(not free_names(cell) for cell in cells)
        return self.displays.of_value(common, asked, first, typed)

    def _in_unit(self, found: Type, asked: AskedUnit, cell: Node) -> None:
        """A cell of another dimension than its header is a mistake in the cell."""
        try:
            self.checker.shown(found, asked, cell)
        except Mistake as mistake:
            if mistake.slug == "unit-mismatch":
                mistake.span = span_of(cell)
            raise

    def of_two_way(self, statement: Table) -> TwoWayTypes:
        """Types of the three parts of a two-way table."""
        table = statement.two_way
        assert table is not None
        down = self._common(table.down, None, "the first column holds")[0]
        across = self._common(table.across, None, "the header holds")[0]
        cells = tuple(cell for row in table.cells for cell in row)
        return TwoWayTypes(down, across, self._common(cells, None, "the table holds")[0])

    # --- equations ---

    def of_unknown(self, unit: AskedUnit) -> Shown:
        """An unknown has the dimension of its unit."""
        read = read_unit(unit.text, unit.span, self.checker.is_name)
        found = type_of_unit(read, unit.span)
        return Type(found.dimension, found.absolute, flavour=found.flavour), read, True

    def of_sought(self, sought: Sought) -> Shown:
        """The unit of an unknown stands at its first mention."""
        above = self.entry_of(sought.name)
        declared = above if above is not None and above.kind == "unknown" else None
        if sought.unit is None:
            if above is not None and above.kind != "unknown":  # what is wrong with that is said elsewhere
                return UNKNOWN, ONE, False
            if declared is None:
                message = f"in which unit `{sought.name}` will be found is not said"
                mend = f"write `solve for {sought.name} [mm]`, or `[1]` for a plain number"
                raise Mistake("bad-syntax", sought.span, message, mend)
            return declared.type, declared.unit, True
        shown = self.of_unknown(sought.unit)
        if declared is not None and not declared.type.unknown and declared.unit.text != shown[1].text:
            message = f"`{sought.name}` is sought in {shown[1].text or '1'}, "
            message += f"but `unknown` above says {declared.unit.text or '1'}"
            raise Mistake("unit-mismatch", sought.unit.span, message, "leave out the unit here")
        return shown

    def check_equations(self, statement: Solution) -> None:
        """Both sides of each equation have one dimension, and the bounds that of their unknown."""
        together = statement.together
        number, unknowns = len(together.equations), len(together.sought)
        if number != unknowns:
            message = f"{_count(number, 'equation')} for {_count(unknowns, 'unknown')}"
            mend = "as many equations as unknowns are needed: add what is missing"
            if number > unknowns:
                mend = "take out what follows from the others, and hold it against them with `check:`"
            raise Mistake("equation-count", together.span, message, mend)
        names = {sought.name for sought in together.sought}
        for sought in together.sought:
            self._bounds(sought, names)
        for equation in together.equations:
            left, right = (self.checker.number(o, None) for o in equation.operands)
            self.checker.same(left, right, equation.at[0], "`=` joins", *equation.operands)

    def _bounds(self, sought: Sought, names: set[str]) -> None:
        if sought.low is None or sought.high is None:
            return
        of, _, _ = self.of_sought(sought)
        for bound in (sought.low, sought.high):
            if free_names(bound) & names:
                message = "a bound hangs on an unknown that is solved for here"
                raise Mistake("used-before-defined", span_of(bound), message, "give a bound that is known")
            found = self.checker.number(bound, None)
            self.checker.same(of, found, span_of(bound), f"the bound of `{sought.name}` joins",
                              Name(sought.name), bound)  # fmt: skip

    # --- plots and tables of values ---

    def of_range(self, statement: Plot | Tabulate) -> tuple[Unit, ...]:
        """The unit of what runs over the range, then that of each curve."""
        low, high = statement.low, statement.high
        types = [self.checker.number(bound, None) for bound in (low, high)]
        over = self.checker.same(types[0], types[1], span_of(high), "the range goes over", low, high)
        self.checker.refuse_shadow(statement.variable, statement.variable_span)
        parameters: Parameters = {
            statement.variable: over if over.unknown else Type(over.dimension, over.absolute)
        }
        x_unit = self._unit_of_bound(high, over) or self._unit_of_bound(low, over)
        units = [x_unit or self.displays.of_value(over, None, high, True)[1]]
        for curve in statement.curves:
            found = self.checker.number(curve, parameters)
            asked = self._asked_by(curve)
            units.append(asked or self.displays.of_value(found, None, curve, False)[1])
        return tuple(units)

    def _unit_of_bound(self, bound: Node, over: Type) -> Unit | None:
        entry = self.entry_of(bound.name) if isinstance(bound, Name) else None
        return entry.unit if entry is not None and entry.unit.dimension == over.dimension else None

    def _asked_by(self, curve: Node) -> Unit | None:
        """The unit that a function of the sheet asks for."""
        definition = self.checker.function(curve.function) if isinstance(curve, Call) else None
        if definition is None or definition.unit is None:
            return None
        return read_unit(definition.unit.text, definition.unit.span)


def _count(number: int, word: str) -> str:
    return f"{number} {word}{'' if number == 1 else 's'}"
