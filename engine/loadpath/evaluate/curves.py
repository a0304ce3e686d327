"""What a `plot` draws and a `tabulate` lists: expressions over a range, with jumps, breaks and peaks."""

from __future__ import annotations

from typing import Any

from loadpath.evaluate.explain import run
from loadpath.evaluate.numbers import Compiler, Values
from loadpath.evaluate.special import bad_interval, expression_over
from loadpath.formula.tree import Node
from loadpath.trace.model import Curve, Curves, Spot
from loadpath.units import Unit

_NO_PARAMETERS: dict[str, Any] = {}


def draw(
    compiler: Compiler,
    values: Values,
    curves: tuple[Node, ...],
    variable: str,
    low: Node,
    high: Node,
    units: tuple[Unit, ...],
    steps: int,
) -> Curves:
    """The curves of a `plot` (steps 0), or the rows of a `tabulate`. Raises `Failure`.

    `units`: of what runs over the range, then of each curve.
    """
    a, b = (float(run(compiler.compile_tree(n), n, values, _NO_PARAMETERS, compiler)) for n in (low, high))
    if not a < b:
        raise bad_interval(low, high, a, b)
    drawn = tuple(
        _curve(compiler, values, tree, variable, a, b, unit, steps)
        for tree, unit in zip(curves, units[1:], strict=True)
    )
    return Curves(variable, units[0], a, b, drawn)


def _curve(
    compiler: Compiler, values: Values, tree: Node, x: str, a: float, b: float, unit: Unit, steps: int
) -> Curve:
    from loadpath.numeric import NotDefined, bracket_places, extremes, sample

    of = expression_over(compiler, tree, x, a, b, values, _NO_PARAMETERS)
    if steps:
        stations = [a + (b - a) * i / steps for i in range(steps)] + [b]
        points = tuple((at, _value(compiler, of.node, x, at, values)) for at in stations)
        return Curve(tree, unit, points, None, None, "")
    places = bracket_places(of.node, x, of.value)
    try:
        found = extremes(of.f, of.f_left, of.node, x, a, b, of.value)
    except NotDefined:
        points = sample(of.f, of.f_left, a, b, places, ())
        return Curve(tree, unit, points, None, None, "")
    points = sample(of.f, of.f_left, a, b, places, (found.largest.x, found.smallest.x))
    largest, smallest = Spot(found.largest.x, found.largest.y), Spot(found.smallest.x, found.smallest.y)
    return Curve(tree, unit, points, largest, smallest, found.method)


def _value(compiler: Compiler, node: Node, x: str, at: float, values: Values) -> float:
    work = compiler.compile_tree(node, frozenset([x]))
    return float(run(work, node, values, {x: at}, compiler))
