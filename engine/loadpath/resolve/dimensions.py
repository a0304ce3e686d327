"""The dimension check: every node gets a `Type` before any number is worked, in branches not taken too."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from fractions import Fraction

from loadpath.formula.canonical import text
from loadpath.formula.reader import Mistake
from loadpath.formula.statements import AskedUnit, FunctionDefinition
from loadpath.formula.tree import (
    As,
    Binary,
    Bracket,
    Call,
    Cases,
    Logic,
    Name,
    Negative,
    Node,
    Number,
    Quantity,
    Relation,
    Word,
    span_of,
    walk,
)
from loadpath.functions import FUNCTIONS, Function
from loadpath.resolve.model import UNKNOWN, Type
from loadpath.text import Span
from loadpath.units import BadUnit, Dimension, Unit, parse_unit, say
from loadpath.units.dimension import ACCELERATION, FREQUENCY, TEMPERATURE

_MASS_UNITS = {"lb": "lbf", "kg": "kgf or N", "g": "N", "tonne": "kN", "slug": "lbf", "short_ton": "short_tonf"}
_TURNING = ("rpm", "rad")
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


def read_unit(unit: str, place: Span, is_name: Callable[[str], bool] = lambda _: False) -> Unit:
    """The unit, or the mistake at the part of it that is wrong."""
    try:
        return parse_unit(unit)
    except BadUnit as bad:
        start = place.start + bad.at
        span = Span(start, min(start + max(len(bad.part), 1), max(place.end, start + 1)))
        help = bad.help
        if bad.slug == "unknown-unit" and is_name(bad.part):
            if bad.part == unit:
                raise Mistake(
                    "implied-multiplication", span, f"no operator stands before `{bad.part}`, which is a name of this sheet and no unit",
                    f"a product is typed with `*`: `2*{bad.part}`",
                ) from None  # fmt: skip
            before = unit[: bad.at].rstrip("*/")
            sign = unit[bad.at - 1 : bad.at]
            help = f"`{bad.part}` is a name of this sheet: put spaces round the `{sign}`, as in `12 {before} {sign} {bad.part}`"
        raise Mistake(bad.slug, span, bad.message, help) from None


class Checker:
    """Types of expressions. Raises `Mistake` at the cause; gathers warnings."""

    def __init__(
        self,
        type_of_name: Callable[[str], Type],
        function: Callable[[str], FunctionDefinition | None],
        is_name: Callable[[str], bool],
    ) -> None:
        self.type_of_name, self.function, self.is_name = type_of_name, function, is_name
        self.warnings: list[Mistake] = []
        self._calls: dict[tuple[str, tuple[Type, ...]], Type] = {}

    # --- expressions ---

    def type_of(self, node: Node, parameters: Parameters | None = None) -> Type:
        """The type of an expression; `parameters` are those of the enclosing function."""
        match node:
            case Number(text=typed):
                return Type(zero=float(typed.replace("_", "")) == 0)
            case Quantity():
                return self._quantity(node)
            case Name(name=name):
                return self._name(node, name, parameters)
            case Negative(operand=operand):
                inner = self._number(operand, parameters)
                if inner.absolute:
                    raise _no_multiple(span_of(node))
                return inner
            case Binary(operator="+" | "-"):
                return self._sum(node, parameters)
            case Binary(operator="*" | "/"):
                return self._product(node, parameters)
            case Binary():
                return self._power(node, parameters)
            case Call():
                return self._call(node, parameters)
            case Bracket(inner=inside, power=power):
                inner = self._number(inside, parameters)
                return inner if inner.unknown else Type(inner.dimension.power(Fraction(power)))
            case As():
                return self._as(node, parameters)
            case Cases():
                return self._cases(node, parameters)
            case Word():
                raise Mistake("unknown-choice", node.span, "a word in quotes stands where a number is needed")
        raise TypeError(type(node).__name__)

    def _number(self, node: Node, parameters: Parameters | None) -> Type:
        """As `type_of`, but a choice is refused."""
        found = self.type_of(node, parameters)
        if found.words is not None:
            raise Mistake(
                "unknown-choice", span_of(node), f"`{text(node)}` is a choice between words and cannot be computed with",
                f'a choice is used in a condition: `when {text(node)} = "{found.words[0]}"`',
            )  # fmt: skip
        return found

    def _name(self, node: Name, name: str, parameters: Parameters | None) -> Type:
        if parameters and name in parameters:
            return parameters[name]
        if self.function(name) is not None:
            listed = ", ".join(p.name for p in self.function(name).parameters)  # type: ignore[union-attr]
            raise Mistake("wrong-arguments", node.span, f"`{name}` is a function and is called with its arguments", f"write `{name}({listed})`")
        return self.type_of_name(name)

    def _quantity(self, node: Quantity) -> Type:
        first = Type()
        for part in node.parts:
            place = node.unit_span if part is node.parts[-1] else node.span
            unit = read_unit(part.unit, place, self.is_name)
            self._warn_of_names(unit, place)
            first = self.type_of_unit(unit, place)
        return first

    def type_of_unit(self, unit: Unit, place: Span) -> Type:
        """The type of a value typed in a unit."""
        names = {name for name, _ in unit.atoms}
        flavour = ""
        if unit.dimension == FREQUENCY:
            flavour = "cycles" if any(n.endswith("Hz") for n in names) else "turning" if names & set(_TURNING) else ""
        elif names == {"bar"}:
            flavour = "bar"
        mass = next(((place, name) for name in names if name in _MASS_UNITS), None)
        return Type(unit.dimension, unit.absolute, flavour=flavour, mass=mass)  # type: ignore[arg-type]

    def _warn_of_names(self, unit: Unit, place: Span) -> None:
        """A name of the sheet behind a `*` or `/` in a unit may have been meant as that name."""
        for name, _ in unit.atoms[1:]:
            if self.is_name(name):
                at = place.start + unit.text.rindex(name)
                self.warnings.append(
                    Mistake(
                        "unit-or-name", Span(at, at + len(name)), f"`{name}` in `{unit.text}` is read as the unit, and is also a name of this sheet",
                        f"where the name is meant put spaces round the operator before it; else rename `{name}`",
                    )  # fmt: skip
                )

    def _sum(self, node: Binary, parameters: Parameters | None) -> Type:
        left, right = self._number(node.left, parameters), self._number(node.right, parameters)
        if left.absolute or right.absolute:
            return _temperatures(node, left, right)
        return self.same(left, right, node.at, f"`{node.operator}` joins", node.left, node.right)

    def same(self, left: Type, right: Type, at: Span, doing: str, a: Node, b: Node) -> Type:
        """The common type of two operands, or the mistake at `at`."""
        if left.unknown or right.unknown:
            return UNKNOWN
        if left.zero or right.zero:
            return right if left.zero else left
        if left.dimension != right.dimension:
            raise mismatch(left, right, at, f"{doing} {_article(left.dimension)} and {_article(right.dimension)}: `{text(a)}` and `{text(b)}`")
        if left.absolute != right.absolute:
            raise Mistake(
                "absolute-temperature", at, f"{doing} an absolute temperature and a difference of temperatures",
                "a difference is typed in K: `20 K`; show an absolute temperature with `[K]` to compute with kelvins",
            )  # fmt: skip
        if {left.flavour, right.flavour} == {"cycles", "turning"}:
            self.warn_frequency(at, f"{doing} Hz and rpm or rad/s")
        flavour = left.flavour if left.flavour == right.flavour else ""
        return replace(left, flavour=flavour, mass=left.mass or right.mass)

    def warn_frequency(self, at: Span, what: str) -> None:
        """Hz counts turns, rpm and rad/s count radians."""
        self.warnings.append(
            Mistake("frequency-and-speed", at, f"{what}: 1 Hz of turning is 2*pi rad/s", "multiply or divide by `2*pi` so that both count the same")
        )

    def _product(self, node: Binary, parameters: Parameters | None) -> Type:
        left, right = self._number(node.left, parameters), self._number(node.right, parameters)
        if left.absolute or right.absolute:
            raise _no_multiple(node.at)
        if left.unknown or right.unknown:
            return UNKNOWN
        joined = left.dimension.times(right.dimension) if node.operator == "*" else left.dimension.over(right.dimension)
        return Type(joined, flavour=_flavour_of_product(node, left, right), mass=left.mass or right.mass)  # type: ignore[arg-type]

    def _power(self, node: Binary, parameters: Parameters | None) -> Type:
        base, exponent = self._number(node.left, parameters), self._number(node.right, parameters)
        if base.absolute or exponent.absolute:
            raise _no_multiple(node.at)
        if not exponent.unknown and not exponent.dimension.is_plain:
            raise Mistake("needs-plain-number", span_of(node.right), f"an exponent is a plain number, but `{text(node.right)}` is {_article(exponent.dimension)}")
        if base.unknown:
            return UNKNOWN
        if base.dimension.is_plain:
            return Type()
        power = typed_exponent(node.right)
        if power is None:
            raise Mistake(
                "dimension-exponent", span_of(node.right),
                f"`{text(node.left)}` is {_article(base.dimension)}, so its exponent must be typed, not `{text(node.right)}`",
                "type the number (`2`, `-1`, `0.5`, `(1/3)`), or raise a ratio of two quantities",
            )  # fmt: skip
        return self._root_flavour(base, power, mass=base.mass)

    def _root_flavour(self, base: Type, power: Fraction, mass: tuple[Span, str] | None = None) -> Type:
        turning = base.dimension == _SQUARE_RATE and power == Fraction(1, 2)
        return Type(base.dimension.power(power), flavour="turning" if turning else "", mass=mass)

    def _as(self, node: As, parameters: Parameters | None) -> Type:
        inner = self._number(node.operand, parameters)
        unit = read_unit(node.unit, node.unit_span, self.is_name)
        if not inner.unknown and inner.dimension != unit.dimension and not inner.zero:
            raise mismatch(
                inner, Type(unit.dimension), node.unit_span,
                f"`{text(node.operand)}` is {_article(inner.dimension)} and has no number of {unit.text}, {_article(unit.dimension)}",
            )  # fmt: skip
        if not inner.unknown and inner.absolute != unit.absolute:
            raise Mistake("absolute-temperature", node.unit_span, "an absolute temperature and a difference do not share a scale", "use `degC` or `degF` for an absolute temperature, `K` for a difference")
        return Type()

    # --- calls ---

    def _call(self, node: Call, parameters: Parameters | None) -> Type:
        arguments = [self._number(argument, parameters) for argument in node.arguments]
        definition = self.function(node.function)
        if definition is not None:
            return self._own_call(node, definition, arguments)
        built_in = FUNCTIONS.get(node.function)
        if built_in is None:
            return UNKNOWN
        if not built_in.least <= len(arguments) <= built_in.most:
            need = str(built_in.least) if built_in.least == built_in.most else f"{built_in.least} or more"
            raise Mistake("wrong-arguments", node.at, f"`{node.function}` takes {need} argument{'s' if need != '1' else ''}, {len(arguments)} stand here", f"as in `{built_in.example.split('|')[0].strip()}`")
        return self._built_in(node, built_in, arguments)

    def _built_in(self, node: Call, function: Function, arguments: list[Type]) -> Type:
        if function.rule == "plain":
            for argument, found in zip(node.arguments, arguments, strict=True):
                self._need_plain(function.name, argument, found)
            return Type()
        if any(a.unknown for a in arguments):
            return UNKNOWN
        if function.rule == "root":
            if arguments[0].absolute:
                raise _no_multiple(node.at)
            return self._root_flavour(arguments[0], Fraction(1, function.root))
        if function.rule == "same":
            if arguments[0].absolute:
                raise _no_multiple(node.at)
            return arguments[0]
        common = arguments[0]
        for argument, found in zip(node.arguments[1:], arguments[1:], strict=True):
            common = self.same(common, found, span_of(argument), f"`{function.name}` takes", node.arguments[0], argument)
        if function.rule == "steps" and common.absolute:
            raise _no_multiple(node.at)
        return Type() if function.rule == "like-first" else common

    def _need_plain(self, function: str, argument: Node, found: Type) -> None:
        if found.unknown or (found.dimension.is_plain and not found.absolute):
            return
        raise Mistake(
            "needs-plain-number", span_of(argument), f"`{function}` takes a plain number, but `{text(argument)}` is {_article(found.dimension)}",
            "divide by a quantity of the same kind, or take the number of a unit: `(f_c as MPa)`",
        )  # fmt: skip

    def _own_call(self, node: Call, definition: FunctionDefinition, arguments: list[Type]) -> Type:
        if len(arguments) != len(definition.parameters):
            listed = ", ".join(p.name for p in definition.parameters)
            raise Mistake("wrong-arguments", node.at, f"`{node.function}` takes {len(definition.parameters)} argument{'s' if len(definition.parameters) > 1 else ''}, {len(arguments)} stand here", f"it is defined as `{node.function}({listed})`")
        given: Parameters = {}
        for parameter, argument, found in zip(definition.parameters, node.arguments, arguments, strict=True):
            given[parameter.name] = self._argument(node, parameter.name, parameter.unit, argument, found)
        key = (node.function, tuple(given.values()))
        if key not in self._calls:
            self._calls[key] = self._body(node, definition, given)
        return self._calls[key]

    def _argument(self, node: Call, name: str, asked: AskedUnit | None, argument: Node, found: Type) -> Type:
        if asked is None or found.unknown:
            return found
        unit = parse_unit(asked.text)
        if found.zero:
            return Type(unit.dimension, unit.absolute)
        if found.dimension != unit.dimension:
            raise mismatch(
                found, Type(unit.dimension), span_of(argument),
                f"`{name}` of `{node.function}` is {_article(unit.dimension)}, but `{text(argument)}` is {_article(found.dimension)}",
            )  # fmt: skip
        return Type(unit.dimension, unit.absolute, mass=found.mass)

    def _body(self, node: Call, definition: FunctionDefinition, given: Parameters) -> Type:
        try:
            found = self.type_of(definition.body, given)
            return self.shown(found, definition.unit, definition.body)[0] if definition.unit else found
        except Mistake as mistake:
            raise Mistake(mistake.slug, span_of(node), f"with these arguments `{node.function}` does not go: {mistake.message}", mistake.help) from None

    # --- conditions and cases ---

    def relation(self, node: Node, parameters: Parameters | None = None) -> None:
        """Checks a relation, a chain, or several joined by `and`, `or`."""
        if isinstance(node, Logic):
            for operand in node.operands:
                self.relation(operand, parameters)
            return
        assert isinstance(node, Relation)
        types = [None if isinstance(operand, Word) else self.type_of(operand, parameters) for operand in node.operands]
        pairs = zip(node.operands, node.operands[1:], types, types[1:], node.signs, node.at, strict=False)
        for a, b, left, right, sign, at in pairs:
            self._pair(a, b, left, right, sign, at)
        concrete = [t for t in types if t is not None and not t.zero and not t.unknown]
        if len(concrete) > 1 and concrete[0].words is None and concrete[-1].words is None:
            self.same(concrete[0], concrete[-1], node.at[-1], f"`{node.signs[-1]}` compares", node.operands[0], node.operands[-1])

    def _pair(self, a: Node, b: Node, left: Type | None, right: Type | None, sign: str, at: Span) -> None:
        if left is None or right is None or left.words is not None or right.words is not None:
            self._words(a, b, left, right, sign, at)
            return
        common = self.same(left, right, at, f"`{sign}` compares", a, b)
        if sign == "=" and not common.unknown and not common.dimension.is_plain:
            raise Mistake("bad-syntax", at, "`=` in a condition is for whole numbers and choices", "compare quantities with `<=` or `>=`")

    def _words(self, a: Node, b: Node, left: Type | None, right: Type | None, sign: str, at: Span) -> None:
        word, choice, name = (b, left, a) if right is None else (a, right, b)
        if not isinstance(word, Word) or choice is None:
            raise Mistake("unknown-choice", at, "a choice is compared with one of its words", 'write `when curve = "b"`')
        if choice.unknown:
            return
        if choice.words is None:
            raise Mistake("unknown-choice", span_of(word), f"`{text(name)}` is a number and is compared with a word")
        if sign != "=":
            raise Mistake("unknown-choice", at, f"`{sign}` cannot compare words", "use `=`")
        if word.text not in choice.words:
            raise Mistake(
                "unknown-choice", word.span, f'"{word.text}" is not one of the words of `{text(name)}`',
                "it is one of " + ", ".join(f'"{option}"' for option in choice.words),
            )  # fmt: skip

    def _cases(self, node: Cases, parameters: Parameters | None) -> Type:
        common: Type | None = None
        first = node.branches[0].value
        for branch in node.branches:
            if branch.condition is not None:
                self.relation(branch.condition, parameters)
            found = self._number(branch.value, parameters)
            if common is None:
                common = found
            else:
                common = self.same(common, found, span_of(branch.value), "the branches give", first, branch.value)
        assert common is not None
        return common

    # --- the unit a value is shown in ---

    def shown(self, found: Type, asked: AskedUnit, value: Node) -> tuple[Type, Unit]:
        """The type and unit of a value that is shown in `[unit]`, or the mistake in the brackets."""
        unit = read_unit(asked.text, asked.span, self.is_name)
        if found.unknown:
            return replace(self.type_of_unit(unit, asked.span), mass=None), unit
        if found.zero:
            return Type(unit.dimension, unit.absolute), unit
        if found.dimension != unit.dimension:
            raise mismatch(found, Type(unit.dimension), asked.span, f"`{text(value)}` is {_article(found.dimension)}, but `[{asked.text}]` is {_article(unit.dimension)}")
        if unit.absolute and not found.absolute:
            raise Mistake("absolute-temperature", asked.span, f"a difference of temperatures has no place on the scale of {unit.text}", "show it in `[K]`")
        kind = self.type_of_unit(unit, asked.span).flavour
        if {found.flavour, kind} == {"cycles", "turning"}:
            self.warn_frequency(asked.span, f"`[{asked.text}]` shows what is counted in {'rad/s' if kind == 'cycles' else 'Hz'}")
        keeps = found.absolute and unit.absolute
        return replace(found, absolute=keeps, zero=False, flavour=kind or found.flavour), unit


def mismatch(left: Type, right: Type, at: Span, message: str) -> Mistake:
    """`unit-mismatch`, or `mass-as-force` at the mass where that is the cause."""
    for mass_side, other in ((left, right), (right, left)):
        if mass_side.mass is not None and other.dimension == mass_side.dimension.times(ACCELERATION):
            place, name = mass_side.mass
            mend = _MASS_UNITS[name]
            mistake = Mistake("mass-as-force", place, f"`{name}` is a mass, but is used as a force", f"write `{mend}` for the force, or multiply the mass by `9.81 m/s^2`")
            mistake.remark = ("used as a force here", at)  # type: ignore[attr-defined]
            return mistake
    return Mistake("unit-mismatch", at, message)


def _article(of: Dimension) -> str:
    words = say(of)
    if words.startswith(("a ", "1/")) or "/" in words or "*" in words or "^" in words:
        return words
    return words if words in ("time",) else f"{'an' if words[0] in 'aeiou' else 'a'} {words}"


def _no_multiple(at: Span) -> Mistake:
    return Mistake(
        "absolute-temperature", at, "an absolute temperature cannot be multiplied, divided, negated or raised",
        "take a difference of two of them, or show it in absolute kelvins first: `T_K [K] = T`",
    )  # fmt: skip


def _temperatures(node: Binary, left: Type, right: Type) -> Type:
    for found, other in ((left, right), (right, left)):
        if found.unknown:
            return UNKNOWN
        if found.absolute and not other.zero and other.dimension != TEMPERATURE:
            raise Mistake("unit-mismatch", node.at, f"`{node.operator}` joins a temperature and {_article(other.dimension)}")
    if node.operator == "-" and left.absolute:
        return Type(TEMPERATURE, absolute=not right.absolute)
    if node.operator == "+" and left.absolute != right.absolute:
        return Type(TEMPERATURE, absolute=True)
    raise Mistake(
        "absolute-temperature", node.at, "two absolute temperatures cannot be added" if node.operator == "+" else "an absolute temperature cannot be taken from a difference",
        "a difference is typed in K: `20 K`",
    )  # fmt: skip


def _holds_pi(node: Node) -> bool:
    return any(isinstance(part, Name) and part.name == "pi" for part in walk(node))


def _flavour_of_product(node: Binary, left: Type, right: Type) -> str:
    kept, factor = (left, node.right) if left.flavour else (right, node.left)
    plain = right if kept is left else left
    if not kept.flavour or not plain.dimension.is_plain or (kept is right and node.operator == "/"):
        return ""
    if kept.flavour == "bar":
        return "bar" if isinstance(factor, Number | Name | Negative) else ""
    return "" if _holds_pi(factor) else kept.flavour


