"""A pocket calculator for printed formulas: it carries units along and never converts them.

It shares nothing with the engine. Powers of ten between SI prefixes, kip and lbf, ksi and psi it does by
itself, as a reader does; feet never become inches, degrees never radians and rpm never rad/s unless a printed
factor says so. Where units don't cancel it refuses.
"""

from __future__ import annotations

import math
import re
from collections.abc import Callable
from dataclasses import dataclass
from fractions import Fraction

Powers = dict[str, Fraction]


class DoesNotCancel(Exception):
    """The units of a printed formula don't lead where they should."""


@dataclass(frozen=True)
class Amount:
    """A number that counts in units; decimal units are already in metres, kilograms, seconds and kelvins."""

    number: float
    powers: tuple[tuple[str, Fraction], ...] = ()


def amount(number: float, powers: Powers) -> Amount:
    return Amount(number, tuple(sorted((name, power) for name, power in powers.items() if power)))


# --- units --------------------------------------------------------------------------------------------------

PREFIXES = {
    "": 0,
    "n": -9,
    "u": -6,
    "µ": -6,
    "m": -3,
    "c": -2,
    "d": -1,
    "h": 2,
    "k": 3,
    "M": 6,
    "G": 9,
    "T": 12,
}
# source: the SI Brochure, tables 4 and 7: powers of metre, kilogram, second, kelvin, and a power of ten
DECIMAL: dict[str, tuple[int, dict[str, int]]] = {
    "m": (0, {"m": 1}), "g": (-3, {"kg": 1}), "s": (0, {"s": 1}), "K": (0, {"K": 1}), "rad": (0, {}),
    "N": (0, {"kg": 1, "m": 1, "s": -2}),
    "Pa": (0, {"kg": 1, "m": -1, "s": -2}), "bar": (5, {"kg": 1, "m": -1, "s": -2}),
    "J": (0, {"kg": 1, "m": 2, "s": -2}), "W": (0, {"kg": 1, "m": 2, "s": -3}), "Hz": (0, {"s": -1}),
}  # fmt: skip
ALONE: dict[str, tuple[int, dict[str, int]]] = {
    "litre": (-3, {"m": 3}), "tonne": (3, {"kg": 1}), "%": (-2, {}), "ppm": (-6, {}), "microstrain": (-6, {}),
    "kip": (3, {"lbf": 1}), "mil": (-3, {"in": 1}),
    "psi": (0, {"lbf": 1, "in": -2}), "ksi": (3, {"lbf": 1, "in": -2}),
    "psf": (0, {"lbf": 1, "ft": -2}), "ksf": (3, {"lbf": 1, "ft": -2}), "plf": (0, {"lbf": 1, "ft": -1}),
    "klf": (3, {"lbf": 1, "ft": -1}), "pcf": (0, {"lbf": 1, "ft": -3}), "kcf": (3, {"lbf": 1, "ft": -3}),
    "delta_degF": (0, {"degF": 1}), "degF": (0, {"degF": 1}), "degC": (0, {"K": 1}),
}  # fmt: skip
OWN_KIND = {
    "deg", "rpm", "min", "h", "day", "in", "ft", "yd", "mile",
    "lbf", "ozf", "lb", "slug", "short_ton", "short_tonf", "kgf", "hp", "hp_metric", "Btu", "US_gal", "atm",
}  # fmt: skip
"""Units that only a printed factor turns into others."""


def named_unit(name: str) -> Amount:
    if name in OWN_KIND:
        return amount(1.0, {name: Fraction(1)})
    ten, powers = ALONE.get(name) or _prefixed(name)
    return amount(float(f"1e{ten}"), {base: Fraction(power) for base, power in powers.items()})


def _prefixed(name: str) -> tuple[int, dict[str, int]]:
    for base, (ten, powers) in DECIMAL.items():
        if name.endswith(base) and name.removesuffix(base) in PREFIXES:
            return ten + PREFIXES[name.removesuffix(base)], powers
    raise KeyError(name)


def unit_amount(text: str) -> Amount:
    """One of a unit as typed: `kN*m`, `J/(kg*K)`, `1/K`, `mm^(1/2)`."""
    if text in ("", "1"):
        return Amount(1.0)
    above, _, below = _split_at_slash(text)
    total = Amount(1.0)
    for part, sign in [(p, 1) for p in _factors(above)] + [(p, -1) for p in _factors(below)]:
        name, _, power = part.partition("^")
        total = times(total, raised(named_unit(name), sign * Fraction(power.strip("()") or "1")))
    return total


def _split_at_slash(text: str) -> tuple[str, str, str]:
    depth = 0
    for index, character in enumerate(text):
        depth += {"(": 1, ")": -1}.get(character, 0)
        if character == "/" and depth == 0:
            return text[:index], "/", text[index + 1 :]
    return text, "", ""


def _factors(text: str) -> list[str]:
    if text.startswith("(") and text.endswith(")"):
        text = text[1:-1]
    return [part for part in text.split("*") if part not in ("", "1")]


# --- arithmetic ---------------------------------------------------------------------------------------------


def times(a: Amount, b: Amount) -> Amount:
    powers = dict(a.powers)
    for name, power in b.powers:
        powers[name] = powers.get(name, Fraction(0)) + power
    return amount(a.number * b.number, powers)


def raised(a: Amount, power: Fraction | float) -> Amount:
    exact = Fraction(power).limit_denominator(1000)
    return amount(a.number ** float(power), {name: p * exact for name, p in a.powers})


def alike(*amounts: Amount) -> Powers:
    """The units that all of them have; a bare 0 has any."""
    kinds = {a.powers for a in amounts if a.number != 0} or {amounts[0].powers}
    if len(kinds) > 1:
        raise DoesNotCancel(" and ".join(str(dict(kind)) for kind in kinds))
    return dict(kinds.pop())


def plain(a: Amount) -> float:
    if a.powers and a.number != 0:
        raise DoesNotCancel(f"a plain number is needed, not {dict(a.powers)}")
    return a.number


def angle(a: Amount) -> float:
    """In radians; a calculator has a key for degrees."""
    return math.radians(a.number) if a.powers == (("deg", Fraction(1)),) else plain(a)


def stepped(rounding: Callable[[float], int]) -> Callable[[Amount, Amount], Amount]:
    """To a multiple of a step; what is a multiple but for rounding stays."""

    def work(x: Amount, step: Amount) -> Amount:
        powers, ratio = alike(x, step), x.number / step.number
        whole = round(ratio) if abs(ratio - round(ratio)) < 1e-9 else rounding(ratio)
        return amount(whole * step.number, powers)

    return work


def of(take: Callable[[Amount], float], function: Callable[[float], float]) -> Callable[[Amount], Amount]:
    """A function of one plain number or angle."""
    return lambda x: Amount(function(take(x)))


FUNCTIONS: dict[str, Callable[..., Amount]] = {
    "sqrt": lambda x: raised(x, Fraction(1, 2)),
    "cbrt": lambda x: raised(x, Fraction(1, 3)),
    "abs": lambda x: Amount(abs(x.number), x.powers),
    "min": lambda *xs: amount(min(x.number for x in xs), alike(*xs)),
    "max": lambda *xs: amount(max(x.number for x in xs), alike(*xs)),
    "round_up": stepped(math.ceil),
    "round_down": stepped(math.floor),
    "atan2": lambda y, x: (alike(y, x), Amount(math.atan2(y.number, x.number)))[1],
    **{name: of(angle, getattr(math, name)) for name in ("sin", "cos", "tan")},
    "sec": of(angle, lambda x: 1 / math.cos(x)),
    **{
        name: of(plain, getattr(math, name))
        for name in ("exp", "log10", "asin", "acos", "atan", "sinh", "cosh", "tanh")
    },
    "ln": of(plain, math.log),
}


# --- reading ------------------------------------------------------------------------------------------------

_NAME = r"(?:[A-Za-zµ][A-Za-z_]*|%)"
_POWER = r"(?:\^(?:-?\d+(?:\.\d+)?|\([-\d/]+\)))?"
_ATOM = rf"(?:{_NAME}{_POWER})"
_UNIT = rf"(?:1/)?(?:{_ATOM}|\({_ATOM}(?:\*{_ATOM})*\))(?:[*/](?:{_ATOM}|\({_ATOM}(?:\*{_ATOM})*\)))*"
_NUMBER = r"\d[\d_]*(?:\.\d+)?(?:[eE][-+]?\d+)?"
_TOKENS = re.compile(
    rf"(?P<fraction>(?:(?P<whole>\d+) )?(?P<over>\d+)/(?P<under>\d+) (?P<fraction_unit>{_UNIT})(?![\w(]))"
    rf"|(?P<number>{_NUMBER})(?: (?!as )(?P<unit>{_UNIT})(?![\w(]))?"
    r"|(?P<as>as (?P<as_unit>[^()\s]+(?:\([^()]*\)[^()\s]*)?))"
    r"|(?P<word>[a-z]\w*)|(?P<sign>[-+*/^(),<>])|(?P<space>\s+)"
)


class Reader:
    """Reads and works one printed formula."""

    def __init__(self, text: str) -> None:
        self.tokens: list[tuple[str, object]] = []
        at = 0
        while at < len(text):
            match = _TOKENS.match(text, at)
            if match is None:
                raise ValueError(f"not a printed formula: {text[at:]!r} in {text!r}")
            at = match.end()
            self._take(match)
        self.tokens.append(("end", ""))
        self.at = 0

    def _take(self, match: re.Match[str]) -> None:
        if match["fraction"]:
            value = int(match["whole"] or 0) + int(match["over"]) / int(match["under"])
            self.tokens.append(("value", times(Amount(value), unit_amount(match["fraction_unit"]))))
        elif match["number"]:
            number = float(match["number"].replace("_", ""))
            self.tokens.append(("value", times(Amount(number), unit_amount(match["unit"] or ""))))
        elif match["as"]:
            self.tokens.append(("as", match["as_unit"]))
        elif match["word"]:
            self.tokens.append(("word", match["word"]))
        elif match["sign"]:
            self.tokens.append(("sign", match["sign"]))

    def next_is(self, *signs: str) -> bool:
        kind, value = self.tokens[self.at]
        return kind == "sign" and value in signs

    def pop(self) -> object:
        self.at += 1
        return self.tokens[self.at - 1][1]

    def expect(self, sign: str) -> None:
        if not self.next_is(sign):
            raise ValueError(f"{sign!r} expected, {self.tokens[self.at]} found")
        self.at += 1

    def whole(self) -> Amount:
        value = self.sum()
        if self.tokens[self.at][0] != "end":
            raise ValueError(f"left over: {self.tokens[self.at :]}")
        return value

    def sum(self) -> Amount:
        value = self.product()
        while self.next_is("+", "-"):
            sign = 1 if self.pop() == "+" else -1
            other = self.product()
            value = amount(value.number + sign * other.number, alike(value, other))
        return value

    def product(self) -> Amount:
        value = self.signed()
        while self.next_is("*", "/"):
            sign = 1 if self.pop() == "*" else -1
            value = times(value, raised(self.signed(), sign))
        return value

    def signed(self) -> Amount:
        if self.next_is("-"):
            self.pop()
            return times(Amount(-1.0), self.signed())
        return self.power()

    def power(self) -> Amount:
        base = self.atom()
        if self.next_is("^"):
            self.pop()
            return raised(base, plain(self.signed()))
        return base

    def atom(self) -> Amount:
        kind, value = self.tokens[self.at]
        if kind == "value":
            self.at += 1
            first = value
            while self.tokens[self.at][0] == "value" and isinstance(first, Amount):  # 6 ft 6 in
                first = self._feet_and_inches(first)
            assert isinstance(first, Amount)
            return first
        if self.next_is("<"):
            return self.macaulay()
        if self.next_is("("):
            return self.bracket()
        if kind == "word":
            return self.named()
        raise ValueError(f"a value expected, {self.tokens[self.at]} found")

    def _feet_and_inches(self, feet: Amount) -> Amount:
        inches = self.pop()
        assert (
            isinstance(inches, Amount) and dict(feet.powers) == {"ft": 1} and dict(inches.powers) == {"in": 1}
        )
        return Amount(12 * feet.number + inches.number, inches.powers)

    def bracket(self) -> Amount:
        self.expect("(")
        value = self.sum()
        if self.tokens[self.at][0] == "as":
            unit = unit_amount(str(self.pop()))
            value = Amount(plain(times(value, raised(unit, -1))))
        self.expect(")")
        return value

    def macaulay(self) -> Amount:
        self.expect("<")
        value = self.sum()
        self.expect(">")
        self.expect("^")
        power = int(plain(self.atom()))
        return (
            raised(value, power)
            if value.number > 0 or (value.number == 0 and power == 0)
            else amount(0.0, dict(raised(value, power).powers))
        )

    def named(self) -> Amount:
        name = str(self.pop())
        if name == "pi":
            return Amount(math.pi)
        self.expect("(")
        arguments = [self.sum()]
        while self.next_is(","):
            self.pop()
            arguments.append(self.sum())
        self.expect(")")
        return FUNCTIONS[name](*arguments)


def work(text: str, unit: str) -> float:
    """The number that a printed formula comes to in the unit of its result. Raises DoesNotCancel."""
    value, one = Reader(text).whole(), unit_amount(unit)
    if value.number != 0 and value.powers != one.powers:
        raise DoesNotCancel(f"{dict(value.powers)} is not {dict(one.powers)}")
    return value.number / one.number
