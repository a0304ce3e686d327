"""Names that live only within a call: what a tree takes from outside, and trees put in place of names."""

from __future__ import annotations

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from loadpath.formula.binding import BRINGS_ITS_OWN, free_names, own_name, parameter_named, put_in
from loadpath.formula.canonical import text
from loadpath.formula.lines import Item
from loadpath.formula.reader import Reader
from loadpath.formula.tree import Binary, Bracket, Call, Name, Negative, Node, Number, children


def tree(typed: str) -> Node:
    reader = Reader(Item(typed, 0, ()))
    node = reader.expression()
    assert reader.done()
    return node


def call(typed: str) -> Call:
    node = tree(typed)
    assert isinstance(node, Call)
    return node


def replaced(typed: str, **values: str) -> str:
    return text(put_in(tree(typed), {name: tree(value) for name, value in values.items()}))


# --- which names a tree takes from outside ------------------------------------------------------------------


@pytest.mark.parametrize(
    ("typed", "names"),
    [
        ("a + b*3 kN", "a b"),
        ("f(a, b)", "a b"),
        ('t.b at "w" + t.h at k', "t.b t.h k"),
        ("(c as mm)*<x - a>^2", "c x a"),
        ("integral(w*x, x, a, b)", "w a b"),
        ("integral(w*x, x, a, x)", "w a x"),
        ("integral(w*x, x, x, b)", "w x b"),
        ("integral(w*x, x)", "w x"),
        ("derivative(w*x, x)", "w x"),
        ("sum(w*k, k, 0, n) + k", "w n k"),
        ("sum(t.b)", "t.b"),
        ("limit_of(sin(x)/x, x, a)", "a"),
        ("largest(f(x), x, 0 m, L) - smallest(g(y), y, 0 m, L)", "L"),
        ("where_largest(x*y, x, 0, 1) + where_smallest(x*y, y, 0, 1)", "x y"),
        ("integral(integral(x*y*z, y, 0, x), x, 0, a)", "z a"),
        ("interp(x, t.a, t.b) + lookup(x, t.a, t.b)", "x t.a t.b"),
        ("max(x, y)", "x y"),
        ("integral(w*2, 3, a, b)", "w a b"),
    ],
)
def test_free_names(typed: str, names: str) -> None:
    assert free_names(tree(typed)) == set(names.split())


def test_names_bound_outside_are_not_free() -> None:
    assert free_names(tree("a + b + integral(a*c, c, 0, b)"), frozenset({"a"})) == {"b"}


@pytest.mark.parametrize("function", BRINGS_ITS_OWN)
def test_only_the_form_with_bounds_brings_a_name_of_its_own(function: str) -> None:
    for count in range(1, 7):
        typed = f"{function}({', '.join(['f', 'x', '0', '1', '2', '3'][:count])})"
        own = own_name(call(typed))
        assert (own is not None) == (count in BRINGS_ITS_OWN[function])
        assert own is None or own.name == "x"


def test_parameters_that_calls_are_about() -> None:
    found = parameter_named(call("derivative(x^2, x)"))
    assert found is not None and found.name == "x"
    assert parameter_named(call("integral(x^2, x)")) == Name("x")
    assert parameter_named(call("integral(x^2, x, 0, 1)")) is None
    assert parameter_named(call("derivative(x^2, 2*x)")) is None
    assert parameter_named(call("limit_of(x^2, x, 0)")) is None


# --- putting trees in place of names ------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("typed", "values", "gives"),
    [
        ("a + b", {"a": "b", "b": "a"}, "b + a"),
        ("a^2", {"a": "-c"}, "(-c)^2"),
        ("a/b", {"b": "c*d"}, "a/(c*d)"),
        ("2*<x - a>^1", {"a": "L/2"}, "2*<x - L/2>^1"),
        ("(a as mm)", {"a": "b + c"}, "(b + c as mm)"),
        ("f(a, g(a))", {"a": "2 m"}, "f(2 m, g(2 m))"),
        ('t.b at k + k', {"k": "j"}, "t.b at j + j"),
        # what lives only within a call stays its own
        ("integral(w*x, x, 0, x)", {"x": "L"}, "integral(w*x, x, 0, L)"),
        ("integral(w*x, x, 0, L)", {"w": "q", "L": "2*l"}, "integral(q*x, x, 0, 2*l)"),
        ("sum(k*w, k, 0, n) + k", {"k": "j"}, "sum(k*w, k, 0, n) + j"),
        # a name that would be caught makes room
        ("integral(w*x, x, 0, L)", {"w": "x"}, "integral(x*x', x', 0, L)"),
        ("integral(w*x, x, 0, L)", {"w": "x + x'"}, "integral((x + x')*x'', x'', 0, L)"),
        ("integral(w*x + x', x, 0, L)", {"w": "x"}, "integral(x*x'' + x', x'', 0, L)"),
        # where it stands outside the body it is not caught
        ("integral(w*x, x, 0, L)", {"L": "x"}, "integral(w*x, x, 0, x)"),
        ("integral(w*x, x, 0, L)", {"v": "x"}, "integral(w*x, x, 0, L)"),
        # one within another
        ("integral(integral(w*x*y, y, 0, x), x, 0, L)", {"w": "x*y"},
         "integral(integral(x*y*x'*y', y', 0, x'), x', 0, L)"),
        ("integral(integral(w*y, y, 0, x), x, 0, y)", {"y": "x"},
         "integral(integral(w*y, y, 0, x), x, 0, x)"),
        ("largest(V*x, x, 0, 1)*limit_of(V/x, x, 0)", {"V": "x"},
         "largest(x*x', x', 0, 1)*limit_of(x/x', x', 0)"),
    ],
)  # fmt: skip
def test_put_in(typed: str, values: dict[str, str], gives: str) -> None:
    assert replaced(typed, **values) == gives


def test_derivatives_and_integrals_by_a_parameter_are_put_in_like_any_call() -> None:
    """Their name is a parameter of the function around them, which whoever puts in must mind."""
    assert replaced("derivative(w*x, x)", w="q") == "derivative(q*x, x)"


def test_nothing_to_put_in_changes_nothing() -> None:
    node = tree("integral(w*x, x, 0, L)")
    assert put_in(node, {}) == node


# --- held against numbers -----------------------------------------------------------------------------------

NAMES = ("a", "b", "x", "y", "x'")
names = st.sampled_from(NAMES).map(Name)
leaves: st.SearchStrategy[Node] = names | st.sampled_from(["1", "2", "3"]).map(Number)


def grown(inner: st.SearchStrategy[Node]) -> st.SearchStrategy[Node]:
    whole = st.sampled_from(["1", "2", "3"]).map(Number)
    return st.one_of(
        st.builds(Binary, st.sampled_from(("+", "-", "*")), inner, inner),
        st.builds(Negative, inner),
        st.builds(Bracket, inner, st.just(1)),
        st.builds(
            lambda f, own, m, n: Call("sum", (f, own, m, n)), inner, names, whole | names, whole | names
        ),
    )


trees: st.SearchStrategy[Node] = st.recursive(leaves, grown, max_leaves=8)


def worth(node: Node, values: dict[str, float]) -> float:
    """The value of such a tree, each sum with its own name bound; an arithmetic of its own."""
    match node:
        case Number(text=typed):
            return float(typed)
        case Name(name=name):
            return values[name]
        case Negative(operand=operand):
            return -worth(operand, values)
        case Bracket(inner=inner):
            return max(worth(inner, values), 0.0)
        case Binary(operator=operator, left=left, right=right):
            a, b = worth(left, values), worth(right, values)
            return {"+": a + b, "-": a - b, "*": a * b}[operator]
        case Call(function="sum", arguments=(body, Name(name=own), low, high)):
            first, last = worth(low, values), worth(high, values)
            whole = range(math.floor(max(min(first, 9), -9)), math.floor(max(min(last, 9), -9)) + 1)
            return math.fsum(worth(body, {**values, own: float(k)}) for k in whole)
    raise AssertionError(node)


numbers = st.fixed_dictionaries({name: st.integers(-3, 3).map(float) for name in NAMES})


@given(trees, st.dictionaries(st.sampled_from(NAMES), trees, max_size=3), numbers)
def test_a_tree_put_in_is_worth_what_the_names_were(
    node: Node, values: dict[str, Node], given_values: dict[str, float]
) -> None:
    """Substitution and evaluation commute, whatever names the sums bring of their own."""
    meant = {**given_values, **{name: worth(tree, given_values) for name, tree in values.items()}}
    after = put_in(node, values)
    assert free_names(after) <= set(NAMES)
    assert worth(after, given_values) == worth(node, meant)


@given(trees, st.dictionaries(st.sampled_from(NAMES), trees, max_size=3))
def test_the_free_names_of_a_tree_put_in(node: Node, values: dict[str, Node]) -> None:
    free = free_names(node)
    expected = (free - set(values)).union(*(free_names(t) for name, t in values.items() if name in free))
    assert free_names(put_in(node, values)) == expected


@given(trees)
def test_free_names_are_those_whose_change_could_matter(node: Node) -> None:
    """Each name that stands anywhere is free, or is some call's own."""
    standing: set[str] = set()
    own: set[str] = set()
    waiting: list[object] = [node]
    while waiting:
        each = waiting.pop()
        assert isinstance(each, Node)
        if isinstance(each, Name):
            standing.add(each.name)
        if isinstance(each, Call) and (name := own_name(each)) is not None:
            own.add(name.name)
        waiting += children(each)
    assert free_names(node) <= standing
    assert standing - free_names(node) <= own
