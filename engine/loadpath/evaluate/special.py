"""Numbers of the functions of whole expressions and of columns: `largest`, `integral`, `sum`, `interp`."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass
from itertools import pairwise
from time import monotonic
from typing import TYPE_CHECKING, Any

from loadpath.evaluate.failure import Failure, Show, short
from loadpath.evaluate.inline import inlined, rows_written_out
from loadpath.evaluate.limits import STEP_SECONDS
from loadpath.evaluate.numbers import ROW, Compiler, Values, Work
from loadpath.formula.binding import free_names, own_name
from loadpath.formula.tree import NOWHERE, Call, Name, Node, span_of
from loadpath.resolve.columns import is_brought_back

if TYPE_CHECKING:
    from loadpath.numeric import Extremes, NoConvergence, Quadrature

MOST_TERMS = 100_000
"""Of a `sum(f, k, m, n)`."""
ROUNDING = 1e-15
"""A sum below this share of its terms is nothing but their rounding."""
WHOLE = 1e-9
"""A bound within this much of a whole number is that number."""


def compile_special(compiler: Compiler, node: Call, parameters: frozenset[str]) -> Work:
    """A closure that gives the value of a call."""
    if is_brought_back(node):
        return _brought_back(compiler, node, parameters)
    match node.function:
        case "interp" | "lookup":
            return _look_up(compiler, node, parameters)
        case "sum":
            return _sum(compiler, node, parameters)
        case "simplified":
            return compiler.compile_tree(node.arguments[0], parameters)
        case "integral" if len(node.arguments) == 4:
            return lambda e, p: integrate(compiler, node, e, p).value
        case "largest" | "smallest" | "where_largest" | "where_smallest":
            return lambda e, p: _picked(node.function, look_over(compiler, node, e, p))
    return _unworked(node)


def _unworked(node: Call) -> Work:
    """`integral(f, x)`, `derivative`, `limit_of`: algebra alone can work these, before any number."""

    def work(e: Values, p: Values) -> Any:
        raise Failure(
            "no-closed-form", lambda show: f"`{short(node)}` was not worked by algebra", node.at,
            "write it in the body of a function, or give bounds",
        )  # fmt: skip

    return work


# --- columns ------------------------------------------------------------------------------------------------


def _rows_of(compiler: Compiler, node: Node) -> int:
    return next((compiler.columns[name].count for name in compiler.columns_in(node)), 0)


def cells(
    compiler: Compiler, column: Node, parameters: frozenset[str]
) -> Callable[[Values, Values], list[float]]:
    """A closure that gives the value of a column expression in each of its rows."""
    count, work = _rows_of(compiler, column), compiler.compile_tree(column, parameters | {ROW})
    if parameters - {ROW}:
        return lambda e, p: [work(e, {**p, ROW: i}) for i in range(count)]

    def once(e: Values, p: Values) -> list[float]:
        if column not in compiler.once:
            compiler.once[column] = [work(e, {ROW: i}) for i in range(count)]
        return compiler.once[column]

    return once


def total(values: list[float]) -> float:
    """The sum; 0 where it is below the rounding of its terms."""
    found = math.fsum(values)
    return 0.0 if abs(found) <= ROUNDING * math.fsum(map(abs, values)) else found


def _brought_back(compiler: Compiler, node: Call, parameters: frozenset[str]) -> Work:
    each = cells(compiler, node.arguments[0], parameters)
    together: dict[str, Callable[[list[float]], float]] = {
        "sum": total, "min": min, "max": max, "count": lambda values: float(len(values)),
    }  # fmt: skip
    bring = together[node.function]
    return lambda e, p: bring(each(e, p))


# --- looking up ---------------------------------------------------------------------------------------------


@dataclass(frozen=True, slots=True)
class Found:
    """Which rows a look-up read."""

    value: float
    rows: tuple[int, ...]
    """One, or the two between which it lies."""
    across: tuple[int, ...] = ()
    """Of a two-way table."""
    xs: tuple[float, ...] = ()
    ys: tuple[float, ...] = ()


def _look_up(compiler: Compiler, node: Call, parameters: frozenset[str]) -> Work:
    finder = look_up(compiler, node, parameters)
    return lambda e, p: finder(e, p).value


def look_up(compiler: Compiler, node: Call, parameters: frozenset[str]) -> Callable[[Values, Values], Found]:
    """A closure that looks up, and says which rows it read."""
    x, xs, ys = node.arguments
    if isinstance(ys, Name) and ys.name in compiler.two_way:
        return _two_way(compiler, node, ys.name, parameters)
    at = compiler.compile_tree(x, parameters)
    first, second = cells(compiler, xs, parameters), cells(compiler, ys, parameters)

    def find(e: Values, p: Values) -> Found:
        value, a, b = at(e, p), first(e, p), second(e, p)
        if node.function == "lookup":
            row = _row_not_above(node, value, a)
            return Found(b[row], (row,), (), tuple(a), tuple(b))
        rows, share = _between(node, value, a, x)
        return Found(_mixed(b, rows, share), rows, (), tuple(a), tuple(b))

    return find


def _mixed(values: list[float], rows: tuple[int, ...], share: float) -> float:
    if len(rows) == 1:
        return values[rows[0]]
    a, b = values[rows[0]], values[rows[1]]
    return a + share * (b - a)


def _row_not_above(node: Call, x: float, xs: list[float]) -> int:
    twice = next((each for i, each in enumerate(xs) if each in xs[:i]), None)
    if twice is not None:
        raise Failure(
            "not-rising",
            lambda show: f"`{short(node.arguments[1])}` holds {show(node.arguments[0], twice)} twice",
            span_of(node.arguments[1]), "keep one row for each value",
        )  # fmt: skip
    below = [i for i, each in enumerate(xs) if each <= x + abs(x) * 1e-12]
    if not below:
        raise _outside(node, node.arguments[0], x, min(xs), max(xs), "below the first row")
    return max(below, key=lambda i: xs[i])


DOWN, ACROSS = "the first column", "the header"


def _between(
    node: Call, x: float, xs: list[float], asked: Node, along: str = ""
) -> tuple[tuple[int, ...], float]:
    """The rows that x lies on or between, and how far from the first to the second."""
    _refuse_unordered(node, xs, along)
    order = range(len(xs)) if xs[0] <= xs[-1] else range(len(xs) - 1, -1, -1)
    rows = list(order)
    for row in rows:
        if abs(x - xs[row]) <= 1e-12 * max(abs(x), abs(xs[row])):
            return (row,), 0.0
    if not xs[rows[0]] < x < xs[rows[-1]]:
        raise _outside(node, asked, x, xs[rows[0]], xs[rows[-1]], "outside the rows")
    second = next(i for i, row in enumerate(rows) if xs[row] > x)
    a, b = rows[second - 1], rows[second]
    return (a, b), (x - xs[a]) / (xs[b] - xs[a])


def _refuse_unordered(node: Call, xs: list[float], along: str = "") -> None:
    steps = [b - a for a, b in pairwise(xs)]
    if all(step > 0 for step in steps) or all(step < 0 for step in steps):
        return
    asked = node.arguments[1 if along == ACROSS else 0]
    up = bool(steps) and sum(step > 0 for step in steps) >= len(steps) / 2
    row = next((i for i, step in enumerate(steps) if (step <= 0) == up), 0)
    raise Failure(
        "not-rising",
        lambda show: f"{along or f'`{short(node.arguments[1])}`'} neither rises nor falls strictly: "
        f"{show(asked, xs[row + 1])} stands behind {show(asked, xs[row])}",
        span_of(node.arguments[2 if along else 1]),
        "sort the table, with one row (or one header cell) for each value",
    )  # fmt: skip


def _outside(node: Call, asked: Node, x: float, low: float, high: float, where: str) -> Failure:
    def tell(show: Show) -> str:
        span = f"{show(asked, low)} to {show(asked, high)}"
        return f"`{short(asked)}` is {show(asked, x)}, {where}: the table goes from {span}"

    return Failure(
        "outside-table", tell, span_of(asked), "a table is never read beyond its rows: add the rows"
    )


def _two_way(
    compiler: Compiler, node: Call, name: str, parameters: frozenset[str]
) -> Callable[[Values, Values], Found]:
    table = compiler.two_way[name]
    x, y = (compiler.compile_tree(a, parameters) for a in node.arguments[:2])
    down = [compiler.compile_tree(each) for each in table.down]
    across = [compiler.compile_tree(each) for each in table.across]
    body = [[compiler.compile_tree(each) for each in row] for row in table.cells]

    def find(e: Values, p: Values) -> Found:
        rows, s = _between(node, x(e, p), [each(e, {}) for each in down], node.arguments[0], DOWN)
        columns, t = _between(node, y(e, p), [each(e, {}) for each in across], node.arguments[1], ACROSS)
        lines = [_mixed([body[i][j](e, {}) for j in range(len(across))], columns, t) for i in rows]
        value = lines[0] if len(lines) == 1 else lines[0] + s * (lines[1] - lines[0])
        return Found(float(value), rows, columns)

    return find


# --- expressions over a range -------------------------------------------------------------------------------


@dataclass(frozen=True, slots=True)
class Over:
    """An expression of one name, ready for a numerical method."""

    node: Node
    """With all bodies in place."""
    x: str
    low: float
    high: float
    f: Callable[[float], float]
    f_left: Callable[[float], float]
    value: Callable[[Node], float]


def check_time(compiler: Compiler, node: Node) -> None:
    """Raises `Failure` where the step at hand has taken too long."""
    if monotonic() > compiler.deadline:
        raise Failure(
            "algebra-time-out",
            lambda show: f"`{short(node)}` was stopped: the step took more than {STEP_SECONDS:.0f} s",
            getattr(node, "at", span_of(node)),
            "work it once, give it a name, and use that; or take fewer places",
        )  # fmt: skip


def over(compiler: Compiler, node: Call, e: Values, p: Values) -> Over:
    """The expression of a call such as `largest(f, x, a, b)`. Raises `Failure` for bounds that are none."""
    check_time(compiler, node)
    own = own_name(node)
    assert own is not None
    low, high = (compiler.compile_tree(a, frozenset(p))(e, p) for a in node.arguments[2:])
    if not low < high and node.function != "integral":
        raise bad_interval(node.arguments[2], node.arguments[3], low, high)
    return expression_over(compiler, node.arguments[0], own.name, low, high, e, p)


def expression_over(
    compiler: Compiler, body: Node, x: str, low: float, high: float, e: Values, p: Values
) -> Over:
    """An expression of one name over a range, ready for a numerical method."""
    whole = rows_written_out(inlined(body, compiler.function), frozenset([x]), compiler.columns)
    names = frozenset(p) | {x}
    work = compiler.compile_tree(whole, names)

    def value(part: Node) -> float:
        return float(compiler.compile_tree(part, frozenset(p))(e, p))

    def f_left(at: float) -> float:
        from loadpath.numeric import left_of

        left = compiler.compile_tree(left_of(whole, x, at, value), names)
        return float(left(e, {**p, x: at}))

    return Over(whole, x, low, high, lambda at: float(work(e, {**p, x: at})), f_left, value)


def bad_interval(a: Node, b: Node, low: float, high: float) -> Failure:
    """Bounds the wrong way round, or equal."""
    how = "are equal" if low == high else "are the wrong way round"

    def tell(show: Show) -> str:
        return f"the bounds {how}: {_said(show, a, low)} and {_said(show, b, high)}"

    known = [span for span in (span_of(a), span_of(b)) if span != NOWHERE]
    place = known[0].join(known[-1]) if known else NOWHERE
    return Failure("bad-interval", tell, place, "the first bound is the smaller one")


def _said(show: Show, node: Node, value: float) -> str:
    return f"`{short(node)}` is {show(node, value)}" if free_names(node) else f"`{short(node)}`"


def look_over(compiler: Compiler, node: Call, e: Values, p: Values) -> Extremes:
    """What `largest` and its likes look at. Raises `Failure`."""
    from loadpath.numeric import NotDefined, extremes

    of = over(compiler, node, e, p)
    try:
        return extremes(of.f, of.f_left, of.node, of.x, of.low, of.high, of.value)
    except NotDefined as trouble:
        raise _not_defined(node, trouble.x, trouble.what) from None


def _not_defined(node: Call, x: float, what: str) -> Failure:
    def tell(show: Show) -> str:
        own = own_name(node)
        name = own.name if own else "x"
        return f"`{short(node.arguments[0])}` {what} at {name} = {show(node.arguments[3], x)}"

    return Failure("outside-domain", tell, node.at, "leave the place out of the range")


def _picked(function: str, found: Extremes) -> float:
    spot = found.largest if function.endswith("largest") else found.smallest
    return spot.x if function.startswith("where_") else spot.y


def integrate(compiler: Compiler, node: Call, e: Values, p: Values) -> Quadrature:
    """A definite integral in numbers. Raises `Failure`."""
    from loadpath.numeric import NoConvergence, NotDefined, Quadrature, bracket_places, quadrature

    of = over(compiler, node, e, p)
    if of.low == of.high:
        return Quadrature(0.0, 0.0, "equal bounds")
    sign, low, high = (1.0, of.low, of.high) if of.low < of.high else (-1.0, of.high, of.low)
    try:
        found = quadrature(of.f, low, high, bracket_places(of.node, of.x, of.value))
    except NotDefined as trouble:
        raise _not_defined(node, trouble.x, trouble.what) from None
    except NoConvergence as trouble:
        raise _no_convergence(node, trouble) from None
    return Quadrature(sign * found.value, found.error, found.method)


def _no_convergence(node: Call, trouble: NoConvergence) -> Failure:
    def tell(show: Show) -> str:
        a, b = (show(node.arguments[3], at) for at in (trouble.low, trouble.high))
        return f"`{short(node)}` has no closed form, and in numbers {trouble.what} between {a} and {b}"

    return Failure("not-finite", tell, node.at, "check whether the integral exists; leave out the place")


# --- sums ---------------------------------------------------------------------------------------------------


def _sum(compiler: Compiler, node: Call, parameters: frozenset[str]) -> Work:
    own = own_name(node)
    assert own is not None
    name = own.name
    work = compiler.compile_tree(node.arguments[0], parameters | {name})
    bounds = [compiler.compile_tree(a, parameters) for a in node.arguments[2:]]

    def added(e: Values, p: Values) -> float:
        check_time(compiler, node)
        low, high = whole_bounds(node, *(bound(e, p) for bound in bounds))
        return total([work(e, {**p, name: float(k)}) for k in range(low, high + 1)])

    return added


def whole_bounds(node: Call, low: float, high: float) -> tuple[int, int]:
    """The bounds of a sum as whole numbers. Raises `Failure`."""
    for argument, bound in zip(node.arguments[2:], (low, high), strict=True):
        if abs(bound - round(bound)) > WHOLE * max(1.0, abs(bound)):
            raise Failure(
                "bad-interval",
                lambda show, a=argument, b=bound: f"`sum` runs over whole numbers: {_said(show, a, b)}",  # type: ignore[misc]
                span_of(argument), "give whole bounds: `sum(f, k, 0, 5)`",
            )  # fmt: skip
    first, last = round(low), round(high)
    if last < first:
        raise bad_interval(node.arguments[2], node.arguments[3], low, high)
    if last - first >= MOST_TERMS:
        raise Failure(
            "over-limit", lambda show: f"a sum of more than {MOST_TERMS} terms", node.at,
            "stop the sum earlier",
        )  # fmt: skip
    return first, last
