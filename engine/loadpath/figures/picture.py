"""What a plot shows, as data, and in words."""

from __future__ import annotations

import math
import re
from dataclasses import dataclass, replace
from itertools import groupby

from loadpath.formula.names import is_letter, is_name_character, plain_symbol
from loadpath.units.printing import NARROW, plain, typeset

MOST_CURVES = 12
MOST_POINTS = 20_000
"""Of all curves together."""
MOST_PEAKS = 40
"""Of all curves together."""
MOST_TEXT = 300
"""Characters of a name, unit or peak text."""
MOST_JUMPS = 4
"""As many jumps and gaps of a curve are told one by one in words; then they are counted."""
DIGITS = 4
"""Significant digits of the numbers that `describe` prints."""
Point = tuple[float, float]


@dataclass(frozen=True, slots=True)
class Peak:
    """A place on a curve that is marked."""

    x: float
    y: float
    text: str
    """As printed beside it: `31.25 kN⋅m at 2.5 m`."""


@dataclass(frozen=True, slots=True)
class Curve:
    """One line of a plot; points are in the printed units, in the order they are joined."""

    name: str
    """Plain text: `M(x)`, `σ_b(x)`."""
    symbol: str
    """The canonical name that begins `name`, `M` or `sigma_b`, for its subscript; "" draws `name` plain."""
    unit: str
    """As printed: `kN⋅m`; "" for a plain number. Curves of one unit share a panel."""
    points: tuple[Point, ...]
    """Two with one x are a jump; a y that is not finite is a gap."""
    peaks: tuple[Peak, ...]


@dataclass(frozen=True, slots=True)
class Picture:
    """A plot of curves over one x."""

    x_name: str
    x_unit: str
    curves: tuple[Curve, ...]
    alt: str
    """What it shows, in words; "" takes `describe`."""


def normal(picture: Picture) -> Picture:
    """The picture with plain floats, one kind of zero and one kind of gap, so that equals are equal keys.

    Raises ValueError where it exceeds the limits, has no curve or no point, or an x or a peak is not finite.
    """
    curves = picture.curves
    if not 1 <= len(curves) <= MOST_CURVES:
        raise ValueError(f"a plot has 1 to {MOST_CURVES} curves, not {len(curves)}")
    if not 1 <= (count := sum(len(c.points) for c in curves)) <= MOST_POINTS:
        raise ValueError(f"a plot has 1 to {MOST_POINTS} points, not {count}")
    if (count := sum(len(c.peaks) for c in curves)) > MOST_PEAKS:
        raise ValueError(f"a plot has at most {MOST_PEAKS} peaks, not {count}")
    texts = [picture.x_name, picture.x_unit]
    for c in curves:
        texts += [c.name, c.symbol, c.unit, *(p.text for p in c.peaks)]
        places = [x for x, _ in c.points] + [v for p in c.peaks for v in (p.x, p.y)]
        if not all(map(math.isfinite, places)):
            raise ValueError(f"a place on {c.name[:50]!r} is not finite")
    if max(map(len, texts)) > MOST_TEXT:
        raise ValueError(f"a text in a plot has at most {MOST_TEXT} characters")
    return replace(picture, curves=tuple(_normal_curve(c) for c in curves))


def _normal_curve(curve: Curve) -> Curve:
    points = tuple((x + 0.0, y + 0.0 if math.isfinite(y) else math.nan) for x, y in curve.points)
    peaks = tuple(Peak(p.x + 0.0, p.y + 0.0, p.text) for p in curve.peaks)
    return replace(curve, points=points, peaks=peaks)


def is_name(text: str) -> bool:
    """True for a name of the language, dots included, that prints as a symbol."""
    return text != "" and is_letter(text[0]) and all(is_name_character(c) or c == "." for c in text)


def panels(picture: Picture) -> list[list[Curve]]:
    """The curves by unit, units in the order they come first."""
    by_unit: dict[str, list[Curve]] = {}
    for curve in picture.curves:
        by_unit.setdefault(curve.unit, []).append(curve)
    return list(by_unit.values())


def runs(points: tuple[Point, ...]) -> list[list[Point]]:
    """The stretches of a curve between its gaps."""
    return [list(run) for drawn, run in groupby(points, lambda p: math.isfinite(p[1])) if drawn]


# --- in words -----------------------------------------------------------------------------------------------


def describe(picture: Picture) -> str:
    """What is plotted against what, over which range, with largest and smallest values, jumps and gaps.

    All of it from the plotted points, rounded to four significant digits. Raises ValueError as `svg` does.
    """
    picture = normal(picture)
    if is_name(picture.x_name):
        picture = replace(picture, x_name=plain_symbol(picture.x_name))
    xs = [x for c in picture.curves for x, _ in c.points]
    listed = _listed([_listed([c.name for c in p]) + _in(p[0].unit) for p in panels(picture)])
    over = picture.x_name + _in(picture.x_unit)
    start, end = _number(min(xs)), _number(max(xs))
    first = f"Plot of {listed} against {over}, from {start} to {_value(max(xs), picture.x_unit)}."
    if start == end:
        first = f"Plot of {listed} against {over}, at {_value(min(xs), picture.x_unit)} only."
    return " ".join([first, *(_told(c, picture) for c in picture.curves)])


def _in(unit: str) -> str:
    return f" in {unit}" if unit else ""


def _listed(parts: list[str]) -> str:
    return " and ".join(filter(None, [", ".join(parts[:-1]), parts[-1]]))


def _told(curve: Curve, picture: Picture) -> str:
    drawn = [p for p in curve.points if math.isfinite(p[1])]
    if not drawn:
        return f"{curve.name} has no value here."
    low, high = min(y for _, y in drawn), max(y for _, y in drawn)
    if low == high:
        parts = [f"{_value(low, curve.unit)} throughout"]
    else:
        parts = [
            f"{word} {_value(extreme, curve.unit)} {_places([x for x, y in drawn if y == extreme], picture)}"
            for word, extreme in (("largest", high), ("smallest", low))
        ]
    parts += _some(_jumps(curve, picture), "jumps") + _some(_gaps(curve, picture), "gaps")
    if curve.peaks:
        parts.append("marked: " + ", ".join(dict.fromkeys(p.text for p in curve.peaks)))
    return f"{curve.name}: {'; '.join(parts)}."


def _places(xs: list[float], picture: Picture) -> str:
    distinct = list(dict.fromkeys(xs))
    if len(distinct) > 3:
        start, end = _x(min(xs), picture), _value(max(xs), picture.x_unit)
        return f"at {len(distinct)} plotted places from {start} to {end}"
    return "at " + " and ".join(_x(x, picture) for x in distinct)


def _jumps(curve: Curve, picture: Picture) -> list[str]:
    told = []
    for x, group in groupby(curve.points, lambda p: p[0]):
        ys = [y for _, y in group if math.isfinite(y)]
        if len(ys) > 1 and ys[0] != ys[-1]:
            told.append(f"jump at {_x(x, picture)} from {_number(ys[0])} to {_value(ys[-1], curve.unit)}")
    return told


def _gaps(curve: Curve, picture: Picture) -> list[str]:
    told, last = [], ""
    for drawn, group in groupby(curve.points, lambda p: math.isfinite(p[1])):
        xs = [x for x, _ in group]
        if drawn:
            told += [f"no value between {last} and {_x(xs[0], picture)}"] if last else []
            last = _x(xs[-1], picture)
        elif not last:
            told.append(f"no value from {_x(xs[0], picture)} on, up to the first point drawn")
    if not math.isfinite(curve.points[-1][1]):
        told.append(f"no value after {last}")
    return told


def _some(told: list[str], kind: str) -> list[str]:
    return told if len(told) <= MOST_JUMPS else [*told[:MOST_JUMPS], f"{len(told)} {kind} in all"]


def _x(x: float, picture: Picture) -> str:
    return f"{picture.x_name} = {_value(x, picture.x_unit)}"


def _number(value: float) -> str:
    """Four digits, without zeros at the end of decimals."""
    return typeset(re.sub(r"(\.\d*?)0+(?=e|$)", lambda m: m.group(1).rstrip("."), plain(value, DIGITS)))


def _value(value: float, unit: str) -> str:
    return _number(value) + ("" if unit == "°" else NARROW if unit else "") + unit
