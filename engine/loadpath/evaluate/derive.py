"""Derived expressions: what algebra makes of `integral`, `derivative`, `limit_of`, `simplified` and of short
sums, before numbers are worked."""

from __future__ import annotations

import math
from dataclasses import dataclass, field, replace
from typing import Any

from loadpath import algebra
from loadpath.algebra import AlgebraFailure
from loadpath.evaluate.failure import Failure, short
from loadpath.evaluate.inline import inlined, mapped, rows_written_out, too_large
from loadpath.evaluate.numbers import Compiler, Values, part_value
from loadpath.evaluate.special import integrate, whole_bounds
from loadpath.evaluate.symbolic import is_symbolic
from loadpath.formula.binding import put_in
from loadpath.formula.mistake import Mistake
from loadpath.formula.tree import (
    Binary,
    Bracket,
    Branch,
    Call,
    Cases,
    Name,
    Negative,
    Node,
    Number,
    Quantity,
    Relation,
    walk,
)
from loadpath.functions import FUNCTIONS
from loadpath.resolve import Resolved, Type
from loadpath.trace.model import Aside

MOST_NODES = 2000
"""Of a derived expression."""
WRITTEN_OUT = 10
"""Terms of a sum that is written out."""
AGREES = 1e-6
"""A closed form and its quadrature agree within this much."""

SAMPLES = 200
"""Places between the bounds at which a denominator is looked at."""
GROWS = 5.0
"""What grows so much at each thousandth of the way has no limit."""

_NO_PARAMETERS: dict[str, Any] = {}


@dataclass(frozen=True, slots=True)
class Derived:
    """An expression with what algebra made of it."""

    typed: Node | None
    """None where algebra changed nothing."""
    tree: Node
    asides: tuple[Aside, ...] = ()
    """Which antiderivative was taken, which jump was left out."""


@dataclass
class Deriver:
    """Derives the expressions of one run."""

    resolved: Resolved
    compiler: Compiler
    values: Values
    asides: list[Aside] = field(default_factory=list)

    def derive(self, tree: Node, parameters: dict[str, Type] | None = None) -> Derived:
        """The tree with each call that algebra works in its closed form. Raises `Failure`.

        A definite integral that has none stays a call, which is then worked numerically.
        """
        self.asides = []
        self.known = parameters is None
        types = parameters or {}
        with algebra.time_limit(algebra.TIME_LIMIT):
            if isinstance(tree, Cases):
                branches = tuple(replace(b, value=self._one(b.value, types)) for b in tree.branches)
                new: Node = replace(tree, branches=branches)
            else:
                new = self._one(tree, types)
        return Derived(None if new == tree else tree, new, tuple(dict.fromkeys(self.asides)))

    def _one(self, tree: Node, types: dict[str, Type]) -> Node:
        made: set[int] = set()

        def change(node: Node) -> Node:
            if isinstance(node, Binary) and node.operator == "+" and id(node.right) in made:
                return _joined(node.left, node.right)
            if not isinstance(node, Call) or not is_symbolic(node):
                return node
            try:
                found = self._worked(node, types)
            except AlgebraFailure as trouble:
                message = f"`{short(node)}`: {trouble.message}"
                raise Failure(trouble.slug, lambda show: message, node.at, trouble.help) from None
            if sum(1 for _ in walk(found)) > MOST_NODES:
                raise too_large(node.at, MOST_NODES)
            made.add(id(found))
            kept.append(found)
            return found

        kept: list[Node] = []  # so that no other node takes the place of one in memory

        return mapped(tree, change)

    def _worked(self, call: Call, types: dict[str, Type]) -> Node:
        f = inlined(call.arguments[0], self.compiler.function, call.at)
        if len(call.arguments) > 1 and isinstance(call.arguments[1], Name):
            f = rows_written_out(f, frozenset([_second(call)]), self.compiler.columns)
        match call.function:
            case "integral" if len(call.arguments) == 4:
                return self._definite(call, f, types)
            case "integral":
                return self._antiderivative(call, f, types)
            case "derivative":
                return self._derivative(call, f, types)
            case "limit_of":
                return self._limit(call, f, types)
            case "simplified":
                return self._simplified(call, f, types)
        return self._sum(call, f)

    # --- one kind after the other ---

    def _antiderivative(self, call: Call, f: Node, types: dict[str, Type]) -> Node:
        x = _second(call)
        found = algebra.antiderivative(f, x, self._above_zero)
        tree = None if found is None else self._fitting(call, found, types)
        if tree is None:
            raise Failure(
                "no-closed-form", lambda show: f"`{short(call)}` has no closed form", call.at,
                "give bounds, so that it is worked numerically: `integral(f, t, 0, x)`",
            )  # fmt: skip
        at_zero = Relation((Name(x), Number("0")), ("=",))
        vanishes = algebra.vanishes_at_zero(tree, x, self._above_zero)
        before = (
            "antiderivative taken: the one that is 0 at"
            if vanishes
            else "antiderivative taken: it is not 0 at"
        )
        self.asides.append(Aside(before, at_zero, ""))
        return tree

    def _definite(self, call: Call, f: Node, types: dict[str, Type]) -> Node:
        x, a, b = _second(call), *call.arguments[2:]
        try:
            found = algebra.definite(f, x, a, b, self._above_zero)
        except AlgebraFailure as trouble:
            if trouble.slug != "no-closed-form":
                raise
            found = None
        tree = None if found is None else self._fitting(call, found, types)
        if tree is None or not self._agrees(call, f, tree):
            if not self.known:
                said = "has no closed form that was found: worked numerically, where it is called"
                self.asides.append(Aside("", call, said))
            return call
        return tree

    def _agrees(self, call: Call, f: Node, tree: Node) -> bool:
        """A closed form is believed where its value and that of a quadrature agree; where it hangs on what is
        not known yet, where nothing it divides by passes through 0 between the bounds."""
        if not self.known:
            return self._never_divides_by_zero(call, f)
        try:
            closed = self.compiler.compile_tree(tree)(self.values, _NO_PARAMETERS)
            numeric = integrate(self.compiler, call, self.values, _NO_PARAMETERS)
        except KeyError:  # hangs on an unknown, or on a name that lives only around it
            return self._never_divides_by_zero(call, f)
        except (ArithmeticError, ValueError, Failure):
            return False
        return math.isclose(closed, numeric.value, rel_tol=AGREES, abs_tol=10 * numeric.error)

    def _never_divides_by_zero(self, call: Call, f: Node) -> bool:
        """True where the denominators keep their sign between the bounds; False where that is not known."""
        x, compiler = _second(call), self.compiler
        for denominator in algebra.denominators(f, x):
            work = compiler.compile_tree(denominator, frozenset([x]))
            try:
                a, b = (compiler.compile_tree(n)(self.values, _NO_PARAMETERS) for n in call.arguments[2:])
                places = [a + (b - a) * i / SAMPLES for i in range(SAMPLES + 1)]
                signs = {math.copysign(1, work(self.values, {x: at})) for at in places}
            except (ArithmeticError, ValueError, KeyError):
                return False
            if len(signs) > 1:
                return False
        return True

    def _derivative(self, call: Call, f: Node, types: dict[str, Type]) -> Node:
        x = _second(call)
        tree = self._fitting(call, algebra.derivative(f, x), types)
        if tree is None:
            raise _unfit(call)
        for place in algebra.jumps_in(f, x):
            self.asides.append(Aside("the jump at", place, "has no derivative and is left out"))
        return tree

    def _limit(self, call: Call, f: Node, types: dict[str, Type]) -> Node:
        place = call.arguments[2]
        if self._is_regular(f, _second(call), place):
            return put_in(f, {_second(call): place})
        found = algebra.limit(f, _second(call), _bare_zero(place))
        tree = None if found is None else self._fitting(call, found, types)
        if tree is None and self._grows(call, f):
            raise Failure(
                "not-finite", lambda show: f"`{short(call)}` grows beyond every bound", call.at,
                "check the expression: it has no finite limit there",
            )  # fmt: skip
        if tree is None:
            raise Failure(
                "no-closed-form", lambda show: f"no limit was found for `{short(call)}`", call.at,
                "check whether it exists, from both sides",
            )  # fmt: skip
        return tree

    def _is_regular(self, f: Node, x: str, place: Node) -> bool:
        """True where an expression made of continuous functions has a value: that is its limit."""
        if not all(_is_continuous(node) for node in walk(f)):
            return False
        try:
            at = self.compiler.compile_tree(place)(self.values, _NO_PARAMETERS)
            value = self.compiler.compile_tree(f, frozenset([x]))(self.values, {x: at})
        except (ArithmeticError, ValueError, KeyError):
            return False
        return math.isfinite(value)

    def _simplified(self, call: Call, f: Node, types: dict[str, Type]) -> Node:
        found = self._fitting(call, algebra.simplified(f), types) or call.arguments[0]
        if found != f:
            self.asides.append(Aside("the same as", call.arguments[0], "wherever that has a value"))
        return found

    def _grows(self, call: Call, f: Node) -> bool:
        """True where the expression is seen to grow ever faster towards the place of its limit."""
        x = _second(call)
        try:
            work = self.compiler.compile_tree(f, frozenset([x]))
            place = self.compiler.compile_tree(call.arguments[2])(self.values, _NO_PARAMETERS)
            steps = [max(abs(place), 1.0) * 10.0 ** -(3 * k) for k in (1, 2, 3)]
            near, nearer, nearest = (abs(work(self.values, {x: place + step})) for step in steps)
        except (ArithmeticError, ValueError, KeyError):
            return False
        return bool(nearer > GROWS * near and nearest > GROWS * nearer)

    def _sum(self, call: Call, f: Node) -> Node:
        """The terms written out, where they are few and their bounds are known."""
        try:
            bounds = [self.compiler.compile_tree(a)(self.values, _NO_PARAMETERS) for a in call.arguments[2:]]
        except (ArithmeticError, ValueError, KeyError):
            return call
        low, high = whole_bounds(call, *bounds)
        if high - low >= WRITTEN_OUT:
            return call
        name, body = _second(call), call.arguments[0]
        terms = [put_in(body, {name: _whole(k)}) for k in range(low, high + 1)]
        total = terms[0]
        for term in terms[1:]:
            total = Binary("+", total, term)
        return total

    # --- what holds for all ---

    def _above_zero(self, inner: Node) -> bool:
        """True where the inside of a bracket at x = 0 is known to be above 0."""
        try:
            above = bool(self.compiler.compile_tree(inner)(self.values, _NO_PARAMETERS) > 0)
        except (ArithmeticError, ValueError, KeyError):
            return False
        if above:
            self.asides.append(Aside("with", Relation((inner, Number("0")), (">",)), ""))
        return above

    def _fitting(self, call: Call, tree: Node, types: dict[str, Type]) -> Node | None:
        """The tree, where it has the dimension that the call has; the check is that of any typed formula."""
        checker = self.resolved.checker
        inner = dict(types)
        try:
            wanted, found = checker.type_of(call, inner), checker.type_of(tree, inner)
        except Mistake:
            return None
        finally:
            checker.warnings.clear()
        fits = wanted.unknown or found.unknown or found.zero or wanted.dimension == found.dimension
        return tree if fits else None


def _is_continuous(node: Node | Branch) -> bool:
    """True for an operation that is continuous wherever it has a value."""
    if isinstance(node, Call):
        function = FUNCTIONS.get(node.function)
        return function is not None and function.rule != "steps" and node.function != "atan2"
    return not isinstance(node, Cases | Branch) and not (isinstance(node, Bracket) and node.power == 0)


def _joined(left: Node, right: Node) -> Node:
    """`a + (b - c)` as `a + b - c`."""
    match right:
        case Binary(operator="+" | "-", left=first):
            return replace(right, left=_joined(left, first))
        case Negative(operand=operand):
            return Binary("-", left, operand)
    return Binary("+", left, right)


def _second(call: Call) -> str:
    name = call.arguments[1]
    assert isinstance(name, Name)
    return name.name


def _bare_zero(place: Node) -> Node:
    """`0 rad` as `0`: a place that is nothing in any unit."""
    is_zero = isinstance(place, Quantity) and all(part_value(part) == 0 for part in place.parts)
    return Number("0") if is_zero else place


def _whole(k: int) -> Node:
    return Number(str(k)) if k >= 0 else Negative(Number(str(-k)))


def _unfit(call: Call) -> Failure:
    return Failure(
        "no-closed-form",
        lambda show: f"what algebra makes of `{short(call)}` cannot be checked for its units",
        call.at, "write it out by hand",
    )  # fmt: skip
