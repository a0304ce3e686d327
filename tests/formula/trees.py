"""Random formula trees, as a sheet may hold them."""

from __future__ import annotations

from hypothesis import strategies as st

from loadpath.formula.tree import (
    As,
    Binary,
    Bracket,
    Call,
    Logic,
    Name,
    Negative,
    Node,
    Number,
    Part,
    Quantity,
    Relation,
    Word,
)

NAMES = ("a", "b_1", "sigma", "M_Ed_y", "F'", "x", "B1.M_max")
UNITS = ("kN", "mm^2", "J/(kg*K)", "%", "1/K", "kN*m", "K^-1")

names = st.sampled_from(NAMES).map(Name)
numbers = st.sampled_from(("0", "2", "12_000", "0.5", "1.2e6", "3e-4", "0.1")).map(Number)
fractions = st.sampled_from((("1", "2"), ("5", "8")))
quantities = st.one_of(
    st.builds(
        lambda w, u: Quantity((Part(w, None, u),)),
        st.sampled_from(("0", "20", "1.5")),
        st.sampled_from(UNITS),
    ),
    st.builds(lambda o: Quantity((Part("", o, "in"),)), fractions),
    st.builds(lambda w, o: Quantity((Part(w, o, "in"),)), st.sampled_from(("2", "12")), fractions),
    st.builds(lambda o: Quantity((Part("12", None, "ft"), Part("6", o, "in"))), st.none() | fractions),
    st.sampled_from(("20", "-20")).map(lambda w: Quantity((Part(w, None, "degC"),))),
)
leaves: st.SearchStrategy[Node] = names | numbers | quantities


def _grown(inner: st.SearchStrategy[Node]) -> st.SearchStrategy[Node]:
    return st.one_of(
        st.builds(Negative, inner),
        st.builds(Binary, st.sampled_from(("+", "-", "*", "/", "^")), inner, inner),
        st.builds(lambda a: Call("sqrt", (a,)), inner),
        st.builds(lambda a, b: Call("M", (a, b)), inner, inner),
        st.builds(Bracket, inner, st.integers(0, 3)),
        st.builds(As, inner, st.sampled_from(UNITS[:4])),
    )


trees: st.SearchStrategy[Node] = st.recursive(leaves, _grown, max_leaves=12)
"""Expressions."""

_operands = trees | st.just(Word("b"))
relations: st.SearchStrategy[Node] = st.one_of(
    st.builds(
        lambda a, s, b: Relation((a, b), (s,)),
        _operands,
        st.sampled_from(("<=", "<", ">=", ">", "=")),
        _operands,
    ),
    st.builds(lambda a, b, c: Relation((a, b, c), ("<", "<=")), trees, trees, trees),
)
conditions: st.SearchStrategy[Node] = st.recursive(
    relations,
    lambda inner: st.builds(
        Logic, st.sampled_from(("and", "or")), st.lists(inner, min_size=2, max_size=3).map(tuple)
    ),
    max_leaves=4,
)
"""Relations joined by `and` and `or`."""
