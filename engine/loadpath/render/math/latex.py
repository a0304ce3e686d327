r"""Formulas as LaTeX math, within what KaTeX and MathJax both read and Git hosts let through.

A Git host may take a backslash before a sign for an escape of Markdown and drop it, and `12\,345` would
then read as 12,345. So no macro here is a backslash and a sign: `\thinspace` stands for `\,`, `\cr` for a
double backslash. No `_` stands between two signs, where Markdown would begin to stress. Signs of a typed
word that mean something to TeX or Markdown are printed by their full-width twins.
"""

from __future__ import annotations

import re
from collections.abc import Iterable, Sequence

from loadpath.formula.names import Symbol
from loadpath.formula.tree import Node
from loadpath.render.math.alignment import NOTHING, aligned
from loadpath.render.math.boxes import (
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
    Table,
    Variable,
    Words,
    is_tall,
    parts,
    row,
)
from loadpath.render.math.breaking import Boxes, lines
from loadpath.render.math.layout import RELATIONS, lay_out
from loadpath.render.math.texts import MIXED, mantissa_and_exponent, printable
from loadpath.render.math.width import PAGE, width
from loadpath.units.printing import MINUS, NARROW, grouped, unit_symbol
from loadpath.units.printing import THIN as THIN_SPACE

THIN = r"\thinspace "
DEEPER = r"\quad "
"""In front of a line that begins within a bracket, once for each."""

_GREEK = {
    "α": "alpha", "β": "beta", "γ": "gamma", "δ": "delta", "ε": "varepsilon", "ζ": "zeta", "η": "eta",
    "θ": "theta", "ι": "iota", "κ": "kappa", "λ": "lambda", "μ": "mu", "ν": "nu", "ξ": "xi", "π": "pi",
    "ρ": "rho", "σ": "sigma", "τ": "tau", "υ": "upsilon", "φ": "varphi", "χ": "chi", "ψ": "psi", "ω": "omega",
    "Γ": "Gamma", "Δ": "Delta", "Θ": "Theta", "Λ": "Lambda", "Ξ": "Xi", "Π": "Pi", "Σ": "Sigma",
    "Υ": "Upsilon", "Φ": "Phi", "Ψ": "Psi", "Ω": "Omega",
}  # fmt: skip
_AS_LATIN = dict(zip("ΑΒΕΖΗΙΚΜΝΟΡΤΧο", "ABEZHIKMNOPTXo", strict=True))
"""Greek letters without a macro: a Latin letter looks the same."""
_OWN_MACRO = frozenset(
    "sin cos tan sec sinh cosh tanh arcsin arccos arctan exp ln log min max lim".split()  # noqa: SIM905
)
_SIGNS = {
    "≠": r" \ne ",
    "≤": r" \le ", "≥": r" \ge ", "<": r" \lt ", ">": r" \gt ", "=": " = ", "+": " + ", "−": " - ",
    "×": r" \times ", "⋅": r" \cdot ", "÷": r" \div ", "/": "/", ",": ", ", "√": r"\surd ",
    "∛": r"{}^{3}\surd ", "^": r" \wedge ", "→": r" \to ", "∫": r"\int ", "∑": r"\sum ", "…": r" \ldots ",
}  # fmt: skip
_OPENING = {"(": "(", "[": "[", "⟨": r"\langle ", "|": r"\lvert "}
_CLOSING = {")": ")", "]": "] ", "⟩": r"\rangle ", "|": r"\rvert "}
_LOWERED = str.maketrans("⁰¹²³⁴⁵⁶⁷⁸⁹⁻·ᐟ", "0123456789-./")
_UNIT_PIECES = re.compile("[⁰¹²³⁴⁵⁶⁷⁸⁹⁻·ᐟ]+|[A-Za-z0-9]+|.", re.S)
_IN_UNITS = {"⋅": r"{\cdot}", "°": r"{}^{\circ}", " ": THIN, "/": "/", "(": "(", ")": ")"}
_HARMLESS = frozenset(" .,;!?()/+=-")
_TWINS = {"'": "’", '"': "”", "_": "ˍ"}


def latex(node: Node, *, flat: bool = False, taken: int | None = None) -> str:
    """A formula without its delimiters, on one line.

    `flat`: no built-up fractions; `taken`: index of the branch of `cases` to mark.
    """
    return _line(parts(lay_out(node, flat, taken)))


def latex_lines(lhs: Node | None, sides: Sequence[Node], sign: str = "=", *, most: float = PAGE) -> str:
    """`lhs = side = side` without its delimiters, on one line where it fits into `most` em.

    Else a line a side, aligned, and more where a side has to be broken before an operator. No line begins
    with what Markdown takes for markup.
    """
    first = parts(lay_out(lhs)) if lhs is not None else ()
    boxes = [row(Operator(RELATIONS[sign], "relation"), lay_out(side)) for side in sides]
    whole = row(*first, *boxes)
    if len(lines(whole, most)) <= 1:
        return ("" if first else "{} ") + _line(parts(whole))
    room = most - sum(width(box) for box in first)
    rows = [(row(*first) if i == 0 else NOTHING, box) for i, box in enumerate(boxes)]
    return _block(rows, room)


def latex_equations(equations: Sequence[Node], *, most: float = PAGE) -> str:
    """Relations without delimiters, one block aligned at their first signs; each may take several lines."""
    return _block(*aligned(equations, most))


def _block(rows: Sequence[tuple[Box, Box]], room: float) -> str:
    out: list[str] = []
    for left, right in rows:
        (_, start), *more = lines(right, room)
        out.append(f"{_begun(_line(parts(left)))} & {_line(start)}".strip())
        out += [rf"& \qquad {DEEPER * depth}{{}} {_line(run)}" for depth, run in more]
    return "\n".join([r"\begin{aligned}", " \\cr\n".join(out), r"\end{aligned}"])


def _begun(line: str) -> str:
    """A line that Markdown can't take for an entry of a list."""
    return f"{{}} {line}" if line[:1].isdigit() or line.startswith("-") else line


# --- writing boxes ------------------------------------------------------------------------------------------


def _line(boxes: Boxes) -> str:
    return re.sub("  +", " ", _row(boxes)).strip()


def _row(boxes: Iterable[Box], fractions: int = 0) -> str:
    return "".join(_write(box, fractions) for box in boxes)


def _inside(box: Box, fractions: int = 0) -> str:
    return f"{{{_write(box, fractions).strip()}}}"


def _write(box: Box, fractions: int = 0) -> str:
    """LaTeX of a box; `fractions`: how many are around it."""
    match box:
        case Figure(number=number):
            return _figure(number)
        case Amount(parts=pairs):
            return THIN.join(_amount(number, unit) for number, unit in pairs)
        case Variable(symbol=s):
            return _variable(s)
        case Words(text=text):
            return _text(text)
        case Function(name=name, index=index):
            return _function(name) + (f"_{{{index}}}" if index else "")
        case Operator():
            return _operator(box)
        case Row(boxes=boxes):
            return _row(boxes, fractions)
        case Fence(opening=opening, inner=inner, closing=closing):
            left, right = (r"\left", r"\right") if is_tall(inner) else ("", "")
            text = _row(parts(inner), fractions).strip()
            return f"{left}{_OPENING[opening]}{text}{right}{_CLOSING[closing].strip()}"
        case Fraction(top=top, bottom=bottom):
            macro = r"\frac" if fractions else r"\dfrac"
            return macro + _inside(top, fractions + 1) + _inside(bottom, fractions + 1)
        case Power(base=base, exponent=exponent):
            return f"{_base(base, fractions)}^{_inside(exponent, fractions)}"
        case Ranged(below=below, above=above):
            upper = "" if above is None else f"^{_inside(above, fractions)}"
            return f"{_write(box.head).strip()}_{_inside(below, fractions)}{upper} "
        case Root(inner=inner, index=index):
            return rf"\sqrt{f'[{index}]' if index else ''}{_inside(inner, fractions)}"
        case Table():
            return _table(box)
    raise TypeError(type(box).__name__)


def _base(box: Box, fractions: int) -> str:
    """What an exponent may stand behind as it is; a power or a primed name takes braces."""
    bare = isinstance(box, Figure | Fence | Operator) or (isinstance(box, Variable) and not box.symbol.primes)
    return _write(box, fractions).strip() if bare else _inside(box, fractions)


def _operator(operator: Operator) -> str:
    sign = operator.sign
    match operator.kind:
        case "logic":
            return rf"\enspace {_text(sign)}\enspace "
        case "sign":
            return "-"
        case "apply":
            return ""
        case "gap":
            return THIN
        case "open" if operator.tall and sign in _OPENING:
            return rf"\Bigl{_OPENING[sign]}"
        case "close" if operator.tall:
            return rf"\Bigr{_CLOSING[sign]}"
        case "open" if sign in _OPENING:
            return _OPENING[sign]
        case "close":
            return _CLOSING[sign]
    return _SIGNS[sign]


def _function(name: str) -> str:
    if name in _OWN_MACRO:
        return "\\" + name
    return _upright(name)


def _table(table: Table) -> str:
    rows = []
    for i, (value, condition) in enumerate(table.rows):
        words = _text("otherwise") if condition is None else rf"\text{{if }}{_write(condition).strip()}"
        mark = r"\quad \text{(taken)}" if i == table.chosen else ""
        rows.append(f"{_write(value).strip()} & {words}{mark}")
    return r"\begin{cases} " + r" \cr ".join(rows) + r" \end{cases}"


# --- numbers and units --------------------------------------------------------------------------------------


def _figure(number: str) -> str:
    mantissa, exponent = mantissa_and_exponent(number)
    if mixed := MIXED.fullmatch(mantissa):
        minus, whole, over, under = mixed.groups("")
        return rf"{minus}{whole}\tfrac{{{over}}}{{{under}}}"
    text = grouped(mantissa).replace(MINUS, "-").replace(THIN_SPACE, THIN)
    return text + (rf" \times 10^{{{exponent}}}" if exponent is not None else "")


def _amount(number: str, unit: str) -> str:
    return (_figure(number) + (THIN if unit != "deg" else "") if number else "") + _unit(unit)


def _unit(unit: str) -> str:
    if unit == "deg":
        return r"{}^{\circ}"
    pieces = (_unit_piece(piece) for piece in _UNIT_PIECES.findall(unit_symbol(unit)))
    return rf"\mathrm{{{''.join(pieces).strip()}}}"


def _unit_piece(piece: str) -> str:
    lowered = piece.translate(_LOWERED)
    if lowered != piece:
        return f"^{{{lowered}}}"
    return _IN_UNITS.get(piece) or (piece if piece.isascii() and piece.isalnum() else _text(piece))


# --- names and words ----------------------------------------------------------------------------------------


def _text(text: str) -> str:
    r"""Upright text in `\text{}`, with nothing in it that TeX or Markdown would act on."""
    return rf"\text{{{''.join(_harmless(character) for character in printable(text))}}}"


def _harmless(character: str) -> str:
    if character in (THIN_SPACE, NARROW):
        return " "
    if not character.isascii() or character.isalnum() or character in _HARMLESS:
        return character
    return _TWINS.get(character) or chr(ord(character) + 0xFEE0)


def _variable(s: Symbol) -> str:
    prefix = "" if not s.prefix else _upright(s.prefix)
    base = _letters(s.base) or "{}"
    if s.subscript:
        # never a sign on both sides of the `_`
        base += ("_" if base[-1].isalnum() else "_ ") + f"{{{_subscript(s.subscript)}}}"
    primes = r" \prime" * s.primes
    return f"{prefix}{base}" + (f"^{{{primes.strip()}}}" if primes else "")


def _subscript(text: str) -> str:
    if re.fullmatch("[A-Za-z0-9,]+", text):
        return rf"\mathrm{{{text.replace(',', '{,}')}}}"
    return "{,}".join(_subscript_part(part) for part in text.split(","))


def _subscript_part(part: str) -> str:
    if part[0] in _GREEK | _AS_LATIN and part[1:].isdigit() | (len(part) == 1):
        return f"{_letter(part[0])} {part[1:]}".strip()
    return _upright(part)


def _upright(text: str) -> str:
    return rf"\mathrm{{{text}}}" if re.fullmatch("[A-Za-z0-9.]+", text) else _text(text)


def _letters(base: str) -> str:
    """One letter with digits behind it as math italic, a word as such, other scripts as text."""
    letters = base.rstrip("0123456789")
    if len(letters) == 1:
        return _letter(letters) + base[1:]
    if not base or base == "_":
        return ""
    return rf"\mathit{{{base}}}" if base.isascii() and base.isalnum() else _text(base)


def _letter(letter: str) -> str:
    if letter in _GREEK:
        return f"\\{_GREEK[letter]}"
    if letter in _AS_LATIN:
        return rf"\mathrm{{{_AS_LATIN[letter]}}}"
    return letter if letter.isascii() and letter.isalpha() else _text(letter)
