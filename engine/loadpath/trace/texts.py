"""What a step says: formula, substitution, result. Made when asked for; every document and the trace file
print these.

All of it is trees and plain numbers: how they look (MathML, LaTeX, text) is up to the printers.
"""

from __future__ import annotations

from contextlib import suppress
from dataclasses import dataclass, replace
from itertools import pairwise

from loadpath.formula.binding import free_names, own_name
from loadpath.formula.canonical import statement_text
from loadpath.formula.signs import holds
from loadpath.formula.statements import Check, Criterion, Definition, Table, Validity
from loadpath.formula.tree import Binary, Call, Logic, Name, Node, Number, Relation, Shown, Sign, walk
from loadpath.resolve import LOOKED_UP
from loadpath.trace.digits import exact_digits, in_order, order_digits, typed_number
from loadpath.trace.model import Called, Operand, Step, Trace, Verdict, Working
from loadpath.trace.substitute import Scope, natural_unit, shown, substitute, with_factors
from loadpath.units import ONE, Unit
from loadpath.units.dimension import LENGTH
from loadpath.units.printing import MOST_DIGITS, feet_and_inches, plain, read_plain, step_of

WORKED_INPUT = 5
"""Digits to which an input that is worked out (`5/8 in`, `42.3 kg/m * 9.81 m/s^2`) is printed at the
least, where it has them."""
_WHOLE = ("round_up", "round_down", "count")
MORE = 2
"""Further digits that a substitution may show where the usual ones would not lead to the result."""


# --- values -----------------------------------------------------------------------------------------------


def operand(step: Step) -> Operand | None:
    """The value of a step as it stands in a substitution; None where it has none."""
    if step.si is None or isinstance(step.si, tuple):
        return None
    if isinstance(step.si, str):
        return Operand(step.si, step.unit, step.digits)
    if step.kind != "input" or not isinstance(step.statement, Definition):
        if step.working is not None and (typed := typed_number(step.working.tree, step.unit)):
            return Operand(step.si, step.unit, step.digits, typed, exact=True)
        return Operand(step.si, step.unit, _digits_of_result(step))
    typed = typed_number(step.statement.value, step.unit)
    value = step.unit.from_si(step.si)
    return Operand(
        step.si,
        step.unit,
        min(exact_digits(value, step.digits), max(step.digits, WORKED_INPUT)),
        typed,
        exact=True,
    )


def _digits_of_result(step: Step) -> int:
    """A value rounded to whole steps is shown as such: `10 mm`, not `10.00 mm`."""
    tree = step.working.tree if step.working else None
    if isinstance(tree, Call) and tree.function in _WHOLE and isinstance(step.si, float):
        return min(exact_digits(step.unit.from_si(step.si), step.digits), step.digits)
    return step.digits


def display(step: Step, unit: Unit | None = None) -> Shown | None:
    """The result of a step as printed, in its own unit or another; None where there is none."""
    own = operand(step)
    if own is None:
        return None
    if unit is not None and unit.text != own.unit.text and isinstance(own.si, float):
        digits = exact_digits(unit.from_si(own.si), step.digits) if own.exact else own.digits
        own = Operand(own.si, unit, digits)
    return _in_feet(own) or shown(own)


def _in_feet(own: Operand) -> Shown | None:
    """A length in feet and inches, None for any other value."""
    if not isinstance(own.si, float) or not own.unit.text.startswith("ft-in"):
        return None
    said = feet_and_inches(own.unit.from_si(own.si), int(own.unit.text.partition("/")[2]))
    return Shown(said.removesuffix(" in"), "in")


def scope_of(trace: Trace, working: Working | None = None) -> Scope:
    """The printed value of each name that a working may use."""
    own = dict(working.scope) if working else {}

    def find(name: str) -> Operand | None:
        if name in own:
            return own[name]
        if " at " in name:
            return cell(trace, name)
        step = trace.by_name.get(name)
        return operand(step) if step is not None else None

    return find


def cell(trace: Trace, at: str) -> Operand | None:
    """The printed value of `plates.b at "web"`, or of a row that a choice names."""
    name, _, row = at.partition(" at ")
    step, label = trace.by_name[name], row.strip('"')
    if not row.startswith('"'):
        chosen = trace.by_name[row].si
        label = chosen if isinstance(chosen, str) else ""
    index = next((i for i, each in enumerate(step.rows) if each.label == label), None)
    return None if index is None else row_operand(step, index)


def row_operand(step: Step, index: int) -> Operand | None:
    """One row of a column as printed: as typed, or to the digits of a result."""
    row = step.rows[index]
    if row.si is None:
        return None
    tree = row.working.tree if row.working else None
    exact = step.kind == "table" and tree is not None and not free_names(tree)
    typed = typed_number(tree, step.unit) if exact and tree is not None else ""
    digits = exact_digits(step.unit.from_si(row.si), step.digits) if exact else step.digits
    return Operand(row.si, step.unit, digits, typed, exact=exact)


def row_shown(step: Step, index: int) -> Shown | None:
    """One row of a column as it stands in a table."""
    own = row_operand(step, index)
    return None if own is None else _in_feet(own) or shown(own)


# --- formula and substitution -----------------------------------------------------------------------------


@dataclass(frozen=True, slots=True)
class Substitution:
    """A formula with its printed values."""

    tree: Node
    closes: bool
    """False where even further digits don't lead to the printed result: the step says "from unrounded
    values"."""
    more: int = 0
    """Further digits that its values show, so that they lead to the printed result."""


def holds_names(tree: Node) -> bool:
    """True where a substitution shows something that the formula doesn't."""
    return any(isinstance(n, Name) and n.name != "pi" for n in walk(tree)) or any(
        type(n).__name__ == "Call" for n in walk(tree)
    )


def substitution(trace: Trace, working: Working, result: Operand) -> Substitution | None:
    """The substitution of a value, with as many digits as it takes to land on the printed result."""
    if not holds_names(working.tree) or isinstance(result.si, str):
        return None
    scope = scope_of(trace, working)
    for more in range(MORE + 1):
        tree = substitute(working.tree, scope, working.calls, more)
        if _lands(trace, tree, result):
            return Substitution(with_factors(tree, result.unit), True, more)
    return Substitution(with_factors(substitute(working.tree, scope, working.calls), result.unit), False)


def _lands(trace: Trace, tree: Node, result: Operand) -> bool:
    """True where the printed numbers give the printed result within one unit of its last digit."""
    assert isinstance(result.si, float)
    try:
        reached = result.unit.from_si(trace.work(tree))
    except (ArithmeticError, ValueError, KeyError):
        return False
    printed = shown(result).number
    if read_plain(printed) == 0:
        return reached == 0
    return abs(reached - read_plain(printed)) <= 1.0001 * step_of(printed, result.digits)


def step_substitution(trace: Trace, step: Step) -> Substitution | None:
    """The substitution of a result, None for other steps and where nothing was computed."""
    result = operand(step)
    if step.kind not in ("result", "solution") or step.working is None or result is None:
        return None
    key = ("substitution", step.id)
    if key not in trace.made:
        trace.made[key] = substitution(trace, step.working, result)
    made: Substitution | None = trace.made[key]
    return made


def row_substitution(trace: Trace, step: Step, index: int) -> Substitution | None:
    """The substitution of one row of a column; None where nothing stands in place of names."""
    result, working = row_operand(step, index), step.rows[index].working
    if result is None or working is None:
        return None
    key = (f"substitution {index}", step.id)
    if key not in trace.made:
        trace.made[key] = substitution(trace, working, result)
    made: Substitution | None = trace.made[key]
    return made


def call_substitution(trace: Trace, called: Called) -> Substitution | None:
    """The substitution of a call's body, with the parameters' values in place; of what looks at a whole
    expression or column, what it adds up."""
    for more, written in enumerate(called.working.written):
        if _lands(trace, written, called.value):
            return Substitution(written, True, more)
    if called.working.written:
        return Substitution(called.working.written[0], False)
    if called.working.tree == called.call:
        return None
    return substitution(trace, called.working, called.value)


def looked_call(trace: Trace, called: Called, outer: Working) -> tuple[Call, int]:
    """A call that looks at a whole expression or column, with the values that it looks up, or the range that
    it goes over; and how many further digits they need to lead to the printed result."""
    call, scope = called.call, scope_of(trace, outer)
    if own_name(call) is None and call.function not in LOOKED_UP:
        return call, 0
    first = 2 if own_name(call) is not None else 0
    last = len(call.arguments) - (2 if call.function == "lookup" or _is_one_way(trace, call) else 1)
    places = range(first, len(call.arguments)) if first else range(last) if call.function in LOOKED_UP else ()
    for more in range(MORE + 1):
        arguments = list(call.arguments)
        for i in places:
            arguments[i] = substitute(call.arguments[i], scope, outer.calls, more)
        put = replace(call, arguments=tuple(arguments))
        if first or _lands(trace, put, called.value):
            return put, more
    return replace(call, arguments=tuple(arguments)), 0


def _is_one_way(trace: Trace, call: Call) -> bool:
    last = call.arguments[-1]
    step = trace.by_name.get(last.name) if isinstance(last, Name) else None
    return step is None or not isinstance(step.statement, Table)


# --- relations --------------------------------------------------------------------------------------------


@dataclass(frozen=True, slots=True)
class Compared:
    """One relation of a criterion, a validity or a condition, as it is printed."""

    formula: Relation
    substituted: Relation | None
    """With values in place of names, where a side is more than a name or a number."""
    evaluated: Relation
    """Each side as one number, with the signs that hold: `8.746 mm > 8.667 mm` where `<=` was asked and
    does not."""
    closes: bool = True
    """False where the printed values of a side don't lead to its printed number."""
    per_length: tuple[int, Name, str] | None = None
    """Operand index, length and number: the demand as `L/499.9`, where the limit is `L/n`."""


def compared(trace: Trace, step: Step) -> tuple[Compared, ...]:
    """The relations of a judged step, in the order typed; () where nothing was computed."""
    statement, verdict = step.statement, step.verdict
    if (
        verdict is None
        or not verdict.sides
        or step.working is None
        or not isinstance(statement, Criterion | Validity | Check)
    ):
        return ()
    key = ("compared", step.id)
    if key not in trace.made:
        trace.made[key] = _compared_in(trace, step, step.working, verdict)
    kept: tuple[Compared, ...] = trace.made[key]
    return kept


def row_compared(trace: Trace, step: Step, index: int) -> tuple[Compared, ...]:
    """The same, of one row of a step that is judged row by row."""
    row = step.rows[index]
    if row.verdict is None or row.working is None:
        return ()
    return _compared_in(trace, step, row.working, row.verdict)


def _compared_in(trace: Trace, step: Step, working: Working, verdict: Verdict) -> tuple[Compared, ...]:
    relations = [n for n in walk(working.tree) if isinstance(n, Relation)]
    worked = zip(relations, verdict.sides, step.entry.side_units, strict=False)
    made = [_compared(trace, working, *each, step.digits) for each in worked]
    if isinstance(step.statement, Check):
        # its sides are equal within the tolerance, which stands beside them
        made = [replace(c, evaluated=replace(c.evaluated, signs=c.formula.signs)) for c in made]
    return tuple(made)


def _compared(
    trace: Trace, working: Working, relation: Relation, values: tuple[float | str, ...], unit: Unit, base: int
) -> Compared:
    scope = scope_of(trace, working)
    numbers = [unit.from_si(v) if isinstance(v, float) else v for v in values]
    sides = _sides(relation, numbers, unit, base, scope)
    evaluated = Relation(
        sides,
        tuple(_sign_that_holds(*each) for each in zip(relation.signs, numbers, numbers[1:], strict=False)),
    )
    substituted, closes = None, True
    if any(_is_worked(o, unit, scope) for o in relation.operands):
        inner: list[Node] = []
        for operand_, value, side in zip(relation.operands, values, sides, strict=True):
            if isinstance(value, float) and _is_worked(operand_, unit, scope):
                tree, lands = _worked_side(trace, working, operand_, unit, side)
                inner.append(tree)
                closes = closes and lands
            else:
                inner.append(side)
        substituted = Relation(tuple(inner), relation.signs)
    per_length = _per_length(relation, numbers, unit, scope)
    return Compared(relation, substituted, evaluated, closes, per_length)


_OPPOSITE: dict[Sign, Sign] = {"<=": ">", "<": ">=", ">=": "<", ">": "<=", "=": "≠"}


def _sign_that_holds(asked: Sign, a: float | str, b: float | str) -> Sign:
    """The sign asked for, or its opposite where it does not hold."""
    return asked if holds(asked, a, b) else _OPPOSITE[asked]


def _is_worked(node: Node, unit: Unit, scope: Scope) -> bool:
    """True for a side that is more than one printed number: it is worked out, or stands in a unit of
    another size."""
    if isinstance(node, Name):
        own = scope(node.name)
        return own is not None and not isinstance(own.si, str) and own.unit.size != unit.size
    return holds_names(node)


def _worked_side(
    trace: Trace, working: Working, node: Node, unit: Unit, side: Shown
) -> tuple[Node, bool]:
    """One side with values in place of names, with as many digits as it takes to land on its printed number;
    False where none do."""
    scope = scope_of(trace, working)
    trees = [substitute(node, scope, working.calls, more) for more in range(MORE + 1)]
    step = step_of(side.number, len(side.number))
    landed = [t for t in trees if abs(unit.from_si(trace.work(t)) - read_plain(side.number)) <= 1.0001 * step]
    return with_factors(landed[0] if landed else trees[0], unit), bool(landed)


def _sides(
    relation: Relation, numbers: list[float | str], unit: Unit, base: int, scope: Scope
) -> tuple[Shown, ...]:
    """Each side as one number, to as many digits as it takes to stand in the order found."""
    values = [n for n in numbers if isinstance(n, float)]
    fewest = order_digits(values, base)
    for digits in range(fewest, MOST_DIGITS + 1):
        sides = tuple(
            _side(o, n, unit, digits, scope) for o, n in zip(relation.operands, numbers, strict=True)
        )
        if all(
            in_order(a, b, s.number, t.number)
            for (a, b), (s, t) in zip(pairwise(values), pairwise(sides), strict=False)
        ):
            return sides
    return tuple(_rounded(value, unit, fewest) for value in values)


def _rounded(value: float, unit: Unit, digits: int) -> Shown:
    return Shown(plain(value, digits), "in" if unit.text.startswith("ft-in") else unit.text)


def _side(node: Node, number: float | str, unit: Unit, digits: int, scope: Scope) -> Shown:
    """One side: as typed where it is typed, else to so many digits."""
    if isinstance(number, str):
        return Shown(number, "", word=True)
    if (
        isinstance(node, Name)
        and (own := scope(node.name)) is not None
        and own.exact
        and own.unit.text == unit.text
    ):
        return shown(own)
    if typed := typed_number(node, unit):
        return Shown(typed, unit.text)
    if number == 0:
        return Shown("0", unit.text)
    if not holds_names(node):
        digits = exact_digits(number, digits)
    return _rounded(number, unit, digits)


def _per_length(
    relation: Relation, numbers: list[float | str], unit: Unit, scope: Scope
) -> tuple[int, Name, str] | None:
    """A length against L/n is printed as L/n too."""
    if len(relation.operands) != 2:
        return None
    limit_at = 1 if relation.signs[0][0] == "<" else 0
    limit, demand = relation.operands[limit_at], numbers[1 - limit_at]
    match limit:
        case Binary(operator="/", left=Name() as length, right=Number(text=typed)):
            of = scope(length.name)
        case _:
            return None
    if (
        of is None
        or not isinstance(of.si, float)
        or not isinstance(demand, float)
        or demand == 0
        or unit.dimension != LENGTH
    ):
        return None
    ratio, asked = of.si / unit.to_si(abs(demand)), read_plain(typed)
    digits = next(
        (d for d in range(4, MOST_DIGITS) if in_order(ratio, asked, plain(ratio, d), typed)), MOST_DIGITS
    )
    return 1 - limit_at, length, plain(ratio, digits)


def conditions(trace: Trace, working: Working) -> tuple[tuple[Compared, ...], ...]:
    """For each branch down to the one taken: the relations of its condition, with their numbers."""
    if working.taken is None:
        return ()
    branches = working.taken.cases.branches[: working.taken.index + 1]
    return tuple(_conditions(trace, working, b.condition) for b in branches)


def _conditions(trace: Trace, working: Working, condition: Node | None) -> tuple[Compared, ...]:
    scope = scope_of(trace, working)
    out = []
    for node in walk(condition) if condition is not None else ():
        if isinstance(node, Relation):
            # what the condition passes over (`when x = 0 or 1/x <= 3`) need not have a value
            with suppress(ArithmeticError, ValueError):
                out.append(_condition(trace, working, node, scope))
    return tuple(out)


def _condition(trace: Trace, working: Working, relation: Relation, scope: Scope) -> Compared:
    values: list[float | str] = []
    for operand_ in relation.operands:
        node = substitute_exact(operand_, scope, working.calls)
        values.append(node if isinstance(node, str) else trace.work(node))
    unit = _unit_of(relation, scope, working.calls)
    return _compared(trace, working, relation, tuple(values), unit, trace.sheet.front.digits)


def substitute_exact(node: Node, scope: Scope, calls: tuple[Called, ...]) -> Node | str:
    """A tree with full values in place of names, to be worked; a word stays a word."""
    exact = substitute(node, lambda name: _exact(scope(name)), tuple(_exact_call(c) for c in calls))
    if isinstance(exact, Shown) and exact.word:
        return exact.number
    return getattr(node, "text", "") if type(node).__name__ == "Word" else exact


def _exact(own: Operand | None) -> Operand | None:
    return (
        own
        if own is None or isinstance(own.si, str)
        else Operand(own.si, own.unit, own.digits, repr(own.unit.from_si(own.si)))
    )


def _exact_call(called: Called) -> Called:
    value = _exact(called.value)
    assert value is not None
    return Called(called.call, called.arguments, called.working, value)


def _unit_of(relation: Relation, scope: Scope, calls: tuple[Called, ...]) -> Unit:
    """The unit that the sides of a condition are shown in: that of the first side that has one."""
    for node in relation.operands:
        unit = natural_unit(substitute(node, scope, calls))
        if unit.text:
            return unit
    return ONE


# --- lines of text ----------------------------------------------------------------------------------------


def formula(step: Step) -> str:
    """The formula in canonical text."""
    return statement_text(step.statement)


def rejoined(relation: Node, parts: list[Node]) -> Node:
    """The shape of a typed relation with other relations in place of its own."""
    waiting = iter(parts)

    def put(node: Node) -> Node:
        if isinstance(node, Logic):
            return Logic(node.word, tuple(put(o) for o in node.operands))
        return next(waiting)

    return put(relation)
