"""Types of calls: built-in functions by their rule, the sheet's own by their body."""

from __future__ import annotations

from fractions import Fraction
from typing import TYPE_CHECKING

from loadpath.formula.canonical import text
from loadpath.formula.mistake import Mistake
from loadpath.formula.statements import AskedUnit, FunctionDefinition
from loadpath.formula.tree import Call, Node, span_of
from loadpath.functions import FUNCTIONS, SPECIAL, Function
from loadpath.resolve.columns import is_brought_back
from loadpath.resolve.mismatches import article, factor_between, mismatch, no_bare_zero, no_multiple
from loadpath.resolve.model import UNKNOWN, Type
from loadpath.resolve.special import refuse_table, type_of_special
from loadpath.units import parse_unit

if TYPE_CHECKING:
    from loadpath.resolve.dimensions import Checker, Parameters

_ARGUMENTS = {"choose": "a, b, ...", "steps": "x, step", "like-first": "y, x"}
"""How the arguments of a built-in function are named, by its rule; `x` for the rest."""


def form(function: Function | FunctionDefinition) -> str:
    """How a function is called: `round_up(x, step)`."""
    if isinstance(function, FunctionDefinition):
        return f"{function.name}({', '.join(p.name for p in function.parameters)})"
    return f"{function.name}({_ARGUMENTS.get(function.rule, 'x')})"


def type_of_call(checker: Checker, node: Call, parameters: Parameters | None) -> Type:
    """The type of a call; UNKNOWN where there is no such function, which is said elsewhere."""
    if node.function in SPECIAL:
        return type_of_special(checker, node, parameters)
    if is_brought_back(node):
        refuse_table(checker, node)
    arguments = [checker.number(argument, parameters) for argument in node.arguments]
    definition = checker.function(node.function)
    if definition is not None:
        return _own(checker, node, definition, arguments)
    built_in = FUNCTIONS.get(node.function)
    if built_in is None:
        return UNKNOWN
    if not built_in.least <= len(arguments) <= built_in.most:
        need = str(built_in.least) if built_in.least == built_in.most else f"{built_in.least} or more"
        raise _wrong_count(node, need, form(built_in))
    return _built_in(checker, node, built_in, arguments)


def _wrong_count(node: Call, need: str, form: str) -> Mistake:
    some = "argument" if need == "1" else "arguments"
    message = f"`{node.function}` takes {need} {some}, {len(node.arguments) or 'none'} stand here"
    return Mistake("wrong-arguments", node.at, message.replace("1 stand ", "1 stands "), f"write `{form}`")


# --- built-in functions -------------------------------------------------------------------------------------


def _built_in(checker: Checker, node: Call, function: Function, arguments: list[Type]) -> Type:
    if function.rule == "plain":
        for argument, found in zip(node.arguments, arguments, strict=True):
            _need_plain(function.name, argument, found)
        return Type()
    if any(a.unknown for a in arguments):
        return UNKNOWN
    if function.rule in ("root", "same", "steps") and any(a.absolute for a in arguments):
        raise no_multiple(node.at)
    if function.rule == "root":
        return checker.root(arguments[0], Fraction(1, function.root), node.at)
    if function.rule == "same":
        return arguments[0]
    common = arguments[0]
    for argument, found in zip(node.arguments[1:], arguments[1:], strict=True):
        doing = f"`{function.name}` takes"
        common = checker.same(common, found, span_of(argument), doing, node.arguments[0], argument)
    return Type() if function.rule == "like-first" else common


def _need_plain(function: str, argument: Node, found: Type) -> None:
    if found.unknown or (found.dimension.is_plain and not found.absolute):
        return
    message = f"`{function}` takes a plain number, but `{text(argument)}` is {article(found.dimension)}"
    help = "divide by a quantity of the same kind, or take the number of a unit: `(f_c as MPa)`"
    raise Mistake("needs-plain-number", span_of(argument), message, help)


# --- functions of the sheet ---------------------------------------------------------------------------------


def _own(checker: Checker, node: Call, definition: FunctionDefinition, arguments: list[Type]) -> Type:
    if len(arguments) != len(definition.parameters):
        raise _wrong_count(node, str(len(definition.parameters)), form(definition))
    given: Parameters = {}
    for parameter, argument, found in zip(definition.parameters, node.arguments, arguments, strict=True):
        given[parameter.name] = _argument(node, parameter.name, parameter.unit, argument, found)
    key = (node.function, tuple(given.values()))
    if key not in checker.known_calls:
        checker.known_calls[key] = _body(checker, node, definition, given)
    return checker.known_calls[key]


def _argument(node: Call, name: str, asked: AskedUnit | None, argument: Node, found: Type) -> Type:
    if asked is None or found.unknown:
        return found
    unit = parse_unit(asked.text)
    if found.zero:
        if unit.absolute:
            raise no_bare_zero(span_of(argument))
        return Type(unit.dimension)
    if found.dimension != unit.dimension:
        message = f"`{name}` of `{node.function}` is {article(unit.dimension)}"
        message += f", but `{text(argument)}` is {article(found.dimension)}"
        help = factor_between(unit.dimension, found.dimension)
        raise mismatch(found, Type(unit.dimension), span_of(argument), message, help)
    if found.absolute != unit.absolute:
        message = (
            f"`{name}` of `{node.function}` is in {unit.text}, and `{text(argument)}` is on another scale"
        )
        help = "`degC` and `degF` are absolute temperatures, `K` is for differences"
        raise Mistake("absolute-temperature", span_of(argument), message, help)
    return Type(unit.dimension, unit.absolute, flavour=found.flavour, mass=found.mass)


def _body(checker: Checker, node: Call, definition: FunctionDefinition, given: Parameters) -> Type:
    try:
        found = checker.type_of(definition.body, given)
        return checker.shown(found, definition.unit, definition.body)[0] if definition.unit else found
    except Mistake as mistake:
        message = f"with these arguments `{node.function}` does not go: {mistake.message}"
        raise Mistake(mistake.slug, span_of(node), message, mistake.help) from None
