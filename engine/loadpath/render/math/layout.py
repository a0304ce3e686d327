"""From a formula tree to boxes: which brackets, which sign for a product, what stands above what.

After ISO 80000-1 and -2 (from memory): sloping quantity symbols, upright numbers, units and function names,
`×` between numbers, a half-high dot between symbols. Fractions within fractions stop at two.
"""

from __future__ import annotations

import re
from dataclasses import dataclass, replace
from functools import lru_cache
from typing import Literal

from loadpath.formula.canonical import POWER, PRODUCT, SIGN, SUM, is_measured, level, needs_brackets
from loadpath.formula.names import symbol
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
    walk,
)
from loadpath.functions import NAMES
from loadpath.render.math.boxes import (
    Amount,
    Box,
    Fence,
    Figure,
    Fraction,
    Function,
    Operator,
    Power,
    Ranged,
    Root,
    Row,
    Table,
    Variable,
    Words,
    bracketed,
    row,
)
from loadpath.units.printing import MINUS

MOST_FRACTIONS = 2
"""Fractions one within the other; what lies deeper is set on the line."""

RELATIONS = {"<=": "≤", ">=": "≥", "<": "<", ">": ">", "=": "=", "≠": "≠"}
_FUNCTIONS = {"asin": ("arcsin", ""), "acos": ("arccos", ""), "atan": ("arctan", ""), "log10": ("log", "10")}
_WITH_SIGNS: dict[str, tuple[int, ...]] = {
    "integral": (2, 4), "derivative": (2,), "limit_of": (3,), "sum": (1, 4),
    "largest": (4,), "smallest": (4,), "where_largest": (4,), "where_smallest": (4,),
}  # fmt: skip
"""Functions that print with a sign of their own, by their number of arguments."""
_D = Function("d")
_GAP = Operator("", "gap")
_EXTREMES = {"largest": "max", "smallest": "min", "where_largest": "max", "where_smallest": "min"}
_PLAIN = re.compile(r"[\d.]+")
_FEET = re.compile(r"(-?[\d.]+) ft (.+)")


@dataclass(frozen=True, slots=True)
class Place:
    """Where in a formula a node stands."""

    flat: bool = False
    """Fractions are set on the line."""
    fractions: int = 0
    """Fractions built up around it."""
    numeric: bool = False
    """A formula of numbers: `pi` counts as one."""
    signed: bool = False
    """Directly behind an operator: a minus takes brackets."""
    followed: Literal["", "sum", "product"] = ""
    """What comes directly behind: what has no end of its own, as `∑ a`, takes brackets."""
    chosen: int | None = None
    """The branch to mark."""

    @property
    def on_line(self) -> bool:
        return self.flat or self.fractions >= MOST_FRACTIONS

    def start(self) -> Place:
        """The beginning of an expression of its own."""
        return replace(self, signed=False, followed="")

    def behind(self) -> Place:
        """Directly behind an operator."""
        return replace(self, signed=True)

    def before(self, kind: Literal["sum", "product"]) -> Place:
        """Directly before an operator."""
        return replace(self, followed=kind)

    def within(self) -> Place:
        """Above or below the stroke of a fraction."""
        return replace(self.start(), fractions=self.fractions + 1)

    def raised(self) -> Place:
        """In an exponent, or a range below a sign."""
        return replace(self.start(), flat=True)


@lru_cache(maxsize=1024)
def lay_out(node: Node, flat: bool = False, chosen: int | None = None) -> Box:
    """The boxes of a formula.

    `flat`: every fraction on the line; `chosen`: index of the branch of `cases` to mark.
    """
    return _lay(node, Place(flat=flat, numeric=_is_numeric(node), chosen=chosen))


def _is_numeric(node: Node) -> bool:
    nodes = list(walk(node))
    names = [n.name for n in nodes if isinstance(n, Name)]
    return any(isinstance(n, Shown) for n in nodes) or all(name == "pi" for name in names)


def _lay(node: Node, place: Place) -> Box:
    match node:
        case Number(text=text):
            return Figure(text)
        case Quantity(parts=pieces):
            return Amount(tuple((_number(part), part.unit) for part in pieces))
        case Shown():
            return _shown(node)
        case Word(text=text):
            return Words(f"“{text}”")
        case Name(name=name):
            return Variable(symbol(name))
        case Negative(operand=operand):
            return row(Operator(MINUS, "sign"), _child(operand, node, place.behind()))
        case Binary(operator="+" | "-"):
            return _sum(node, place)
        case Binary(operator="*", left=left, right=right):
            sign = Operator(_product_sign(left, right, place), "product")
            first = _child(left, node, place.before("product"))
            return row(first, sign, _child(right, node, place.behind(), True))
        case Binary(operator="/"):
            return _on_line(node, place) if place.on_line else _fraction(node, place)
        case Binary():
            return _power(node, place)
        case Call() if _has_sign(node):
            ended = not place.followed or (node.function == "integral" and place.followed == "sum")
            box = _with_sign(node, place.start())
            return box if ended else bracketed(box)
        case Call():
            return _call(node, place.start())
        case Bracket(inner=inner, power=power):
            return Power(Fence("⟨", _lay(inner, place.start()), "⟩"), Figure(str(power)))
        case As():
            return _as(node, place.start())
        case At():
            return _at(node, place.start())
        case Factor():
            return _factor(node, place)
        case Relation():
            return _relation(node, place.start())
        case Logic(word=word, operands=operands):
            return _joined([_child(o, node, place.start()) for o in operands], Operator(word, "logic"))
        case Cases(branches=branches):
            conditions = replace(place.start(), flat=True)
            rows = tuple(
                (_lay(b.value, place.start()), None if b.condition is None else _lay(b.condition, conditions))
                for b in branches
            )
            return Table(rows, place.chosen)
    raise TypeError(type(node).__name__)


# --- values -------------------------------------------------------------------------------------------------


def _number(part: Part) -> str:
    return " ".join(filter(None, [part.whole, "/".join(part.over) if part.over else ""]))


def _shown(node: Shown) -> Box:
    if node.word:
        return Words(f"“{node.number}”")
    if not node.unit:
        return Figure(node.number)
    if feet := _FEET.fullmatch(node.number):
        return Amount(((feet.group(1), "ft"), (feet.group(2), node.unit)))
    return Amount(((node.number, node.unit),))


def _as(node: As, place: Place, brackets: bool = True) -> Box:
    """The unit that is taken off, behind a small word; a value in that very unit is its plain number."""
    inner = row(
        _lay(node.operand, place.before("product")), Words(" in ", small=True), Amount((("", node.unit),))
    )
    if isinstance(node.operand, Shown) and node.operand.unit == node.unit:
        inner = Figure(node.operand.number)
        brackets = brackets and not _PLAIN.fullmatch(node.operand.number)
    return bracketed(inner) if brackets else inner


def _at(node: At, place: Place) -> Box:
    """A cell: the column, then the label of its row upright."""
    column = _lay(node.operand, place)
    if not isinstance(node.operand, Name):
        column = bracketed(column)
    match node.row:
        case Word(text=text) | Shown(number=text, word=True):
            return row(column, Words(f" at {text}"))
    return row(column, Words(" at "), _lay(node.row, place))


def _factor(node: Factor, place: Place) -> Box:
    """The conversion factor at the end of a substitution."""
    body, amount = _child(node.body, node, place.before("product")), Amount(((node.number, node.unit),))
    if node.divided:
        return row(body, Operator("÷", "product"), bracketed(amount))
    return row(body, Operator("×", "product"), amount)


# --- operations ---------------------------------------------------------------------------------------------


def _sum(node: Binary, place: Place) -> Box:
    """A chain of terms, from the last to the first: derived ones have hundreds."""
    backwards: list[Box] = []
    while True:
        sign = Operator(MINUS if node.operator == "-" else "+", "sum")
        backwards += [_child(node.right, node, place.behind(), True), sign]
        place = place.before("sum")
        if not (isinstance(node.left, Binary) and node.left.operator in ("+", "-")):
            return row(_child(node.left, node, place), *reversed(backwards))
        node = node.left


def _child(child: Node, parent: Node, place: Place, right: bool = False) -> Box:
    """An operand, in brackets where its meaning or a second sign asks for them."""
    needs = needs_brackets(child, parent, right) or (place.signed and level(child) == SIGN)
    in_words = _has_words(child) and not isinstance(parent, Relation | Logic)
    return _guarded(child, place, needs or in_words, _multiplies(parent))


def _guarded(child: Node, place: Place, needs: bool, stroke: bool) -> Box:
    """A node in brackets where it needs them; `stroke`: as a fraction on the line it needs them too."""
    if isinstance(child, Binary) and child.operator == "/" and (needs or stroke):
        if place.on_line:
            return bracketed(_lay(child, place.start()))
        built = _lay(child, place.start())
        assert isinstance(built, Fraction)
        return replace(built, flat=bracketed(built.flat))
    return bracketed(_lay(child, place.start())) if needs else _lay(child, place)


def _multiplies(node: Node) -> bool:
    return isinstance(node, Factor) or (isinstance(node, Binary) and node.operator == "*")


def _product_sign(left: Node, right: Node, place: Place) -> str:
    """`×` where numbers stand on both sides."""
    neighbour = left.right if isinstance(left, Binary) and left.operator == "*" else left
    return "×" if _is_figures(neighbour, place) and _is_figures(right, place) else "⋅"


def _is_figures(node: Node, place: Place) -> bool:
    for inner in walk(node):
        if isinstance(inner, Name) and not (inner.name == "pi" and place.numeric):
            return False
        if isinstance(inner, Call) and inner.function not in NAMES:
            return False
    return True


def _fraction(node: Binary, place: Place) -> Fraction:
    top, bottom = _lay(node.left, place.within()), _lay(node.right, place.within())
    return Fraction(top, bottom, _stroke(node, top, bottom))


def _on_line(node: Binary, place: Place) -> Box:
    return _stroke(node, _lay(node.left, place.start()), _lay(node.right, place.start()))


def _stroke(node: Binary, top: Box, bottom: Box) -> Box:
    """`top/bottom`, with brackets round all that could be read past the stroke."""
    long_top = level(node.left) <= SIGN or _has_stroke(node.left) or _is_open(node.left)
    long_bottom = level(node.right) <= SIGN or is_measured(node.right) or _is_open(node.right)
    return row(
        bracketed(top) if long_top else top,
        Operator("/", "slash"),
        bracketed(bottom) if long_bottom else bottom,
    )


def _has_stroke(node: Node) -> bool:
    """True for an amount with a stroke in its unit or its number."""
    match node:
        case Shown(number=number, unit=unit):
            return "/" in unit or "/" in number
        case Quantity(parts=pieces):
            return any("/" in part.unit or part.over for part in pieces)
    return False


def _power(node: Binary, place: Place) -> Box:
    exponent = _lay(node.right, place.raised())
    if needs_brackets(node.left, node) or _ends_open(node.left):
        return Power(bracketed(_lay(node.left, place.start())), exponent)
    return Power(_lay(node.left, place.start()), exponent)


def _ends_open(node: Node) -> bool:
    """True for what an exponent behind it could be read into: `sin(x)`, a root, a primed name."""
    match node:
        case Call(function=function):
            return function != "abs"
        case Name(name=name):
            return name.endswith("'")
        case Bracket() | At():
            return True
    return level(node) == POWER


# --- calculus -----------------------------------------------------------------------------------------------


def _has_sign(node: Node) -> bool:
    return isinstance(node, Call) and len(node.arguments) in _WITH_SIGNS.get(node.function, ())


def _has_words(node: Node) -> bool:
    """True for what has words between its parts: `A at top flange`, `x at max M(x)`."""
    return isinstance(node, At) or (_has_sign(node) and isinstance(node, Call) and "where" in node.function)


def _is_open(node: Node) -> bool:
    """True for what could run on past its end, or begin before its start."""
    return _has_sign(node) or isinstance(node, At)


def _with_sign(node: Call, place: Place) -> Box:
    """A function with a sign of its own; what it works on stands behind that sign."""
    body, *outer = node.arguments
    match node.function:
        case "derivative":
            return row(_rate(outer[0], place), _GAP, _body(body, place, PRODUCT, stroke=True))
        case "integral":
            low_and_high = [_lay(bound, place.raised()) for bound in outer[1:]]
            sign = Ranged("∫", *low_and_high) if low_and_high else Operator("∫", "big")
            return row(
                sign, _body(body, place.before("product"), stroke=True), _GAP, *_differential(outer[0], place)
            )
        case "where_largest" | "where_smallest":
            return row(_lay(outer[0], place), Words(" at "), _range(node, place), _GAP, _body(body, place))
        case "sum":
            return row(_range(node, place) if outer else Operator("∑", "big"), _body(body, place))
    return row(_range(node, place), _GAP, _body(body, place))


def _range(node: Call, place: Place) -> Ranged:
    """`lim`, `max`, `min` or `∑` with its range."""
    variable, *bounds = [_lay(bound, place.raised()) for bound in node.arguments[1:]]
    match node.function, bounds:
        case "limit_of", [end]:
            return Ranged("lim", row(variable, Operator("→", "relation"), end))
        case "sum", [low, high]:
            return Ranged("∑", row(variable, Operator("=", "relation"), low), high)
    low, high = bounds
    at_most = Operator("≤", "relation")
    return Ranged(_EXTREMES[node.function], row(low, at_most, variable, at_most, high))


def _body(node: Node, place: Place, loosest: int = SUM, stroke: bool = False) -> Box:
    """What a sign works on: in brackets where it is as loose as `loosest` or begins with a minus.

    `stroke`: as a fraction on the line too.
    """
    needs = level(node) <= loosest or level(node) == SIGN or _has_words(node)
    return _guarded(node, place.behind(), needs, stroke)


def _rate(variable: Node, place: Place) -> Box:
    """The fraction d/dx."""
    top, bottom = _D, row(*_differential(variable, place))
    on_line = bracketed(row(top, Operator("/", "slash"), bottom))
    return on_line if place.on_line else Fraction(top, bottom, on_line)


def _differential(variable: Node, place: Place) -> tuple[Box, Box]:
    box = _lay(variable, place.start())
    return _D, box if isinstance(variable, Name) else bracketed(box)


# --- functions, relations -----------------------------------------------------------------------------------


def _call(node: Call, place: Place) -> Box:
    inside = [_argument(argument, place) for argument in node.arguments]
    match node.function, inside:
        case "sqrt", [only]:
            return Root(only)
        case "cbrt", [only]:
            return Root(only, "3")
        case "abs", [only]:
            return Fence("|", only, "|")
    listed = _joined(inside, Operator(",", "comma"))
    return row(_function(node.function), Operator("", "apply"), bracketed(listed))


def _argument(node: Node, place: Place) -> Box:
    return _as(node, place, brackets=False) if isinstance(node, As) else _lay(node, place)


def _function(name: str) -> Box:
    if name not in NAMES:
        return Variable(symbol(name))
    return Function(*_FUNCTIONS.get(name, (name.replace("_", " "), "")))


def _relation(node: Relation, place: Place) -> Box:
    boxes = [_child(node.operands[0], node, place)]
    for sign, operand in zip(node.signs, node.operands[1:], strict=True):
        boxes += [Operator(RELATIONS[sign], "relation"), _child(operand, node, place)]
    return row(*boxes)


def _joined(boxes: list[Box], between: Operator) -> Box:
    out: list[Box] = []
    for box in boxes:
        out += [between, box] if out else [box]
    return row(*out) if out else Row(())
