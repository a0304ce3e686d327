"""What the tests of both printers share: typed formulas as trees, and trees of every kind for hypothesis."""

from __future__ import annotations

from typing import Any

from hypothesis import strategies as st

from loadpath.formula.lines import Item
from loadpath.formula.reader import Reader
from loadpath.formula.tree import (
    As,
    At,
    Binary,
    Bracket,
    Branch,
    Call,
    Cases,
    Factor,
    Logic,
    Name,
    Negative,
    Node,
    Number,
    Part,
    Quantity,
    Relation,
    Shown,
    Word,
)

HOSTILE = [
    "<script>alert(1)</script>", "</math><img src=x onerror=alert(1)>", "a&b", '"}</style>', "]]>", "<!--",
    "&lt;", r"\input{secret}", r"\href{javascript:x}{y}", "$x$", "$$", "}{", "{", "\\", "`code`", "100 %",
    "a_b_c", "*bold*",
    "[link](x)", "a|b", "~~a~~", "#1", "^", "| a | b |", "\u202e", "x\x07y", "荷载", "ﷺ", "it's",
]  # fmt: skip
"""Words and units that try to be markup."""

NAMES = [
    "a", "P_Ed", "M_Ed_y", "sigma_x_max", "b.I_y", "top_flange.W_el_y", "curve", "F1", "x'", "f_c'",
    "d_轴", "é", "фактор_ф", "Alpha", "omicron_Beta", "pi", "h", "a_long_name_of_a_load_on_the_old_slip",
]  # fmt: skip


def formula(typed: str) -> Node:
    """An expression as typed, as a tree."""
    reader = Reader(Item(typed, 0, ()))
    node = reader.expression()
    assert reader.done(), typed
    return node


def condition(typed: str) -> Node:
    """Relations as typed, as a tree."""
    reader = Reader(Item(typed, 0, ()))
    node = reader.condition()
    assert reader.done(), typed
    return node


def with_values(node: Any, values: dict[str, Node]) -> Any:
    """The tree with other nodes in place of names."""
    if isinstance(node, Name):
        return values.get(node.name, node)
    match node:
        case Negative(operand=operand):
            return Negative(with_values(operand, values))
        case Binary(operator=operator, left=left, right=right):
            return Binary(operator, with_values(left, values), with_values(right, values))
        case Call(function=function, arguments=arguments):
            return Call(function, tuple(with_values(a, values) for a in arguments))
        case Bracket(inner=inner, power=power):
            return Bracket(with_values(inner, values), power)
        case As(operand=operand, unit=unit):
            return As(with_values(operand, values), unit)
        case At(operand=operand, row=row):
            return At(with_values(operand, values), with_values(row, values))
        case Relation(operands=operands, signs=signs):
            return Relation(tuple(with_values(o, values) for o in operands), signs)
    return node


# --- trees of every kind ------------------------------------------------------------------------------------


PLAIN_NUMBERS = st.sampled_from(
    ["0", "3", "12", "1.35", "12345.678", "12.5e6", "1.20e-9", "2 1/2", "5/8", "12_000"]
)


def _shown() -> st.SearchStrategy[Node]:
    numbers = st.tuples(st.sampled_from(["", "-"]), PLAIN_NUMBERS).map("".join)
    units = st.sampled_from(["", "kN", "kN*m", "mm^4", "deg", "degC", "%", "m^(1/2)", "J/(kg*K)", "1/K"])
    words = st.one_of(st.sampled_from(HOSTILE), st.text(max_size=12))
    return st.one_of(st.builds(Shown, numbers, units), st.builds(Shown, words, st.just(""), st.just(True)))


def _leaves() -> st.SearchStrategy[Node]:
    wholes, fractions = st.sampled_from(["2", "12.5", ""]), st.just(("1", "2")) | st.none()
    part = st.builds(Part, wholes, fractions, st.sampled_from(["ft", "in", *HOSTILE]))
    return st.one_of(
        st.builds(Number, st.sampled_from(["0", "2", "0.5", "12_000.5", "1.2E-06", "1" * 40])),
        st.builds(Name, st.sampled_from(NAMES)),
        st.builds(Quantity, st.lists(part, min_size=1, max_size=2).map(tuple)),
        _shown(),
    )


def _grown(inner: st.SearchStrategy[Node]) -> st.SearchStrategy[Node]:
    calls = st.sampled_from(["sqrt", "cbrt", "abs"])
    many = st.sampled_from(["sin", "log10", "min", "atan2", "round_up", "where_largest", "M", "M_x'"])
    return st.one_of(
        st.builds(Binary, st.sampled_from(["+", "-", "*", "/", "^"]), inner, inner),
        st.builds(Binary, st.sampled_from(["/", "*"]), inner, inner),
        st.builds(Negative, inner),
        st.builds(Call, calls, st.tuples(inner)),
        st.builds(Call, many, st.lists(inner, max_size=3).map(tuple)),
        st.builds(Bracket, inner, st.integers(0, 3)),
        st.builds(As, inner, st.sampled_from(["psi", "in", "<b>"])),
        st.builds(
            At, inner, st.builds(Word, st.sampled_from(HOSTILE)) | st.builds(Name, st.sampled_from(NAMES))
        ),
        _calculus(inner),
        st.builds(Factor, inner, st.just("12"), st.sampled_from(["in/ft", "rad"]), st.booleans()),
    )


def _calculus(inner: st.SearchStrategy[Node]) -> st.SearchStrategy[Node]:
    """Calls that print with a sign of their own."""
    own = st.builds(Name, st.sampled_from(["x", "k", "xi"])) | inner
    ranged = ["integral", "sum", "largest", "smallest", "where_largest", "where_smallest"]
    return st.one_of(
        st.builds(Call, st.sampled_from(["sum", "simplified"]), st.tuples(inner)),
        st.builds(Call, st.sampled_from(["integral", "derivative"]), st.tuples(inner, own)),
        st.builds(Call, st.just("limit_of"), st.tuples(inner, own, inner)),
        st.builds(Call, st.sampled_from(ranged), st.tuples(inner, own, inner, inner)),
    )


def expressions() -> st.SearchStrategy[Node]:
    """Expressions of every kind of node."""
    return st.recursive(_leaves(), _grown, max_leaves=14)


def relations() -> st.SearchStrategy[Node]:
    """Relations, chains, `and`, `or`."""
    words = st.builds(Word, st.one_of(st.sampled_from(HOSTILE), st.text(max_size=8)))
    side = st.one_of(expressions(), words)
    signs = st.sampled_from(["<=", "<", ">=", ">", "="])
    two = st.builds(lambda a, s, b: Relation((a, b), (s,)), side, signs, side)
    three = st.builds(lambda a, s, b, c: Relation((a, b, c), (s, s)), side, signs, side, side)
    one = st.one_of(two, three)
    several = st.lists(one, min_size=2, max_size=3).map(tuple)
    return st.one_of(one, st.builds(Logic, st.sampled_from(["and", "or"]), several))


def trees() -> st.SearchStrategy[Node]:
    """Everything that a printer may be given."""
    branch = st.builds(Branch, expressions(), relations() | st.none())
    cases = st.builds(Cases, st.lists(branch, min_size=1, max_size=3).map(tuple))
    return st.one_of(expressions(), relations(), cases)


# --- arithmetic only, to be read back -----------------------------------------------------------------------


def arithmetic() -> st.SearchStrategy[Node]:
    """Trees whose print can be typed again: short names, numbers, quantities, operators, functions."""
    leaves = st.one_of(
        st.builds(Name, st.sampled_from(["a", "P_Ed", "sigma_x", "F1", "f_c'", "load"])),
        st.builds(Number, st.sampled_from(["2", "0.5", "12345", "1.2e6"])),
        st.sampled_from([formula(typed) for typed in ("6 m", "12.5 kN/m", "3 kN", "(f_k as psi)")]),
    )

    def grown(inner: st.SearchStrategy[Node]) -> st.SearchStrategy[Node]:
        operators = st.sampled_from(["+", "-", "*", "/", "^"])
        functions = st.sampled_from(["sqrt", "cbrt", "abs", "sin", "ln", "M"])
        return st.one_of(
            st.builds(Binary, operators, inner, inner),
            st.builds(Negative, inner),
            st.builds(Call, functions, st.tuples(inner)),
            st.builds(Call, st.just("min"), st.tuples(inner, inner)),
            st.builds(Bracket, inner, st.integers(0, 2)),
        )

    return st.recursive(leaves, grown, max_leaves=20)
