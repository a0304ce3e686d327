"""The compiled plan: a formula tree becomes a chain of closures over bare SI floats.

`compile_tree` is bound to the scalar functions of `math`; a binding to columns can be made the same way. The closures
check nothing: where one fails, `explain` goes over the tree again and finds the operation that failed.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from typing import Any

from loadpath.formula.canonical import text
from loadpath.formula.statements import FunctionDefinition
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
    Number,
    Part,
    Quantity,
    Relation,
    Shown,
    Word,
    span_of,
)
from loadpath.functions import FUNCTIONS
from loadpath.text import Span
from loadpath.units import parse_unit
from loadpath.units.printing import read_plain

Values = Mapping[str, Any]
Work = Callable[[Values, Values], Any]
"""Takes the values of the sheet's names and of the enclosing function's parameters."""

EQUAL = 1e-9
"""Sides of a relation within this much of the larger are equal."""
ON_THE_BRACKET = 1e-12
"""A difference within this much of its larger operand is zero inside a Macaulay bracket."""


@dataclass
class Failure(Exception):
    """A number that cannot be had; becomes a finding."""

    slug: str
    message: str
    span: Span
    help: str = ""


def nearly(a: float, b: float) -> bool:
    """True where two sides count as equal."""
    return abs(a - b) <= EQUAL * max(abs(a), abs(b))


_COMPARE: dict[str, Callable[[float, float], bool]] = {
    "<=": lambda a, b: a < b or nearly(a, b),
    "<": lambda a, b: a < b and not nearly(a, b),
    ">=": lambda a, b: a > b or nearly(a, b),
    ">": lambda a, b: a > b and not nearly(a, b),
    "=": nearly,
}


def holds(sign: str, a: float | str, b: float | str) -> bool:
    """One relation between two values, words included."""
    if isinstance(a, str) or isinstance(b, str):
        return a == b
    return _COMPARE[sign](a, b)


def part_value(part: Part) -> float:
    """A typed part of a quantity in coherent SI."""
    number = read_plain(part.whole) if part.whole else 0.0
    if part.over:
        over, under = (int(p.replace("_", "")) for p in part.over)
        number = (number * under + over) / under
    return parse_unit(part.unit).to_si(number)


class Compiler:
    """Compiles trees of one sheet; functions of the sheet are compiled once, where first called."""

    def __init__(self, functions: Mapping[str, FunctionDefinition]) -> None:
        self._functions = functions
        self._bodies: dict[str, Work] = {}

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
                parts = [self.compile_tree(o, parameters) for o in operands]
                join = all if word == "and" else any
                return lambda e, p: join(part(e, p) for part in parts)
            case Cases():
                return self._cases(node, parameters)
        raise TypeError(type(node).__name__)

    def _name(self, name: str, parameters: frozenset[str]) -> Work:
        if name == "pi":
            return _constant(math.pi)
        if name in parameters:
            return lambda e, p: p[name]
        return lambda e, p: e[name]

    def _binary(self, node: Binary, parameters: frozenset[str]) -> Work:
        a, b = self.compile_tree(node.left, parameters), self.compile_tree(node.right, parameters)
        match node.operator:
            case "+":
                return lambda e, p: a(e, p) + b(e, p)
            case "-":
                return lambda e, p: a(e, p) - b(e, p)
            case "*":
                return lambda e, p: a(e, p) * b(e, p)
            case "/":
                return lambda e, p: a(e, p) / b(e, p)
        power = math.pow
        return lambda e, p: power(a(e, p), b(e, p))

    def _call(self, node: Call, parameters: frozenset[str]) -> Work:
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
        if definition.name not in self._bodies:
            own = frozenset(p.name for p in definition.parameters)
            self._bodies[definition.name] = self.compile_tree(definition.body, own)
        return self._bodies[definition.name]

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
            (self.compile_tree(b.condition, parameters) if b.condition is not None else None, self.compile_tree(b.value, parameters))
            for b in node.branches
        ]  # fmt: skip

        def cases(e: Values, p: Values) -> Any:
            for condition, value in branches:
                if condition is None or condition(e, p):
                    return value(e, p)
            raise Failure("no-branch", _no_branch(node), node.branches[0].span, "add a last branch: `value  otherwise`")

        return cases


def _no_branch(node: Cases) -> str:
    conditions = "; ".join(text(b.condition) for b in node.branches if b.condition is not None)
    return f"none of the conditions holds: {conditions}"


def _constant(value: Any) -> Work:
    return lambda e, p: value


def _sum_of(parts: tuple[Part, ...]) -> float:
    if len(parts) == 2:
        inches = 12 * _in_unit(parts[0]) + _in_unit(parts[1])
        return parse_unit("in").to_si(inches)
    return part_value(parts[0])


def _in_unit(part: Part) -> float:
    return parse_unit(part.unit).from_si(part_value(part))


def run(work: Work, node: Node, values: Values, parameters: Values, compiler: Compiler) -> Any:
    """The value of a compiled tree. Raises `Failure` at the operation that cannot be done."""
    try:
        value = work(values, parameters)
        if isinstance(value, float) and not math.isfinite(value):
            raise OverflowError
    except Failure:
        raise
    except (ArithmeticError, ValueError, OverflowError):
        explain(node, values, parameters, compiler)
        raise Failure("not-finite", f"`{_short(node)}` gives a number too large to hold", span_of(node)) from None
    return value


def explain(node: Any, values: Values, parameters: Values, compiler: Compiler) -> None:
    """Finds the operation that fails, deepest and leftmost first, and raises its `Failure`."""
    own = frozenset(parameters)
    if isinstance(node, Cases):
        _explain_cases(node, values, parameters, compiler)
        return
    for child in _direct(node):
        explain(child, values, parameters, compiler)
    arguments = [compiler.compile_tree(c, own)(values, parameters) for c in _direct(node)]
    match node:
        case Binary(operator="/") if arguments[1] == 0:
            raise Failure("division-by-zero", f"`{_short(node.right)}` is 0, and `{_short(node.left)}` is divided by it", node.at, _mend_zero(node))
        case Binary(operator="^") if arguments[0] < 0 and arguments[1] != int(arguments[1]):
            raise Failure("root-of-negative", f"`{_short(node.left)}` is {arguments[0]:.4g}, and a power of {arguments[1]:.4g} has no real value there", node.at)
        case Binary(operator="^") if arguments[0] == 0 and arguments[1] < 0:
            raise Failure("division-by-zero", f"`{_short(node.left)}` is 0 and is raised to {arguments[1]:.4g}", node.at)
        case Call(function=function) if function in FUNCTIONS:
            _explain_call(node, arguments)
        case Call(function=function):
            definition = compiler._functions[function]
            given = {p.name: a for p, a in zip(definition.parameters, arguments, strict=True)}
            explain(definition.body, values, given, compiler)
    try:
        value = compiler.compile_tree(node, own)(values, parameters)
    except (ArithmeticError, ValueError):
        value = math.inf
    if isinstance(value, float) and not math.isfinite(value):
        shown = " and ".join(f"{a:.4g}" for a in arguments if isinstance(a, float))
        raise Failure("not-finite", f"`{_short(node)}` of {shown} (in SI units) gives a number too large to hold", getattr(node, "at", None) or span_of(node))


def _mend_zero(node: Binary) -> str:
    return "check the values that it comes from"


def _explain_call(node: Call, arguments: list[Any]) -> None:
    function = FUNCTIONS[node.function]
    try:
        function.work(*arguments)
    except ValueError as reason:
        slug = "root-of-negative" if function.rule == "root" else "outside-domain"
        shown = ", ".join(f"{a:.6g}" for a in arguments)
        raise Failure(slug, f"`{node.function}` of {shown}{' (in SI units)' if function.rule != 'plain' else ''}: {reason}", node.at) from None
    except OverflowError:
        raise Failure("not-finite", f"`{node.function}` of {arguments[0]:.6g} gives a number too large to hold", node.at) from None


def _explain_cases(node: Cases, values: Values, parameters: Values, compiler: Compiler) -> None:
    own = frozenset(parameters)
    for branch in node.branches:
        if branch.condition is not None:
            explain(branch.condition, values, parameters, compiler)
            if not compiler.compile_tree(branch.condition, own)(values, parameters):
                continue
        explain(branch.value, values, parameters, compiler)
        return


def _direct(node: Any) -> tuple[Node, ...]:
    match node:
        case Negative(operand=operand) | As(operand=operand):
            return (operand,)
        case Factor(body=body):
            return (body,)
        case Binary(left=left, right=right):
            return (left, right)
        case Call(arguments=arguments):
            return arguments
        case Bracket(inner=inner):
            return (inner,)
        case Relation(operands=operands) | Logic(operands=operands):
            return operands
    return ()


def _short(node: Node) -> str:
    said = text(node)
    return said if len(said) <= 60 else said[:57] + "..."
