"""Why equations have no value: which part that hangs on no unknown cannot be worked."""

from __future__ import annotations

from typing import Any

from loadpath.evaluate.explain import run
from loadpath.evaluate.failure import Failure, short
from loadpath.evaluate.inline import inlined
from loadpath.evaluate.numbers import Compiler, Values
from loadpath.formula.binding import free_names, own_name
from loadpath.formula.statements import Equations
from loadpath.formula.tree import Binary, Branch, Call, Cases, Logic, Node, children

_NO_PARAMETERS: dict[str, Any] = {}


def why_no_value(
    together: Equations, compiler: Compiler, values: Values, otherwise: Failure | None = None
) -> Failure:
    """The failure of the first part of the bounds and equations of a `solve for` that has no value; where
    each part by itself has one, what is said `otherwise`."""
    unknowns = frozenset(sought.name for sought in together.sought)
    bounds = [bound for sought in together.sought for bound in (sought.low, sought.high) if bound]
    try:
        for tree in (*bounds, *together.equations):
            _look_through(inlined(tree, compiler.function), unknowns, compiler, values)
    except Failure as failure:
        return failure
    if otherwise is not None:
        return otherwise
    said = ", ".join(f"`{name}`" for name in sorted(unknowns))
    return Failure(
        "not-finite", lambda show: f"something in the equations has no value, or too large a one, for {said}",
        together.span, "check the values that the equations hold, for a division by 0 above all",
    )  # fmt: skip


def _look_through(node: Node | Branch, unknowns: frozenset[str], compiler: Compiler, values: Values) -> None:
    """Raises `Failure` for a part without unknowns that has no value. What may be passed over, as a branch,
    is not looked into."""
    if isinstance(node, Cases | Logic | Branch) or (isinstance(node, Call) and own_name(node) is not None):
        return
    if not free_names(node) & unknowns:
        run(compiler.compile_tree(node), node, values, _NO_PARAMETERS, compiler)
        return
    for child in children(node):
        _look_through(child, unknowns, compiler, values)
    if isinstance(node, Binary) and node.operator == "/" and not free_names(node.right) & unknowns:
        divisor = node.right
        if compiler.compile_tree(divisor)(values, _NO_PARAMETERS) == 0:
            raise Failure(
                "division-by-zero",
                lambda show: f"`{short(divisor)}` is 0, and `{short(node.left)}` is divided by it",
                node.at, "check the values that it comes from",
            )  # fmt: skip
