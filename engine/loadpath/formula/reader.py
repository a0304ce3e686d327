"""Reading expressions: one pass over the text, each position an offset into the source.

Written by hand rather than handed to a parser generator: whether `12 kN/m * L` holds a unit, `5/8 in` a fraction or
`<x - a>^1` a bracket depends on what stands around it, and every message below says what was meant at that place.
`grammar.lark` states the same language for readers; a test holds the two together.
"""

from __future__ import annotations

import re
from dataclasses import dataclass

from loadpath.formula.lines import Item
from loadpath.formula.names import RESERVED, canonical, is_letter, is_name_character
from loadpath.formula.tree import (
    As,
    Binary,
    Bracket,
    Call,
    Logic,
    Name,
    Negative,
    Node,
    Number,
    Operator,
    Part,
    Quantity,
    Relation,
    Sign,
    Word,
    span_of,
    walk,
)
from loadpath.text import Span

DEEPEST = 100
"""Brackets within brackets."""
LONGEST_NUMBER = 60
LARGEST_EXPONENT = 300
TALLEST_TREE = 200
MOST_NODES = 5000

_NUMBER = re.compile(r"\d[\d_]*(?:\.\d[\d_]*)?(?:[eE][+-]?\d+)?")
_WHOLE = re.compile(r"\d[\d_]*")
_FRACTION = re.compile(r"(\d[\d_]*)/(\d[\d_]*)(?![\d.])")
_ONE_OVER = re.compile(r"1/(?=[^\W\d]|\()")
_SIGNS: tuple[Sign, ...] = ("<=", ">=", "<", ">", "=")
_SUM, _PRODUCT = 1, 2
_PRECEDENCE = {"+": _SUM, "-": _SUM, "*": _PRODUCT, "/": _PRODUCT}
_OTHER_SIGNS = {
    "**": "a power is typed `^`",
    "==": "one `=` is enough",
    "!=": "the language has no sign for unequal; state the branches the other way round",
    "<>": "the language has no sign for unequal",
    "=<": "write `<=`",
    "=>": "write `>=`",
    ":=": "write `=`",
    "≤": "write `<=`",
    "≥": "write `>=`",
    "·": "write `*`",
    "⋅": "write `*`",
    "×": "write `*`",
    "÷": "write `/`",
    "−": "write `-`, the hyphen of the keyboard",
    "–": "write `-`, the hyphen of the keyboard",
    "²": "write `^2`",
    "³": "write `^3`",
    "√": "write `sqrt(...)`",
    "°": "write `deg`, `degC` or `degF`",
}


class Mistake(Exception):
    """What stopped the reading of a statement; becomes a finding."""

    def __init__(self, slug: str, span: Span, message: str, help: str = "", label: str = "") -> None:
        super().__init__(message)
        self.slug, self.span, self.message, self.help, self.label = slug, span, message, help, label


@dataclass(slots=True)
class Reader:
    """A place in the text of one item, and the rules for what may stand there."""

    item: Item
    at: int = 0
    """Index into `item.text`."""
    depth: int = 0
    before: str = ""
    """The operator just read, "" otherwise: decides whether `1/2 in` may be one number."""

    # --- looking at the text ---

    @property
    def text(self) -> str:
        return self.item.text

    def skip(self) -> None:
        """Past white space."""
        while self.at < len(self.text) and self.text[self.at].isspace():
            self.at += 1

    def peek(self, ahead: int = 0) -> str:
        """The character at the place, "" at the end."""
        index = self.at + ahead
        return self.text[index] if index < len(self.text) else ""

    def done(self) -> bool:
        """True where only white space is left."""
        self.skip()
        return self.at >= len(self.text)

    def span(self, start: int, end: int | None = None) -> Span:
        """Indexes as a span of the source."""
        return Span(self.item.start + start, self.item.start + (self.at if end is None else end))

    def here(self, length: int = 1) -> Span:
        """The next characters, or the last one where the text is over."""
        self.skip()
        if self.at >= len(self.text):
            end = len(self.text.rstrip())
            return self.span(max(end - 1, 0), end)
        return self.span(self.at, self.at + length)

    def found(self) -> str:
        """What stands here, for messages."""
        if self.done():
            return "the end of the line"
        word = self.word()
        return f"`{word or self.peek()}`"

    def word(self) -> str:
        """The name-like run of characters at the place, "" where there is none; doesn't move."""
        self.skip()
        end = self.at
        while end < len(self.text) and (
            is_name_character(self.text[end]) and (end > self.at or is_letter(self.text[end]))
        ):
            end += 1
        return self.text[self.at : end]

    def takes(self, literal: str) -> bool:
        """Moves past the literal where it stands here."""
        self.skip()
        if self.text.startswith(literal, self.at):
            self.at += len(literal)
            return True
        return False

    def takes_word(self, word: str) -> bool:
        """Moves past a whole word."""
        if self.word() == word:
            self.at += len(word)
            return True
        return False

    def expect(self, literal: str, message: str, help: str = "") -> None:
        """Past the literal, or a mistake at this place."""
        if not self.takes(literal):
            raise Mistake("bad-syntax", self.here(), f"{message}, but {self.found()} stands here", help)

    def expect_end(self) -> None:
        """Nothing may be left, or the mistake that fits what is."""
        if not self.done():
            raise self.leftover()

    # --- names ---

    def name(self, what: str = "a name") -> tuple[str, Span]:
        """A name, dots included, in canonical text."""
        word = self.word()
        start = self.at
        if not word:
            raise Mistake("bad-syntax", self.here(), f"expected {what}, but {self.found()} stands here")
        self.at += len(word)
        while self.peek() == "." and is_letter(self.peek(1)):
            self.at += 1
            self.at += len(self.word())
        return canonical(self.text[start : self.at]), self.span(start)

    # --- expressions, loosest first ---

    def condition(self) -> Node:
        """Relations joined by `and` and `or`; `and` binds tighter."""
        return self._joined("or", lambda: self._joined("and", self._bracketed_relation))

    def _joined(self, word: str, read) -> Node:  # type: ignore[no-untyped-def]
        start = self.at
        operands = [read()]
        while self.takes_word(word):
            operands.append(read())
        if len(operands) == 1:
            return operands[0]  # type: ignore[no-any-return]
        return Logic(word, tuple(operands), self.span(start))  # type: ignore[arg-type]

    def _bracketed_relation(self) -> Node:
        """A relation, which may stand in parentheses of its own: `(a < b) and (c < d)`."""
        start = self.at
        try:
            return self.relation()
        except Mistake as mistake:
            self.at = start
            if self.takes("("):
                try:
                    with_brackets = self.condition()
                    if self.takes(")"):
                        return with_brackets
                except Mistake:
                    pass
            raise mistake from None

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
            raise Mistake(
                "no-relation", self.here(), f"expected a relation (`<=`, `<`, `>=`, `>`), but {self.found()} stands here"
            )
        return Relation(tuple(operands), tuple(signs), self.span(start), tuple(places))

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
        end = self.text.find('"', start + 1)
        if end < 0:
            raise Mistake("unbalanced-bracket", self.here(), 'the word that begins here has no closing `"`')
        self.at = end + 1
        return Word(self.text[start + 1 : end], self.span(start))

    def expression(self) -> Node:
        """A sum of products; the whole is held to the size that the engine works."""
        self.skip()
        start = self.at
        node = self._binary(_SUM)
        if self.depth == 0:
            _check_size(node, self.span(start))
        return node

    def _binary(self, level: int) -> Node:
        left = self._unary()
        while True:
            self.skip()
            operator = self.peek()
            if operator == "*" and self.peek(1) == "*":
                self.refuse_other_signs()
            if _PRECEDENCE.get(operator, 0) < level:
                return left
            if operator == "+" and self.peek(1) == "-":
                raise Mistake(
                    "not-available", self.here(2), "`+-` is kept for tolerances, which this version cannot work yet",
                    "to add a negative value put it in parentheses: `a + (-b)`",
                )  # fmt: skip
            place = self.at
            self.at += 1
            self.before = operator
            right = self._binary(_PRECEDENCE[operator] + 1)
            kind: Operator = operator  # type: ignore[assignment]
            left = Binary(kind, left, right, span_of(left).join(span_of(right)), self.span(place, place + 1))

    def _unary(self) -> Node:
        self.skip()
        if self.peek() != "-":
            return self._power()
        start = self.at
        self.at += 1
        if self.peek().isdigit() and (absolute := self._absolute_temperature(start)) is not None:
            return absolute
        self.enter()
        operand = self._unary()
        self.depth -= 1
        return Negative(operand, self.span(start))

    def _absolute_temperature(self, start: int) -> Quantity | None:
        """`-20 degC`: the minus belongs to the number."""
        mark = self.at
        node = self._number()
        if isinstance(node, Quantity) and len(node.parts) == 1 and node.parts[0].unit in ("degC", "degF"):
            part = node.parts[0]
            return Quantity((Part("-" + part.whole, part.over, part.unit),), self.span(start), node.unit_span)
        self.at = mark
        return None

    def _power(self) -> Node:
        base = self._primary()
        self.skip()
        if self.peek() != "^":
            return base
        place = self.at
        self.at += 1
        self.before = "^"
        self.enter()
        exponent = self._unary()
        self.depth -= 1
        return Binary("^", base, exponent, span_of(base).join(span_of(exponent)), self.span(place, place + 1))

    def _primary(self) -> Node:
        self.skip()
        character = self.peek()
        if character.isascii() and character.isdigit():
            return self._number()
        if is_letter(character):
            return self._name_or_call()
        if character == "(":
            return self._parentheses()
        if character == "<":
            return self._macaulay()
        self.refuse_other_signs()
        if character == '"':
            raise Mistake(
                "unknown-choice", self.here(), "a word in quotes stands where a number or a name is needed",
                "a choice is typed `curve = \"b\" of \"a\", \"b\"` and used as `when curve = \"b\"`",
            )  # fmt: skip
        if character == ")":
            raise Mistake("unbalanced-bracket", self.here(), "this `)` closes nothing, or nothing stands before it")
        if character == ".":
            raise Mistake("bad-syntax", self.here(), "a number begins with a digit", "write `0.5`, not `.5`")
        raise Mistake("bad-syntax", self.here(), f"expected a number, a name or `(`, but {self.found()} stands here")

    def enter(self) -> None:
        """One level deeper, or a mistake."""
        self.depth += 1
        if self.depth > DEEPEST:
            raise Mistake("over-limit", self.here(), f"more than {DEEPEST} brackets within brackets")

    def _parentheses(self) -> Node:
        start = self.at
        self.at += 1
        self.before = ""
        self.enter()
        inner = self._binary(_SUM)
        if self.word() == "as":
            inner = self._as(inner, start)
        self._close(start, ")")
        if isinstance(inner, As):
            inner = As(inner.operand, inner.unit, self.span(start), inner.unit_span)
        self.depth -= 1
        return inner

    def _as(self, operand: Node, start: int) -> As:
        self.takes_word("as")
        self.skip()
        unit, place = self.unit_text()
        return As(operand, unit, self.span(start), place)

    def _close(self, start: int, closing: str) -> None:
        opening = self.text[start]
        if self.takes(closing):
            return
        if self.done():
            raise Mistake(
                "unbalanced-bracket", self.span(start, start + 1), f"this `{opening}` is never closed",
                f"close it with `{closing}`",
            )  # fmt: skip
        raise self.leftover()

    def _macaulay(self) -> Bracket:
        start = self.at
        self.at += 1
        self.before = ""
        self.enter()
        inner = self._binary(_SUM)
        self._close(start, ">")
        self.depth -= 1
        if not self.takes("^"):
            raise Mistake(
                "bad-syntax", self.span(start), "a Macaulay bracket takes its power: `<x - a>^1`",
                "a power of 0, 1, 2, ... is typed after `>`",
            )  # fmt: skip
        self.skip()
        digits = _WHOLE.match(self.text, self.at)
        if digits is None or len(digits.group()) > 2:
            raise Mistake("bad-syntax", self.here(), "the power of a Macaulay bracket is a typed whole number: 0, 1, 2, ...")
        self.at = digits.end()
        return Bracket(inner, int(digits.group()), self.span(start))

    def _name_or_call(self) -> Node:
        start = self.at
        word = self.word()
        if word in RESERVED:
            raise Mistake(
                "reserved-word", self.here(len(word)), f"`{word}` is a word of the language and stands where a value is needed",
                f"choose another name, such as `{word}_1`",
            )  # fmt: skip
        name, place = self.name()
        if self.peek() != "(":
            return Name(name, place)
        opening = self.at
        self.at += 1
        self.enter()
        arguments = self._arguments(opening)
        self.depth -= 1
        return Call(name, arguments, self.span(start), place)

    def _arguments(self, opening: int) -> tuple[Node, ...]:
        if self.takes(")"):
            return ()
        arguments = []
        while True:
            self.before = ""
            arguments.append(self._binary(_SUM))
            if not self.takes(","):
                break
        self._close(opening, ")")
        return tuple(arguments)

    # --- numbers and units ---

    def _number(self) -> Node:
        start = self.at
        before, self.before = self.before, ""
        first = self._part(before)
        if isinstance(first, Number):
            return first
        part, place = first
        parts = [part]
        if part.unit == "ft" and part.over is None:
            mark = self.at
            self.skip()
            second = self._part("") if self.peek().isdigit() else None
            if isinstance(second, tuple) and second[0].unit == "in":
                parts.append(second[0])
                place = second[1]
            else:
                self.at = mark
        return Quantity(tuple(parts), self.span(start), place)

    def _part(self, before: str) -> Number | tuple[Part, Span]:
        """A plain number, or a number with the unit that follows it."""
        start = self.at
        fraction = _FRACTION.match(self.text, start)
        if fraction is not None and self._unit_follows(fraction.end()):
            if before in ("/", "^"):
                raise self._two_readings(fraction)
            self._refuse_hyphenated(start, fraction)
            self.at = fraction.end()
            unit, place = self._unit_after_space()
            return Part("", (fraction.group(1), fraction.group(2)), unit), place
        text = self._number_text()
        mark = self.at
        mixed = _FRACTION.match(self.text, self._after_spaces())
        if mixed is not None and _WHOLE.fullmatch(text) and mixed.start() > mark and self._unit_follows(mixed.end()):
            self.at = mixed.end()
            unit, place = self._unit_after_space()
            return Part(text, (mixed.group(1), mixed.group(2)), unit), place
        if self._unit_follows(mark):
            unit, place = self._unit_after_space()
            return Part(text, None, unit), place
        return Number(text, self.span(start))

    def _after_spaces(self) -> int:
        index = self.at
        while index < len(self.text) and self.text[index] == " ":
            index += 1
        return index

    def _number_text(self) -> str:
        start = self.at
        match = _NUMBER.match(self.text, start)
        assert match is not None
        text = match.group()
        self.at = match.end()
        if len(text) > LONGEST_NUMBER:
            raise Mistake("over-limit", self.span(start), f"a number of more than {LONGEST_NUMBER} characters")
        exponent = text.lower().partition("e")[2]
        if exponent and abs(int(exponent)) > LARGEST_EXPONENT:
            raise Mistake("over-limit", self.span(start), f"an exponent beyond {LARGEST_EXPONENT}")
        follows = self.peek()
        if is_letter(follows) or follows in ("%", "°"):
            rest = self.word() or follows
            raise Mistake(
                "implied-multiplication", self.span(self.at, self.at + len(rest)),
                f"`{rest}` stands directly after the number {text}",
                f"write `{text} {rest}` for a quantity with a unit, `{text}*{rest}` for a product",
            )  # fmt: skip
        if follows == "." and self.peek(1) in ("", " ", ")", "*", "/", "+", "-"):
            raise Mistake("bad-syntax", self.here(), "a decimal point takes a digit after it", f"write `{text}` or `{text}.0`")
        return text

    def _unit_follows(self, index: int) -> bool:
        """True where white space and then a unit stand at the index."""
        if index >= len(self.text) or self.text[index] != " ":
            return False
        while index < len(self.text) and self.text[index] == " ":
            index += 1
        if self.text.startswith("%", index) or _ONE_OVER.match(self.text, index):
            return True
        end = index
        while end < len(self.text) and is_name_character(self.text[end]):
            end += 1
        word = self.text[index:end]
        return bool(word) and (is_letter(word[0]) or word[0] == "µ") and word not in RESERVED

    def _unit_after_space(self) -> tuple[str, Span]:
        self.skip()
        return self.unit_text()

    def unit_text(self) -> tuple[str, Span]:
        """A unit: up to a space, a comma, a relation sign, a bracket, or a parenthesis not opened within it."""
        start, opened = self.at, 0
        while self.at < len(self.text):
            character = self.text[self.at]
            if character.isspace() or character in ',<>=[]{}"':
                break
            if character == "(":
                if self.at > start and self.text[self.at - 1] not in "*/(":
                    break
                opened += 1
            elif character == ")":
                if opened == 0:
                    break
                opened -= 1
            elif character == "+" or (character == "-" and self.text[self.at - 1] != "^"):
                raise Mistake(
                    "bad-unit", self.span(start, self.at + 1), f"the unit runs into a `{character}`",
                    f"put spaces round the `{character}`; a product of units is typed `N*m`",
                )  # fmt: skip
            self.at += 1
        text = self.text[start : self.at]
        if not text:
            raise Mistake("bad-unit", self.here(), f"expected a unit, but {self.found()} stands here")
        return text, self.span(start)

    def bracketed_unit(self) -> tuple[str, Span]:
        """What stands in `[...]`; the place is inside the brackets."""
        self.skip()
        opening = self.at
        self.at += 1
        closing = self.text.find("]", self.at)
        if closing < 0:
            raise Mistake("unbalanced-bracket", self.span(opening, opening + 1), "this `[` is never closed", "close it with `]`")
        inside = self.text[self.at : closing]
        lead = len(inside) - len(inside.lstrip())
        place = self.span(self.at + lead, self.at + lead + max(len(inside.strip()), 1))
        self.at = closing + 1
        if not inside.strip():
            raise Mistake("bad-unit", place, "no unit stands in the brackets", "write `[1]` for a plain number")
        return inside.strip(), place

    def _two_readings(self, fraction: re.Match[str]) -> Mistake:
        start = fraction.start()
        self.at = fraction.end()
        unit, _ = self._unit_after_space()
        typed = f"{fraction.group()} {unit}"
        return Mistake(
            "mixed-number", self.span(start, fraction.end()),
            f"`{typed}` after `{self.text[:start].rstrip()[-1:]}` can be read in two ways",
            f"put it in parentheses: `({typed})`",
        )  # fmt: skip

    def _refuse_hyphenated(self, start: int, fraction: re.Match[str]) -> None:
        """`1-1/2 in` reads as one less a half inch; the trade means `1 1/2 in`."""
        match = re.search(r"(\d+)-$", self.text[:start])
        if match is None:
            return
        whole = match.group(1)
        self.at = fraction.end()
        unit, _ = self._unit_after_space()
        raise Mistake(
            "mixed-number", self.span(match.start(), fraction.end()),
            f"`{whole}-{fraction.group()} {unit}` would subtract",
            f"write `{whole} {fraction.group()} {unit}` for the mixed number, spaces round the `-` for a difference",
        )  # fmt: skip

    # --- what cannot stand here ---

    def refuse_other_signs(self) -> None:
        """Signs of other notations, each with its mend."""
        for sign, mend in _OTHER_SIGNS.items():
            if self.text.startswith(sign, self.at) and not (sign == "<>" and self.text[self.at : self.at + 3] == "<>^"):
                raise Mistake("bad-syntax", self.here(len(sign)), f"`{sign}` is not a sign of the language", mend)

    def leftover(self) -> Mistake:
        """The mistake that fits what stands where an operator or the end was expected."""
        self.skip()
        character, word = self.peek(), self.word()
        try:
            self.refuse_other_signs()
        except Mistake as mistake:
            return mistake
        if character == "," and self.peek(1).isdigit() and self.text[self.at - 1 : self.at].isdigit():
            return Mistake("decimal-comma", self.here(), "a comma stands inside a number", "decimals use a point: `3.5`; groups use `_`: `12_000`")
        if word == "as":
            return Mistake("bad-syntax", self.here(2), "`as` stands outside parentheses", "write `(f_c as psi)`")
        if word == "at":
            return Mistake("not-available", self.here(2), "`at` looks a row up in a table, which this version cannot do yet")
        if word in RESERVED:
            return Mistake("bad-syntax", self.here(len(word)), f"`{word}` cannot stand here")
        if character == ")":
            return Mistake("unbalanced-bracket", self.here(), "this `)` closes nothing")
        if word or character in ('(', '"') or character.isdigit():
            shown = word or character
            return Mistake(
                "implied-multiplication", self.here(len(shown)), f"no operator stands before `{shown}`",
                "a product is typed with `*`; a unit follows its number after one space",
            )  # fmt: skip
        if character in "<>=":
            return Mistake("bad-syntax", self.here(), f"`{character}` cannot stand here", "a formula line holds one `=`; a relation begins with `strength:`, `stiffness:`, `stability:` or `limit:`")
        if character == "[":
            return Mistake("bad-syntax", self.here(), "`[` cannot stand here", "the unit of a result stands after its name: `sigma [MPa] = ...`; a citation stands in a note after ` -- `")
        return Mistake("bad-syntax", self.here(), f"{self.found()} cannot stand here")


def _check_size(node: Node, span: Span) -> None:
    count = sum(1 for _ in _layers(node))
    if count > TALLEST_TREE:
        raise Mistake("over-limit", span, f"a formula with more than {TALLEST_TREE} operations one on top of the other", "split it into several lines")
    if sum(1 for _ in walk(node)) > MOST_NODES:
        raise Mistake("over-limit", span, f"a formula with more than {MOST_NODES} parts", "split it into several lines")


def _layers(node: Node):  # type: ignore[no-untyped-def]
    """One item for each level of the tree, without recursion; stops soon after the limit."""
    from loadpath.formula.tree import children

    layer, seen = [node], 0
    while layer and seen <= TALLEST_TREE:
        yield layer
        seen += 1
        layer = [child for parent in layer for child in children(parent)]  # type: ignore[misc]
