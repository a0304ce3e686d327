"""Reading statements that are about several names or expressions: unknowns, equations, plots and tables of
values."""

from __future__ import annotations

import re

from loadpath.formula import meant
from loadpath.formula.lines import Group, Item
from loadpath.formula.mistake import Mistake
from loadpath.formula.names import RESERVED
from loadpath.formula.reader import Reader
from loadpath.formula.statements import (
    AskedUnit,
    Equations,
    Plot,
    Solution,
    Sought,
    Statement,
    Tabulate,
    Unknown,
)
from loadpath.formula.tree import Node, Relation
from loadpath.functions import NAMES as FUNCTION_NAMES
from loadpath.text import Span

MOST_UNKNOWNS = 100
MOST_CURVES = 12
MOST_STEPS = 500

_STEPS = re.compile(r"([0-9][0-9_]*)\s+steps?\b")
_SOLVE_FORM = "write `solve for R_A [kN]`, and each equation on a deeper line: `R_A*L = P*b`"
_RANGE_FORM = "for x from 0 m to L"


# --- unknowns -----------------------------------------------------------------------------------------------


def read_unknowns(group: Group, reader: Reader) -> tuple[Statement, ...]:
    """`unknown C_1 [rad], C_2 [mm]`: one statement a name."""
    reader.takes_word("unknown")
    names: list[tuple[str, Span, AskedUnit]] = []
    while True:
        name, place = _name(reader)
        if reader.peek() != "[":
            message = f"`unknown` says in which unit `{name}` will be found"
            raise Mistake("bad-syntax", place, message, f"write `unknown {name} [mm]`, or `[1]` for a number")
        names.append((name, place, AskedUnit(*reader.bracketed_unit())))
        if not reader.takes(","):
            break
    _end(reader, "between two names stands a comma: `unknown C_1 [rad], C_2 [mm]`")
    _refuse_many(names, reader)
    whole = group.span
    spans = [whole, *(place for _, place, _ in names[1:])]
    return tuple(
        Unknown(span, group.whole.notes, name, place, unit)
        for span, (name, place, unit) in zip(spans, names, strict=True)
    )


def _name(reader: Reader) -> tuple[str, Span]:
    word = reader.word()
    if word in RESERVED or word in FUNCTION_NAMES:
        message = f"`{word}` is a word of the language and cannot be an unknown"
        mend = f"choose another name, such as `{word}_1`"
        raise Mistake("reserved-word", reader.here(len(word)), message, mend)
    name, place = reader.name("the name of an unknown")
    if "." in name:
        raise Mistake("bad-syntax", place, f"the unknown `{name}` holds a dot", "write `_` instead")
    reader.skip()
    return name, place


def _refuse_many(names: list[tuple[str, Span, AskedUnit]] | list[Sought], reader: Reader) -> None:
    if len(names) > MOST_UNKNOWNS:
        message = f"more than {MOST_UNKNOWNS} unknowns on one line"
        raise Mistake("over-limit", reader.span(0), message, "split the problem into several")


def _end(reader: Reader, mend: str) -> None:
    if not reader.done() and reader.word() and reader.word() not in RESERVED:
        word = reader.word()
        message = f"`{word}` stands here without a comma before it"
        raise Mistake("bad-syntax", reader.here(len(word)), message, mend)
    reader.expect_end()


# --- equations ----------------------------------------------------------------------------------------------


def read_solve(group: Group, reader: Reader) -> tuple[Statement, ...]:
    """`solve for R_A [kN], R_B [kN]` with an equation on each deeper line: one statement an unknown."""
    head = Reader(group.head)
    head.skip()
    word = head.here(5)
    head.takes_word("solve")
    if not head.takes_word("for"):
        message = "`solve` is followed by `for` and the unknowns"
        raise Mistake("bad-syntax", word, message, _SOLVE_FORM)
    sought = [_sought(head)]
    while head.takes(","):
        sought.append(_sought(head))
    _end(head, "between two unknowns stands a comma: `solve for R_A [kN], R_B [kN]`")
    _refuse_many(sought, head)
    _refuse_twice(sought)
    if not group.deeper:
        message = "`solve for` takes its equations on deeper lines"
        raise Mistake("stray-line", word, message, _SOLVE_FORM)
    equations = tuple(_equation(item) for item in group.deeper)
    notes = tuple(item.notes for item in group.deeper)
    together = Equations(tuple(sought), equations, notes, group.head.span)
    spans = [group.span, *(each.span for each in sought[1:])]
    return tuple(Solution(span, group.whole.notes, i, together) for i, span in enumerate(spans))


def _sought(reader: Reader) -> Sought:
    name, place = _name(reader)
    unit = AskedUnit(*reader.bracketed_unit()) if reader.peek() == "[" else None
    if not reader.takes_word("between"):
        return Sought(name, place, unit)
    low = reader.expression()
    if not reader.takes_word("and"):
        message = f"expected `and` and the upper bound, but {reader.found()} stands here"
        mend = f"write `{name} [mm] between 0 mm and 40 mm`"
        raise Mistake("bad-syntax", reader.here(), message, mend)
    return Sought(name, place, unit, low, reader.expression())


def _refuse_twice(sought: list[Sought]) -> None:
    seen: set[str] = set()
    for each in sought:
        if each.name in seen:
            message = f"`{each.name}` is solved for twice"
            raise Mistake("defined-twice", each.span, message, "name each unknown once")
        seen.add(each.name)


def _equation(item: Item) -> Relation:
    reader = Reader(item)
    try:
        relation = reader.relation()
    except Mistake as mistake:
        if mistake.slug != "no-relation":
            raise
        mend = "write both sides: `... = 0`"
        raise Mistake("bad-syntax", mistake.span, "an equation holds one `=`", mend) from None
    if relation.signs != ("=",):
        if len(relation.signs) > 1:
            message, mend = "an equation holds one `=`", "write two equations"
        else:
            message = f"an equation holds `=`, not `{relation.signs[0]}`"
            mend = "write `=`; the range of a solution is stated as `between ... and ...`"
        raise Mistake("bad-syntax", relation.at[-1], message, mend)
    reader.expect_end()
    return relation


# --- plots and tables of values -----------------------------------------------------------------------------


def read_plot(group: Group, reader: Reader) -> tuple[Statement, ...]:
    """`plot V(x), M(x) for x from 0 m to L`."""
    reader.takes_word("plot")
    curves, variable, place, low, high = _curves(reader, "plot V(x), M(x)")
    _end(reader, f"the line ends behind the range: `plot V(x), M(x) {_RANGE_FORM}`")
    return (Plot(group.span, group.whole.notes, curves, variable, place, low, high),)


def read_tabulate(group: Group, reader: Reader) -> tuple[Statement, ...]:
    """`tabulate M(x), v(x) for x from 0 m to L, 10 steps`."""
    reader.takes_word("tabulate")
    curves, variable, place, low, high = _curves(reader, "tabulate M(x), v(x)")
    form = f"`tabulate M(x), v(x) {_RANGE_FORM}, 10 steps`"
    reader.takes(",")
    reader.skip()
    match = _STEPS.match(reader.text, reader.at)
    if match is None:
        message = f"expected the number of steps, but {reader.found()} stands here"
        raise Mistake("bad-syntax", reader.here(), message, f"end the line with it: {form}")
    steps = int(match.group(1).replace("_", "")) if len(match.group(1)) < 9 else MOST_STEPS + 1
    where = reader.span(match.start(), match.end())
    if not 1 <= steps <= MOST_STEPS:
        mend = f"choose a number from 1 to {MOST_STEPS}"
        raise Mistake("over-limit", where, f"a table of {match.group(1)} steps", mend)
    reader.at = match.end()
    reader.expect_end()
    return (Tabulate(group.span, group.whole.notes, curves, variable, place, low, high, steps),)


def _curves(reader: Reader, form: str) -> tuple[tuple[Node, ...], str, Span, Node, Node]:
    form = f"`{form} {_RANGE_FORM}`"
    curves = [reader.expression()]
    while reader.takes(","):
        curves.append(reader.expression())
    if len(curves) > MOST_CURVES:
        message = f"more than {MOST_CURVES} expressions on one line"
        raise Mistake("over-limit", reader.span(0), message, "use several lines")
    _word(reader, "for", "and the name that runs over a range", form)
    if reader.word() in RESERVED:
        raise meant.reserved(reader, reader.word())
    name, place = reader.name("the name that runs over the range")
    if "." in name:
        raise Mistake("bad-syntax", place, f"`{name}` holds a dot and cannot run over a range", "write `x`")
    _word(reader, "from", "and where the range begins", form)
    low = reader.expression()
    _word(reader, "to", "and where the range ends", form)
    return tuple(curves), name, place, low, reader.expression()


def _word(reader: Reader, word: str, what: str, form: str) -> None:
    if reader.takes_word(word):
        return
    if not reader.done() and reader.word() not in RESERVED and reader.peek() not in (",", "="):
        raise reader.leftover()
    message = f"expected `{word}` {what}, but {reader.found()} stands here"
    raise Mistake("bad-syntax", reader.here(), message, f"write {form}")
