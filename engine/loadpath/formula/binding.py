"""Names that live only within a call (`x` of `integral(f, x, a, b)`), and putting trees in place of names."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace

from loadpath.formula.tree import Branch, Call, Name, Node, children, with_children

BRINGS_ITS_OWN: dict[str, tuple[int, ...]] = {
    "integral": (4,), "sum": (4,), "limit_of": (3,),
    "largest": (4,), "smallest": (4,), "where_largest": (4,), "where_smallest": (4,),
}  # fmt: skip
"""Functions whose second argument is a name of their own, by their number of arguments."""
OF_A_PARAMETER: dict[str, tuple[int, ...]] = {"derivative": (2,), "integral": (2,)}
"""Functions whose second argument is a parameter of the enclosing function."""


def own_name(call: Call) -> Name | None:
    """The name that lives only within a call, None where it brings none."""
    if len(call.arguments) in BRINGS_ITS_OWN.get(call.function, ()):
        second = call.arguments[1]
        return second if isinstance(second, Name) else None
    return None


def parameter_named(call: Call) -> Name | None:
    """The parameter that a call such as `derivative(f, x)` is about."""
    if len(call.arguments) in OF_A_PARAMETER.get(call.function, ()):
        second = call.arguments[1]
        return second if isinstance(second, Name) else None
    return None


def free_names(node: Node | Branch, bound: frozenset[str] = frozenset()) -> set[str]:
    """Names that a tree takes from outside itself."""
    if isinstance(node, Name):
        return set() if node.name in bound else {node.name}
    if isinstance(node, Call) and (own := own_name(node)) is not None:
        found = free_names(node.arguments[0], bound | {own.name})
        return found.union(*(free_names(each, bound) for each in node.arguments[2:]))
    return set().union(*(free_names(each, bound) for each in children(node)))


def put_in(node: Node, values: Mapping[str, Node]) -> Node:
    """The tree with other trees in place of names; what lives only within a call stays its own."""
    if isinstance(node, Name):
        return values.get(node.name, node)
    if isinstance(node, Call) and own_name(node) is not None:
        return _put_in_call(node, values)
    return with_children(node, lambda child: put_in(child, values))


def _put_in_call(call: Call, values: Mapping[str, Node]) -> Call:
    own = own_name(call)
    assert own is not None
    body, outer = call.arguments[0], call.arguments[2:]
    inner = {name: tree for name, tree in values.items() if name != own.name}
    used = free_names(body)
    if any(own.name in free_names(tree) for name, tree in inner.items() if name in used):
        fresh = _fresh(own.name, used.union(*(free_names(tree) for tree in inner.values())))
        body, own = put_in(body, {own.name: Name(fresh, own.span)}), Name(fresh, own.span)
    return replace(call, arguments=(put_in(body, inner), own, *(put_in(each, values) for each in outer)))


def _fresh(name: str, taken: set[str]) -> str:
    while name in taken:
        name += "'"
    return name
