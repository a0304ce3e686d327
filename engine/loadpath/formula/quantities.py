"""Reading numbers, fractions and units: `12.5 kN/m`, `2 1/2 in`, `12 ft 6 1/2 in`, `0.24 J/(kg*K)`."""

from __future__ import annotations

import re
from dataclasses import dataclass

from loadpath.formula.cursor import Cursor
from loadpath.formula.mistake import Mistake
from loadpath.formula.names import RESERVED, is_letter, is_name_character
from loadpath.formula.tree import Number, Part, Quantity
from loadpath.text import Span

LONGEST_NUMBER = 60
LARGEST_EXPONENT = 300
LONGEST_UNIT = 60

_NUMBER = re.compile(r"[0-9][0-9_]*(?:\.[0-9][0-9_]*)?(?:[eE][+-]?[0-9]+)?")
_WHOLE = re.compile(r"[0-9][0-9_]*")
_FRACTION = re.compile(r"([0-9][0-9_]*)/([0-9][0-9_]*)(?![0-9.])")
_ONE_OVER = re.compile(r"1/(?=[^\W\d]|\()")
_VALUE_BEHIND = re.compile(r"[0-9]|[^\W\d][\w']*\(")
"""Behind the sign of a product or a quotient in a unit: a number, or a call."""
_IN_BRACKETS = re.compile(r"\(([^()]*)(\))?")
_MIXED_HYPHEN = re.compile(r"(?<![\w.])([0-9]+)-$")


@dataclass(slots=True)
class Quantities(Cursor):
    """A cursor that reads numbers with their units."""

    operator: str = ""
    """The operator just read, "" otherwise: decides whether `1/2 in` may be one number."""

    def number(self) -> Number | Quantity:
        """A plain number or a quantity, feet and inches in two parts."""
        start = self.at
        operator, self.operator = self.operator, ""
        first = self._part(operator)
        if isinstance(first, Number):
            return first
        part, place = first
        if part.unit == "ft" and part.over is None and (second := self._inches()) is not None:
            return Quantity((part, second[0]), self.span(start), second[1])
        return Quantity((part,), self.span(start), place)

    def _inches(self) -> tuple[Part, Span] | None:
        """The inches behind a number of feet."""
        mark = self.at
        self.skip()
        if self.at_digit():
            second = self._part("")
            if not isinstance(second, Number) and second[0].unit == "in":
                return second
        self.at = mark
        return None

    def _part(self, operator: str) -> Number | tuple[Part, Span]:
        """A plain number, or a number with the unit that follows it."""
        start = self.at
        fraction = _FRACTION.match(self.text, start)
        if fraction is not None and self._unit_follows(fraction.end()):
            if operator in ("/", "^"):
                raise self._two_readings(fraction, operator)
            self._refuse_hyphenated(start, fraction)
            self.at = fraction.end()
            unit, place = self._unit_after_space()
            return Part("", self._typed_fraction(fraction), unit), place
        text = self._number_text()
        mixed = _FRACTION.match(self.text, self._after_spaces())
        if (
            mixed is not None
            and mixed.start() > self.at
            and _WHOLE.fullmatch(text)
            and self._unit_follows(mixed.end())
        ):
            self.at = mixed.end()
            unit, place = self._unit_after_space()
            return Part(text, self._typed_fraction(mixed), unit), place
        if self._unit_follows(self.at):
            unit, place = self._unit_after_space()
            return Part(text, None, unit), place
        return Number(text, self.span(start))

    def _typed_fraction(self, match: re.Match[str]) -> tuple[str, str]:
        over, under = match.groups()
        if int(under.replace("_", "")) == 0:
            place = self.span(match.start(), match.end())
            raise Mistake("division-by-zero", place, f"`{match.group()}` divides by 0", "check the fraction")
        return over, under

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
            message = f"a number of more than {LONGEST_NUMBER} characters"
            raise Mistake("over-limit", self.span(start), message, "write it with an exponent: `1.2e6`")
        exponent = text.lower().partition("e")[2]
        if exponent and abs(int(exponent)) > LARGEST_EXPONENT:
            message = f"the exponent of `{text}` lies beyond {LARGEST_EXPONENT}"
            raise Mistake("over-limit", self.span(start), message, "check the exponent")
        self._refuse_attached(text)
        return text

    def _refuse_attached(self, text: str) -> None:
        """Nothing but an operator may stand directly behind a number."""
        follows = self.peek()
        if follows == "°":
            self.refuse_other_signs()
        if is_letter(follows) or follows == "%":
            rest = self.word() or follows
            product = f", `{text}*{rest}` for a product" if rest != "%" else ""
            raise Mistake(
                "implied-multiplication", self.span(self.at, self.at + len(rest)),
                f"`{rest}` stands directly behind the number {text}",
                f"write `{text} {rest}` for a quantity with a unit{product}",
            )  # fmt: skip
        if follows == "." and not self.peek(1).isdigit():
            raise Mistake(
                "bad-syntax",
                self.here(),
                "a decimal point takes a digit after it",
                f"write `{text}` or `{text}.0`",
            )

    # --- units ---

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
        return bool(word) and is_letter(word[0]) and word not in RESERVED

    def _unit_after_space(self) -> tuple[str, Span]:
        self.skip()
        return self.unit_text()

    def unit_text(self) -> tuple[str, Span]:
        """A unit: up to a space, a comma, a relation sign, a bracket, a parenthesis not opened within it."""
        start, opened = self.at, 0
        while self.at < len(self.text):
            character = self.text[self.at]
            if character.isspace() or character in ',<>=[]{}"':
                break
            if character == "(":
                if self.at > start and self.text[self.at - 1] not in "*/(^":
                    break
                opened += 1
            elif character == ")":
                if opened == 0:
                    break
                opened -= 1
            if character in "*/" and opened == 0 and self._runs_into_a_value(self.at + 1):
                raise self._no_spaces(start, character)
            if character == "+" or (character == "-" and self.text[self.at - 1] not in "^("):
                raise self._runs_on(start, character)
            self.at += 1
        text = self.text[start : self.at]
        if not text:
            message = f"expected a unit, but {self.found()} stands here"
            raise Mistake("bad-unit", self.here(), message, "a unit is written as in `kN/m^2` or `J/(kg*K)`")
        if len(text) > LONGEST_UNIT:
            message = f"a unit of more than {LONGEST_UNIT} characters"
            raise Mistake("over-limit", self.span(start), message, "write it shorter")
        return text, self.span(start)

    def _runs_into_a_value(self, at: int) -> bool:
        """True where what stands behind a sign in a unit is no unit: `kN/m*(L - a)`, `kN*2`, `kN*sin(x)`."""
        rest = self.text[at:]
        if _VALUE_BEHIND.match(rest):
            return not rest.startswith("1/")
        inside = _IN_BRACKETS.match(rest)
        if inside is None or not inside.group(1):
            return False
        return not inside.group(2) or " " in inside.group(1).strip()

    def _no_spaces(self, start: int, sign: str) -> Mistake:
        unit = self.text[start : self.at]
        message = f"the unit `{unit}` runs into what is multiplied or divided"
        number = Cursor(self.item, start).before()
        mend = f"put spaces round the `{sign}`: `{f'{number} {unit} {sign} ...'.lstrip()}`"
        return Mistake("bad-unit", self.span(start, self.at + 1), message, mend)

    def _runs_on(self, start: int, sign: str) -> Mistake:
        if self.text.startswith("--", self.at):
            self.refuse_other_signs()
        return Mistake(
            "bad-unit", self.span(start, self.at + 1), f"the unit runs into a `{sign}`",
            f"put spaces round the `{sign}`; a product of units is typed `N*m`",
        )  # fmt: skip

    def bracketed_unit(self) -> tuple[str, Span]:
        """What stands in `[...]`; the place is inside the brackets."""
        self.skip()
        opening = self.at
        self.at += 1
        closing = self.text.find("]", self.at)
        if closing < 0:
            place = self.span(opening, opening + 1)
            raise Mistake("unbalanced-bracket", place, "this `[` is never closed", "close it with `]`")
        inside = self.text[self.at : closing]
        lead = len(inside) - len(inside.lstrip())
        place = self.span(self.at + lead, self.at + lead + max(len(inside.strip()), 1))
        self.at = closing + 1
        if not inside.strip():
            message = "no unit stands in the brackets"
            raise Mistake("bad-unit", place, message, "write `[1]` for a plain number")
        if len(inside) > LONGEST_UNIT:
            message = f"a unit of more than {LONGEST_UNIT} characters"
            raise Mistake("over-limit", place, message, "write it shorter")
        return inside.strip(), place

    # --- fractions that can be read in two ways ---

    def _two_readings(self, fraction: re.Match[str], operator: str) -> Mistake:
        start = fraction.start()
        left = Cursor(self.item, self.text.rindex(operator, 0, start)).before()
        self.at = fraction.end()
        unit, _ = self._unit_after_space()
        typed = f"{fraction.group()} {unit}"
        return Mistake(
            "mixed-number", self.span(start, fraction.end()),
            f"`{typed}` behind a `{operator}` can be read in two ways",
            f"put the fraction in parentheses: `{left}{operator}({typed})`",
        )  # fmt: skip

    def _refuse_hyphenated(self, start: int, fraction: re.Match[str]) -> None:
        """`1-1/2 in` reads as one less a half inch; the trade means `1 1/2 in`."""
        match = _MIXED_HYPHEN.search(self.text, max(start - 60, 0), start)
        if match is None:
            return
        whole = match.group(1)
        self.at = fraction.end()
        unit, _ = self._unit_after_space()
        raise Mistake(
            "mixed-number", self.span(match.start(), fraction.end()),
            f"`{whole}-{fraction.group()} {unit}` would subtract",
            f"write `{whole} {fraction.group()} {unit}` for the mixed number, else put spaces round the `-`",
        )  # fmt: skip
