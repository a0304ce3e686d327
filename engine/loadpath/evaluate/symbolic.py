"""Which expressions algebra works before any number."""

from __future__ import annotations

from loadpath.formula.tree import Call, Node, walk

_SYMBOLIC = {"integral", "derivative", "limit_of", "simplified"}


def is_derived(node: Node) -> bool:
    """True where a tree holds something that algebra works."""
    return any(isinstance(n, Call) and is_symbolic(n) for n in walk(node))


def is_symbolic(call: Call) -> bool:
    """True for a call that algebra works."""
    return call.function in _SYMBOLIC or (call.function == "sum" and len(call.arguments) == 4)
