"""A second arithmetic for whole formulas: it reads their plain text and works it in SI with full values.

It shares nothing with the engine but the text: its own reader (that of the pocket calculator), its own
factors of units, scipy's QUADPACK for integrals, differences for derivatives, a fine walk for extremes.
"""

from __future__ import annotations

import math
import re
from collections.abc import Callable, Iterator, Mapping
from contextlib import contextmanager
from dataclasses import dataclass, field
from functools import cache
from itertools import pairwise

import numpy as np
from pocket_calculator import _NUMBER, _UNIT, FUNCTIONS, Amount, Reader, unit_amount

# source: NIST SP 811 (2008), appendix B (from memory): the definitions of units that no power of ten gives
OWN_FACTORS = {
    "deg": math.pi / 180, "rpm": 2 * math.pi / 60, "min": 60.0, "h": 3600.0, "day": 86400.0,
    "in": 0.0254, "ft": 0.3048, "yd": 0.9144, "mile": 1609.344,
    "lbf": 0.45359237 * 9.80665, "lb": 0.45359237, "slug": 0.45359237 * 9.80665 / 0.3048,
    "ozf": 0.45359237 * 9.80665 / 16, "short_ton": 907.18474, "short_tonf": 907.18474 * 9.80665,
    "kgf": 9.80665, "hp": 550 * 0.3048 * 0.45359237 * 9.80665, "hp_metric": 75 * 9.80665,
    "Btu": 1055.05585262, "US_gal": 231 * 0.0254**3, "atm": 101325.0, "degF": 5 / 9,
}  # fmt: skip

LOOKS = (
    "integral",
    "sum",
    "largest",
    "smallest",
    "where_largest",
    "where_smallest",
    "limit_of",
    "derivative",
)
"""Functions whose first argument is worked again and again."""


@cache
def factor(unit: str) -> float:
    """How many coherent SI units one of a unit is."""
    if unit.startswith("ft-in"):
        unit = "in"
    one = unit_amount(unit)
    return one.number * math.prod(OWN_FACTORS.get(name, 1.0) ** float(power) for name, power in one.powers)


@dataclass
class Known:
    """What names, columns and functions stand for."""

    values: dict[str, float | str] = field(default_factory=dict)
    """SI; the word of a choice."""
    columns: dict[str, tuple[float, ...]] = field(default_factory=dict)
    rows: dict[str, tuple[str, ...]] = field(default_factory=dict)
    """Labels, by column."""
    functions: dict[str, tuple[tuple[str, ...], str]] = field(default_factory=dict)
    """Parameters and body."""
    two_way: dict[str, tuple[list[float], list[float], list[list[float]]]] = field(default_factory=dict)


_TOKEN = re.compile(
    rf"(?P<absolute>(?P<degrees>-?{_NUMBER}) (?P<scale>degC|degF)(?![\w(*/^]))"
    rf"|(?P<fraction>(?:(?P<whole>\d+) )?(?P<over>\d+)/(?P<under>\d+) (?P<fraction_unit>{_UNIT})(?![\w(]))"
    rf"|(?P<number>{_NUMBER})(?: (?!as |at |and |or |when |otherwise)(?P<unit>{_UNIT})(?![\w(]))?"
    r"|(?P<as>as (?P<as_unit>[^()\s]+(?:\([^()]*\)[^()\s]*)?))"
    r'|(?P<at>at (?:"(?P<label>[^"]*)"|(?P<chosen>\w+)))'
    r"|(?P<word>[^\W\d][\w'.]*)|(?P<sign>[-+*/^(),<>])|(?P<space>\s+)"
)


class Worker(Reader):
    """Works a formula with names in it; `row` picks the cells of columns."""

    def __init__(self, text: str, known: Known, row: int | None = None) -> None:
        self.known, self.row = known, row
        self.bound: dict[str, float] = {}
        self.tokens, self.at, place = [], 0, 0
        while place < len(text):
            match = _TOKEN.match(text, place)
            if match is None:
                raise ValueError(f"not a formula: {text[place:]!r} in {text!r}")
            place = match.end()
            self._take(match)
        self.tokens.append(("end", ""))

    def _take(self, match: re.Match[str]) -> None:
        if match["absolute"]:
            degrees = float(match["degrees"])
            si = degrees + 273.15 if match["scale"] == "degC" else (degrees + 459.67) * 5 / 9
            self.tokens.append(("value", Amount(si)))
        elif match["fraction"]:
            number = int(match["whole"] or 0) + int(match["over"]) / int(match["under"])
            self.tokens.append(("value", _si(number, match["fraction_unit"])))
        elif match["number"]:
            self.tokens.append(("value", _si(float(match["number"].replace("_", "")), match["unit"] or "")))
        elif match["as"]:
            self.tokens.append(("as", match["as_unit"]))
        elif match["at"]:
            self.tokens.append(("at", match["label"] if match["label"] is not None else (match["chosen"],)))
        elif match["word"]:
            self.tokens.append(("word", match["word"]))
        elif match["sign"]:
            self.tokens.append(("sign", match["sign"]))

    def run(self, bound: Mapping[str, float] | None = None) -> float:
        """The value in SI, with what the parameters stand for."""
        self.at, self.bound = 0, dict(bound or {})
        return self.whole().number

    def atom(self) -> Amount:
        value = super().atom()
        if self.tokens[self.at][0] == "at":
            raise ValueError("`at` stands behind a column")
        return value

    def _feet_and_inches(self, feet: Amount) -> Amount:
        inches = self.pop()
        assert isinstance(inches, Amount)
        return Amount(feet.number + inches.number)

    def bracket(self) -> Amount:
        self.expect("(")
        value = self.sum()
        if self.tokens[self.at][0] == "as":
            value = Amount(value.number / factor(str(self.pop())))
        self.expect(")")
        return value

    def named(self) -> Amount:
        name = str(self.pop())
        if not self.next_is("("):
            return Amount(self._value(name))
        if name in LOOKS and (found := self._look(name)) is not None:
            return Amount(found)
        if name in ("sum", "count", "min", "max") and (back := self._brought_back(name)) is not None:
            return Amount(back)
        if name in ("interp", "lookup"):
            return Amount(self._read(name))
        self.expect("(")
        arguments = [self.sum()]
        while self.next_is(","):
            self.pop()
            arguments.append(self.sum())
        self.expect(")")
        if name == "simplified":
            return arguments[0]
        if name in FUNCTIONS:
            return FUNCTIONS[name](*arguments)
        parameters, body = self.known.functions[name]
        bound = dict(zip(parameters, (a.number for a in arguments), strict=True))
        return Amount(self._body(body, bound))

    def _body(self, body: str, bound: dict[str, float]) -> float:
        if not body.startswith("cases "):
            return Worker(body, self.known, self.row).run(bound)
        for branch in body.removeprefix("cases ").split("; "):
            value, _, condition = branch.removesuffix(" otherwise").partition(" when ")
            if not condition or self._holds(condition, bound):
                return Worker(value, self.known, self.row).run(bound)
        raise ValueError(f"no branch of {body}")

    def _holds(self, condition: str, bound: dict[str, float]) -> bool:
        """`and` binds tighter than `or`."""
        return any(
            all(self._relation(part, bound) for part in group.split(" and "))
            for group in condition.split(" or ")
        )

    def _relation(self, text: str, bound: dict[str, float]) -> bool:
        parts = re.split(r" (<=|>=|=) | (<|>) (?!\^)", text)
        sides = list(parts[::3])
        signs = [a or b for a, b in zip(parts[1::3], parts[2::3], strict=True)]
        if '"' in sides[-1]:
            return self.known.values[sides[0]] == sides[-1].strip('"')
        values = [Worker(side, self.known, self.row).run(bound) for side in sides]
        return all(_holds(a, sign, b) for a, sign, b in zip(values, signs, values[1:], strict=False))

    def _value(self, name: str) -> float:
        if self.tokens[self.at][0] == "at":
            return self._cell(name, self.pop())
        if name == "pi":
            return math.pi
        if name in self.bound:
            return self.bound[name]
        if name in self.known.columns:
            assert self.row is not None, f"{name} is a column"
            return self.known.columns[name][self.row]
        value = self.known.values[name]
        assert isinstance(value, float), name
        return value

    def _cell(self, column: str, label: object) -> float:
        word = self.known.values[label[0]] if isinstance(label, tuple) else label
        assert isinstance(word, str)
        return self.known.columns[column][self.known.rows[column].index(word)]

    # --- what is looked over ---

    def _arguments(self) -> list[list[tuple[str, object]]]:
        """The tokens of each argument; the place stays where it is."""
        depth, out, place = 0, [[]], self.at  # type: ignore[var-annotated]
        while True:
            token = self.tokens[place]
            depth += {"(": 1, ")": -1}.get(str(token[1]), 0) if token[0] == "sign" else 0
            if depth == 0:
                return out
            if token == ("sign", ",") and depth == 1:
                out.append([])
            elif not (token == ("sign", "(") and depth == 1 and not out[0] and place == self.at):
                out[-1].append(token)
            place += 1

    def _inner(self, tokens: list[tuple[str, object]], row: int | None = None) -> Worker:
        made = object.__new__(Worker)
        made.tokens, made.at, made.known = [*tokens, ("end", "")], 0, self.known
        made.row = self.row if row is None else row
        made.bound = self.bound
        return made

    def _skip(self) -> None:
        depth = 0
        while True:
            kind, value = self.tokens[self.at]
            depth += {"(": 1, ")": -1}.get(str(value), 0) if kind == "sign" else 0
            self.at += 1
            if depth == 0:
                return

    def _look(self, name: str) -> float | None:
        arguments = self._arguments()
        if len(arguments) < 2 or (name == "sum" and len(arguments) != 4):
            return None
        x = str(arguments[1][0][1])
        bounds = [self._inner(a).run(self.bound) for a in arguments[2:]]
        body, outer = self._inner(arguments[0]), dict(self.bound)
        self._skip()

        def f(at: float) -> float:
            return body.run({**outer, x: at})

        match name, bounds:
            case "integral", [low, high]:
                return quadrature(f, low, high)
            case "integral", []:
                return quadrature(f, 0.0, outer[x])
            case "derivative", []:
                return difference(f, outer[x])
            case "limit_of", [place]:
                return limit(f, place)
            case "sum", [low, high]:
                return math.fsum(f(float(k)) for k in range(round(low), round(high) + 1))
            case _, [low, high]:
                place, value = walked(f, low, high, -1.0 if name.endswith("smallest") else 1.0)
                return place if name.startswith("where") else value
        raise ValueError(name)

    def _length(self, tokens: list[tuple[str, object]]) -> int | None:
        """How many rows an argument goes over, None where it is one value."""
        bare = [
            len(self.known.columns[str(value)])
            for i, (kind, value) in enumerate(tokens)
            if kind == "word" and value in self.known.columns and (*tokens, ("end", ""))[i + 1][0] != "at"
        ]
        return bare[0] if bare else None

    def _brought_back(self, name: str) -> float | None:
        arguments = self._arguments()
        if len(arguments) != 1 or (length := self._length(arguments[0])) is None:
            return None
        self._skip()
        values = self._column(arguments[0], length)
        return {"sum": math.fsum, "count": len, "min": min, "max": max}[name](values)  # type: ignore[operator]

    def _column(self, tokens: list[tuple[str, object]], length: int) -> list[float]:
        outer = dict(self.bound)
        return [self._inner(tokens, row).run(outer) for row in range(length)]

    def _read(self, name: str) -> float:
        arguments = self._arguments()
        outer = dict(self.bound)
        self._skip()
        x = self._inner(arguments[0]).run(outer)
        if (table := self.known.two_way.get(str(arguments[2][0][1]))) is not None:
            y = self._inner(arguments[1]).run(outer)
            down, across, cells = table
            return float(np.interp(y, across, [np.interp(x, down, column) for column in zip(*cells)]))  # noqa: B905
        length = self._length(arguments[1])
        assert length is not None
        xs, ys = (self._column(a, length) for a in arguments[1:])
        if name == "lookup":
            return ys[max(i for i, each in enumerate(xs) if each <= x)]
        if xs[0] > xs[-1]:
            xs, ys = xs[::-1], ys[::-1]
        return float(np.interp(x, xs, ys))


def _holds(a: float, sign: str, b: float) -> bool:
    near = math.isclose(a, b, rel_tol=1e-9)
    return {"<=": a < b or near, "<": a < b and not near, ">=": a > b or near, ">": a > b and not near}.get(
        sign, near
    )


def _si(number: float, unit: str) -> Amount:
    return Amount(number * factor(unit))


# --- numerical methods, plain and slow ----------------------------------------------------------------------


def quadrature(f: Callable[[float], float], low: float, high: float) -> float:
    """Gauss and Kronrod's rule on ever smaller pieces, by scipy (QUADPACK)."""
    from scipy.integrate import quad

    return float(quad(f, low, high, epsabs=0, epsrel=1e-8, limit=25)[0])


def limit(f: Callable[[float], float], at: float) -> float:
    """The mean of both sides, carried on to no distance at all by Richardson's rule."""
    rows = [[(f(at + h) + f(at - h)) / 2 for h in (0.16, 0.08, 0.04, 0.02)]]
    for k in range(1, 4):
        rows.append([(4**k * b - a) / (4**k - 1) for a, b in pairwise(rows[-1])])
    return rows[-1][0]


def difference(f: Callable[[float], float], at: float) -> float:
    """Richardson's central difference."""
    step = 1e-3 * max(abs(at), 1e-3)
    wide, narrow = ((f(at + h) - f(at - h)) / (2 * h) for h in (step, step / 2))
    return (4 * narrow - wide) / 3


def walked(f: Callable[[float], float], low: float, high: float, sign: float) -> tuple[float, float]:
    """Place and value of the largest (sign 1) or smallest (-1) of f: a walk, made finer at its best."""
    a, b, place, pieces = low, high, low, 200
    for _ in range(6):
        step = (b - a) / pieces
        place = max((a + step * i for i in range(pieces + 1)), key=lambda x: sign * f(x))
        a, b, pieces = max(low, place - step), min(high, place + step), 20
    return place, f(place)


@contextmanager
def told(where: str) -> Iterator[None]:
    """What goes wrong says where."""
    try:
        yield
    except Exception as error:
        raise AssertionError(f"{where}: {type(error).__name__}: {error}") from error
