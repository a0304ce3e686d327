"""Figures drawn from the numbers of a sheet."""

from __future__ import annotations

from collections import Counter
from typing import TYPE_CHECKING

from loadpath.document.model import Head, Line, PlotBlock
from loadpath.document.tables import range_line
from loadpath.figures import Curve as Drawn
from loadpath.figures import Peak, Picture
from loadpath.formula.canonical import text
from loadpath.formula.names import plain_symbol
from loadpath.formula.statements import Plot
from loadpath.formula.tree import Call, Name, Node, Relation, Shown
from loadpath.trace import Curve, Curves, Spot, Step
from loadpath.trace.digits import exact_digits
from loadpath.units import Unit
from loadpath.units.printing import plain, typeset, unit_symbol

if TYPE_CHECKING:
    from loadpath.document.steps import StepWriter

NOTHING = 1e-9
"""A peak below this share of the curve's size is zero, and is not marked in the picture."""


def plot_block(writer: StepWriter, step: Step, statement: Plot, head: Head, number: int) -> PlotBlock:
    """A `plot` as a figure."""
    caption, drawn = range_line(statement), step.curves
    if drawn is None:
        return PlotBlock(head, number, caption, None)
    digits = writer.trace.sheet.front.digits
    lines = tuple(line for curve in drawn.curves for line in _lines(drawn, curve, digits))
    return PlotBlock(head, number, caption, _picture(drawn, digits), lines)


def _picture(drawn: Curves, digits: int) -> Picture:
    names = _names(drawn)
    curves = tuple(
        _drawn(drawn, curve, digits, name) for curve, name in zip(drawn.curves, names, strict=True)
    )
    alt = "" if all(curve.largest for curve in drawn.curves) else _alt(drawn, curves)
    return Picture(plain_symbol(drawn.variable), _symbol(drawn.unit), curves, alt)


def _alt(drawn: Curves, curves: tuple[Drawn, ...]) -> str:
    """What a plot shows whose extremes were not all sought."""
    a, b = (_joined(_number(drawn.unit, x, 4), drawn.unit) for x in (drawn.low, drawn.high))
    names = ", ".join(f"{c.name} in {c.unit}" if c.unit else c.name for c in curves)
    return f"Plot of {names} against {plain_symbol(drawn.variable)}, from {a} to {b}; with gaps or poles."


def _drawn(drawn: Curves, curve: Curve, digits: int, named: tuple[str, str]) -> Drawn:
    points = tuple((drawn.unit.from_si(x), curve.unit.from_si(y)) for x, y in curve.points)
    name, symbol = named
    return Drawn(name, symbol, _symbol(curve.unit), points, _peaks(drawn, curve, digits))


def _names(drawn: Curves) -> list[tuple[str, str]]:
    """The words beside each curve, and the name they begin with: `M(x)` for `M(x, w_1, P_1)`, whose caption
    says it in full, where no other curve is the same function."""
    functions = Counter(c.tree.function for c in drawn.curves if isinstance(c.tree, Call))
    x = Name(drawn.variable)
    trees = (
        Call(c.tree.function, (x,))
        if isinstance(c.tree, Call) and functions[c.tree.function] == 1 and x in c.tree.arguments
        else c.tree
        for c in drawn.curves
    )
    return [_name(tree) for tree in trees]


def _name(tree: Node) -> tuple[str, str]:
    if isinstance(tree, Call) and all(isinstance(a, Name) for a in tree.arguments):
        arguments = ", ".join(plain_symbol(a.name) for a in tree.arguments if isinstance(a, Name))
        return f"{plain_symbol(tree.function)}({arguments})", tree.function
    if isinstance(tree, Name):
        return plain_symbol(tree.name), tree.name
    return text(tree), ""


def _symbol(unit: Unit) -> str:
    return unit_symbol(unit.text) if unit.text else ""


def _peaks(drawn: Curves, curve: Curve, digits: int) -> tuple[Peak, ...]:
    if curve.largest is None or curve.smallest is None:
        return ()
    size = max(abs(curve.largest.y), abs(curve.smallest.y))
    spots = [s for s in (curve.largest, curve.smallest) if abs(s.y) > NOTHING * size]
    if len(spots) == 2 and spots[0] == spots[1]:
        spots = spots[:1]
    return tuple(
        Peak(drawn.unit.from_si(s.x), curve.unit.from_si(s.y), _peak_text(drawn, curve, s, digits))
        for s in spots
    )


def _peak_text(drawn: Curves, curve: Curve, spot: Spot, digits: int) -> str:
    y, x = _number(curve.unit, spot.y, digits), _number(drawn.unit, spot.x, digits)
    return f"{_joined(y, curve.unit)} at {_joined(x, drawn.unit)}"


def _joined(number: str, unit: Unit) -> str:
    symbol = _symbol(unit)
    return f"{typeset(number)} {symbol}" if symbol else typeset(number)


def _number(unit: Unit, si: float, digits: int) -> str:
    value = unit.from_si(si)
    return plain(value, min(exact_digits(value, digits), digits))


def _lines(drawn: Curves, curve: Curve, digits: int) -> list[Line]:
    """Largest and smallest with their places, and how they were found."""
    if curve.largest is None or curve.smallest is None:
        return [Line((curve.tree, ": has no value at some places; its extremes were not sought"))]
    parts: list[str | Node] = [curve.tree, ": "]
    for word, spot in (("largest ", curve.largest), (", smallest ", curve.smallest)):
        place = Shown(_number(drawn.unit, spot.x, digits), drawn.unit.text)
        at = Relation((Name(drawn.variable), place), ("=",))
        parts += [word, Shown(_number(curve.unit, spot.y, digits), curve.unit.text), " at ", at]
    return [Line((*parts, f" ({curve.method})"))]
