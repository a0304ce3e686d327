"""Expressions as sums of terms, in the order typed: what products, like terms and fractions are worked on.

A term is an exact number times factors, each a tree with a rational exponent. Reading a tree multiplies
nothing out: a sum within a product stays one factor until somebody expands it.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable
from dataclasses import dataclass
from fractions import Fraction
from functools import lru_cache
from math import isqrt

from loadpath.algebra.failure import NoForm, remaining, too_large
from loadpath.algebra.trees import ZERO, exact, is_short, is_zero, quantity, quantity_value, size
from loadpath.algebra.writing import Order, current_order, product_node, sum_node
from loadpath.formula.tree import Binary, Bracket, Call, Name, Negative, Node, Number, Quantity

MOST_TERMS = 2000
MOST_BITS = 4000
HALF = Fraction(1, 2)


@dataclass(frozen=True, slots=True)
class Term:
    """`number * base^exponent * ...`, factors in the order met."""

    number: Fraction
    factors: tuple[tuple[Node, Fraction], ...] = ()


Terms = tuple[Term, ...]
UNIT = Term(Fraction(1))


# --- reading and writing ------------------------------------------------------------------------------------


def read(node: Node) -> Terms:
    """The tree as a sum of terms, like terms together; raises NoForm where it divides by zero."""
    return _read(node, current_order())


@lru_cache(maxsize=4096)
def _read(node: Node, order: Order | None) -> Terms:
    """Once for each order in which products are written, which decides how sums within products look."""
    match node:
        case Number(text=typed):
            return numeric(exact(typed))
        case Quantity():
            return () if is_zero(node) else (factor(node),)
        case Negative(operand=operand):
            return scaled(read(operand), Fraction(-1))
        case Binary(operator="+" | "-"):
            return _read_sum(node)
        case Binary(operator="*" | "/"):
            return _read_product(node)
        case Binary(operator="^", left=left, right=right):
            exponent = as_number(read(right))
            if exponent is not None:
                return power(as_term(read(left)), exponent)
            base = settled(read(left))
            if not base:
                raise NoForm
            return (factor(Binary("^", write(base), write(settled(read(right))))),)
        case Call(function="sqrt", arguments=(only,)):
            return power(as_term(settled(read(only))), HALF)
        case Call():
            return _folded(Call(node.function, tuple(write(settled(read(a))) for a in _arguments(node))))
        case Bracket(inner=inner, power=power_of):
            return _bracket(settled(read(inner)), power_of)
    return (factor(node),)


def _read_sum(node: Node) -> Terms:
    """A chain of sums without recursion along it."""
    parts: list[Terms] = []
    while isinstance(node, Binary) and node.operator in "+-":
        right = read(node.right)
        parts.append(right if node.operator == "+" else scaled(right, Fraction(-1)))
        node = node.left
    parts.append(read(node))
    return merged(t for part in reversed(parts) for t in part)


def _read_product(node: Node) -> Terms:
    parts: list[Term] = []
    while isinstance(node, Binary) and node.operator in "*/":
        right = as_term(read(node.right))
        parts.append(right if node.operator == "*" else inverse(right))
        node = node.left
    out = as_term(read(node))
    for part in reversed(parts):
        out = times(out, part)
    return (out,) if out.number else ()


def _bracket(inner: Terms, order: int) -> Terms:
    """A Macaulay bracket, worked out where its inside is a typed number or nothing."""
    if not inner:
        return (UNIT,) if order == 0 else ()
    known = sign(inner)
    if known is None or (len(inner) > 1):
        return (factor(Bracket(write(inner), order)),)
    return power(inner[0], Fraction(order)) if known > 0 else ()


def _arguments(call: Call) -> tuple[Node, ...]:
    """`max(max(a, b), c)` takes all three."""
    if call.function not in ("max", "min"):
        return call.arguments
    out: list[Node] = []
    for argument in call.arguments:
        same = isinstance(argument, Call) and argument.function == call.function
        out += _arguments(argument) if same and isinstance(argument, Call) else (argument,)
    return tuple(dict.fromkeys(out))


_AT_ZERO = {"sin": 0, "tan": 0, "asin": 0, "atan": 0, "sinh": 0, "tanh": 0, "abs": 0, "cbrt": 0,
            "cos": 1, "sec": 1, "exp": 1, "cosh": 1}  # fmt: skip


def _folded(call: Call) -> Terms:
    """A call, worked out where it is plain: `sin(0)`, `ln(1)`, `sin(pi)`."""
    if len(call.arguments) != 1:
        return (factor(call),)
    inside = read(call.arguments[0])
    value = as_number(inside)
    if value == 0 and call.function in _AT_ZERO:
        return numeric(Fraction(_AT_ZERO[call.function]))
    if call.function in ("ln", "log10") and value is not None and value <= 0:
        raise NoForm
    if call.function in ("ln", "log10") and value == 1:
        return ()
    if call.function == "abs" and value is not None:
        return numeric(abs(value))
    turns = _turns(inside)
    if call.function in ("sin", "cos") and turns is not None and (2 * turns).denominator == 1:
        quarter = int(2 * turns) + (1 if call.function == "cos" else 0)
        return numeric(Fraction((0, 1, 0, -1)[quarter % 4]))
    return (factor(call),)


def _turns(terms: Terms) -> Fraction | None:
    """How many times pi, where it is a number times pi."""
    if len(terms) == 1 and terms[0].factors == ((Name("pi"), Fraction(1)),):
        return terms[0].number
    return None


def numeric(value: Fraction) -> Terms:
    """A plain number."""
    return (Term(value),) if value else ()


def factor(node: Node, exponent: Fraction = Fraction(1)) -> Term:
    """One factor."""
    return Term(Fraction(1), ((node, exponent),))


def as_number(terms: Terms) -> Fraction | None:
    """The value where there is nothing but a number."""
    if not terms:
        return Fraction(0)
    return terms[0].number if len(terms) == 1 and not terms[0].factors else None


def as_term(terms: Terms) -> Term:
    """One term: a sum becomes one factor."""
    if not terms:
        return Term(Fraction(0))
    if len(terms) == 1:
        return terms[0]
    return factor(write(settled(terms))) if len(settled(terms)) > 1 else as_term(settled(terms))


def write(terms: Terms) -> Node:
    """The tree of a sum, factors and terms in the order they have."""
    if not terms:
        return ZERO
    return sum_node([product_node(t.number, t.factors) for t in terms])


def is_sum(node: Node) -> bool:
    """True for a base that could be multiplied out."""
    return isinstance(node, Binary) and node.operator in "+-"


# --- arithmetic ---------------------------------------------------------------------------------------------


def scaled(terms: Terms, by: Fraction) -> Terms:
    """Every term times a number."""
    return tuple(Term(t.number * by, t.factors) for t in terms) if by else ()


def times(a: Term, b: Term) -> Term:
    """The product of two terms."""
    if not b.factors:
        return Term(_held(a.number * b.number), a.factors)
    exponents = dict(a.factors)
    for base, exponent in b.factors:
        exponents[base] = exponents.get(base, Fraction(0)) + exponent
    out = Term(_held(a.number * b.number), tuple((n, e) for n, e in exponents.items() if e))
    whole = [(n, e) for n, e in out.factors if _opens(n, e)]
    if not whole:
        return out
    out = Term(out.number, tuple(f for f in out.factors if not _opens(*f)))
    for base, exponent in whole:
        opened = as_term(power(as_term(read(base)), exponent))
        if any(n == base for n, _ in opened.factors):
            out = Term(out.number, (*out.factors, (base, exponent)))
        else:
            out = times(out, opened)
    return out


def _opens(base: Node, exponent: Fraction) -> bool:
    """True for a product within a root that the exponent has become whole for."""
    if exponent.denominator != 1:
        return False
    if isinstance(base, Binary):
        return base.operator in "*/" or (base.operator == "^" and as_number(read(base.right)) is not None)
    return isinstance(base, Number)


def _held(number: Fraction) -> Fraction:
    if number.numerator.bit_length() + number.denominator.bit_length() > 2 * MOST_BITS:
        raise too_large("the derived expression holds a number of more than a thousand digits")
    return number


def inverse(term: Term) -> Term:
    """1 over a term."""
    if not term.number:
        raise NoForm
    return Term(1 / term.number, tuple((n, -e) for n, e in term.factors))


def power(term: Term, exponent: Fraction) -> Terms:
    """A term to a rational power. The root of an even power stays a root: sqrt(x^2) is not x."""
    if not term.number:
        if exponent < 0:
            raise NoForm
        return (UNIT,) if exponent == 0 else ()
    if exponent.denominator == 1:
        number = number_power(term.number, int(exponent))
        if number is None:
            return (factor(Binary("^", write((term,)), write(numeric(exponent)))),)
        out = Term(number)
        for base, e in term.factors:
            out = times(out, factor(base, e * exponent)) if e * exponent else out
        return (out,)
    if not term.factors and term.number == 1:
        return (UNIT,)
    if term.number == 1 and len(term.factors) == 1 and term.factors[0][1] == 1:
        return (factor(term.factors[0][0], exponent),)
    root = _root(term.number, exponent)
    if root is None or not term.factors:
        return (factor(write((term,)), exponent),) if root is None else (Term(root),)
    inside = power(Term(Fraction(1), term.factors), exponent)[0] if term.number != 1 else None
    return (factor(write((term,)), exponent) if inside is None else times(Term(root), inside),)


def number_power(number: Fraction, exponent: int) -> Fraction | None:
    """None where the power would be too long a number."""
    bits = number.numerator.bit_length() + number.denominator.bit_length()
    if number not in (1, -1) and bits * abs(exponent) > MOST_BITS:
        return None
    return number ** (exponent if number not in (1, -1) else exponent % 2)


def _root(number: Fraction, exponent: Fraction) -> Fraction | None:
    """The exact power of a number above 0, None where there is none."""
    if number <= 0 or exponent.denominator > 4:
        return None
    over = _whole_root(number.numerator, exponent.denominator)
    under = _whole_root(number.denominator, exponent.denominator)
    if over is None or under is None:
        return None
    return number_power(Fraction(over, under), exponent.numerator)


def _whole_root(value: int, degree: int) -> int | None:
    if degree in (2, 4):
        root = isqrt(value) if degree == 2 else isqrt(isqrt(value))
    else:
        root = _cube_root(value)
    return root if root**degree == value else None


def _cube_root(value: int) -> int:
    low, high = 0, 1 << (value.bit_length() // 3 + 1)
    while low < high:
        middle = (low + high + 1) // 2
        low, high = (middle, high) if middle**3 <= value else (low, middle - 1)
    return low


def merged(terms: Iterable[Term]) -> Terms:
    """Like terms together, each where its first one stood."""
    sums: dict[frozenset[tuple[Node, Fraction]], tuple[Fraction, tuple[tuple[Node, Fraction], ...]]] = {}
    for term in terms:
        key = frozenset(term.factors)
        number, factors = sums.get(key, (Fraction(0), term.factors))
        sums[key] = (number + term.number, factors)
    out = tuple(Term(number, factors) for number, factors in sums.values() if number)
    if len(out) > MOST_TERMS:
        raise too_large(f"the derived expression has more than {MOST_TERMS} terms")
    return _quantities_together(out)


def _quantities_together(terms: Terms) -> Terms:
    """`5 m - 2 m` is `3 m`: typed quantities of one unit, next to factors that are the same."""
    groups: dict[tuple[str, frozenset[tuple[Node, Fraction]]], list[int]] = {}
    splits = [_one_quantity(term) for term in terms]
    for index, one in enumerate(splits):
        if one is not None:
            groups.setdefault((one[1], frozenset(one[2])), []).append(index)
    out: list[Term | None] = list(terms)
    for members in groups.values():
        parts = [one for i in members if (one := splits[i]) is not None]
        total = sum((number for number, _, _ in parts), Fraction(0))
        if len(members) < 2 or not is_short(total):
            continue
        _, unit, others = parts[0]
        for i in members:
            out[i] = None
        if total:
            typed = (quantity(abs(total), unit), Fraction(1))
            out[members[0]] = Term(Fraction(1 if total > 0 else -1), (typed, *others))
    return tuple(t for t in out if t is not None)


def _one_quantity(term: Term) -> tuple[Fraction, str, tuple[tuple[Node, Fraction], ...]] | None:
    """Value, unit and the other factors of a term with one quantity in it."""
    found = [(n, e) for n, e in term.factors if isinstance(n, Quantity)]
    if len(found) != 1 or found[0][1] != 1 or not isinstance(found[0][0], Quantity):
        return None
    value = quantity_value(found[0][0])
    if value is None:
        return None
    return value[0] * term.number, value[1], tuple(f for f in term.factors if f[0] != found[0][0])


def product(a: Terms, b: Terms) -> Terms:
    """Two sums multiplied out."""
    if len(a) * len(b) > 20 * MOST_TERMS:
        raise too_large(f"the derived expression has more than {MOST_TERMS} terms")
    remaining()
    return merged(times(s, t) for s in a for t in b)


def expanded(terms: Terms, wanted: Callable[[Node], bool] = lambda base: True) -> Terms:
    """Sums with whole powers above 0 multiplied out."""
    out: list[Term] = []
    for term in terms:
        at = next((i for i, f in enumerate(term.factors) if _multiplies_out(f) and wanted(f[0])), None)
        if at is None:
            out.append(term)
            continue
        base, exponent = term.factors[at]
        inside = expanded(read(base), wanted)
        done: Terms = (Term(term.number, term.factors[:at]),)
        if exponent > 64:
            raise too_large("the derived expression has a sum to a high power")
        for _ in range(int(exponent)):
            done = product(done, inside)
        out += expanded(product(done, (Term(Fraction(1), term.factors[at + 1 :]),)), wanted)
        if len(out) > 20 * MOST_TERMS:
            raise too_large(f"the derived expression has more than {MOST_TERMS} terms")
    return merged(out)


def _multiplies_out(factor: tuple[Node, Fraction]) -> bool:
    return is_sum(factor[0]) and factor[1].denominator == 1 and factor[1] > 0


def settled(terms: Iterable[Term]) -> Terms:
    """Multiplied out where that is shorter."""
    terms = merged(terms)
    if not any(_multiplies_out(f) for t in terms for f in t.factors):
        return terms
    if any(e > 8 for t in terms for n, e in t.factors if is_sum(n)):
        return terms
    other = expanded(terms)
    return other if size(write(other)) < size(write(terms)) else terms


def sign(terms: Terms) -> int | None:
    """-1, 0 or 1 where nothing but typed numbers of one unit stand there; None where it hangs on a name."""
    if not terms:
        return 0
    if len(terms) > 1:
        return None
    for base, _ in terms[0].factors:
        if not (isinstance(base, Number) or base == Name("pi") or _is_plain_quantity(base)):
            return None
    return 1 if terms[0].number > 0 else -1


def _is_plain_quantity(base: Node) -> bool:
    return isinstance(base, Quantity) and all(p.unit not in ("degC", "degF") for p in base.parts)
