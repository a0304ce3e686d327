"""Solving equations: linear systems, one equation in closed form or between bounds, several at once."""

from __future__ import annotations

import math
from dataclasses import dataclass
from fractions import Fraction
from itertools import product
from typing import Any

from loadpath import algebra
from loadpath.algebra import AlgebraFailure
from loadpath.evaluate.derive import Deriver
from loadpath.evaluate.failure import Failure, Show, short
from loadpath.evaluate.inline import inlined, rows_written_out
from loadpath.evaluate.numbers import Compiler, Values
from loadpath.evaluate.special import bad_interval
from loadpath.evaluate.symbolic import is_derived
from loadpath.evaluate.valueless import why_no_value
from loadpath.formula.binding import free_names
from loadpath.formula.mistake import Mistake
from loadpath.formula.statements import Equations, Sought
from loadpath.formula.tree import Binary, Bracket, Negative, Node, Number, Relation, rebuilt, span_of, walk
from loadpath.resolve import Entry, Resolved
from loadpath.trace.model import Operand, PutBack, Solved
from loadpath.units import Unit

MOST_SYMBOLS = 3
"""Unknowns of a linear system that is also solved in symbols."""
MOST_OPERATIONS = 60
"""Of all equations of such a system."""
SYMBOL_SECONDS = 5.0
"""For a solution in symbols beside one in numbers."""
CLOSE = 1e-9
"""A root is believed where the sides of its equation agree within this much of their terms."""
TOUCHES = 1e-13
"""A curve that turns within this much of zero, as a share of its terms, touches it."""
ONE_ROOT = 1e-5
"""Roots nearer than this, with nothing but rounding between them, are one."""
LISTED = 8
"""Roots that a message lists."""

_NO_PARAMETERS: dict[str, Any] = {}


@dataclass(frozen=True, slots=True)
class Solutions:
    """What one `solve for` found."""

    values: dict[str, float]
    """SI."""
    solved: Solved


def solve(
    together: Equations, entries: dict[str, Entry], resolved: Resolved, compiler: Compiler, values: Values
) -> Solutions:
    """The unknowns of one `solve for`. Raises `Failure` where there is not exactly one solution."""
    try:
        with algebra.time_limit(algebra.TIME_LIMIT):
            return _Solver(together, entries, resolved, compiler, values).solutions()
    except (ArithmeticError, ValueError):
        raise why_no_value(together, compiler, values) from None


@dataclass(frozen=True, slots=True)
class _Root:
    value: float
    symbols: Node | None = None


class _Solver:
    def __init__(
        self,
        together: Equations,
        entries: dict[str, Entry],
        resolved: Resolved,
        compiler: Compiler,
        values: Values,
    ) -> None:
        self.together, self.entries, self.resolved = together, entries, resolved
        self.compiler, self.values = compiler, values
        self.names = tuple(sought.name for sought in together.sought)
        self.derived = tuple(self._derived(equation) for equation in together.equations)
        self.equations = tuple(self._inlined(equation) for equation in self.derived)
        self.empty: tuple[Node, ...] = ()
        self.bounds = {sought.name: self._bounds(sought) for sought in together.sought}

    def solutions(self) -> Solutions:
        found = self._linear()
        if found is None:
            found = self._one() if len(self.names) == 1 else self._several()
        values, method, symbols, others = found
        back = tuple(self._put_back(i, values) for i in range(len(self.equations)))
        if not all(each.close for each in back):
            raise self._not_close(back)
        return Solutions(values, Solved(method, symbols, back, others, self.derived, self.empty))

    # --- the equations ---

    def _derived(self, equation: Relation) -> Relation:
        """The equation with its integrals and derivatives worked by algebra."""
        if not is_derived(equation):
            return equation
        found = Deriver(self.resolved, self.compiler, self.values).derive(equation).tree
        assert isinstance(found, Relation)
        return found

    def _inlined(self, equation: Relation) -> Relation:
        names, columns = frozenset(self.names), self.compiler.columns
        sides = tuple(
            rows_written_out(inlined(side, self.compiler.function), names, columns)
            for side in equation.operands
        )
        return Relation(sides, equation.signs, equation.span, equation.at)

    def _worth(self, node: Node, more: dict[str, float] | None = None) -> float:
        values = self.values if more is None else {**self.values, **more}
        return float(self.compiler.compile_tree(node)(values, _NO_PARAMETERS))

    def _bounds(self, sought: Sought) -> tuple[float, float] | None:
        if sought.low is None or sought.high is None:
            return None
        low, high = self._worth(sought.low), self._worth(sought.high)
        if not low < high:
            raise bad_interval(sought.low, sought.high, low, high)
        return low, high

    @property
    def place(self) -> Any:
        return self.together.span

    # --- linear systems ---

    def _linear(self) -> _Found | None:
        from loadpath.numeric.linear import linear_form
        from loadpath.numeric.linear import solve as solve_linear

        unknowns = frozenset(self.names)
        matrix, right = [], []
        for equation in self.equations:
            form = linear_form(_difference(equation), unknowns)
            if form is None:
                return None
            matrix.append([self._worth(form[name]) if name in form else 0.0 for name in self.names])
            right.append(-self._worth(form[""]) if "" in form else 0.0)
        solution = solve_linear(matrix, right)
        if solution.values is None or solution.state != "regular":
            raise self._singular(solution.state, solution.free, solution.condition)
        values = dict(zip(self.names, solution.values, strict=True))
        for name, value in values.items():
            self._refuse_outside(name, value)
        symbols, self.empty = self._in_symbols(values)
        one = len(self.names) == 1
        method = "as a linear equation" if one else f"as a linear system of {len(self.names)} equations"
        return values, method + ("" if symbols else ", in numbers"), symbols, ()

    def _in_symbols(self, values: dict[str, float]) -> tuple[dict[str, Node], tuple[Node, ...]]:
        """The solution of a small system in symbols, where it gives the same numbers and units; and the
        brackets that are 0 and left out of it."""
        operations = sum(isinstance(n, Binary) for e in self.equations for n in walk(e))
        if len(self.names) > MOST_SYMBOLS or operations > MOST_OPERATIONS:
            return {}, ()
        empty: dict[Node, None] = {}
        equations = tuple(self._without_empty(equation, empty) for equation in self.equations)
        try:
            found = algebra.solve_linear(equations, self.names, seconds=SYMBOL_SECONDS)
        except AlgebraFailure:
            return {}, ()
        if found is None or set(found) != set(self.names):
            return {}, ()
        same = all(self._gives(found[name], values[name]) and self._fits(name, found[name]) for name in found)
        return (dict(found), tuple(empty)) if same else ({}, ())

    def _without_empty(self, equation: Relation, empty: dict[Node, None]) -> Relation:
        """The equation with brackets that are 0 by their values as 0."""

        def change(node: Node) -> Node | None:
            if not isinstance(node, Bracket) or free_names(node) & set(self.names):
                return None
            try:
                is_empty = self._worth(node) == 0
            except (ArithmeticError, ValueError, KeyError, Failure):
                return None
            if not is_empty:
                return None
            empty[node] = None
            return Number("0")

        changed = rebuilt(equation, change)
        assert isinstance(changed, Relation)
        return changed

    def _gives(self, tree: Node, value: float) -> bool:
        try:
            return math.isclose(self._worth(tree), value, rel_tol=CLOSE, abs_tol=1e-300)
        except (ArithmeticError, ValueError, KeyError, Failure):
            return False

    def _fits(self, name: str, tree: Node) -> bool:
        checker = self.resolved.checker
        try:
            found = checker.type_of(tree)
        except Mistake:
            return False
        finally:
            checker.warnings.clear()
        return found.unknown or found.zero or found.dimension == self.entries[name].type.dimension

    def _refuse_outside(self, name: str, value: float) -> None:
        bounds = self.bounds[name]
        if bounds is None or bounds[0] <= value <= bounds[1]:
            return
        raise Failure(
            "root-outside-bounds",
            lambda show: f"the only solution, {name} = {self._shown(name, value)}, lies outside the bounds "
            f"{self._shown(name, bounds[0])} to {self._shown(name, bounds[1])}",
            self._sought(name).span, "check the equations, or the bounds",
        )  # fmt: skip

    def _singular(self, state: str, free: tuple[int, ...], condition: float) -> Failure:
        if state == "singular, no solution":
            message, slug = "the equations contradict each other: there is no solution", "no-solution"
            mend = "check the signs, and whether one equation says the same as another in other numbers"
        elif state == "singular, many solutions":
            names = ", ".join(f"`{self.names[i]}`" for i in free) or "the unknowns"
            message, slug = f"there are many solutions: the equations don't fix {names}", "many-solutions"
            mend = "one equation follows from the others; write one that says something new"
        else:
            message = f"the equations are nearly the same: {math.log10(condition):.0f} digits are lost"
            slug, mend = "singular-system", "write equations that are further apart, or eliminate by hand"
        return Failure(slug, lambda show: message, self.place, mend)

    # --- one equation ---

    def _one(self) -> _Found:
        from loadpath.numeric.polynomial import MOST_DEGREE
        from loadpath.numeric.roots import degree_in

        name, equation = self.names[0], self.equations[0]
        difference = _difference(equation)
        degree = degree_in(difference, frozenset([name]))
        if degree is not None and degree > MOST_DEGREE and self.bounds[name] is not None:
            return self._between(difference)
        if degree is not None and degree >= 1:
            roots, method = self._of_polynomial(difference, degree)
        elif degree == 0:
            raise self._no_solution(f"`{name}` does not stand in the equation")
        elif self.bounds[name] is not None:
            return self._between(difference)
        else:
            roots, method = self._closed_form()
        return self._chosen(name, roots, method)

    def _of_polynomial(self, difference: Node, degree: int) -> tuple[list[_Root], str]:
        from loadpath.numeric.roots import coefficients

        name = self.names[0]
        numbers = coefficients(difference, name, self._worth)
        if numbers is None:
            raise self._no_form(f"a polynomial of degree {degree} is solved between bounds only")
        if not any(numbers[1:]):
            raise self._no_solution(f"`{name}` drops out of the equation")
        real = self._real_roots(tuple(Fraction(c) for c in numbers))
        if degree == 2:
            return self._with_symbols(real), "as a quadratic equation"
        method = f"as a polynomial of degree {degree}, of which all real roots were looked at"
        return [_Root(value) for value in real], method

    def _real_roots(self, numbers: tuple[Fraction, ...]) -> list[float]:
        """The real roots; one that touches, which rounding may part or lose, counts once."""
        slope = tuple(i * c for i, c in enumerate(numbers))[1:]
        touching = [r for r in algebra.real_roots(slope) if self._is_root(r)] if any(slope[1:]) else []
        crossing = list(algebra.real_roots(numbers))
        apart = [r for r in crossing if not any(self._is_one(r, t) for t in touching)]
        return sorted({*apart, *touching})

    def _is_root(self, value: float) -> bool:
        """True where nothing but rounding is left: a curve that comes near to zero and turns has no root."""
        back = self._put_back(0, {self.names[0]: value})
        return abs(back.left - back.right) <= TOUCHES * back.size

    def _is_one(self, a: float, b: float) -> bool:
        """True for two roots between which nothing can be told from zero."""
        near = math.isclose(a, b, rel_tol=ONE_ROOT, abs_tol=1e-300)
        return near and all(self._is_root(a + (b - a) * share) for share in (0.25, 0.5, 0.75))

    def _with_symbols(self, real: list[float]) -> list[_Root]:
        """Roots with their formula, where that gives the same number: it may cancel."""
        try:
            trees = algebra.roots(self.equations[0], self.names[0]) or ()
        except AlgebraFailure:
            trees = ()
        found = [root for root in map(self._root, trees) if root is not None]

        def formula(value: float) -> Node | None:
            same = (r.symbols for r in found if math.isclose(r.value, value, rel_tol=CLOSE, abs_tol=1e-300))
            return next(same, None)

        return [_Root(value, formula(value)) for value in real]

    def _closed_form(self) -> tuple[list[_Root], str]:
        name, equation = self.names[0], self.together.equations[0]
        mend = f"give bounds, so that it is solved numerically: `solve for {name} between a and b`"
        try:
            trees = algebra.roots(self.equations[0], name)
        except AlgebraFailure as trouble:
            message = f"{trouble.message}; `{short(equation)}`"
            raise Failure(trouble.slug, lambda show: message, self.place, mend) from None
        if not trees:
            raise self._no_form(f"`{short(equation)}` has no solution in closed form for `{name}`")
        found = [r for r in map(self._root, trees) if r is not None]
        return found, "in closed form"

    def _no_form(self, message: str) -> Failure:
        name = self.names[0]
        mend = f"give bounds, so that it is solved numerically: `solve for {name} between a and b`"
        return Failure("no-closed-form", lambda show: message, self.place, mend)

    def _root(self, tree: Node) -> _Root | None:
        """A candidate as a number; None where it has no real value or other units."""
        try:
            value = self._worth(tree)
        except (ArithmeticError, ValueError, KeyError, Failure):
            return None
        if not math.isfinite(value) or not self._fits(self.names[0], tree):
            return None
        return _Root(value, tree)

    def _between(self, difference: Node) -> _Found:
        from loadpath.numeric.pieces import bracket_places
        from loadpath.numeric.roots import roots_between
        from loadpath.numeric.trouble import NotDefined

        name = self.names[0]
        bounds = self.bounds[name]
        assert bounds is not None
        work = self.compiler.compile_tree(difference)
        places = bracket_places(difference, name, self._worth)
        low, high = (self._shown(name, bound) for bound in bounds)
        try:
            found = roots_between(
                lambda x: float(work({**self.values, name: x}, _NO_PARAMETERS)), *bounds, places
            )
        except NotDefined:
            message = f"the equation has no value at any `{name}` looked at between {low} and {high}"
            nowhere = Failure(
                "outside-domain", lambda show: message, self.place, "check the equation, or the bounds"
            )
            raise why_no_value(self.together, self.compiler, self.values, nowhere) from None
        if found.over:
            a, b = (self._shown(name, end) for end in found.over[0])
            raise Failure(
                "many-solutions", lambda show: f"every `{name}` from {a} to {b} solves the equation",
                self.place, "write an equation that fixes one value, or narrow the bounds",
            )  # fmt: skip
        if not found.found:
            message = f"no value of `{name}` that solves the equation was found between {low} and {high}"
            raise self._no_solution(message)
        return self._chosen(name, [_Root(value) for value in found.found], f"by {found.method}")

    def _chosen(self, name: str, roots: list[_Root], method: str) -> _Found:
        """The one root that solves the equation and lies within the bounds."""
        good = _unlike([root for root in roots if self._put_back(0, {name: root.value}).close])
        bounds = self.bounds[name]
        inside = [r for r in good if bounds is None or bounds[0] <= r.value <= bounds[1]]
        if not good:
            raise self._no_solution("it has no real root")
        if not inside:
            assert bounds is not None
            raise self._outside(name, good, bounds)
        if len(inside) > 1:
            raise self._several_roots(name, inside)
        root = inside[0]
        entry = self.entries[name]
        others = tuple(
            (name, Operand(r.value, entry.unit, self.resolved.sheet.front.digits), "outside the bounds")
            for r in good
            if r is not root
        )
        return {name: root.value}, method, {name: root.symbols} if root.symbols else {}, others

    # --- several equations that are not linear ---

    def _several(self) -> _Found:
        bounds = [self.bounds[name] for name in self.names]
        if len(self.names) > 4 or any(each is None for each in bounds):
            raise Failure(
                "no-closed-form",
                lambda show: "several equations that are not linear in the unknowns are solved numerically, "
                "between bounds, for up to 4 unknowns",
                self.place, "give each unknown bounds, or eliminate by hand until one equation is left",
            )  # fmt: skip
        found = self._search([each for each in bounds if each is not None])
        if not found:
            raise self._no_solution("no solution was found between the bounds")
        if len(found) > 1:
            listed = "; ".join(
                ", ".join(f"{n} = {self._shown(n, v)}" for n, v in zip(self.names, each, strict=True))
                for each in found[:LISTED]
            )
            raise Failure(
                "several-roots", lambda show: f"there are several solutions between the bounds: {listed}",
                self.place, "narrow the bounds until one is left",
            )  # fmt: skip
        method = (
            f"numeric, from {_starts(len(self.names)) ** len(self.names)} starting points between the bounds"
        )
        method += "; that there is no other solution is not shown"
        return dict(zip(self.names, found[0], strict=True)), method, {}, ()

    def _search(self, bounds: list[tuple[float, float]]) -> list[tuple[float, ...]]:
        from scipy.optimize import least_squares

        works = [tuple(map(self.compiler.compile_tree, e.operands)) for e in self.equations]
        widths = [high - low for low, high in bounds]

        def residuals(t: Any) -> list[float]:
            """Each as a share of its sides, so that no equation drowns another."""
            shares = zip(self.names, bounds, widths, t, strict=True)
            values = {**self.values, **{n: low + float(s) * w for n, (low, _), w, s in shares}}
            try:
                sides = [[float(work(values, _NO_PARAMETERS)) for work in pair] for pair in works]
            except (ArithmeticError, ValueError):
                return [2.0] * len(works)
            return [(a - b) / ((abs(a) + abs(b)) or 1.0) for a, b in sides]

        count = _starts(len(bounds))
        found: list[tuple[float, ...]] = []
        for start in product([(i + 0.5) / count for i in range(count)], repeat=len(bounds)):
            fit = least_squares(
                residuals, start,
                bounds=(0, 1), xtol=1e-15, ftol=1e-15, gtol=1e-15,
            )  # fmt: skip
            here = tuple(low + float(s) * w for (low, _), w, s in zip(bounds, widths, fit.x, strict=True))
            values = dict(zip(self.names, here, strict=True))
            if all(self._put_back(i, values).close for i in range(len(self.equations))) and not any(
                all(abs(a - b) <= 1e-6 * w for a, b, w in zip(here, each, widths, strict=True))
                for each in found
            ):
                found.append(here)
        return sorted(found)

    # --- putting back ---

    def _put_back(self, index: int, values: dict[str, float]) -> PutBack:
        """One equation with the solution put back; close where its sides agree to rounding of their terms."""
        typed, equation = self.together.equations[index], self.equations[index]
        units = self.entries[self.names[0]].side_units
        unit: Unit = units[index] if index < len(units) else self.entries[self.names[0]].unit
        try:
            left, right = (self._worth(side, values) for side in equation.operands)
        except (ArithmeticError, ValueError, Failure):
            return PutBack(typed, math.nan, math.nan, unit, math.nan, False)
        size = max(self._size(side, values) for side in equation.operands)
        return PutBack(typed, left, right, unit, size, abs(left - right) <= CLOSE * size)

    def _size(self, node: Node, values: dict[str, float]) -> float:
        """How large a value is before its terms cancel: what its rounding goes with."""
        match node:
            case Binary(operator="+" | "-", left=left, right=right):
                return self._size(left, values) + self._size(right, values)
            case Binary(operator="*", left=left, right=right):
                return self._size(left, values) * self._size(right, values)
            case Binary(operator="/", left=left, right=right):
                return self._size(left, values) / abs(self._worth(right, values))
            case Negative(operand=operand):
                return self._size(operand, values)
            case Binary(operator="^", left=base, right=Number(text=typed)) if typed.isdigit():
                return self._size(base, values) ** int(typed)
        return abs(self._worth(node, values))

    # --- what is said ---

    def _sought(self, name: str) -> Sought:
        return next(sought for sought in self.together.sought if sought.name == name)

    def _shown(self, name: str, value: float) -> str:
        from loadpath.trace.digits import exact_digits
        from loadpath.units.printing import plain

        unit = self.entries[name].unit
        number = unit.from_si(value)
        return f"{plain(number, min(exact_digits(number, 6), 6))} {unit.text}".rstrip()

    def _no_solution(self, why: str) -> Failure:
        return Failure(
            "no-solution", lambda show: why, self.place, "check the equation, its signs and the bounds"
        )

    def _outside(self, name: str, roots: list[_Root], bounds: tuple[float, float]) -> Failure:
        listed = ", ".join(self._shown(name, root.value) for root in roots[:LISTED])
        low, high = (self._shown(name, bound) for bound in bounds)
        message = f"every root lies outside the bounds {low} to {high}: {name} = {listed}"
        return Failure("root-outside-bounds", lambda show: message, self._sought(name).span,
                       "check the equation, or the bounds")  # fmt: skip

    def _several_roots(self, name: str, roots: list[_Root]) -> Failure:
        listed = ", ".join(self._shown(name, root.value) for root in roots[:LISTED])
        more = f" and {len(roots) - LISTED} more" if len(roots) > LISTED else ""
        where = "between the bounds" if self.bounds[name] else "of the equation"
        message = f"{len(roots)} roots were found {where}: {name} = {listed}{more}"
        mend = f"say which by bounds: `solve for {name} between ... and ...`"
        return Failure("several-roots", lambda show: message, self._sought(name).span, mend)

    def _not_close(self, back: tuple[PutBack, ...]) -> Failure:
        wrong = next(each for each in back if not each.close)

        def tell(show: Show) -> str:
            return f"the solution put back does not satisfy `{short(wrong.equation)}` to rounding"

        return Failure(
            "singular-system", tell, span_of(wrong.equation), "write the equations in another form"
        )


_Found = tuple[dict[str, float], str, dict[str, Node], tuple[tuple[str, Operand, str], ...]]
"""Values, method, symbols, other roots."""


def _difference(equation: Relation) -> Node:
    """Left side less right side."""
    left, right = equation.operands
    return Binary("-", left, right)


def _unlike(roots: list[_Root]) -> list[_Root]:
    """Each root once, rising."""
    kept: list[_Root] = []
    for root in sorted(roots, key=lambda r: r.value):
        if not kept or not math.isclose(root.value, kept[-1].value, rel_tol=1e-9, abs_tol=1e-300):
            kept.append(root)
    return kept


def _starts(unknowns: int) -> int:
    """Starting points along each axis."""
    return {2: 7, 3: 5}.get(unknowns, 4)
