"""What a reader must see of the functions that look at whole expressions or columns: which row was read,
which places were looked at, by which method."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import replace
from typing import TYPE_CHECKING, Any

from loadpath.evaluate.numbers import Values
from loadpath.evaluate.special import Found, cells, integrate, look_over, look_up
from loadpath.formula.binding import own_name, put_in
from loadpath.formula.tree import Binary, Call, Logic, Name, Node, Number, Quantity, Relation, Shown
from loadpath.resolve import Rows, Type
from loadpath.resolve.columns import is_brought_back
from loadpath.trace.digits import exact_digits
from loadpath.trace.model import Aside, Called, Operand, Working
from loadpath.units import ONE, Unit, parse_unit
from loadpath.units.printing import plain

if TYPE_CHECKING:
    from loadpath.evaluate.working import Observer

MOST_MORE = 4
"""Further digits that the terms of a sum may show, so that they add up to what is printed."""
MOST_ADDED = 12
"""Cells of a sum that are written out."""
MOST_SPOTS = 24
"""Places looked at that are listed."""
ERROR_DIGITS = 2
NOTHING = 1e-12
"""A value below this share of the largest one looked at is printed as 0."""


class Looking:
    """Notes what such a call looked at."""

    def __init__(self, observer: Observer) -> None:
        self.of = observer

    def called(
        self, call: Call, parameters: Values, scope: Mapping[str, Operand], types: dict[str, Type]
    ) -> Called:
        """The call with its value and what it looked at."""
        compiler, resolved = self.of.compiler, self.of.resolved
        si = float(compiler.compile_tree(call, frozenset(parameters))(self.of.values, parameters))
        unit = self._unit(call, types)
        value = Operand(si, unit, resolved.sheet.front.digits)
        if call.function == "count":
            value = replace(value, digits=exact_digits(si, value.digits))
        written, asides = self._seen(call, parameters, value, types)
        working = Working(call, tuple(scope.items()), asides=asides, written=written)
        return Called(call, (), working, value)

    def _unit(self, call: Call, types: dict[str, Type]) -> Unit:
        """That of a column named in it, of a function that asks for one, else the sheet's for its kind."""
        resolved = self.of.resolved
        shown = call.arguments[-1] if call.function in ("interp", "lookup") else call.arguments[0]
        if call.function == "count":
            return ONE
        if call.function.startswith("where_"):
            shown = call.arguments[3]
        if isinstance(shown, Name) and shown.name in resolved.by_name:
            entry = resolved.entries[resolved.by_name[shown.name]]
            if not entry.type.unknown and shown.name not in self.of.compiler.two_way:
                return entry.unit
        if isinstance(shown, Call) and not call.function.startswith("integral"):
            definition = self.of.compiler.function(shown.function)
            if definition is not None and definition.unit is not None:
                return parse_unit(definition.unit.text)
        checker = resolved.checker
        found = checker.type_of(call, types)
        checker.warnings.clear()
        return resolved.system.unit_for(found.dimension, found.absolute, found.flavour == "bar")

    def _seen(
        self, call: Call, parameters: Values, value: Operand, types: dict[str, Type]
    ) -> tuple[tuple[Node, ...], tuple[Aside, ...]]:
        if is_brought_back(call):
            return self._column(call, parameters, value)
        match call.function:
            case "interp" | "lookup":
                found = look_up(self.of.compiler, call, frozenset(parameters))(self.of.values, parameters)
                return (), tuple(self._rows(call, found, parameters, value, types))
            case "integral":
                return (), (self._quadrature(call, parameters, value),)
            case "largest" | "smallest" | "where_largest" | "where_smallest":
                return (), tuple(self._spots(call, parameters, types))
        return (), ()

    # --- columns ---

    def _column(
        self, call: Call, parameters: Values, value: Operand
    ) -> tuple[tuple[Node, ...], tuple[Aside, ...]]:
        column = call.arguments[0]
        values = cells(self.of.compiler, column, frozenset(parameters))(self.of.values, parameters)
        rows = self._rows_of(column)
        if call.function == "count":
            return (), ()
        if call.function == "sum":
            return tuple(self._added(column, values, value)), ()
        pick = min if call.function == "min" else max
        index = values.index(pick(values))
        return (), (Aside(f"{call.function}: {rows.said(index)} of", column, ""),)

    def _rows_of(self, column: Node) -> Rows:
        return self.of.compiler.columns[self.of.compiler.columns_in(column)[0]]

    def _added(self, column: Node, values: list[float], value: Operand) -> Iterator[Node]:
        """The cells that a sum adds up, one after the other, with more digits each time."""
        if not 2 <= len(values) <= MOST_ADDED:
            return
        for more in range(MOST_MORE + 1):
            shown = [self._cell(column, i, si, value, more) for i, si in enumerate(values)]
            total: Node = shown[0]
            for each in shown[1:]:
                total = Binary("+", total, each)
            yield total

    def _cell(self, column: Node, row: int, si: float, like: Operand, more: int) -> Shown:
        digits = like.digits + more
        if isinstance(column, Name):
            operand = self.of.cell(column.name, row)
            if operand.typed and operand.unit.text == like.unit.text:
                return Shown(operand.typed, operand.unit.text)
            digits = operand.digits + (0 if operand.exact else more)
        return Shown(plain(like.unit.from_si(si), digits), like.unit.text)

    # --- look-ups ---

    def _rows(
        self, call: Call, found: Found, parameters: Values, value: Operand, types: dict[str, Type]
    ) -> Iterator[Aside]:
        x, xs, ys = call.arguments
        if not isinstance(x, Name | Number | Quantity):
            at = float(self.of.compiler.compile_tree(x, frozenset(parameters))(self.of.values, parameters))
            sought = _shown(self._column_unit(x, types), at, value.digits)
            yield Aside("looked up:", Relation((x, sought), ("=",)), "")
        if isinstance(ys, Name) and ys.name in self.of.compiler.two_way:
            rows, columns = (" and ".join(str(i + 1) for i in each) for each in (found.rows, found.across))
            plural = "s" if len(found.rows) > 1 else ""
            across = "s" if len(found.across) > 1 else ""
            yield Aside(f"read in row{plural} {rows} and column{across} {columns} of", Name(ys.name), "")
            yield from self._corners(x, xs, ys.name, found, types)
            return
        unit_x, unit_y = self._column_unit(xs, types), self._column_unit(ys, types)
        labels = self._rows_of(xs)
        for i in found.rows:
            a = _shown(unit_x, found.xs[i], value.digits)
            b = _shown(unit_y, found.ys[i], value.digits)
            pair = Logic("and", (Relation((xs, a), ("=",)), Relation((ys, b), ("=",))))
            yield Aside(f"read in {labels.said(i)}:", pair, "")

    def _corners(
        self, x: Node, y: Node, table: str, found: Found, types: dict[str, Type]
    ) -> Iterator[Aside]:
        """The cells that were read, each with its place on both sides."""
        of, work = self.of.compiler.two_way[table], self.of.compiler.compile_tree
        digits = self.of.resolved.sheet.front.digits
        kinds = self.of.resolved.checker.two_way(table)
        assert kinds is not None
        units = [self._unit_of(t) for t in (kinds.down, kinds.across, kinds.cells)]
        for i in found.rows:
            for j in found.across:
                nodes = (of.down[i], of.across[j], of.cells[i][j])
                a, b, z = (
                    _shown(unit, float(work(node)(self.of.values, {})), digits)
                    for unit, node in zip(units, nodes, strict=True)
                )
                pairs = ((x, a), (y, b), (Name(table), z))
                yield Aside("cell:", Logic("and", tuple(Relation(pair, ("=",)) for pair in pairs)), "")

    def _unit_of(self, found: Type) -> Unit:
        return self.of.resolved.system.unit_for(found.dimension, found.absolute, found.flavour == "bar")

    def _column_unit(self, column: Node, types: dict[str, Type]) -> Unit:
        resolved = self.of.resolved
        if isinstance(column, Name) and column.name in resolved.by_name:
            return resolved.entries[resolved.by_name[column.name]].unit
        found = resolved.checker.type_of(column, types)
        resolved.checker.warnings.clear()
        return resolved.system.unit_for(found.dimension, found.absolute, found.flavour == "bar")

    # --- expressions over a range ---

    def _quadrature(self, call: Call, parameters: Values, value: Operand) -> Aside:
        from loadpath.numeric.roots import STEPS

        found = integrate(self.of.compiler, call, self.of.values, parameters)
        error = Shown(plain(value.unit.from_si(found.error), ERROR_DIGITS), value.unit.text)
        missed = f"; a peak narrower than 1/{STEPS} of the range can be missed"
        return Aside(f"no closed form found: {found.method}, error estimate", error, missed)

    def _spots(self, call: Call, parameters: Values, types: dict[str, Type]) -> Iterator[Aside]:
        found = look_over(self.of.compiler, call, self.of.values, parameters)
        own = own_name(call)
        assert own is not None
        x_unit, y_unit = (
            self._unit(replace(call, function="where_largest"), types),
            self._unit(replace(call, function="largest"), types),
        )
        digits = self.of.resolved.sheet.front.digits
        if found.method != "exact":
            yield Aside("", Name(own.name), f"looked over: {found.method}, then refined")
        size = max(abs(spot.y) for spot in found.looked_at)
        for spot in found.looked_at[:MOST_SPOTS]:
            at = _shown(x_unit, spot.x, digits)
            y = _shown(y_unit, 0.0 if abs(spot.y) <= NOTHING * size else spot.y, digits)
            yield Aside(
                f"{spot.where}, ", Relation((put_in(call.arguments[0], {own.name: at}), y), ("=",)), ""
            )
        if len(found.looked_at) > MOST_SPOTS:
            yield Aside(
                "", Name(own.name), f"at {len(found.looked_at) - MOST_SPOTS} more places lies between"
            )
        over = found.largest_over if call.function.endswith("largest") else found.smallest_over
        if over is not None:
            a, b = (_shown(x_unit, each, digits) for each in over)
            yield Aside("holds over the stretch", Relation((a, Name(own.name), b), ("<=", "<=")), "")


def _shown(unit: Unit, si: float, digits: int) -> Shown:
    number: Any = unit.from_si(si)
    return Shown(plain(number, min(exact_digits(number, digits), digits)), unit.text)
