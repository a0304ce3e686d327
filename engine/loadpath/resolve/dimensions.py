"""The dimension check: every node gets a `Type` before any number is worked, in branches not taken too."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from fractions import Fraction

from loadpath.findings import Remark
from loadpath.formula.canonical import text
from loadpath.formula.mistake import Mistake
from loadpath.formula.statements import AskedUnit, FunctionDefinition
from loadpath.formula.tree import (
    As,
    At,
    Binary,
    Bracket,
    Call,
    Cases,
    Name,
    Negative,
    Node,
    Number,
    Quantity,
    Word,
    span_of,
    walk,
)
from loadpath.resolve import calls, relations
from loadpath.resolve.mismatches import (
    article,
    factor_between,
    held,
    mend,
    mismatch,
    no_bare_zero,
    no_multiple,
    sum_of_temperatures,
)
from loadpath.resolve.model import UNKNOWN, Flavour, TwoWayTypes, Type
from loadpath.resolve.units import names_behind_operators, read_unit, type_of_unit
from loadpath.text import Span
from loadpath.units import Unit, UnitSystem
from loadpath.units.dimension import FREQUENCY

_SQUARE_RATE = FREQUENCY.power(Fraction(2))
Parameters = dict[str, Type]


def typed_exponent(node: Node) -> Fraction | None:
    """The exact value of a typed exponent (`2`, `-1`, `0.5`, `(1/3)`), None where it holds a name."""
    match node:
        case Number(text=typed):
            return Fraction(typed.replace("_", "")) if len(typed) < 12 else None
        case Negative(operand=operand):
            inner = typed_exponent(operand)
            return None if inner is None else -inner
        case Binary(operator="/", left=left, right=right):
            over, under = typed_exponent(left), typed_exponent(right)
            return over / under if over is not None and under else None
    return None


class Checker:
    """Types of expressions. Raises `Mistake` at the cause; gathers warnings."""

    def __init__(
        self,
        type_of_name: Callable[[str], Type],
        function: Callable[[str], FunctionDefinition | None],
        is_name: Callable[[str], bool],
        system: UnitSystem,
        two_way: Callable[[str], TwoWayTypes | None] = lambda _: None,
        is_table: Callable[[str], bool] = lambda _: False,
        first: Callable[[str], Span | None] = lambda _: None,
    ) -> None:
        self.type_of_name, self.function, self.is_name, self.system = type_of_name, function, is_name, system
        self.two_way, self.is_table, self.first = two_way, is_table, first
        self.warnings: list[Mistake] = []
        self.known_calls: dict[tuple[str, tuple[Type, ...]], Type] = {}
        """Types of calls of the sheet's functions, by the types of their arguments."""

    # --- expressions ---

    def type_of(self, node: Node, parameters: Parameters | None = None) -> Type:
        """The type of an expression; `parameters` are those of the enclosing function."""
        match node:
            case Number(text=typed):
                return Type(zero=float(typed.replace("_", "")) == 0)
            case Quantity():
                return self._quantity(node)
            case Name():
                return self._name(node, parameters)
            case Negative(operand=operand):
                inner = self.number(operand, parameters)
                if inner.absolute:
                    raise no_multiple(span_of(node))
                return inner
            case Binary(operator="+" | "-"):
                return self._sum(node, parameters)
            case Binary(operator="*" | "/"):
                return self._product(node, parameters)
            case Binary():
                return self._power(node, parameters)
            case Call():
                return calls.type_of_call(self, node, parameters)
            case Bracket():
                return self._bracket(node, parameters)
            case As():
                return self._as(node, parameters)
            case At(operand=operand):
                return self.number(operand, parameters)
            case Cases():
                return relations.type_of_cases(self, node, parameters)
            case Word():
                message = "a word in quotes stands where a number is needed"
                raise Mistake(
                    "unknown-choice", node.span, message, 'words stand in conditions: `when curve = "b"`'
                )
        raise TypeError(type(node).__name__)

    def number(self, node: Node, parameters: Parameters | None) -> Type:
        """As `type_of`, but a choice is refused."""
        found = self.type_of(node, parameters)
        if found.words is not None:
            raise Mistake(
                "unknown-choice", span_of(node),
                f"`{text(node)}` is a choice between words and cannot be computed with",
                f'a choice is used in a condition: `when {text(node)} = "{found.words[0]}"`',
            )  # fmt: skip
        return found

    def _name(self, node: Name, parameters: Parameters | None) -> Type:
        if parameters and node.name in parameters:
            return parameters[node.name]
        definition = self.function(node.name)
        if definition is not None:
            message = f"`{node.name}` is a function and is called with its arguments"
            raise Mistake("wrong-arguments", node.span, message, f"write `{calls.form(definition)}`")
        if self.is_table(node.name):
            message = f"`{node.name}` is a table, and a formula takes one of its columns"
            mend = f"name the column: `{node.name}.A`"
            raise Mistake("column-not-number", node.span, message, mend)
        return self.type_of_name(node.name)

    def refuse_shadow(self, name: str, place: Span, parameters: Parameters | None = None) -> None:
        """A name that lives only within a call or a function may be no name around it."""
        if self.is_name(name) or name == "pi":
            first = self.first(name)
            raise Mistake(
                "shadowed-name", place, f"`{name}` lives only here, but is also a name of this sheet",
                "choose another name for one of the two",
                remarks=() if first is None else (Remark("the name of the sheet stands here", first),),
            )  # fmt: skip
        if parameters and name in parameters:
            message = f"`{name}` lives only here, but is also a parameter of what this stands in"
            raise Mistake("shadowed-name", place, message, "choose another name for one of the two")

    def _quantity(self, node: Quantity) -> Type:
        found = Type()
        for part in node.parts:
            place = node.unit_span if part is node.parts[-1] else node.span
            try:
                unit = read_unit(part.unit, place, self.is_name)
            except Mistake as mistake:
                if mistake.slug == "implied-multiplication":
                    number = part.whole or "/".join(part.over or ())
                    mistake.help = f"a product is typed with `*`: `{number}*{part.unit}`"
                raise
            self.warnings += names_behind_operators(unit, place, self.is_name)
            found = type_of_unit(unit, place)
        return found

    def _sum(self, node: Binary, parameters: Parameters | None) -> Type:
        left, right = self.number(node.left, parameters), self.number(node.right, parameters)
        if left.absolute or right.absolute:
            return sum_of_temperatures(node, left, right)
        return self.same(left, right, node.at, f"`{node.operator}` joins", node.left, node.right)

    def same(self, left: Type, right: Type, at: Span, doing: str, a: Node, b: Node) -> Type:
        """The common type of two operands, or the mistake at `at`."""
        if left.unknown or right.unknown:
            return UNKNOWN
        if left.zero or right.zero:
            if left.absolute or right.absolute:
                raise no_bare_zero(at)
            return right if left.zero else left
        if left.dimension != right.dimension:
            both = f"{article(left.dimension)} and {article(right.dimension)}: `{text(a)}` and `{text(b)}`"
            raise mismatch(left, right, at, f"{doing} {both}", mend(left, right, a, b, self.system))
        if left.absolute != right.absolute:
            raise Mistake(
                "absolute-temperature", at,
                f"{doing} an absolute temperature and a difference of temperatures",
                "a difference is typed in K: `20 K`; show an absolute one with `[K]` to compute with kelvins",
            )  # fmt: skip
        if {left.flavour, right.flavour} == {"cycles", "turning"}:
            self.warn_frequency(at, f"{doing} Hz and rpm or rad/s")
        flavour = left.flavour if left.flavour == right.flavour else ""
        return replace(left, flavour=flavour, mass=left.mass or right.mass)

    def warn_frequency(self, at: Span, what: str) -> None:
        """Hz counts turns, rpm and rad/s count radians."""
        message = f"{what}: 1 Hz of turning is 2*pi rad/s"
        help = "multiply or divide by `2*pi` so that both count the same"
        self.warnings.append(Mistake("frequency-and-speed", at, message, help))

    def _product(self, node: Binary, parameters: Parameters | None) -> Type:
        left, right = self.number(node.left, parameters), self.number(node.right, parameters)
        if left.absolute or right.absolute:
            raise no_multiple(node.at)
        if left.unknown or right.unknown:
            return UNKNOWN
        a, b = left.dimension, right.dimension
        joined = held(a.times(b) if node.operator == "*" else a.over(b), node.at, self.system)
        return Type(joined, flavour=_flavour_of_product(node, left, right), mass=left.mass or right.mass)

    def _power(self, node: Binary, parameters: Parameters | None) -> Type:
        base, exponent = self.number(node.left, parameters), self.number(node.right, parameters)
        if base.absolute or exponent.absolute:
            raise no_multiple(node.at)
        if not exponent.unknown and not exponent.dimension.is_plain:
            message = (
                f"an exponent is a plain number, but `{text(node.right)}` is {article(exponent.dimension)}"
            )
            help = "divide it by a quantity of the same kind"
            raise Mistake("needs-plain-number", span_of(node.right), message, help)
        if base.unknown:
            return UNKNOWN
        if base.dimension.is_plain:
            return Type()
        power = typed_exponent(node.right)
        if power is None:
            raise Mistake(
                "dimension-exponent", span_of(node.right),
                f"`{text(node.left)}` is {article(base.dimension)}, so its exponent must be typed, "
                f"not `{text(node.right)}`",
                "type the number (`2`, `-1`, `0.5`, `(1/3)`), or raise a ratio of two quantities",
            )  # fmt: skip
        return self.root(base, power, node.at)

    def root(self, base: Type, power: Fraction, at: Span) -> Type:
        """The type of a power; the root of stiffness over mass is a speed in rad/s."""
        turning: Flavour = "turning" if base.dimension == _SQUARE_RATE and power == Fraction(1, 2) else ""
        return Type(held(base.dimension.power(power), at, self.system), flavour=turning, mass=base.mass)

    def _bracket(self, node: Bracket, parameters: Parameters | None) -> Type:
        inner = self.number(node.inner, parameters)
        if inner.absolute:
            raise no_multiple(node.span)
        if inner.unknown:
            return UNKNOWN
        return Type(held(inner.dimension.power(Fraction(node.power)), node.span, self.system))

    def _as(self, node: As, parameters: Parameters | None) -> Type:
        inner = self.number(node.operand, parameters)
        unit = read_unit(node.unit, node.unit_span, self.is_name)
        if inner.unknown:
            return Type()
        if inner.zero and unit.absolute:
            raise no_bare_zero(node.unit_span)
        if inner.dimension != unit.dimension and not inner.zero:
            named = f"`{text(node.operand)}` is {article(inner.dimension)}"
            message = f"{named} and has no number of {unit.text}, {article(unit.dimension)}"
            help = factor_between(inner.dimension, unit.dimension)
            raise mismatch(inner, Type(unit.dimension), node.unit_span, message, help)
        if inner.absolute != unit.absolute:
            message = "an absolute temperature and a difference do not share a scale"
            help = "use `degC` or `degF` for an absolute temperature, `K` for a difference"
            raise Mistake("absolute-temperature", node.unit_span, message, help)
        return Type()

    def parameter_types(self, definition: FunctionDefinition) -> Parameters:
        """Types of a function's parameters; UNKNOWN for one without unit."""
        types: Parameters = {}
        for parameter in definition.parameters:
            types[parameter.name] = UNKNOWN
            if parameter.unit is not None:
                unit = read_unit(parameter.unit.text, parameter.unit.span, self.is_name)
                types[parameter.name] = Type(unit.dimension, unit.absolute)
        return types

    # --- relations, and the unit that a value is shown in ---

    def relation(self, node: Node, parameters: Parameters | None = None) -> None:
        """Checks a relation, a chain, or several joined by `and`, `or`."""
        relations.check_relation(self, node, parameters)

    def shown(self, found: Type, asked: AskedUnit, value: Node) -> tuple[Type, Unit]:
        """The type and unit of a value that is shown in `[unit]`, or the mistake in the brackets."""
        unit = read_unit(asked.text, asked.span, self.is_name)
        if found.unknown:
            return replace(type_of_unit(unit, asked.span), mass=None), unit
        if found.zero:
            if unit.absolute:
                raise no_bare_zero(asked.span)
            return Type(unit.dimension), unit
        if found.dimension != unit.dimension:
            message = f"`{text(value)}` is {article(found.dimension)}"
            message += f", but `[{asked.text}]` is {article(unit.dimension)}"
            fitting = self.system.unit_for(found.dimension).text or "1"
            help = f"ask for a unit such as `[{fitting}]`, or check the formula: "
            help += factor_between(found.dimension, unit.dimension)
            raise mismatch(found, Type(unit.dimension), asked.span, message, help)
        if unit.absolute and not found.absolute:
            message = f"a difference of temperatures has no place on the scale of {unit.text}"
            raise Mistake("absolute-temperature", asked.span, message, "show it in `[K]`")
        kind = type_of_unit(unit, asked.span).flavour
        if {found.flavour, kind} == {"cycles", "turning"}:
            counted = "rad/s" if kind == "cycles" else "Hz"
            self.warn_frequency(asked.span, f"`[{asked.text}]` shows what is counted in {counted}")
        absolute = found.absolute and unit.absolute
        return replace(found, absolute=absolute, flavour=kind or found.flavour), unit


def _flavour_of_product(node: Binary, left: Type, right: Type) -> Flavour:
    kept, factor = (left, node.right) if left.flavour else (right, node.left)
    plain = right if kept is left else left
    if not kept.flavour or not plain.dimension.is_plain or (kept is right and node.operator == "/"):
        return ""
    if kept.flavour == "bar":
        return "bar" if isinstance(factor, Number | Name | Negative) else ""
    return "" if _holds_pi(factor) else kept.flavour


def _holds_pi(node: Node) -> bool:
    return any(isinstance(part, Name) and part.name == "pi" for part in walk(node))
