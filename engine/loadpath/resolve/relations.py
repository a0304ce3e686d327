"""The dimension check of relations, of conditions, and of the branches of `cases`."""

from __future__ import annotations

from typing import TYPE_CHECKING

from loadpath.formula.canonical import text
from loadpath.formula.mistake import Mistake
from loadpath.formula.tree import Cases, Logic, Node, Relation, Word, span_of
from loadpath.resolve.model import Type
from loadpath.text import Span

if TYPE_CHECKING:
    from loadpath.resolve.dimensions import Checker, Parameters


def check_relation(checker: Checker, node: Node, parameters: Parameters | None) -> None:
    """Checks a relation, a chain, or several joined by `and`, `or`."""
    if isinstance(node, Logic):
        for operand in node.operands:
            check_relation(checker, operand, parameters)
        return
    assert isinstance(node, Relation)
    types = [
        None if isinstance(operand, Word) else checker.type_of(operand, parameters)
        for operand in node.operands
    ]
    pairs = zip(node.operands, node.operands[1:], types, types[1:], node.signs, node.at, strict=False)
    for a, b, left, right, sign, at in pairs:
        if left is None or right is None or left.words is not None or right.words is not None:
            _words(a, b, left, right, sign, at)
        else:
            _numbers(checker, a, b, left, right, sign, at)
    _ends(checker, node, types)


def _numbers(checker: Checker, a: Node, b: Node, left: Type, right: Type, sign: str, at: Span) -> None:
    common = checker.same(left, right, at, f"`{sign}` compares", a, b)
    if sign == "=" and not common.unknown and not common.dimension.is_plain:
        message = "`=` in a condition is for whole numbers and choices"
        raise Mistake("bad-syntax", at, message, "compare quantities with `<=` or `>=`")


def _ends(checker: Checker, node: Relation, types: list[Type | None]) -> None:
    """In `6 mm <= 0 <= 40 kN` each pair fits, but the ends do not."""
    fixed = [
        (operand, found)
        for operand, found in zip(node.operands, types, strict=True)
        if found is not None and found.words is None and not found.zero and not found.unknown
    ]
    if len(fixed) > 1:
        (a, left), (b, right) = fixed[0], fixed[-1]
        checker.same(left, right, node.at[-1], f"`{node.signs[-1]}` compares", a, b)


def _words(a: Node, b: Node, left: Type | None, right: Type | None, sign: str, at: Span) -> None:
    word, choice, name = (b, left, a) if right is None else (a, right, b)
    if not isinstance(word, Word) or choice is None:
        message = "a choice is compared with one of its words"
        raise Mistake("unknown-choice", at, message, 'write `when curve = "b"`')
    if choice.unknown:
        return
    if choice.words is None:
        message = f"`{text(name)}` is a number and is compared with a word"
        raise Mistake("unknown-choice", span_of(word), message, "compare it with a number, without quotes")
    if sign != "=":
        raise Mistake("unknown-choice", at, f"`{sign}` cannot compare words", "use `=`")
    if word.text not in choice.words:
        message = f'"{word.text}" is not one of the words of `{text(name)}`'
        listed = ", ".join(f'"{option}"' for option in choice.words)
        raise Mistake("unknown-choice", word.span, message, f"it is one of {listed}")


def type_of_cases(checker: Checker, node: Cases, parameters: Parameters | None) -> Type:
    """All branches have one dimension."""
    common: Type | None = None
    first = node.branches[0].value
    for branch in node.branches:
        if branch.condition is not None:
            check_relation(checker, branch.condition, parameters)
        found = checker.number(branch.value, parameters)
        if common is None:
            common = found
        else:
            common = checker.same(
                common, found, span_of(branch.value), "the branches give", first, branch.value
            )
    assert common is not None
    return common
