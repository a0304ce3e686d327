"""Substitutions: the formula with each name replaced by its printed value, so that a reader lands on the
result.

Where the printed units don't cancel to those of the result (ft against in, rpm, degrees, hp), the factor is
printed as a term of its own. Powers of ten between SI prefixes are left to the reader.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass, replace
from fractions import Fraction

from loadpath.formula.canonical import text
from loadpath.formula.tree import (
    As,
    At,
    Binary,
    Bracket,
    Call,
    Factor,
    Name,
    Negative,
    Node,
    Quantity,
    Shown,
    with_children,
)
from loadpath.functions import FUNCTIONS
from loadpath.resolve.dimensions import typed_exponent
from loadpath.trace.digits import exact_digits
from loadpath.trace.model import Called, Operand
from loadpath.units import Unit, parse_unit
from loadpath.units.dimension import LENGTH, MASS, PLAIN, TEMPERATURE, TIME, Dimension
from loadpath.units.printing import plain
from loadpath.units.unit import PREFIXED, PREFIXES, STEP_OF_DEGF

NOTHING = 1e-12
"""A factor that differs from 1 by less is none."""
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
    return Shown(
        plain(operand.unit.from_si(operand.si), operand.digits + (0 if operand.exact else more)), unit
    )


def substitute(tree: Node, scope: Scope, calls: tuple[Called, ...], more: int = 0) -> Node:
    """The tree with printed values in place of names and of calls of the sheet's own functions."""
    values = {called.call: called.value for called in calls}

    def put(node: Node) -> Node:
        match node:
            case Name(name=name):
                operand = scope(name)
                return node if operand is None else shown(operand, more)
            case At():
                operand = scope(text(node))
                return node if operand is None else shown(operand, more)
            case Call() if node in values:
                return shown(values[node], more)
            case As(operand=Name(name=name), unit=unit) if (value := scope(name)) is not None and isinstance(
                value.si, float
            ):
                return _number_of(value, parse_unit(unit), more)
        return with_children(node, put)

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


# --- conversion factors -----------------------------------------------------------------------------------


Atoms = tuple[tuple[str, Fraction], ...]
_BASES, _BASE_UNITS = (LENGTH, MASS, TIME, TEMPERATURE), ("m", "kg", "s", "K")


@dataclass(frozen=True, slots=True)
class Scale:
    """What the printed numbers of an expression count in."""

    size: float
    """SI value of one."""
    atoms: Atoms = ()
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
    """The node with factors inside it, and what its number then counts in; sums turn to `want` where they
    can."""
    match node:
        case Shown(unit=unit, word=False):
            return node, scale_of(parse_unit(unit))
        case Quantity(parts=parts):
            return node, scale_of(parse_unit(parts[-1].unit))
        case Negative(operand=operand):
            inner, scale = _scaled(operand, want)
            return replace(node, operand=inner), scale
        case Binary(operator="+" | "-"):
            return _scaled_sum(node, want)
        case Binary(operator="*" | "/", left=left, right=right):
            a, first = _scaled(left)
            b, second = _scaled(right)
            return replace(node, left=a, right=b), first.times(second, 1 if node.operator == "*" else -1)
        case Binary():
            return _scaled_power(node, want)
        case Call():
            return _scaled_call(node, want)
        case Bracket(inner=inner, power=power):
            inside, scale = _scaled(inner)
            return replace(node, inner=inside), scale.power(Fraction(power))
    return node, PLAIN_SCALE


def _scaled_sum(node: Binary, want: Scale | None) -> tuple[Node, Scale]:
    (a, first), (b, second) = _scaled(node.left, want), _scaled(node.right, want)
    if not first.absolute and not second.absolute:
        (a, b), scale = _alike([(a, first), (b, second)], want)
        return replace(node, left=a, right=b), scale
    if node.operator == "-" and second.absolute:
        return replace(node, left=a, right=_converted(b, second, first)), _steps_of(first)
    reading = first if first.absolute else second
    a, b = (n if s.absolute else _converted(n, s, _steps_of(reading)) for n, s in ((a, first), (b, second)))
    return replace(node, left=a, right=b), reading


def _scaled_power(node: Binary, want: Scale | None) -> tuple[Node, Scale]:
    base, scale = _scaled(node.left)
    raised, of = _scaled(node.right)
    raised = _converted(raised, of, PLAIN_SCALE)
    exponent = typed_exponent(node.right)
    if exponent is None:
        return replace(node, left=_converted(base, scale, PLAIN_SCALE), right=raised), PLAIN_SCALE
    if exponent.denominator > 1:
        base, scale = _under_root(base, scale, exponent, want)
    return replace(node, left=base, right=raised), scale.power(exponent)


def _scaled_call(node: Call, want: Scale | None) -> tuple[Node, Scale]:
    function = FUNCTIONS.get(node.function)
    if function is None:
        return node, PLAIN_SCALE
    if function.rule == "root":
        exponent = Fraction(1, function.root)
        inner, scale = _under_root(*_scaled(node.arguments[0]), exponent, want)
        return replace(node, arguments=(inner,)), scale.power(exponent)
    if function.rule == "plain":
        inner, scale = _scaled(node.arguments[0])
        in_degrees = function.angle and scale.atoms == (("deg", Fraction(1)),)
        if not in_degrees:
            inner = _converted(inner, scale, PLAIN_SCALE)
        return replace(node, arguments=(inner,)), PLAIN_SCALE
    arguments, scale = _alike([_scaled(a, want) for a in node.arguments], want)
    return replace(node, arguments=arguments), PLAIN_SCALE if function.rule == "like-first" else scale


def _alike(scaled: list[tuple[Node, Scale]], want: Scale | None) -> tuple[tuple[Node, ...], Scale]:
    """Several operands brought to one scale: that of the result where given, else that of the first with a
    unit."""
    if (
        want is None
        or any(s.absolute for _, s in scaled)
        or not any(_same_dimension(s, want) for _, s in scaled)
    ):
        want = next((s for n, s in scaled if s.atoms), scaled[0][1])
    return tuple(_converted(n, s, want) if not _is_zero(n) else n for n, s in scaled), want


def _under_root(node: Node, scale: Scale, exponent: Fraction, want: Scale | None) -> tuple[Node, Scale]:
    """The node in units of which the root can be taken, so that no root of a factor is left outside."""
    dimension = _dimension(scale.atoms)
    if want and _dimension(want.atoms) == dimension.power(exponent) and _names(want) <= _names(scale):
        target = want.power(1 / exponent)
    else:
        atoms = _one_of_each_kind(scale.atoms, dimension)
        target = Scale(_size(atoms), atoms)
    return _converted(node, scale, target), target


def _names(scale: Scale) -> set[str]:
    return {name for name, _ in scale.atoms}


def _one_of_each_kind(atoms: Atoms, dimension: Dimension) -> Atoms:
    """Units for a dimension out of those given: a power of one where that is enough, else one unit for
    each kind in them."""
    atoms = _taken_apart(atoms, lambda name: parse_unit(_MADE_OF[name]).atoms if name in _MADE_OF else None)
    ordered = sorted(atoms, key=lambda atom: -abs(atom[1]))
    of_kind = {_dimension(((name, Fraction(1)),)): name for name, _ in reversed(ordered)}
    of_kind = dict(zip(_BASES, _BASE_UNITS, strict=True)) | of_kind
    for base, power in zip(_BASES, dimension, strict=True):
        if dimension == base.power(power):
            return ((of_kind[base], power),) if power else ()
    return _merge((), tuple((of_kind[_dimension(((name, Fraction(1)),))], power) for name, power in atoms))


def _same_dimension(a: Scale, b: Scale) -> bool:
    return _dimension(a.atoms) == _dimension(b.atoms)


def _dimension(atoms: Atoms) -> Dimension:
    of = PLAIN
    for name, power in atoms:
        of = of.times(parse_unit(name).dimension.power(power))
    return of


def _is_zero(node: Node) -> bool:
    return getattr(node, "text", getattr(node, "number", "")) == "0"


def _steps_of(reading: Scale) -> Scale:
    """The scale of differences of a temperature that is read in degC or degF."""
    return Scale(reading.size, (("K" if reading.absolute == "degC" else STEP_OF_DEGF, Fraction(1)),))


def _converted(node: Node, have: Scale, want: Scale) -> Node:
    """The node with the factor from one scale to the other, where SI prefixes alone don't make it."""
    if have.absolute and have.absolute != want.absolute:
        return _read_as(node, have, want)
    ratio = have.size / want.size if have.size and want.size else 0.0
    if not 0 < ratio < math.inf:
        return node
    apart = _merge(want.atoms, tuple((n, -p) for n, p in have.atoms))
    if abs(ratio - 1) < NOTHING or (_is_power_of_ten(ratio) and _is_decimal(apart)):
        return node
    label = _best_label(apart)
    try:
        ratio = 1 / _size(label) if label else ratio
        1 / ratio
    except (OverflowError, ZeroDivisionError):
        return node
    divided = _is_short(1 / ratio) and (ratio < 1 or not _is_short(ratio))
    if divided:
        ratio, label = 1 / ratio, tuple((n, -p) for n, p in label)
    return Factor(node, _short(ratio), _unit_text(label), divided)


def _is_decimal(atoms: Atoms) -> bool:
    """True where all are powers of ten of SI units: the thousand between kip and lbf is no SI prefix."""
    return all(_is_power_of_ten(parse_unit(name).size) for name, _ in atoms)


def _read_as(node: Node, have: Scale, want: Scale) -> Node:
    """A temperature read in degC or degF, on the other scale or in kelvins."""
    if want.absolute == "degF":
        return Binary("+", Factor(node, "1.8", "degF/degC"), Shown("32", STEP_OF_DEGF))
    if want.absolute == "degC":
        return Factor(Binary("-", node, Shown("32", STEP_OF_DEGF)), "1.8", "degF/degC", divided=True)
    above_zero = Shown("273.15", "K") if have.absolute == "degC" else Shown("459.67", STEP_OF_DEGF)
    return _converted(Binary("+", node, above_zero), _steps_of(have), want)


def _is_power_of_ten(ratio: float) -> bool:
    """True for what SI prefixes alone give, under a square or cube root too; no other unit factor comes
    near."""
    if not 0 < ratio < math.inf:
        return False
    sixths = 6 * math.log10(ratio)
    return abs(sixths - round(sixths)) < 1e-8


def _is_short(factor: float) -> bool:
    """True where a few digits hold a factor exactly."""
    return exact_digits(factor, FACTOR_DIGITS + 1) <= FACTOR_DIGITS


def _short(factor: float) -> str:
    """A factor: exact where a few digits hold it, else to so many."""
    return plain(factor, min(exact_digits(factor, FACTOR_DIGITS), FACTOR_DIGITS))


_MADE_OF = {
    "psi": "lbf/in^2",
    "ksi": "kip/in^2",
    "psf": "lbf/ft^2",
    "ksf": "kip/ft^2",
    "plf": "lbf/ft",
    "klf": "kip/ft",
    "pcf": "lbf/ft^3",
    "kcf": "kip/ft^3",
}


def _best_label(atoms: Atoms) -> Atoms:
    """The plainest way to write the units of a factor: whole powers, no two multiples of one unit, few
    units."""
    atoms = _merge((), tuple(("degF" if name == STEP_OF_DEGF else name, power) for name, power in atoms))
    apart = _taken_apart(atoms, lambda name: parse_unit(_MADE_OF[name]).atoms if name in _MADE_OF else None)
    reduced = _taken_apart(atoms, _base_of_decimal)
    return min((apart, atoms, reduced), key=_awkwardness)


def _awkwardness(atoms: Atoms) -> tuple[bool, bool, Fraction]:
    families = [_family(name) for name, _ in atoms]
    return (
        any(p.denominator > 1 for _, p in atoms),
        len(set(families)) < len(families),
        sum((abs(p) for _, p in atoms), Fraction(0)),
    )


def _family(name: str) -> str:
    """SI units that differ by a prefix only are one family."""
    return next(
        (
            base
            for base in PREFIXED
            if name.endswith(base) and name != base and name[: -len(base)] in PREFIXES
        ),
        name,
    )


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
    return float(math.prod(parse_unit(name).size ** float(power) for name, power in atoms))


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
