"""The compiled plan: a formula tree becomes a chain of closures over bare SI floats.

`compile_tree` is bound to the scalar functions of `math`; a binding to columns can be made the same way. The
closures check nothing: where one fails, `explain` goes over the tree once more and finds the operation.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping
from typing import Any

from loadpath.formula.binding import free_names
from loadpath.formula.signs import holds
from loadpath.formula.statements import FunctionDefinition, TwoWay
from loadpath.formula.tree import (
    As,
    At,
    Binary,
    Bracket,
    Call,
    Cases,
    Factor,
    Logic,
    Name,
    Negative,
    Node,
    Number,
    Part,
    Quantity,
    Relation,
    Shown,
    Word,
)
from loadpath.functions import FUNCTIONS, SPECIAL
from loadpath.resolve import Rows
from loadpath.resolve.columns import is_brought_back
from loadpath.units import parse_unit
from loadpath.units.printing import read_plain

Values = Mapping[str, Any]
Work = Callable[[Values, Values], Any]
"""Takes the values of the sheet's names and of the enclosing function's parameters."""

ON_THE_BRACKET = 1e-12
"""A difference within this much of its larger operand is zero inside a Macaulay bracket."""


def part_value(part: Part) -> float:
    """A typed part of a quantity in coherent SI."""
    number = read_plain(part.whole) if part.whole else 0.0
    if part.over:
        over, under = (int(p.replace("_", "")) for p in part.over)
        number = (number * under + over) / under
    return parse_unit(part.unit).to_si(number)


ROW = "#row"
"""Among the parameters: which row of its columns an expression is worked for."""


class Compiler:
    """Compiles trees of one sheet; functions of the sheet are compiled once, where first called."""

    def __init__(
        self,
        functions: Mapping[str, FunctionDefinition],
        columns: Mapping[str, Rows] | None = None,
        two_way: Mapping[str, TwoWay] | None = None,
    ) -> None:
        self._functions = dict(functions)
        self.columns = columns or {}
        self.two_way = two_way or {}
        self._bodies: dict[str, Work] = {}
        self.deadline = math.inf
        """Until when the step at hand may take (`time.monotonic`)."""
        self.once: dict[Node, list[float]] = {}
        """Values of whole columns, worked once a step."""
        self._derived: set[str] = set()
        """Functions whose bodies are derived while the sheet is worked."""

    def compile_tree(self, node: Node, parameters: frozenset[str] = frozenset()) -> Work:
        """A closure that gives the node's value in coherent SI (a bool for relations)."""
        match node:
            case Number(text=typed):
                return _constant(float(typed.replace("_", "")))
            case Quantity(parts=parts):
                return _constant(_sum_of(parts))
            case Shown(number=number, unit=unit, word=word):
                return _constant(number if word else parse_unit(unit).to_si(read_plain(number)))
            case Factor(body=body):
                return self.compile_tree(body, parameters)
            case Word(text=word):
                return _constant(word)
            case Name(name=name):
                return self._name(name, parameters)
            case Negative(operand=operand):
                inner = self.compile_tree(operand, parameters)
                return lambda e, p: -inner(e, p)
            case Binary():
                return self._binary(node, parameters)
            case Call():
                return self._call(node, parameters)
            case Bracket():
                return self._bracket(node, parameters)
            case As(operand=operand, unit=unit):
                inner, from_si = self.compile_tree(operand, parameters), parse_unit(unit).from_si
                return lambda e, p: from_si(inner(e, p))
            case Relation():
                return self._relation(node, parameters)
            case Logic(word=word, operands=operands):
                works = [self.compile_tree(o, parameters) for o in operands]
                join = all if word == "and" else any
                return lambda e, p: join(work(e, p) for work in works)
            case Cases():
                return self._cases(node, parameters)
            case At():
                return self._cell(node)
        raise TypeError(type(node).__name__)

    def columns_in(self, node: Node) -> list[str]:
        """The names of columns that a tree takes from outside itself, in order."""
        return sorted(free_names(node) & self.columns.keys())

    def function(self, name: str) -> FunctionDefinition | None:
        """The sheet's own function of a name, None for a built-in one."""
        return self._functions.get(name)

    def _name(self, name: str, parameters: frozenset[str]) -> Work:
        if name == "pi":
            return _constant(math.pi)
        if name in parameters:
            return lambda e, p: p[name]
        if name in self.columns:
            return lambda e, p: e[name][p[ROW]]
        return lambda e, p: e[name]

    def _binary(self, node: Binary, parameters: frozenset[str]) -> Work:
        a, b = self.compile_tree(node.left, parameters), self.compile_tree(node.right, parameters)
        match node.operator:
            case "+":
                return lambda e, p: a(e, p) + b(e, p)
            case "-":
                return lambda e, p: a(e, p) - b(e, p)
            case "*":
                return _product(a, b)
            case "/":
                return _quotient(a, b)
        power = math.pow
        return lambda e, p: power(a(e, p), b(e, p))

    def _cell(self, node: At) -> Work:
        assert isinstance(node.operand, Name)
        name, row = node.operand.name, node.row
        index = {label: i for i, label in enumerate(self.columns[name].labels)}
        if isinstance(row, Word | Number):
            place = index[row.text] if isinstance(row, Word) else int(row.text) - 1
            return lambda e, p: e[name][place]
        assert isinstance(row, Name)
        choice = row.name
        return lambda e, p: e[name][index[e[choice]]]

    def _call(self, node: Call, parameters: frozenset[str]) -> Work:
        if node.function in SPECIAL or is_brought_back(node):
            from loadpath.evaluate.special import compile_special

            return compile_special(self, node, parameters)
        arguments = [self.compile_tree(a, parameters) for a in node.arguments]
        definition = self._functions.get(node.function)
        if definition is None:
            work = FUNCTIONS[node.function].work
            if len(arguments) == 1:
                only = arguments[0]
                return lambda e, p: work(only(e, p))
            return lambda e, p: work(*[a(e, p) for a in arguments])
        body, names = self.body_of(definition), [p.name for p in definition.parameters]
        return lambda e, p: body(e, {n: a(e, p) for n, a in zip(names, arguments, strict=True)})

    def body_of(self, definition: FunctionDefinition) -> Work:
        """A function's body, compiled once."""
        name, bodies = definition.name, self._bodies
        if name in self._derived:
            return lambda e, p: bodies[name](e, p)
        if name not in bodies:
            self._compile_body(definition)
        return bodies[name]

    def _compile_body(self, definition: FunctionDefinition) -> None:
        own = frozenset(p.name for p in definition.parameters)
        self._bodies[definition.name] = self.compile_tree(definition.body, own)

    def expect(self, name: str) -> None:
        """Says of a function that its body will be derived: calls of it are bound late."""
        self._derived.add(name)

    def derive(self, definition: FunctionDefinition) -> None:
        """Takes up a function whose body has been derived."""
        self._functions[definition.name] = definition
        self._compile_body(definition)

    def _bracket(self, node: Bracket, parameters: frozenset[str]) -> Work:
        power, inside = node.power, node.inner
        whole = self.compile_tree(inside, parameters)
        difference: Callable[[Values, Values], float] = whole
        if isinstance(inside, Binary) and inside.operator == "-":
            a, b = self.compile_tree(inside.left, parameters), self.compile_tree(inside.right, parameters)

            def difference(e: Values, p: Values) -> float:
                left, right = a(e, p), b(e, p)
                apart = left - right
                return 0.0 if abs(apart) <= ON_THE_BRACKET * max(abs(left), abs(right)) else float(apart)

        def bracket(e: Values, p: Values) -> float:
            apart = difference(e, p)
            return float(apart**power) if apart >= 0 else 0.0

        return bracket

    def _relation(self, node: Relation, parameters: frozenset[str]) -> Work:
        operands = [self.compile_tree(o, parameters) for o in node.operands]
        signs = node.signs

        def relation(e: Values, p: Values) -> bool:
            values = [operand(e, p) for operand in operands]
            return all(holds(s, a, b) for s, a, b in zip(signs, values, values[1:], strict=False))

        return relation

    def _cases(self, node: Cases, parameters: frozenset[str]) -> Work:
        branches = [
            (
                None if b.condition is None else self.compile_tree(b.condition, parameters),
                self.compile_tree(b.value, parameters),
            )
            for b in node.branches
        ]

        def cases(e: Values, p: Values) -> Any:
            for condition, value in branches:
                if condition is None or condition(e, p):
                    return value(e, p)
            raise ValueError("no branch holds")

        return cases


def _product(a: Work, b: Work) -> Work:
    def product(e: Values, p: Values) -> Any:
        value = a(e, p) * b(e, p)
        # too large to hold: said here, because a division further on would hide it
        if value - value:
            raise OverflowError
        return value

    return product


def _quotient(a: Work, b: Work) -> Work:
    def quotient(e: Values, p: Values) -> Any:
        value = a(e, p) / b(e, p)
        if value - value:
            raise OverflowError
        return value

    return quotient


def _constant(value: Any) -> Work:
    return lambda e, p: value


def _sum_of(parts: tuple[Part, ...]) -> float:
    if len(parts) == 2:
        inches = 12 * _in_unit(parts[0]) + _in_unit(parts[1])
        return parse_unit("in").to_si(inches)
    return part_value(parts[0])


def _in_unit(part: Part) -> float:
    return parse_unit(part.unit).from_si(part_value(part))
