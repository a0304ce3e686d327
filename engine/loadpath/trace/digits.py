"""How many digits a value is printed to, so that what is printed never contradicts what was found."""

from __future__ import annotations

import math
from collections.abc import Sequence
from itertools import chain, pairwise

from loadpath.formula.signs import EQUAL, nearly
from loadpath.formula.statements import Criterion
from loadpath.formula.tree import Logic, Name, Negative, Node, Number, Quantity, Relation
from loadpath.trace.model import Step, Verdict
from loadpath.units import Unit
from loadpath.units.printing import MOST_DIGITS, plain, read_plain, typeset

RATIO_PLACES = 3
"""Decimals of a utilisation, before they grow."""


def digits_of_verdict(step: Step, base: int) -> tuple[int, list[str]]:
    """Digits with which the printed sides of a criterion stand in the order found; names that are a side
    by themselves."""
    statement, verdict = step.statement, step.verdict
    assert isinstance(statement, Criterion) and verdict is not None
    relations = (
        statement.relation.operands if isinstance(statement.relation, Logic) else (statement.relation,)
    )
    needed = base
    names: list[str] = []
    for relation, values, unit in zip(relations, verdict.sides, step.entry.side_units, strict=False):
        assert isinstance(relation, Relation)
        shown = [unit.from_si(float(v)) for v in values]
        needed = max(needed, order_digits(shown, base))
        names += [o.name for o in relation.operands if isinstance(o, Name)]
    return needed, names


def order_digits(values: Sequence[float], base: int) -> int:
    """The fewest digits, `base` or more, with which printed numbers stand to their neighbours as the
    numbers do.

    Fewer than `base` where so many would part values that count as equal.
    """
    within = max(math.pow(10, 2 - base), EQUAL)
    close = [(a, b) for a, b in pairwise(values) if abs(a - b) <= within * max(abs(a), abs(b))]
    for digits in chain(range(base, MOST_DIGITS + 1), range(base - 1, 1, -1)):
        if all(in_order(a, b, plain(a, digits), plain(b, digits)) for a, b in close):
            return digits
    return MOST_DIGITS


def in_order(a: float, b: float, first: str, second: str) -> bool:
    """True where two plain numbers stand to each other as the values that they print; values that count as
    equal print alike."""
    left, right = read_plain(first), read_plain(second)
    if nearly(a, b):
        return left == right
    return left != right and (left < right) == (a < b)


def ratio_text(verdict: Verdict) -> str:
    """The utilisation, with decimals until it stands on the right side of 1; "" where there is none."""
    ratio = verdict.utilisation
    if ratio is None:
        return ""
    if ratio == 1:
        return f"{1:.{RATIO_PLACES}f}"
    for places in range(RATIO_PLACES, MOST_DIGITS):
        text = f"{ratio:.{places}f}"
        if (float(text) < 1) == (ratio < 1) and float(text) != 1:
            return text if ratio < 1000 else typeset(plain(ratio, 4))
    return repr(ratio)


def exact_digits(value: float, otherwise: int) -> int:
    """The fewest digits that print a typed value exactly, up to ten; `otherwise` where none does."""
    for digits in range(1, 11):
        if abs(read_plain(plain(value, digits)) - value) <= 1e-14 * abs(value):
            return digits
    return otherwise


def typed_number(node: Node, unit: Unit) -> str:
    """The number as typed, where the node is one plain number or quantity in that unit; "" otherwise."""
    match node:
        case Number(text=typed) if unit.text == "":
            return _tidy(typed)
        case Negative(operand=operand):
            inner = typed_number(operand, unit)
            return f"-{inner}" if inner and not inner.startswith("-") else ""
        case Quantity(parts=(part,)) if part.unit == unit.text and not part.over:
            return _tidy(part.whole)
    return ""


def _tidy(typed: str) -> str:
    return typed.replace("_", "").replace("E", "e").replace("e+", "e")
