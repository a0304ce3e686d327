"""Unknowns and their solutions in a document."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

from loadpath.document.model import Head, Line, PutBackLine, Ref, SolutionRow, UnknownRow
from loadpath.formula.statements import Solution, Unknown
from loadpath.formula.tree import Name, Node, Number, Relation, Shown
from loadpath.trace import PutBack, Step, texts
from loadpath.trace.substitute import shown
from loadpath.units.printing import MOST_DIGITS, plain, unit_symbol

if TYPE_CHECKING:
    from loadpath.document.steps import StepWriter

RESIDUAL_DIGITS = 2
NOTHING = 1e-12
"""A side, or what two sides leave over, below this share of their terms is rounding and prints as zero."""


def unknown_row(writer: StepWriter, step: Step, statement: Unknown, head: Head) -> UnknownRow:
    """An unknown before it is solved."""
    found = next((s for s in writer.trace.steps if s.kind == "solution" and s.id == statement.name), None)
    unit = unit_symbol(statement.unit.text) if statement.unit.text != "1" else ""
    return UnknownRow(head, statement.name, unit, Ref(found.number, statement.name) if found else None)


def solution_row(writer: StepWriter, step: Step, statement: Solution, head: Head) -> SolutionRow:
    """One unknown found."""
    together, solved = statement.together, step.solved
    first, last = statement.index == 0, statement.index == len(together.sought) - 1
    put = texts.step_substitution(writer.trace, step)
    sides: tuple[Node, ...] = ()
    lines: tuple[Line, ...] = ()
    if step.working is not None:
        sides = (step.working.tree, *((put.tree,) if put and not isinstance(put.tree, Shown) else ()))
        lines = (*writer.lines(step.working), *writer.further_digits(put))
    if solved is not None:
        lines += tuple(
            Line(("another root, ", Relation((Name(name), shown(value)), ("=",)), f", is not taken: {why}"))
            for name, value, why in solved.others
        )
        if first and solved.symbols:
            lines += tuple(Line(("with ", Relation((node, Number("0")), ("=",)))) for node in solved.empty)
    first_step = _first_of(writer, step, statement)
    if first_step is not None and set(step.uses) <= {*first_step.uses, first_step.id}:
        head = replace(head, feeds_from=())
    return SolutionRow(
        head,
        Name(statement.name),
        together.equations if first else (),
        tuple(writer.inlines(notes) for notes in together.notes) if first else (),
        solved.derived if solved and first and solved.derived != together.equations else (),
        _bounds(statement) if first else (),
        solved.method if solved and first else "",
        sides,
        texts.display(step),
        put.closes if put else True,
        lines,
        tuple(_put_back(each, writer.trace.sheet.front.digits) for each in solved.put_back)
        if solved and last
        else (),
        tuple(call for each in solved.workings for call in writer.calls(each)) if solved else (),
        Ref(first_step.number) if first_step is not None else None,
    )


def _first_of(writer: StepWriter, step: Step, statement: Solution) -> Step | None:
    """The first of the steps that share the equations; None for that one itself."""
    first = writer.trace.by_name.get(statement.together.sought[0].name)
    return None if first is None or first.number == step.number else first


def _bounds(statement: Solution) -> tuple[Relation, ...]:
    return tuple(
        Relation((s.low, Name(s.name), s.high), ("<=", "<="))
        for s in statement.together.sought
        if s.low is not None and s.high is not None
    )


def _put_back(of: PutBack, digits: int) -> PutBackLine:
    unit, size = of.unit, of.size
    printed = "in" if unit.text.startswith("ft-in") else unit.text

    def put(value: float) -> Shown:
        number = plain(unit.from_si(value), min(digits + 2, MOST_DIGITS))
        return Shown("0" if abs(value) <= NOTHING * size else number, printed)

    left_over = of.left - of.right
    rounding = abs(left_over) <= NOTHING * size
    residual = "0" if rounding else plain(left_over / unit.size, RESIDUAL_DIGITS)
    return PutBackLine(of.equation, put(of.left), put(of.right), Shown(residual, printed))
