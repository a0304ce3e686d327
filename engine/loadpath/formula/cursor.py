"""A place in the text of one item, and what can be asked and taken there."""

from __future__ import annotations

import re
from dataclasses import dataclass

from loadpath.formula.lines import Item
from loadpath.formula.mistake import Mistake
from loadpath.formula.names import RESERVED, canonical, is_letter, is_name_character
from loadpath.text import Span

_NOTE_MEND = "a note begins with ` -- `, two hyphens with a space on both sides"
OTHER_SIGNS = {
    "**": "a power is typed `^`",
    "==": "one `=` is enough",
    "!=": "the language has no sign for unequal; state the branches the other way round",
    "<>": "the language has no sign for unequal; state the branches the other way round",
    "=<": "write `<=`",
    "=>": "write `>=`",
    ":=": "write `=`",
    "--": f"{_NOTE_MEND}; to subtract a negative value write `a - (-b)`",
    "≤": "write `<=`",
    "≥": "write `>=`",
    "·": "write `*`",
    "⋅": "write `*`",
    "×": "write `*`",
    "÷": "write `/`",
    "−": "write `-`, the hyphen of the keyboard",
    "–": f"write `-`, the hyphen of the keyboard; {_NOTE_MEND}",
    "—": f"{_NOTE_MEND}; a minus is one hyphen",
    "²": "write `^2`",
    "³": "write `^3`",
    "√": "write `sqrt(...)`",
    "°": "write `deg`, `degC` or `degF`",
}
"""Signs of other notations, each with its mend."""
_LAST = re.compile(r"(?:[\w.']|%)+$|\)$")


@dataclass(slots=True)
class Cursor:
    """A place in the text of one item. Positions are indexes into it; spans are of the source."""

    item: Item
    at: int = 0

    # --- looking ---

    @property
    def text(self) -> str:
        """The item's text, notes blanked."""
        return self.item.text

    def peek(self, ahead: int = 0) -> str:
        """The character at the place, "" at the end."""
        index = self.at + ahead
        return self.text[index] if index < len(self.text) else ""

    def at_digit(self) -> bool:
        """True where a number begins."""
        return self.peek().isascii() and self.peek().isdigit()

    def word(self) -> str:
        """The name-like run of characters that comes next, "" where there is none; takes white space only."""
        self.skip()
        end = self.at
        while end < len(self.text) and (
            is_name_character(self.text[end]) and (end > self.at or is_letter(self.text[end]))
        ):
            end += 1
        return self.text[self.at : end]

    def done(self) -> bool:
        """True where only white space is left."""
        self.skip()
        return self.at >= len(self.text)

    def found(self) -> str:
        """What stands here, for messages."""
        if self.done():
            return "the end of the line"
        return f"`{self.word() or self.peek()}`"

    def before(self) -> str:
        """The number, name or `)` that was read last, for mends; "" where it was something else."""
        last = _LAST.search(self.text[max(self.at - 60, 0) : self.at].rstrip())
        return last.group() if last else ""

    def span(self, start: int, end: int | None = None) -> Span:
        """Indexes as a span of the source; where no end is given, up to the blanks before the place."""
        if end is None:
            end = start + len(self.text[start : self.at].rstrip())
        return Span(self.item.start + start, self.item.start + end)

    def here(self, length: int = 1) -> Span:
        """The next characters, or the last one where the text is over."""
        self.skip()
        if self.at >= len(self.text):
            end = len(self.text.rstrip())
            return self.span(max(end - 1, 0), end)
        return self.span(self.at, self.at + length)

    # --- taking ---

    def skip(self) -> None:
        """Past white space."""
        while self.at < len(self.text) and self.text[self.at].isspace():
            self.at += 1

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

    def name(self, what: str = "a name") -> tuple[str, Span]:
        """A name, dots included, in canonical text."""
        word = self.word()
        start = self.at
        if not word:
            help = "a name begins with a letter: `sigma_b`"
            raise Mistake("bad-syntax", self.here(), f"expected {what}, but {self.found()} stands here", help)
        self.at += len(word)
        while self.peek() == "." and is_letter(self.peek(1)):
            self.at += 1
            self.at += len(self.word())
        return canonical(self.text[start : self.at]), self.span(start)

    # --- what cannot stand here ---

    def refuse_other_signs(self) -> None:
        """Signs of other notations are mistakes."""
        for sign, mend in OTHER_SIGNS.items():
            bracket = sign == "=<" and ">^" in self.text[self.at :]
            if self.text.startswith(sign, self.at) and not bracket:
                message = f"`{sign}` is not a sign of the language"
                raise Mistake("bad-syntax", self.here(len(sign)), message, mend)

    def expect_end(self) -> None:
        """Nothing may be left, or the mistake that fits what is."""
        if not self.done():
            raise self.leftover()

    def leftover(self) -> Mistake:
        """The mistake that fits what stands where an operator or the end was expected."""
        self.skip()
        try:
            self.refuse_other_signs()
        except Mistake as mistake:
            return mistake
        character, word = self.peek(), self.word()
        if character == "," and self.peek(1).isdigit() and self.text[self.at - 1 : self.at].isdigit():
            return self._decimal_comma()
        if word in RESERVED:
            return self._stray_word(word)
        if character == "[":
            return self._stray_bracket()
        if word or character == "(" or character.isdigit():
            return self._no_operator(word or character)
        mend = _STRAY.get(character, "an operator, or the end of the formula, is expected here")
        if character == ")":
            return Mistake("unbalanced-bracket", self.here(), "this `)` closes nothing", mend)
        return Mistake("bad-syntax", self.here(), f"{self.found()} cannot stand here", mend)

    def _stray_word(self, word: str) -> Mistake:
        place = self.here(len(word))
        if word == "as":
            return Mistake("bad-syntax", place, "`as` stands outside parentheses", "write `(f_c as psi)`")
        if word == "at":
            message = "`at` looks up one cell of a column and stands directly behind its name"
            mend = 'give the column a name of its own: `A = plates.b*plates.t`, then `A at "web"`'
            return Mistake("bad-syntax", place, message, mend)
        mend = "it is a word of the language; check what stands before it"
        return Mistake("bad-syntax", place, f"`{word}` cannot stand here", mend)

    def _no_operator(self, shown: str) -> Mistake:
        before = self.before()
        mend = f"a product is typed with `*`: `{before}*{shown}`; a unit stands behind a number only"
        if before.isdigit() and (digits := re.match(r"\d{3}(?!\d)", self.text[self.at :])):
            mend = f"groups of digits are joined by `_`: `{before}_{digits.group()}`"
        place = self.here(len(shown))
        return Mistake("implied-multiplication", place, f"no operator stands before `{shown}`", mend)

    def _stray_bracket(self) -> Mistake:
        number, unit = self.before(), self.text[self.at + 1 :].partition("]")[0].strip()
        if number[:1].isdigit() and unit:
            mend = f"a unit stands behind its number without brackets: `{number} {unit}`"
        else:
            mend = (
                "the unit of a result stands after its name: `sigma [MPa] = ...`; a citation stands in a note"
            )
        return Mistake("bad-syntax", self.here(), "`[` cannot stand here", mend)

    def _decimal_comma(self) -> Mistake:
        """`3,5`, or groups as in `200,000`: a point for the comma would then be wrong a thousand times."""
        tail = re.compile(r"(?:,\d+)+(?:\.\d+)?").match(self.text, self.at)
        assert tail is not None
        head = self.before()
        groups = tail.group().partition(".")[0].split(",")[1:]
        if all(len(group) == 3 for group in groups) and not head.startswith("0"):
            grouped = head + tail.group().replace(",", "_")
            mend = f"digits are grouped by `_`: `{grouped}`; a decimal takes a point"
        else:
            mend = f"a decimal takes a point: `{head}{tail.group().replace(',', '.', 1)}`"
        return Mistake("decimal-comma", self.here(), "a comma stands inside a number", mend)


_STRAY = {
    ")": "delete it, or open a parenthesis before it",
    "=": "a formula line holds one `=`; what it comes to is worked out, not typed",
    "<": "a relation begins with `strength:`, `stiffness:`, `stability:`, `limit:` or `valid:`",
    ">": "a relation begins with `strength:`, `stiffness:`, `stability:`, `limit:` or `valid:`",
    ",": "a comma stands only between the arguments of a function, or between names or words",
    '"': "a word of a choice stands only in `when curve = \"b\"`, or where the choice is made",
    "'": "feet and inches are typed `12 ft 6 in`",
}  # fmt: skip
