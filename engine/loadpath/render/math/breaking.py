"""Where a formula may be broken over lines, and how what is too wide for a line is opened.

A formula is cut before relations, `+` and `−` at its top level. What is still too wide is cut before `×`
and `/` too; then its widest fraction is set on the line, its widest brackets or root may be broken inside,
and at last a name or a number is broken. So nothing is wider than asked for, whatever was typed, down to the
widths of a small screen.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import replace

from loadpath.formula.names import Symbol
from loadpath.render.math.boxes import (
    Amount,
    Box,
    Break,
    Fence,
    Figure,
    Fraction,
    Operator,
    Power,
    Ranged,
    Root,
    Row,
    Table,
    Variable,
    Words,
    is_tall,
    parts,
    row,
)
from loadpath.render.math.width import width
from loadpath.units.printing import THIN, typeset, unit_symbol

Boxes = tuple[Box, ...]
_Run = list[tuple[Box, float]]
"""Boxes side by side, each with its width."""

HANGING = 2.0
"""Em in front of every line but the first."""
DEEPER = 1.0
"""Em more for each bracket that is open."""
MOST_DEEP = 2
SURDS = "√∛"
CHUNK = 12
"""Characters of a name or word that stay together where it has to be broken."""
_TOP = ("relation", "logic", "sum")
_ANY = (*_TOP, "product", "slash")


def cuts(box: Box, most: float) -> list[Boxes]:
    """The runs of a formula between which a line may end, none wider than `most` em."""
    return [tuple(b for b, _ in run) for run in _fitting(box, most)]


def widest_run(box: Box) -> float:
    """Width in em of the widest run that would stay together if nothing were opened."""
    return max((_measure(run) for run in _cut(_sized(parts(box)), _TOP)), default=0.0)


def lines(box: Box, most: float) -> list[tuple[int, Boxes]]:
    """A formula in lines of `most` em, each with how many brackets are open where it begins.

    Every line after the first leaves `HANGING` em free in front, and `DEEPER` for each bracket. A term that
    takes lines of its own shares none with others, so that it is seen where it ends.
    """
    whole = _sized(parts(box))
    if _measure(whole) <= most:
        return [(0, tuple(b for b, _ in whole if not isinstance(b, Break)))]
    out: list[tuple[int, Boxes]] = []
    left, opened = 0.0, 0
    for term in _cut(whole, _TOP):
        runs = _fit(term, most - HANGING - DEEPER * MOST_DEEP)
        for i, run in enumerate(runs):
            size = _measure(run)
            if out and size <= left and (i > 0 or len(runs) == 1):
                out[-1] = out[-1][0], out[-1][1] + tuple(b for b, _ in run)
            else:
                depth = min(max(opened, 0), MOST_DEEP)
                out.append((depth, tuple(b for b, _ in run)))
                left = most - (HANGING + DEEPER * depth if out[1:] else 0.0)
            left -= size
            opened += sum(_opens(b) for b, _ in run)
        left = left if len(runs) == 1 else 0.0
    return out


def _opens(box: Box) -> int:
    """How many brackets a box leaves open."""
    box = box.base if isinstance(box, Power) else box
    if not isinstance(box, Operator) or box.sign in SURDS:
        return 0
    return (box.kind == "open") - (box.kind == "close")


def _fitting(box: Box, most: float) -> list[_Run]:
    return [fitting for run in _cut(_sized(parts(box)), _TOP) for fitting in _fit(run, most)]


def _sized(boxes: Boxes) -> _Run:
    return [(box, width(box)) for box in boxes]


def _measure(run: _Run) -> float:
    return sum(size for _, size in run)


def _cut(run: _Run, before: tuple[str, ...]) -> list[_Run]:
    runs: list[_Run] = [[]]
    for box, size in run:
        kind = box.kind if isinstance(box, Operator) else ""
        if isinstance(box, Break) or (kind in before and runs[-1]):
            runs.append([])
        if not isinstance(box, Break):
            runs[-1].append((box, size))
        if kind == "comma":
            runs.append([])
    return [run for run in runs if run]


def _fit(run: _Run, most: float) -> list[_Run]:
    if _measure(run) <= most:
        return [[(box, size) for box, size in run if not isinstance(box, Break)]]
    for before in ((), _TOP, _ANY):
        shorter = _cut(run, before)
        if len(shorter) > 1:
            return [fitting for piece in shorter for fitting in _fit(piece, most)]
    for index in sorted(range(len(run)), key=lambda i: -run[i][1]):
        if opened := _opened(run[index][0]):
            return _fit([*run[:index], *_sized(opened), *run[index + 1 :]], most)
    return shorter


# --- opening ------------------------------------------------------------------------------------------------


def _opened(box: Box) -> Boxes:
    """The box as a row that can be broken; () where it cannot be."""
    match box:
        case Fence(opening=opening, inner=inner, closing=closing):
            tall = is_tall(inner)
            return Operator(opening, "open", tall), *parts(inner), Operator(closing, "close", tall)
        case Fraction(flat=flat):
            return parts(flat)
        case Root(inner=inner, index=index):
            sign = Operator(SURDS[bool(index)], "open")
            return sign, *_opened(Fence("(", flattened(inner), ")"))
        case Ranged(below=below, above=above):
            range_ = below if above is None else row(below, Operator("…", "product"), above)
            return box.head, *_opened(Fence("[", range_, "]"))
        case Power(base=base, exponent=exponent):
            return _opened_power(base, exponent)
        case Table():
            return _opened_table(box)
    return _broken(box)


def _opened_power(base: Box, exponent: Box) -> Boxes:
    """Brackets keep the exponent behind them; an exponent that is itself too wide comes down to the line."""
    if isinstance(base, Operator) and isinstance(exponent, Figure | Variable):
        return ()
    if width(base) >= width(exponent) and not isinstance(base, Operator):
        *opened, closing = _opened(base if isinstance(base, Fence) else Fence("(", base, ")"))
        return *opened, Power(closing, exponent)
    return *parts(base), Operator("^", "raise"), *_opened(Fence("(", exponent, ")"))


def _opened_table(table: Table) -> Boxes:
    out: list[Box] = []
    for value, condition in table.rows:
        if out:
            out += [Operator(",", "comma"), Break()]
        out += [*parts(value), Operator("otherwise" if condition is None else "if", "logic")]
        out += () if condition is None else parts(condition)
    return tuple(out)


def flattened(box: Box) -> Box:
    """The box with every fraction set on the line."""
    if not is_tall(box):
        return box
    match box:
        case Fraction(flat=flat):
            return flattened(flat)
        case Row(boxes=boxes):
            return row(*(flattened(inner) for inner in boxes))
        case Fence(inner=inner):
            return replace(box, inner=flattened(inner))
        case Root(inner=inner):
            return replace(box, inner=flattened(inner))
        case Power(base=base):
            return replace(box, base=flattened(base))
    return box


# --- breaking names and numbers -----------------------------------------------------------------------------


def _broken(box: Box) -> Boxes:
    match box:
        case Words(text=text, small=small) if len(text) > CHUNK:
            return _with_breaks(Words(chunk, small) for chunk in _chunks(text))
        case Variable(symbol=s) if len(s.prefix + s.base + s.subscript) > CHUNK:
            return _broken_name(s)
        case Figure(number=number) if len(number) > CHUNK:
            return _with_breaks(Words(group) for group in _groups(number))
        case Amount(parts=((number, unit),)):
            if number:
                return Figure(number), Words(THIN), Break(), Amount((("", unit),))
            chunks = _chunks(unit_symbol(unit))
            return _with_breaks(Words(chunk) for chunk in chunks) if len(chunks) > 1 else ()
        case Amount(parts=pairs) if len(pairs) > 1:
            return _with_breaks(Amount((pair,)) for pair in pairs)
    return ()


def _groups(number: str) -> list[str]:
    """A number as printed, cut behind its thin spaces."""
    *groups, last = typeset(number).split(THIN)
    return [*(group + THIN for group in groups), last]


def _broken_name(s: Symbol) -> Boxes:
    pieces = [Symbol(prefix, "", "", 0) for prefix in _chunks(s.prefix)]
    pieces += [Symbol("", base, "", 0) for base in _chunks(s.base)]
    subscripts = _chunks(s.subscript)
    if subscripts:
        pieces[-1] = replace(pieces[-1], subscript=subscripts[0])
    pieces += [Symbol("", "", text, 0) for text in subscripts[1:]]
    pieces[-1] = replace(pieces[-1], primes=s.primes)
    return _with_breaks(Variable(piece) for piece in pieces) if len(pieces) > 1 else ()


def _chunks(text: str) -> list[str]:
    """A text in pieces of `CHUNK` characters, cut behind a comma, a space or a hyphen where one is near."""
    out = []
    while len(text) > CHUNK:
        near = max(text.rfind(mark, CHUNK // 3, CHUNK) for mark in ", -") + 1
        end = near or CHUNK
        out.append(text[:end])
        text = text[end:]
    return [*out, text] if text else out


def _with_breaks(boxes: Iterable[Box]) -> Boxes:
    out: list[Box] = []
    for box in boxes:
        out += [Break(), box] if out else [box]
    return tuple(out)
