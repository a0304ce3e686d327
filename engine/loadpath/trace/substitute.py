"""Substitutions: the formula with each name replaced by its printed value, so that a reader lands on the result.

Where the printed units don't cancel to those of the result (ft against in, rpm, degrees, hp), the factor is printed as
a term of its own. Powers of ten between SI prefixes are left to the reader.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass, replace
from fractions import Fraction

from loadpath.formula.tree import (
    As,
    Binary,
    Bracket,
    Call,
    Factor,
    Logic,
    Name,
    Negative,
    Node,
    Quantity,
    Relation,
    Shown,
)
from loadpath.functions import FUNCTIONS
from loadpath.resolve.dimensions import typed_exponent
from loadpath.trace.digits import exact_digits
from loadpath.trace.model import Called, Operand
from loadpath.units import Unit, parse_unit
from loadpath.units.printing import plain
from loadpath.units.unit import PREFIXED, PREFIXES

FACTOR_DIGITS = 6
"""Significant digits of a conversion factor that no fewer digits hold exactly."""
Scope = Callable[[str], Operand | None]
"""The printed value of a name, None for one that stands as it is (`pi`)."""


def shown(operand: Operand, more: int = 0) -> Shown:
    """A value as it stands in a substitution, with more digits where asked."""
    if isinstance(operand.si, str):
        return Shown(operand.si, "", word=True)
    unit = "in" if operand.unit.text.startswith("ft-in") else operand.unit.text
    if operand.typed:
        return Shown(operand.typed, unit)
    return Shown(plain(operand.unit.from_si(operand.si), operand.digits + (0 if operand.exact else more)), unit)


def substitute(tree: Node, scope: Scope, calls: tuple[Called, ...], more: int = 0) -> Node:
    """The tree with printed values in place of names and of calls of the sheet's own functions."""
    values = {called.call: called.value for called in calls}

    def put(node: Node) -> Node:
        match node:
            case Name(name=name):
                operand = scope(name)
                return node if operand is None else shown(operand, more)
            case Call() if node in values:
                return shown(values[node], more)
            case Call():
                return replace(node, arguments=tuple(put(a) for a in node.arguments))
            case Negative(operand=operand):
                return replace(node, operand=put(operand))
            case Binary(left=left, right=right):
                return replace(node, left=put(left), right=put(right))
            case Bracket(inner=inner):
                return replace(node, inner=put(inner))
            case As(operand=Name(name=name), unit=unit) if (value := scope(name)) is not None and isinstance(value.si, float):
                return _number_of(value, parse_unit(unit), more)
            case As(operand=operand):
                return replace(node, operand=put(operand))
            case Relation(operands=operands) | Logic(operands=operands):
                return replace(node, operands=tuple(put(o) for o in operands))
        return node

    return put(tree)


def _number_of(value: Operand, unit: Unit, more: int) -> Shown:
    """The plain number of a unit in a value: what `(f_c as psi)` stands for."""
    if value.unit.text == unit.text:
        return replace(shown(value, more), unit="")
    assert isinstance(value.si, float)
    number = unit.from_si(value.si)
    if value.exact:
        return Shown(plain(number, exact_digits(number, FACTOR_DIGITS)), "")
    return Shown(plain(number, value.digits + more), "")


# --- conversion factors -----------------------------------------------------------------------------------------


@dataclass(frozen=True, slots=True)
class Scale:
    """What the printed numbers of an expression count in."""

    size: float
    """SI value of one."""
    atoms: tuple[tuple[str, Fraction], ...] = ()
    absolute: str = ""
    """`degC` or `degF` where the number is a reading of that scale."""

    def times(self, other: Scale, sign: int = 1) -> Scale:
        atoms = _merge(self.atoms, tuple((n, p * sign) for n, p in other.atoms))
        return Scale(self.size * other.size**sign, atoms)

    def power(self, exponent: Fraction) -> Scale:
        return Scale(self.size ** float(exponent), tuple((n, p * exponent) for n, p in self.atoms))


PLAIN_SCALE = Scale(1.0)


def scale_of(unit: Unit) -> Scale:
    """The scale of a unit."""
    return Scale(unit.size, unit.atoms, unit.text if unit.absolute else "")


def with_factors(tree: Node, unit: Unit) -> Node:
    """The substituted tree with factors put in where its units don't cancel to `unit`."""
    node, have = _scaled(tree, scale_of(unit))
    return _converted(node, have, scale_of(unit))


def natural_unit(tree: Node) -> Unit:
    """The unit that the printed numbers of a substituted tree come out in."""
    _, scale = _scaled(tree)
    return parse_unit(scale.absolute or _unit_text(_best_label(scale.atoms)))


def _scaled(node: Node, want: Scale | None = None) -> tuple[Node, Scale]:
    """The node with factors inside it, and what its number then counts in; sums turn to `want` where they can."""
    match node:
        case Shown(unit=unit, word=False):
            return node, scale_of(parse_unit(unit))
        case Quantity(parts=parts):
            return node, scale_of(parse_unit(parts[-1].unit))
        case Negative(operand=operand):
            inner, scale = _scaled(operand, want)
            return replace(node, operand=inner), scale
        case Binary(operator="+" | "-", left=left, right=right):
            (a, b), scale = _alike((left, right), want)
            if node.operator == "-" and scale.absolute and _is_absolute(right):
                scale = _step_scale(scale)
            return replace(node, left=a, right=b), scale
        case Binary(operator="*" | "/", left=left, right=right):
            a, first = _scaled(left)
            b, second = _scaled(right)
            return replace(node, left=a, right=b), first.times(second, 1 if node.operator == "*" else -1)
        case Binary(left=left, right=right):
            return _scaled_power(node, left, right)
        case Call():
            return _scaled_call(node, want)
        case Bracket(inner=inner, power=power):
            inside, scale = _scaled(inner)
            return replace(node, inner=inside), scale.power(Fraction(power))
    return node, PLAIN_SCALE


def _scaled_power(node: Binary, left: Node, right: Node) -> tuple[Node, Scale]:
    base, scale = _scaled(left)
    raised, of = _scaled(right)
    raised = _converted(raised, of, PLAIN_SCALE)
    exponent = typed_exponent(node.right)
    if exponent is None:
        return replace(node, left=_converted(base, scale, PLAIN_SCALE), right=raised), PLAIN_SCALE
    return replace(node, left=base, right=raised), scale.power(exponent)


def _scaled_call(node: Call, want: Scale | None) -> tuple[Node, Scale]:
    function = FUNCTIONS.get(node.function)
    if function is None:
        return node, PLAIN_SCALE
    if function.rule == "root":
        inner, scale = _scaled(node.arguments[0])
        return replace(node, arguments=(inner,)), scale.power(Fraction(1, function.root))
    if function.rule == "plain":
        inner, scale = _scaled(node.arguments[0])
        in_degrees = function.angle and scale.atoms == (("deg", Fraction(1)),)
        if not in_degrees:
            inner = _converted(inner, scale, PLAIN_SCALE)
        return replace(node, arguments=(inner,)), PLAIN_SCALE
    arguments, scale = _alike(node.arguments, want)
    return replace(node, arguments=arguments), PLAIN_SCALE if function.rule == "like-first" else scale


def _alike(nodes: tuple[Node, ...], want: Scale | None) -> tuple[tuple[Node, ...], Scale]:
    """Several operands brought to one scale: that of the result where given, else that of the first with a unit."""
    scaled = [_scaled(node, want) for node in nodes]
    if want is None or not any(_same_dimension(s, want) for _, s in scaled):
        want = next((s for n, s in scaled if s.atoms), scaled[0][1])
    return tuple(_converted(n, s, want) if not _is_zero(n) else n for n, s in scaled), replace(want, absolute=scaled[0][1].absolute)


def _same_dimension(a: Scale, b: Scale) -> bool:
    def total(scale: Scale) -> Unit:
        text = _unit_text(scale.atoms)
        return parse_unit(text) if text else parse_unit("")

    return total(a).dimension == total(b).dimension


def _is_zero(node: Node) -> bool:
    return getattr(node, "text", getattr(node, "number", "")) == "0"


def _is_absolute(node: Node) -> bool:
    unit = node.unit if isinstance(node, Shown) else node.parts[-1].unit if isinstance(node, Quantity) else ""
    return unit in ("degC", "degF")


def _step_scale(scale: Scale) -> Scale:
    return Scale(scale.size, (("K", Fraction(1)),) if scale.absolute == "degC" else (("delta_degF", Fraction(1)),))


def _converted(node: Node, have: Scale, want: Scale) -> Node:
    """The node with the factor from one scale to the other, where it is no power of ten."""
    if have.absolute and not want.absolute and want.atoms == (("K", Fraction(1)),):
        return _to_kelvins(node, have)
    ratio = have.size / want.size
    if _is_power_of_ten(ratio):
        return node
    label = _best_label(_merge(want.atoms, tuple((n, -p) for n, p in have.atoms)))
    ratio = 1 / _size(label) if label else ratio
    divided = ratio < 1 and abs(1 / ratio - round(1 / ratio)) < 1e-9 * (1 / ratio)
    if divided:
        ratio, label = 1 / ratio, tuple((n, -p) for n, p in label)
    return Factor(node, _short(ratio), _unit_text(label), divided)


def _to_kelvins(node: Node, have: Scale) -> Node:
    if have.absolute == "degC":
        return Binary("+", node, Shown("273.15", "K"))
    return Factor(Binary("+", node, Shown("459.67", "delta_degF")), "0.555556", "K/degF")


def _is_power_of_ten(ratio: float) -> bool:
    """True for what SI prefixes alone give, under a square or cube root too; no other unit factor comes near."""
    sixths = 6 * math.log10(ratio)
    return abs(sixths - round(sixths)) < 1e-8


def _short(value: float) -> str:
    """A factor: exact where a few digits hold it, else to so many."""
    return plain(value, min(exact_digits(value, FACTOR_DIGITS), FACTOR_DIGITS))


Atoms = tuple[tuple[str, Fraction], ...]
_MADE_OF = {
    "psi": "lbf/in^2", "ksi": "kip/in^2", "psf": "lbf/ft^2", "ksf": "kip/ft^2", "plf": "lbf/ft", "klf": "kip/ft",
    "pcf": "lbf/ft^3", "kcf": "kip/ft^3",
}  # fmt: skip


def _best_label(atoms: Atoms) -> Atoms:
    """The plainest way to write the units of a factor: whole powers, no two multiples of one unit, few units."""
    apart = _taken_apart(atoms, lambda name: parse_unit(_MADE_OF[name]).atoms if name in _MADE_OF else None)
    reduced = _taken_apart(atoms, _base_of_decimal)
    return min((atoms, apart, reduced), key=_awkwardness)


def _awkwardness(atoms: Atoms) -> tuple[bool, bool, Fraction]:
    families = [_family(name) for name, _ in atoms]
    return (
        any(p.denominator > 1 for _, p in atoms), len(set(families)) < len(families), sum((abs(p) for _, p in atoms), Fraction(0)),
    )  # fmt: skip


def _family(name: str) -> str:
    """SI units that differ by a prefix only are one family."""
    return next((base for base in PREFIXED if name.endswith(base) and name != base and name[: -len(base)] in PREFIXES), name)


def _taken_apart(atoms: Atoms, made_of: Callable[[str], Atoms | None]) -> Atoms:
    total: Atoms = ()
    for name, power in atoms:
        parts = made_of(name)
        total = _merge(total, ((name, power),) if parts is None else tuple((n, p * power) for n, p in parts))
    return total


def _base_of_decimal(name: str) -> Atoms | None:
    """The SI base units in a unit that is a power of ten of them: such factors are left to the reader."""
    unit = parse_unit(name)
    if not _is_power_of_ten(unit.size) or unit.absolute:
        return None
    return tuple((n, p) for n, p in zip(("m", "kg", "s", "K"), unit.dimension, strict=True) if p)


def _size(atoms: Atoms) -> float:
    return math.prod(parse_unit(name).size ** float(power) for name, power in atoms)


def _merge(a: Atoms, b: Atoms) -> Atoms:
    total: dict[str, Fraction] = {}
    for name, power in (*a, *b):
        total[name] = total.get(name, Fraction(0)) + power
    return tuple((n, p) for n, p in total.items() if p)


def _unit_text(atoms: Atoms) -> str:
    def factor(name: str, power: Fraction) -> str:
        if power == 1:
            return name
        return f"{name}^{power}" if power.denominator == 1 else f"{name}^({power})"

    above = [factor(n, p) for n, p in atoms if p > 0]
    below = [factor(n, -p) for n, p in atoms if p < 0]
    if not below:
        return "*".join(above)
    bottom = below[0] if len(below) == 1 else f"({'*'.join(below)})"
    return f"{'*'.join(above) or '1'}/{bottom}"
