"""Finding out why a number cannot be had: the tree is gone over once more, one operation after the other."""

from __future__ import annotations

import math
import operator
from collections.abc import Callable, Iterator
from typing import Any

from loadpath.evaluate.failure import Failure, Show, short
from loadpath.evaluate.numbers import ROW, Compiler, Values, Work
from loadpath.evaluate.special import whole_bounds
from loadpath.formula.binding import free_names, own_name
from loadpath.formula.signs import holds
from loadpath.formula.tree import (
    As,
    Binary,
    Bracket,
    Call,
    Cases,
    Factor,
    Logic,
    Name,
    Negative,
    Node,
    Relation,
    span_of,
    walk,
)
from loadpath.functions import FUNCTIONS
from loadpath.resolve import LOOKED_UP, is_looking
from loadpath.resolve.columns import is_brought_back
from loadpath.text import Span
from loadpath.units import parse_unit

_CHECK = "check the values that it comes from"
_OPERATIONS: dict[str, Callable[[float, float], float]] = {
    "+": operator.add, "-": operator.sub, "*": operator.mul, "/": operator.truediv, "^": math.pow,
}  # fmt: skip


def run(work: Work, node: Node, values: Values, parameters: Values, compiler: Compiler) -> Any:
    """The value of a compiled tree. Raises `Failure` at the operation that cannot be done."""
    try:
        value = work(values, parameters)
        if not isinstance(value, float) or math.isfinite(value):
            return value
    except (ArithmeticError, ValueError, Failure):
        pass
    _Explanation(values, compiler).value(node, parameters)
    raise _too_large(node, span_of(node), ())


class _Explanation:
    """Values of parts, deepest and leftmost first; the first that cannot be had raises its `Failure`."""

    def __init__(self, values: Values, compiler: Compiler) -> None:
        self.values, self.compiler = values, compiler

    def value(self, node: Node, parameters: Values) -> Any:
        """The value of a part. Raises `Failure`."""
        match node:
            case Negative(operand=operand):
                return -self.value(operand, parameters)
            case Binary():
                return self._binary(node, parameters)
            case Call():
                return self._call(node, parameters)
            case Bracket(inner=inner):
                inside = self.value(inner, parameters)
                return self._finite(node, lambda: self._leaf(node, parameters), (inner, inside))
            case As(operand=operand, unit=unit):
                return parse_unit(unit).from_si(self.value(operand, parameters))
            case Factor(body=body):
                return self.value(body, parameters)
            case Relation(operands=operands, signs=signs):
                sides = [self.value(o, parameters) for o in operands]
                return all(holds(s, a, b) for s, a, b in zip(signs, sides, sides[1:], strict=False))
            case Logic(word=word, operands=operands):
                return (all if word == "and" else any)(self.value(o, parameters) for o in operands)
            case Cases():
                return self._cases(node, parameters)
        return self._leaf(node, parameters)

    def _leaf(self, node: Node, parameters: Values) -> Any:
        return self.compiler.compile_tree(node, frozenset(parameters))(self.values, parameters)

    def _finite(self, node: Node, work: Callable[[], Any], *known: tuple[Node, float]) -> Any:
        try:
            value = work()
        except (ArithmeticError, ValueError):
            value = math.inf
        if isinstance(value, float) and not math.isfinite(value):
            raise _too_large(node, getattr(node, "at", span_of(node)), known)
        return value

    def _binary(self, node: Binary, parameters: Values) -> float:
        left, right = self.value(node.left, parameters), self.value(node.right, parameters)
        if node.operator == "/" and right == 0:
            raise _zero(node, left)
        if node.operator == "^":
            _check_power(node, left, right)
        known = ((node.left, left), (node.right, right))
        return float(self._finite(node, lambda: _OPERATIONS[node.operator](left, right), *known))

    def _call(self, node: Call, parameters: Values) -> Any:
        if is_looking(node):
            return self._looked(node, parameters)
        arguments = [self.value(argument, parameters) for argument in node.arguments]
        definition = self.compiler.function(node.function)
        if definition is not None:
            given = {p.name: a for p, a in zip(definition.parameters, arguments, strict=True)}
            return self.value(definition.body, given)
        function = FUNCTIONS[node.function]
        known = tuple(zip(node.arguments, arguments, strict=True))
        try:
            value = function.work(*arguments)
        except ValueError as reason:
            raise _outside(node, str(reason), known) from None
        except ArithmeticError:
            value = math.inf
        if not math.isfinite(value):
            raise _too_large(node, node.at, known)
        return value

    def _looked(self, node: Call, parameters: Values) -> Any:
        """A call that looks at a column or a whole expression: the first row or term that has no value raises
        its `Failure`."""
        try:
            value = self._leaf(node, parameters)
            if math.isfinite(value):
                return value
        except (ArithmeticError, ValueError):
            pass
        body, own = node.arguments[0], own_name(node)
        if is_brought_back(node):
            self._cells(body, parameters)
        elif node.function in LOOKED_UP:
            self.value(body, parameters)
            for column in node.arguments[1:]:
                self._cells(column, parameters)
        elif own is not None:
            bounds = [self.value(bound, parameters) for bound in node.arguments[2:]]
            if node.function == "sum":
                first, last = whole_bounds(node, *bounds)
                for k in range(first, last + 1):
                    self.value(body, {**parameters, own.name: float(k)})
        raise _too_large(node, node.at, ())

    def _cells(self, column: Node, parameters: Values) -> None:
        """Works a column row by row. Raises `Failure`, with the row."""
        held = sorted(free_names(column) & set(self.compiler.columns))
        if not held:  # a place along a two-way table, or the table
            if not (isinstance(column, Name) and column.name in self.compiler.two_way):
                self.value(column, parameters)
            return
        rows = self.compiler.columns[held[0]]
        for i in range(rows.count):
            try:
                self.value(column, {**parameters, ROW: i})
            except Failure as failure:
                raise failure.in_row(rows.said(i)) from None

    def _cases(self, node: Cases, parameters: Values) -> Any:
        for branch in node.branches:
            if branch.condition is None or self.value(branch.condition, parameters):
                return self.value(branch.value, parameters)
        raise _no_branch(node, tuple(self._names_in_conditions(node, parameters)))

    def _names_in_conditions(self, node: Cases, parameters: Values) -> Iterator[tuple[Node, Any]]:
        conditions = [b.condition for b in node.branches if b.condition is not None]
        seen: set[Node] = set()
        for part in (part for condition in conditions for part in walk(condition)):
            if isinstance(part, Name) and part not in seen:
                seen.add(part)
                yield part, self._leaf(part, parameters)


# --- what is said -------------------------------------------------------------------------------------------

Known = tuple[tuple[Node, Any], ...]
"""Parts of a formula with their values."""


def _list(show: Show, known: Known) -> str:
    """`P` is 20 kN and `A` is 0 mm^2; what is typed there says itself."""
    told = [
        f"`{short(n)}` is {_shown(show, n, v)}" for n, v in known if any(isinstance(p, Name) for p in walk(n))
    ]
    return " and ".join(told) or " and ".join(f"`{short(n)}`" for n, _ in known)


def _shown(show: Show, node: Node, value: Any) -> str:
    return f'"{value}"' if isinstance(value, str) else show(node, value)


def _zero(node: Binary, left: float) -> Failure:
    def tell(show: Show) -> str:
        return (
            f"`{short(node.right)}` is 0, and `{short(node.left)}` ({show(node.left, left)}) is divided by it"
        )

    return Failure("division-by-zero", tell, node.at, _CHECK)


def _check_power(node: Binary, left: float, right: float) -> None:
    """A power that has no real value."""
    if left == 0 and right < 0:
        raise Failure(
            "division-by-zero",
            lambda show: f"`{short(node.left)}` is 0 and is raised to {show(node.right, right)}",
            node.at, _CHECK,
        )  # fmt: skip
    if left < 0 and right != int(right):
        raise Failure(
            "root-of-negative",
            lambda show: f"`{short(node.left)}` is {show(node.left, left)}, and has no real value raised to "
            f"{show(node.right, right)}",
            node.at, _CHECK,
        )  # fmt: skip


def _outside(node: Call, reason: str, known: Known) -> Failure:
    slug = "root-of-negative" if FUNCTIONS[node.function].rule == "root" else "outside-domain"

    def tell(show: Show) -> str:
        return f"`{node.function}` has no value here: {_list(show, known)}; {reason}"

    return Failure(slug, tell, node.at, _CHECK)


def _too_large(node: Node, at: Span, known: Known) -> Failure:
    def tell(show: Show) -> str:
        behind = f", where {_list(show, known)}" if known else ""
        return f"`{short(node)}` is too large to hold{behind}"

    return Failure("not-finite", tell, at, _CHECK)


def _no_branch(node: Cases, known: Known) -> Failure:
    conditions = "; ".join(short(b.condition) for b in node.branches if b.condition is not None)

    def tell(show: Show) -> str:
        return f"none of the conditions holds ({conditions}), where {_list(show, known)}"

    word = Span(node.span.start, node.span.start + len("cases"))
    return Failure("no-branch", tell, word, "add a last branch for the other values: `value  otherwise`")
