"""Types of the functions of whole expressions and of columns: `integral`, `largest`, `sum`, `interp`."""

from __future__ import annotations

from typing import TYPE_CHECKING

from loadpath.formula.binding import own_name, parameter_named
from loadpath.formula.canonical import text
from loadpath.formula.mistake import Mistake
from loadpath.formula.tree import Call, Name, span_of
from loadpath.functions import SPECIAL
from loadpath.resolve.mismatches import article, held, no_multiple
from loadpath.resolve.model import UNKNOWN, Type

if TYPE_CHECKING:
    from loadpath.resolve.dimensions import Checker, Parameters


class CallMistake(Mistake):
    """A call that is not written as it must be: what seems unknown within it is not worth telling."""


def type_of_special(checker: Checker, node: Call, parameters: Parameters | None) -> Type:
    """The type of a call, its arguments checked in the names that live within it."""
    special = SPECIAL[node.function]
    if len(node.arguments) not in special.counts:
        message = f"`{node.function}` is called with {len(node.arguments) or 'no'} "
        message += "argument" if len(node.arguments) == 1 else "arguments"
        mend = "write " + " or ".join(f"`{form}`" for form in special.forms)
        raise CallMistake("wrong-arguments", node.at, message, mend)
    refuse_table(checker, node)
    if node.function in ("interp", "lookup"):
        return _look_up(checker, node, parameters)
    if node.function == "count":
        checker.number(node.arguments[0], parameters)
        return Type()
    if node.function == "simplified" or (node.function == "sum" and len(node.arguments) == 1):
        found = checker.number(node.arguments[0], parameters)
        if found.absolute and node.function == "sum":
            raise no_multiple(node.at)
        return found
    if parameter_named(node) is not None or len(node.arguments) == 2:
        return _of_parameter(checker, node, parameters)
    return _with_own_name(checker, node, parameters)


def refuse_table(checker: Checker, node: Call) -> None:
    """`sum(plates)`: a whole table where a column is needed."""
    first = node.arguments[0]
    if len(node.arguments) == 1 and isinstance(first, Name) and checker.is_table(first.name):
        message = f"`{node.function}` takes a column, but `{first.name}` is a whole table"
        mend = f"name the column: `{node.function}({first.name}.A)`"
        raise CallMistake("needs-column", first.span, message, mend)


# --- about a parameter of the enclosing function ------------------------------------------------------------


def _of_parameter(checker: Checker, node: Call, parameters: Parameters | None) -> Type:
    named = parameter_named(node)
    if named is None:
        raise _no_name(node)
    if parameters is None or named.name not in parameters:
        message = f"`{named.name}` is no parameter of the function that this stands in"
        form = f"f({named.name} [m]) = {node.function}(..., {named.name})"
        mend = f"it stands in the body of a function: `{form}`"
        if node.function == "integral":
            mend += "; or give bounds: `integral(f, x, a, b)`"
        if parameters and len(parameters) == 1:
            mend = f"the parameter here is `{next(iter(parameters))}`"
        raise CallMistake("not-a-parameter", named.span, message, mend)
    found, over = checker.number(node.arguments[0], parameters), parameters[named.name]
    return _joined(checker, node, found, over, 1 if node.function == "integral" else -1)


def _joined(checker: Checker, node: Call, found: Type, over: Type, sign: int) -> Type:
    """Of an integral (sign 1) or a derivative (sign -1)."""
    if found.absolute or over.absolute:
        raise no_multiple(node.at)
    if found.unknown or over.unknown:
        return UNKNOWN
    if found.zero:
        return found
    a, b = found.dimension, over.dimension
    return Type(held(a.times(b) if sign > 0 else a.over(b), node.at, checker.system), mass=found.mass)


# --- with a name of their own -------------------------------------------------------------------------------


def _no_name(node: Call) -> CallMistake:
    second = node.arguments[1]
    message = f"the second argument of `{node.function}` is a name, but `{text(second)}` stands here"
    forms = " or ".join(f"`{form}`" for form in SPECIAL[node.function].forms if form.count(",") > 0)
    return CallMistake("bad-syntax", span_of(second), message, f"write {forms}")


def _with_own_name(checker: Checker, node: Call, parameters: Parameters | None) -> Type:
    own = own_name(node)
    if own is None:
        raise _no_name(node)
    checker.refuse_shadow(own.name, own.span, parameters)
    over = _over(checker, node, parameters)
    inner = {**(parameters or {}), own.name: over}
    found = checker.number(node.arguments[0], inner)
    if node.function == "integral":
        return _joined(checker, node, found, over, 1)
    if node.function == "sum" and found.absolute:
        raise no_multiple(node.at)
    return over if node.function.startswith("where_") else found


def _over(checker: Checker, node: Call, parameters: Parameters | None) -> Type:
    """The type of a call's own name, from its bounds."""
    bounds = node.arguments[2:]
    types = [checker.number(bound, parameters) for bound in bounds]
    if node.function == "sum":
        for bound, found in zip(bounds, types, strict=True):
            if not found.unknown and (not found.dimension.is_plain or found.absolute):
                message = f"`sum` runs over whole numbers, but `{text(bound)}` is {article(found.dimension)}"
                raise Mistake("needs-plain-number", span_of(bound), message, "write `sum(f, k, 0, 5)`")
        return Type()
    common = types[0]
    if len(types) == 2:
        doing = f"`{node.function}` goes over"
        common = checker.same(types[0], types[1], span_of(bounds[1]), doing, *bounds)
    return common if common.unknown else Type(common.dimension, common.absolute)


# --- tables -------------------------------------------------------------------------------------------------


def _look_up(checker: Checker, node: Call, parameters: Parameters | None) -> Type:
    x, xs, ys = node.arguments
    if isinstance(ys, Name) and (two_way := checker.two_way(ys.name)) is not None:
        if node.function != "interp":
            message = f"`{ys.name}` is a two-way table, which `interp(x, y, table)` reads"
            raise Mistake("needs-column", span_of(ys), message, f"write `interp(x, y, {ys.name})`")
        for argument, along, what in ((x, two_way.down, "first column"), (xs, two_way.across, "header")):
            doing = f"the {what} of `{ys.name}` is held against"
            checker.same(checker.number(argument, parameters), along, span_of(argument), doing, argument, ys)
        return two_way.cells
    types = [checker.number(argument, parameters) for argument in node.arguments]
    checker.same(types[0], types[1], span_of(x), f"`{node.function}` looks up", x, xs)
    return types[2]
