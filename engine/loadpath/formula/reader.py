"""Reading expressions and relations: one pass over the text, each position an offset into the source.

Written by hand rather than handed to a parser generator: whether `12 kN/m * L` holds a unit, `5/8 in` a
fraction or `<x - a>^1` a bracket depends on what stands around it, and a message says what was meant there.
`grammar.lark` states the same language for readers; a test holds the two together.
"""

from __future__ import annotations

import re
from collections.abc import Callable
from dataclasses import dataclass
from typing import Literal

from loadpath.formula.mistake import Mistake
from loadpath.formula.names import RESERVED, is_letter
from loadpath.formula.quantities import Quantities
from loadpath.formula.tree import (
    As,
    At,
    Binary,
    Bracket,
    Branch,
    Call,
    Logic,
    Name,
    Negative,
    Node,
    Operator,
    Part,
    Quantity,
    Relation,
    Sign,
    Word,
    children,
    span_of,
    walk,
)
from loadpath.text import Span

DEEPEST = 50
"""Brackets within brackets."""
TALLEST_TREE = 120
"""Operations one on top of the other: `1 + 2 + ... + 120`."""
MOST_NODES = 5000

_POWER = re.compile(r"[0-9]{1,2}(?![0-9.])")
_SIGNS: tuple[Sign, ...] = ("<=", ">=", "<", ">", "=")
_SUM, _PRODUCT = 1, 2
_OPERATORS: dict[str, tuple[Operator, int]] = {
    "+": ("+", _SUM),
    "-": ("-", _SUM),
    "*": ("*", _PRODUCT),
    "/": ("/", _PRODUCT),
}


@dataclass(slots=True)
class Reader(Quantities):
    """A cursor that reads expressions, relations and conditions."""

    depth: int = 0

    def expect(self, literal: str, message: str, help: str) -> None:
        """Past the literal, or a mistake at this place."""
        if not self.takes(literal):
            raise Mistake("bad-syntax", self.here(), f"{message}, but {self.found()} stands here", help)

    # --- conditions and relations ---

    def condition(self) -> Node:
        """Relations joined by `and` and `or`; `and` binds tighter."""
        return self._joined("or", lambda: self._joined("and", self._bracketed_relation))

    def _joined(self, word: Literal["and", "or"], read: Callable[[], Node]) -> Node:
        self.skip()
        start = self.at
        operands = [read()]
        while self.takes_word(word):
            operands.append(read())
        return operands[0] if len(operands) == 1 else Logic(word, tuple(operands), self.span(start))

    def _bracketed_relation(self) -> Node:
        """A relation, which may stand in parentheses of its own: `(a < b) and (c < d)`."""
        start, depth = self.at, self.depth
        try:
            return self.relation()
        except Mistake:
            self.at, self.depth = start, depth
            if (inside := self._condition_in_brackets()) is not None:
                return inside
            raise

    def _condition_in_brackets(self) -> Node | None:
        if not self.takes("("):
            return None
        self.enter()
        try:
            inside = self.condition()
        except Mistake:
            return None
        self.depth -= 1
        return inside if self.takes(")") else None

    def relation(self) -> Relation:
        """`a <= b`, or a chain."""
        self.skip()
        start = self.at
        operands, signs, places = [self.operand()], [], []
        while (sign := self.sign()) is not None:
            places.append(self.span(self.at - len(sign)))
            signs.append(sign)
            operands.append(self.operand())
        if not signs:
            raise self._no_relation(operands[0])
        return Relation(tuple(operands), tuple(signs), self.span(start), tuple(places))

    def _no_relation(self, operand: Node) -> Mistake:
        if not self.done() and self.word() not in RESERVED:
            return self.leftover()
        return Mistake(
            "no-relation", span_of(operand), "a relation is expected here, but nothing is compared",
            "compare two values with `<=`, `<`, `>=` or `>`, as in `sigma/f_y <= 1`",
        )  # fmt: skip

    def sign(self) -> Sign | None:
        """Past a relation sign, where one stands here."""
        self.skip()
        self.refuse_other_signs()
        return next((sign for sign in _SIGNS if self.takes(sign)), None)

    def operand(self) -> Node:
        """One side of a relation: a word of a choice, or an expression."""
        self.skip()
        return self.choice_word() if self.peek() == '"' else self.expression()

    def choice_word(self) -> Word:
        """A word in double quotes."""
        self.skip()
        start = self.at
        if self.peek() != '"':
            message = f"expected a word in double quotes, but {self.found()} stands here"
            raise Mistake("bad-syntax", self.here(), message, 'a choice is typed `curve = "b" of "a", "b"`')
        end = self.text.find('"', start + 1)
        if end < 0:
            message = "the word that begins here is not closed"
            raise Mistake("bad-syntax", self.here(), message, 'close it with `"`')
        self.at = end + 1
        return Word(self.text[start + 1 : end], self.span(start))

    # --- expressions, loosest first ---

    def expression(self) -> Node:
        """A sum of products; the whole is held to the size that the engine works."""
        self.skip()
        start, self.operator = self.at, ""
        node = self._binary(_SUM)
        if self.depth == 0:
            _check_size(node, self.span(start))
        return node

    def _binary(self, level: int) -> Node:
        left = self._unary()
        while True:
            self.skip()
            if self.text.startswith(("**", "--"), self.at):
                self.refuse_other_signs()
            operator, precedence = _OPERATORS.get(self.peek(), (None, 0))
            if operator is None or precedence < level:
                return left
            if self.text.startswith("+-", self.at):
                message = "`+-` is kept for tolerances, which this version of loadpath cannot work yet"
                mend = "to add a negative value put it in parentheses: `a + (-b)`"
                raise Mistake("not-available", self.here(2), message, mend)
            place = self.at
            self.at += 1
            self.operator = operator
            right = self._binary(precedence + 1)
            whole = span_of(left).join(span_of(right))
            left = Binary(operator, left, right, whole, self.span(place, place + 1))

    def _unary(self) -> Node:
        self.skip()
        if self.peek() != "-":
            return self._power()
        if self.peek(1) == "-":
            self.refuse_other_signs()
        start = self.at
        self.at += 1
        if self.at_digit() and (absolute := self._absolute_temperature(start)) is not None:
            return absolute
        self.enter()
        operand = self._unary()
        self.depth -= 1
        return Negative(operand, self.span(start))

    def _absolute_temperature(self, start: int) -> Quantity | None:
        """`-20 degC`: the minus belongs to the number."""
        mark, operator = self.at, self.operator
        node = self.number()
        if isinstance(node, Quantity) and len(node.parts) == 1 and node.parts[0].unit in ("degC", "degF"):
            part = node.parts[0]
            return Quantity((Part("-" + part.whole, part.over, part.unit),), self.span(start), node.unit_span)
        self.at, self.operator = mark, operator
        return None

    def _power(self) -> Node:
        base = self._primary()
        self.skip()
        if self.peek() != "^":
            return base
        place = self.at
        self.at += 1
        self.operator = "^"
        self.enter()
        exponent = self._unary()
        self.depth -= 1
        whole = span_of(base).join(span_of(exponent))
        return Binary("^", base, exponent, whole, self.span(place, place + 1))

    def _primary(self) -> Node:
        self.skip()
        character = self.peek()
        if self.at_digit():
            return self.number()
        if is_letter(character):
            return self._name_or_call()
        if character == "(":
            return self._parentheses()
        if character == "<" and self.peek(1) not in ("=", ">"):
            return self._macaulay()
        self.refuse_other_signs()
        raise self._no_value(character)

    def _no_value(self, character: str) -> Mistake:
        if character == '"':
            message = "a word in quotes stands where a number or a name is needed"
            mend = 'a choice is typed `curve = "b" of "a", "b"` and used as `when curve = "b"`'
            return Mistake("unknown-choice", self.here(), message, mend)
        if character == ")":
            message = "this `)` closes nothing, or nothing stands before it"
            return Mistake(
                "unbalanced-bracket", self.here(), message, "delete it, or write what belongs before it"
            )
        if character == ".":
            return Mistake("bad-syntax", self.here(), "a number begins with a digit", "write `0.5`, not `.5`")
        message = f"expected a number, a name or `(`, but {self.found()} stands here"
        return Mistake("bad-syntax", self.here(), message, "write the value or the formula that belongs here")

    def enter(self) -> None:
        """One level deeper, or a mistake."""
        self.depth += 1
        if self.depth > DEEPEST:
            message = f"more than {DEEPEST} brackets within brackets"
            raise Mistake("over-limit", self.here(), message, "split the formula into several lines")

    # --- what stands in brackets ---

    def _parentheses(self) -> Node:
        start = self.at
        inner = self._inside(start)
        if self.word() != "as":
            self._close(start, ")")
            self.depth -= 1
            return inner
        self.takes_word("as")
        self.skip()
        unit, place = self.unit_text()
        self._close(start, ")")
        self.depth -= 1
        return As(inner, unit, self.span(start), place)

    def _inside(self, start: int) -> Node:
        """The sum behind an opening bracket; the depth is given back by whoever closes it."""
        self.at = start + 1
        self.operator = ""
        self.enter()
        return self._binary(_SUM)

    def _close(self, start: int, closing: str) -> None:
        if self.takes(closing):
            return
        if not self.done():
            raise self.leftover()
        message = f"this `{self.text[start]}` is never closed"
        raise Mistake(
            "unbalanced-bracket", self.span(start, start + 1), message, f"close it with `{closing}`"
        )

    def _macaulay(self) -> Bracket:
        start = self.at
        inner = self._inside(start)
        self._close(start, ">")
        self.depth -= 1
        mend = "a typed power of 0, 1, 2, ... stands behind it: `<x - a>^1`"
        if not self.takes("^"):
            raise Mistake("bad-syntax", self.span(start), "a Macaulay bracket takes its power", mend)
        self.skip()
        power = _POWER.match(self.text, self.at)
        if power is None:
            message = "the power of a Macaulay bracket is a whole number"
            raise Mistake("bad-syntax", self.here(), message, mend)
        self.at = power.end()
        return Bracket(inner, int(power.group()), self.span(start))

    def _name_or_call(self) -> Node:
        start = self.at
        word = self.word()
        if word in RESERVED:
            message = f"`{word}` is a word of the language and stands where a value is needed"
            raise Mistake(
                "reserved-word", self.here(len(word)), message, f"choose another name, such as `{word}_1`"
            )
        name, place = self.name()
        if self.peek() != "(":
            return self._cell(Name(name, place))
        opening = self.at
        self.at += 1
        self.enter()
        arguments = self._arguments(opening)
        self.depth -= 1
        return Call(name, arguments, self.span(start), place)

    def _cell(self, column: Name) -> Node:
        """The column itself, or one cell of it: `plates.b at "top flange"`."""
        mark = self.at
        if not self.takes_word("at"):
            self.at = mark
            return column
        self.skip()
        if self.peek() == '"':
            row: Node = self.choice_word()
        elif self.word() and self.word() not in RESERVED:
            row = Name(*self.name("the name of a row"))
            if self.word() and self.word() not in RESERVED:
                label = f"{row.name} {self.word()}"
                message = "a label of more than one word stands in quotes"
                raise Mistake("bad-syntax", row.span, message, f'write `{column.name} at "{label}"`')
        else:
            message = f"`at` is followed by the label of a row, but {self.found()} stands here"
            mend = f'write `{column.name} at "label"`, or the name of a choice'
            raise Mistake("bad-syntax", self.here(), message, mend)
        return At(column, row, column.span.join(span_of(row)))

    def _arguments(self, opening: int) -> tuple[Node, ...]:
        if self.takes(")"):
            return ()
        arguments = []
        while True:
            self.operator = ""
            arguments.append(self._binary(_SUM))
            if not self.takes(","):
                break
        self._close(opening, ")")
        return tuple(arguments)


def _check_size(node: Node, span: Span) -> None:
    mend = "split it into several lines"
    if _is_taller(node):
        message = f"a formula with more than {TALLEST_TREE} operations one on top of the other"
        raise Mistake("over-limit", span, message, mend)
    if sum(1 for _ in walk(node)) > MOST_NODES:
        raise Mistake("over-limit", span, f"a formula with more than {MOST_NODES} parts", mend)


def _is_taller(node: Node) -> bool:
    """True for a tree with more levels than the engine works; found without recursion."""
    layer: list[Node | Branch] = [node]
    for _ in range(TALLEST_TREE):
        layer = [child for parent in layer for child in children(parent)]
        if not layer:
            return False
    return True
