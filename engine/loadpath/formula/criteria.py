"""Reading what is judged: criteria, validities and cross-checks."""

from __future__ import annotations

from loadpath.formula import meant
from loadpath.formula.lines import Group
from loadpath.formula.mistake import Mistake
from loadpath.formula.names import RESERVED
from loadpath.formula.reader import Reader
from loadpath.formula.statements import Check, Criterion, Validity
from loadpath.formula.tree import Logic, Node, Relation, walk
from loadpath.text import Span


def read_criterion(group: Group, reader: Reader) -> Criterion:
    """`strength bending: sigma <= f_y`."""
    match = meant.CRITERION.match(group.whole.text)
    assert match is not None
    kind = meant.KIND[match.group(1)]
    place = reader.span(match.start(1), match.end(1))
    reader.at = match.end()
    _refuse_empty(reader, place, f"`{kind}: a <= b`")
    relation = _either(reader)
    for node in walk(relation):
        if isinstance(node, Relation):
            _refuse_equals(node)
            _refuse_two_ways(node)
    return Criterion(group.span, group.whole.notes, kind, meant.own_name(match), relation, place)


def _refuse_empty(reader: Reader, place: Span, form: str) -> None:
    if reader.done():
        raise Mistake("no-relation", place, "nothing stands after the colon", f"write {form}")


def _either(reader: Reader) -> Node:
    """A relation, a chain, or two of them joined by `or`."""
    reader.skip()
    start = reader.at
    first = reader.relation()
    if not reader.takes_word("or"):
        if reader.word() == "and":
            message = "a criterion holds one relation, a chain, or two joined by `or`"
            raise Mistake("bad-syntax", reader.here(3), message, "write two criteria")
        reader.expect_end()
        return first
    second = reader.relation()
    if reader.word() == "or":
        message = "more than two relations are joined by `or`"
        raise Mistake(
            "bad-syntax", reader.here(2), message, "an excluded band has two sides; write two criteria"
        )
    reader.expect_end()
    return Logic("or", (first, second), reader.span(start))


def _refuse_equals(relation: Relation) -> None:
    for sign, place in zip(relation.signs, relation.at, strict=True):
        if sign == "=":
            raise Mistake(
                "no-relation", place, "a criterion needs `<=`, `<`, `>=` or `>`, not `=`",
                "write `<=` or `>=`; two ways of working are compared by `check: a = b within 0.1 %`",
            )  # fmt: skip


def _refuse_two_ways(relation: Relation) -> None:
    if len({sign[0] for sign in relation.signs}) > 1:
        place = relation.at[1]
        raise Mistake("bad-syntax", place, "the signs of a chain point one way", "write `a <= x <= b`")
    if len(relation.signs) > 2:
        message = "a chain holds one value between two bounds"
        raise Mistake("bad-syntax", relation.at[2], message, "write `a <= x <= b`, and a second criterion")


def read_validity(group: Group, reader: Reader) -> Validity:
    """`valid: 3 <= t/d <= 12 for chi`."""
    place = _keyword(reader)
    form = "`valid: 3 <= t/d <= 12 for chi`"
    _refuse_empty(reader, place, form)
    relation = reader.condition()
    if not reader.takes_word("for"):
        raise _no_ending(
            reader, place, "a validity says which names it is for", f"end it with `for` and names: {form}"
        )
    names = [reader.name()]
    while reader.takes(","):
        names.append(reader.name())
    reader.expect_end()
    return Validity(group.span, group.whole.notes, relation, tuple(names))


def read_check(group: Group, reader: Reader) -> Check:
    """`check: a = b within 0.1 %`."""
    place = _keyword(reader)
    form = "`check: a = b within 0.1 %`"
    _refuse_empty(reader, place, form)
    relation = reader.relation()
    if relation.signs != ("=",):
        message = "a cross-check compares with one `=`"
        raise Mistake(
            "no-relation", relation.at[0], message, f"write {form}; a requirement begins with `limit:`"
        )
    if not reader.takes_word("within"):
        message = "a cross-check says within what the two must agree"
        raise _no_ending(reader, place, message, f"end it with a tolerance: {form}")
    tolerance = reader.expression()
    reader.expect_end()
    return Check(group.span, group.whole.notes, relation, tolerance)


def _keyword(reader: Reader) -> Span:
    """Past the word and its colon; the word's place."""
    place = reader.here(len(reader.word()))
    reader.at = reader.text.index(":") + 1
    return place


def _no_ending(reader: Reader, keyword: Span, message: str, mend: str) -> Mistake:
    if not reader.done() and reader.word() not in RESERVED:
        return reader.leftover()
    return Mistake("bad-syntax", keyword if reader.done() else reader.here(), message, mend)
