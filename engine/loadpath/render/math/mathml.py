"""Formulas as presentation MathML, within MathML Core.

Three classes are left to the style sheet: `mi.word` is a name of several letters (sloping, in the face of
the text), `mtable.braced` stands behind the brace of `cases` (its cells begin at the left), `mtr.chosen` is
the branch taken (bold).
"""

from __future__ import annotations

import re
import unicodedata
from collections.abc import Iterable, Sequence

from loadpath.formula.names import Symbol
from loadpath.formula.tree import Node
from loadpath.render.math.alignment import aligned
from loadpath.render.math.boxes import (
    FULL,
    SMALLEST,
    Amount,
    Box,
    Fence,
    Figure,
    Fraction,
    Function,
    Operator,
    Power,
    Ranged,
    Root,
    Row,
    Size,
    Table,
    Variable,
    Words,
    is_tall,
    parts,
    row,
)
from loadpath.render.math.breaking import Boxes, cuts, widest_run
from loadpath.render.math.layout import RELATIONS, lay_out
from loadpath.render.math.texts import MIXED, mantissa_and_exponent, printable
from loadpath.render.math.width import COLUMN, PAGE
from loadpath.units.printing import MINUS, grouped, unit_symbol

MARK = "→"
"""Before the branch taken."""

_GAP = '<mspace width="0.2em"/>'
_THIN_GAP = '<mspace width="0.17em"/>'
_TALL = 'stretchy="true" symmetric="true" minsize="2.2em" maxsize="2.2em"'
_WIDER_GAP = '<mspace width="0.3em"/>'
_FRACTIONAL_POWER = re.compile("([⁰¹²³⁴⁵⁶⁷⁸⁹⁻·]+ᐟ[⁰¹²³⁴⁵⁶⁷⁸⁹]+)")
_LOWERED = str.maketrans("⁰¹²³⁴⁵⁶⁷⁸⁹⁻·ᐟ", "0123456789−./")
_ESCAPES = str.maketrans({"&": "&amp;", "<": "&lt;", ">": "&gt;", '"': "&quot;", "'": "&#39;"})


def mathml(node: Node, *, flat: bool = False, taken: int | None = None) -> str:
    """One `<math>` element, never broken.

    `flat`: no built-up fractions; `taken`: index of the branch of `cases` to mark.
    """
    return _math(parts(lay_out(node, flat, taken)))


def flow(node: Node, sign: str = "", *, most: float = COLUMN, flat: bool = False) -> list[str]:
    """A formula as small `<math>` elements between which a line may end, none wider than `most` em.

    `sign` is a relation in front of it. Joined with `<wbr>` they read as one formula.
    """
    box = lay_out(node, flat)
    whole = row(Operator(RELATIONS.get(sign, sign), "relation"), box) if sign else box
    return [_math(run) for run in cuts(whole, most)]


def widest(node: Node) -> float:
    """Width in em of the widest element that `flow` gives where it needn't open anything."""
    return widest_run(lay_out(node))


def pieces(
    lhs: Node | None, rhs: Node, sign: str = "=", *, most: float = COLUMN, flat: bool = False
) -> list[str]:
    """`lhs = rhs` as `flow` gives it; without `lhs` the first element begins with the sign."""
    left = [] if lhs is None else flow(lhs, most=most, flat=flat)
    return left + flow(rhs, sign, most=most, flat=flat)


def equations(relations: Sequence[Node], *, most: float = PAGE) -> list[tuple[list[str], list[str]]]:
    """Relations as rows of a left and a right side, each as `flow` gives it, to be aligned between the two.

    A right side begins with its relation. A left side that is long stands on the right of a row of its own.
    """
    rows, room = aligned(relations, most)
    return [
        ([_math(run) for run in cuts(left, most)], [_math(run) for run in cuts(right, room)])
        for left, right in rows
    ]


def escape(text: str) -> str:
    """Text for an element or an attribute; what no reader can see is shown as a replacement character."""
    return printable(text).translate(_ESCAPES)


# --- writing boxes ------------------------------------------------------------------------------------------


def _math(boxes: Boxes) -> str:
    return f'<math displaystyle="true">{_row(boxes, FULL)}</math>'


def _row(boxes: Iterable[Box], size: Size) -> str:
    return "".join(_write(box, size, first=i == 0) for i, box in enumerate(boxes))


def _write(box: Box, size: Size, first: bool = False) -> str:
    match box:
        case Figure(number=number):
            return _figure(number, size)
        case Amount(parts=pairs):
            return f"<mrow>{_WIDER_GAP.join(_amount(number, unit, size) for number, unit in pairs)}</mrow>"
        case Variable(symbol=s):
            return _variable(s)
        case Words(text=text, small=small):
            return _small_words(text, size) if small else f"<mtext>{_kept(text)}</mtext>"
        case Function(name=name, index=index):
            return _function(name, index)
        case Operator():
            return _operator(box, first)
        case Row(boxes=boxes):
            return f"<mrow>{_row(boxes, size)}</mrow>"
        case Fence(opening=opening, inner=inner, closing=closing):
            return _fence(opening, inner, closing, size)
        case Fraction(top=top, bottom=bottom):
            inside = size.within()
            return f"<mfrac>{_shrunk(top, inside)}{_shrunk(bottom, inside)}</mfrac>"
        case Power(base=base, exponent=exponent):
            return _power(base, _shrunk(exponent, size.script()), size)
        case Ranged():
            return _ranged(box, size)
        case Root(inner=inner, index=index):
            if index:
                return f"<mroot>{_one(inner, size)}<mn>{index}</mn></mroot>"
            return f"<msqrt>{_row(parts(inner), size)}</msqrt>"
        case Table():
            return _table(box, size)
    raise TypeError(type(box).__name__)


def _one(box: Box, size: Size) -> str:
    """The box as one element."""
    return _write(box, size)


def _shrunk(box: Box, size: Size) -> str:
    """The box as one element at a size that is still fit to read."""
    if size.level <= SMALLEST:
        return _one(box, size)
    return f'<mrow scriptlevel="{SMALLEST}">{_row(parts(box), Size(SMALLEST, True))}</mrow>'


def _kept(text: str) -> str:
    """Escaped text whose spaces at the ends are not dropped."""
    lead, tail = len(text) - len(text.lstrip(" ")), len(text) - len(text.rstrip(" "))
    return "\u00a0" * lead + escape(text.strip(" ")) + "\u00a0" * (tail if text.strip(" ") else 0)


# --- numbers and units --------------------------------------------------------------------------------------


def _figure(number: str, size: Size) -> str:
    mantissa, exponent = mantissa_and_exponent(number)
    if mixed := MIXED.fullmatch(mantissa):
        return _mixed(mixed, size)
    text = f"<mn>{escape(grouped(mantissa))}</mn>"
    if exponent is None:
        return text
    power = f"<msup><mn>10</mn><mn>{grouped(str(exponent))}</mn></msup>"
    return f'<mrow>{text}<mo lspace="0.12em" rspace="0.12em">×</mo>{power}</mrow>'


def _mixed(number: re.Match[str], size: Size) -> str:
    """A typed fraction: small, behind its whole number."""
    minus, whole, over, under = number.groups("")
    level = f' scriptlevel="{SMALLEST}"' if size.level >= SMALLEST else ""
    fraction = "".join(f"<mn{level}>{escape(n)}</mn>" for n in (over, under))
    front = f"<mn>{MINUS if minus else ''}{escape(whole)}</mn>" if minus or whole else ""
    return f'<mrow>{front}<mfrac displaystyle="false">{fraction}</mfrac></mrow>'


def _amount(number: str, unit: str, size: Size) -> str:
    figure = _figure(number, size) if number else ""
    return figure + (_GAP if number and unit != "deg" else "") + _unit(unit)


def _unit(unit: str) -> str:
    """A unit upright; a power that is a fraction has no Unicode form and is raised."""
    out, last = [], ""
    for piece in _FRACTIONAL_POWER.split(unit_symbol(unit)):
        if _FRACTIONAL_POWER.fullmatch(piece):
            out.append(
                f"<msup><mtext>{escape(last)}</mtext><mtext>{piece.translate(_LOWERED)}</mtext></msup>"
            )
            last = ""
            continue
        if last:
            out.append(f"<mtext>{escape(last)}</mtext>")
        last = piece
    return "".join(out) + (f"<mtext>{escape(last)}</mtext>" if last or not out else "")


# --- names --------------------------------------------------------------------------------------------------


def _variable(s: Symbol, exponent: str = "") -> str:
    """A name with its subscript, and an exponent above that where there is one."""
    base = _primed(_base(s.base), s.primes)
    below = f"<mtext>{escape(s.subscript)}</mtext>" if s.subscript else ""
    if below and exponent:
        body = f"<msubsup>{base}{below}{exponent}</msubsup>"
    elif below:
        body = f"<msub>{base}{below}</msub>"
    else:
        body = f"<msup>{base}{exponent}</msup>" if exponent else base
    return f"<mrow><mtext>{escape(s.prefix)}</mtext>{body}</mrow>" if s.prefix else body


def _primed(base: str, primes: int) -> str:
    """Primes stand on the line: the face has them raised already."""
    if not primes:
        return base
    return f'<mrow>{base}<mo form="postfix" lspace="0.06em" rspace="0">{"′" * primes}</mo></mrow>'


def _base(base: str) -> str:
    letters = base.rstrip("0123456789")
    if len(letters) == 1 and letters != base:
        return f"<mrow>{_letters(letters)}<mn>{base[1:]}</mn></mrow>"
    return _letters(base) if base else "<mrow></mrow>"


def _letters(text: str) -> str:
    """One Latin or Greek letter slopes by itself; words of scripts that slope take the class `word`."""
    if len(text) == 1 and (text.isascii() or "Α" <= text <= "ω"):
        return f"<mi>{escape(text)}</mi>"
    return f'<mi class="word">{escape(text)}</mi>' if _slopes(text) else f"<mi>{escape(text)}</mi>"


def _slopes(text: str) -> bool:
    names = (unicodedata.name(c, "") for c in text if c.isalpha())
    return all(name.startswith(("LATIN", "GREEK", "CYRILLIC")) for name in names)


def _function(name: str, index: str) -> str:
    """One letter would slope as an `<mi>`: the d of dx doesn't."""
    text = f"<mi>{name}</mi>" if name.isalnum() and len(name) > 1 else f"<mtext>{escape(name)}</mtext>"
    return f"<msub>{text}<mn>{index}</mn></msub>" if index else text


# --- signs, brackets, powers --------------------------------------------------------------------------------


def _operator(operator: Operator, first: bool) -> str:
    sign = escape(operator.sign)
    match operator.kind:
        case "logic":
            return f'<mspace width="0.5em"/><mtext>{sign}</mtext><mspace width="0.5em"/>'
        case "sign":
            return f'<mo form="prefix">{sign}</mo>'
        case "apply":
            return "<mo>&#x2061;</mo>"
        case "comma":
            return f'<mo rspace="0.3em">{sign}</mo>'
        case "slash":
            return f'<mo form="infix" lspace="0.06em" rspace="0.06em">{sign}</mo>'
        case "open" if operator.tall:
            return f'<mo form="prefix" {_TALL} lspace="0" rspace="0">{sign}</mo>'
        case "close" if operator.tall:
            return f'<mo form="postfix" {_TALL}>{sign}</mo>'
        case "big":
            return f"<mo>{sign}</mo>"
        case "gap":
            return _THIN_GAP
        case "open":
            return f'<mo form="prefix" stretchy="false" lspace="0" rspace="0">{sign}</mo>'
        case "close":
            return f'<mo form="postfix" stretchy="false">{sign}</mo>'
        case "raise":
            return f'<mo form="infix" lspace="0" rspace="0">{sign}</mo>'
    return f'<mo form="infix">{sign}</mo>' if first else f"<mo>{sign}</mo>"


def _fence(opening: str, inner: Box, closing: str, size: Size) -> str:
    kind = 'stretchy="true"' if is_tall(inner) else 'stretchy="false"'
    before, after = f'<mo form="prefix" {kind}>{opening}</mo>', f'<mo form="postfix" {kind}>{closing}</mo>'
    return f"<mrow>{before}{_row(parts(inner), size)}{after}</mrow>"


def _ranged(box: Ranged, size: Size) -> str:
    ends = "".join(_shrunk(end, size.script()) for end in (box.below, box.above) if end is not None)
    if box.beside:
        tag = "msub" if box.above is None else "msubsup"
    else:
        tag = "munder" if box.above is None else "munderover"
    return f"<{tag}>{_write(box.head, size)}{ends}</{tag}>"


def _power(base: Box, exponent: str, size: Size) -> str:
    if isinstance(base, Variable) and not base.symbol.primes:
        return _variable(base.symbol, exponent)
    return f"<msup>{_one(base, size)}{exponent}</msup>"


def _table(table: Table, size: Size) -> str:
    rows = "".join(
        _branch(value, condition, table.chosen, i == table.chosen, size)
        for i, (value, condition) in enumerate(table.rows)
    )
    brace = '<mo form="prefix" stretchy="true" symmetric="true">{</mo>'
    return f'<mrow>{brace}<mtable class="braced">{rows}</mtable></mrow>'


def _branch(value: Box, condition: Box | None, chosen: int | None, taken: bool, size: Size) -> str:
    mark = "" if chosen is None else f"<mtd>{f'<mtext>{MARK}</mtext>' if taken else ''}</mtd>"
    words = "<mtext>otherwise</mtext>"
    if condition is not None:
        words = f'<mtext>if</mtext><mspace width="0.35em"/>{_row(parts(condition), size)}'
    cells = [f'<mtd displaystyle="true">{text}</mtd>' for text in (_row(parts(value), size), words)]
    return ('<mtr class="chosen">' if taken else "<mtr>") + mark + "".join(cells) + "</mtr>"


def _small_words(text: str, size: Size) -> str:
    level = min(size.level + 1, SMALLEST)
    return f'<mtext scriptlevel="{level}">{_kept(text)}</mtext>'
