"""Design inputs: does each say what it is and where it comes from, is it used, has an angle its unit?"""

from __future__ import annotations

import math
from collections.abc import Iterator

from loadpath.findings import Finding, finding
from loadpath.formula.names import canonical
from loadpath.formula.statements import Choice, Column, Definition, Table
from loadpath.formula.tree import Binary, Call, Name, Negative, Node, Number, Quantity, span_of, walk
from loadpath.functions import FUNCTIONS
from loadpath.resolve import expressions
from loadpath.text import Span
from loadpath.trace.model import Step, Trace

ANGLE_NAMES = frozenset(("alpha", "beta", "gamma", "theta", "phi", "psi", "omega", "angle", "slope"))
"""Names that angles usually bear, in canonical text and small letters."""
FULL_TURN = 2 * math.pi
"""A plain number beyond this in magnitude is no angle that anybody would write in radians."""


def input_findings(trace: Trace) -> Iterator[Finding]:
    """`no-note`, `no-source`, `unused-input` and `angle-without-unit`."""
    angles = _typed_as_angles(trace)
    for step in trace:
        statement = step.statement
        if isinstance(statement, Table):
            yield from _table(trace, step, statement)
            continue
        if step.kind not in ("input", "choice") or not isinstance(statement, Definition | Choice):
            continue
        if step.entry.blocked_by == 0:
            yield from _origin(trace, step, statement.name, statement.name_span)
        if step.entry.blocked_by == 0 and not step.used_by and statement.name not in trace.resolved.meant:
            yield finding(
                "unused-input", f"nothing uses the input `{statement.name}`",
                trace.sheet.source, statement.name_span,
                help="delete it, or use it where it belongs; "
                "a value that is only told is written in the text",
            )  # fmt: skip
        if isinstance(statement, Definition) and (typed := _plain_number(statement.value)) is not None:
            named = canonical(statement.name).split("_")[0].lower() in ANGLE_NAMES
            if (named or statement.name in angles) and abs(_value(typed)) > FULL_TURN:
                yield _angle(trace, typed)
    for place in _numbers_in_calls(trace):
        yield _angle(trace, place)


def _origin(trace: Trace, step: Step, name: str, place: Span, what: str = "input") -> Iterator[Finding]:
    where = "line" if what == "input" else "caption"
    if not any(note.text for note in step.statement.notes):
        yield finding(
            "no-note", f"the {what} `{name}` does not say what it is and where it comes from",
            trace.sheet.source, place,
            help=f"end the {where} with a note and its source: ` -- rated load [key]`"
            if what == "input" else "write it behind the colon, with its source: `rated loads [key]`",
        )  # fmt: skip
    elif not step.sources:
        yield finding(
            "no-source", f"the note of the {what} `{name}` cites no source and no assumption",
            trace.sheet.source, place,
            help=f"cite one in the {'note' if what == 'input' else where}, `[key]`, "
            "and say in the front matter what it is",
        )  # fmt: skip


def _table(trace: Trace, step: Step, statement: Table) -> Iterator[Finding]:
    """A table of data is a design input as a whole."""
    if step.entry.blocked_by:
        return
    if any(_is_typed(node) for node in _cells(trace, step, statement)):
        yield from _origin(trace, step, statement.name, statement.name_span, "table")
    columns = [s for s in trace if isinstance(s.statement, Column) and s.statement.table == statement.name]
    meant = {name.partition(".")[0] for name in trace.resolved.meant}
    if not step.used_by and not any(s.used_by for s in columns) and statement.name not in meant:
        yield finding(
            "unused-input", f"nothing uses the table `{statement.name}`",
            trace.sheet.source, statement.name_span,
            help="delete it, or take the word `Table` from its caption: it is then told, and not computed",
        )  # fmt: skip


def _cells(trace: Trace, step: Step, statement: Table) -> Iterator[Node]:
    yield from expressions(statement)
    for of in trace:
        if isinstance(of.statement, Column) and of.statement.table == statement.name:
            yield from of.statement.cells


def _is_typed(cell: Node) -> bool:
    """True for a cell that states a value of its own: neither a name nor nothing."""
    if any(isinstance(n, Name) for n in walk(cell)):
        return False
    return any(
        (isinstance(n, Number) and _value(n) != 0)
        or (isinstance(n, Quantity) and any(part.whole.strip("0.") for part in n.parts))
        for n in walk(cell)
    )


# --- angles -------------------------------------------------------------------------------------------------


def _typed_as_angles(trace: Trace) -> frozenset[str]:
    """Names that stand as the argument of a trigonometric function."""
    return frozenset(leaf.name for leaf in _leaves_of_calls(trace) if isinstance(leaf, Name))


def _numbers_in_calls(trace: Trace) -> Iterator[Number]:
    """Typed plain numbers within a trigonometric function that are too large for radians."""
    for leaf in _leaves_of_calls(trace):
        if isinstance(leaf, Number) and abs(_value(leaf)) > FULL_TURN:
            yield leaf


def _leaves_of_calls(trace: Trace) -> Iterator[Node]:
    for step in trace:
        for tree in expressions(step.statement):
            for node in walk(tree):
                of = FUNCTIONS.get(node.function) if isinstance(node, Call) and node.arguments else None
                if isinstance(node, Call) and of is not None and of.angle:
                    yield from _angles_in(node.arguments[0])


def _angles_in(argument: Node) -> Iterator[Node]:
    """What in an argument is itself an angle: its terms, and the other factor of a typed number.

    A term with `pi`, or with two names in it, has been brought to radians, or counts something.
    """
    match argument:
        case Number() | Name():
            yield argument
        case Negative(operand=operand):
            yield from _angles_in(operand)
        case Binary(operator="+" | "-", left=left, right=right):
            yield from _angles_in(left)
            yield from _angles_in(right)
        case Binary(operator="*", left=Number(), right=Name() as name):
            yield name
        case Binary(operator="*" | "/", left=Name() as name, right=Number()):
            yield name


def _plain_number(value: Node) -> Number | None:
    match value:
        case Number():
            return value
        case Negative(operand=Number() as number):
            return number
    return None


def _value(number: Number) -> float:
    return float(number.text.replace("_", ""))


def _angle(trace: Trace, typed: Number) -> Finding:
    return finding(
        "angle-without-unit", f"the angle {typed.text} has no unit and is taken as radians",
        trace.sheet.source, span_of(typed),
        help=f"write `{typed.text} deg` for degrees, `{typed.text} rad` for radians",
    )  # fmt: skip
