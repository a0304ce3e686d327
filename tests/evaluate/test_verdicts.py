"""Verdicts: every sentence of the contract on criteria, and that nothing printed contradicts what was found.

source: the contract of the language, section 2, "Criterion".
"""

from __future__ import annotations

import math
import re
from itertools import pairwise

import pytest
from hypothesis import example, given
from hypothesis import strategies as st

from loadpath.evaluate.verdicts import both_sides, judge
from loadpath.formula.lines import Item
from loadpath.formula.reader import Reader
from loadpath.formula.tree import Logic, Name, Node, Relation, Sign
from loadpath.trace.digits import order_digits, ratio_text
from loadpath.trace.model import Verdict
from loadpath.units.printing import plain, read_plain

a, b, c = (Name(n) for n in "abc")


def relation(text: str) -> Node:
    return Reader(Item(text, 0, ())).condition()


def single(left: float, sign: Sign, right: float) -> Verdict:
    return judge(Relation((a, b), (sign,)), ((left, right),))


def chain(low: float, value: float, high: float, signs: tuple[Sign, Sign] = ("<=", "<=")) -> Verdict:
    return judge(Relation((a, b, c), signs), ((low, value, high),))


def either(
    first: tuple[float, float], second: tuple[float, float], signs: tuple[Sign, Sign] = ("<=", ">=")
) -> Verdict:
    relations = tuple(Relation((a, b), (sign,)) for sign in signs)
    return judge(Logic("or", relations), (first, second))


def typed(text: str, *values: float) -> Verdict:
    """Of a relation whose typed operands matter."""
    return judge(relation(text), (values,))


# --- sides, and what counts as equal ------------------------------------------------------------------------


@pytest.mark.parametrize("apart", [0, 1e-10, -1e-10, 0.999e-9, -0.999e-9])
@pytest.mark.parametrize("size", [1.0, 2.35e8, 1e-6])
def test_sides_within_a_billionth_of_the_larger_are_equal(apart: float, size: float) -> None:
    """Equal satisfies `<=`; for `<` it has utilisation 1 and is not satisfied."""
    near = size * (1 + apart)
    for sign, satisfied in (("<=", True), (">=", True), ("<", False), (">", False)):
        verdict = single(near, sign, size)  # type: ignore[arg-type]
        assert (verdict.satisfied, verdict.utilisation) == (satisfied, 1)


@pytest.mark.parametrize("apart", [2e-9, 1e-6, 0.1])
def test_sides_further_apart_are_not(apart: float) -> None:
    assert single(1 + apart, "<=", 1).satisfied is False
    assert single(1 - apart, "<=", 1).satisfied is True
    assert single(1 - apart, "<=", 1).utilisation != 1


def test_unrounded_values_are_judged() -> None:
    verdict = single(1.0002, "<=", 1)
    assert verdict.satisfied is False and ratio_text(verdict) == "1.0002"
    digits = order_digits((1.0002, 1), 2)
    assert read_plain(plain(1.0002, digits)) > read_plain(plain(1, digits))


# --- utilisation --------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("left", "sign", "right", "ratio"),
    [
        (50, "<=", 100, 0.5),
        (50, "<", 100, 0.5),
        (100, ">=", 50, 0.5),
        (100, ">", 50, 0.5),
        (150, "<=", 100, 1.5),
    ],
)
def test_utilisation_is_demand_over_limit(left: float, sign: Sign, right: float, ratio: float) -> None:
    """Left over right for `<=`, right over left for `>=`."""
    verdict = single(left, sign, right)
    assert verdict.utilisation == ratio and verdict.satisfied == (ratio <= 1)
    assert verdict.demand is not None and verdict.limit is not None
    assert verdict.demand / verdict.limit == ratio


def test_where_both_sides_are_negative_both_signs_are_turned() -> None:
    """`s >= -60 MPa` is judged as `-s <= 60 MPa`."""
    verdict = single(-45, ">=", -60)
    assert (verdict.utilisation, verdict.demand, verdict.limit, verdict.satisfied) == (0.75, 45, 60, True)
    assert single(-75, ">=", -60).utilisation == 1.25
    assert single(-75, "<=", -60).utilisation == 0.8
    assert single(0, ">=", -60).utilisation == 0
    assert typed("-60 <= s", -60, 0).utilisation == 0


@pytest.mark.parametrize(
    ("left", "sign", "right", "margin"),
    [
        (5, "<=", 0, -5),
        (-5, "<=", 0, 5),
        (0, "<=", 0, 0),
        (5, "<=", -3, -8),
        (0, "<=", -60, -60),
        (-3, ">=", 5, -8),
    ],
)
def test_where_there_is_no_such_ratio_the_margin_is_shown(
    left: float, sign: Sign, right: float, margin: float
) -> None:
    """A limit of zero, a negative resistance."""
    verdict = single(left, sign, right)
    assert verdict.utilisation is None and verdict.margin == margin
    assert verdict.satisfied == (margin >= 0)
    assert not verdict.one_sided


@pytest.mark.parametrize(
    ("text", "values"), [("x >= 0", (5.0, 0.0)), ("0 <= x", (0.0, 5.0)), ("x >= 0 mm", (5.0, 0.0))]
)
def test_a_typed_bound_of_zero_has_no_ratio_on_either_side(text: str, values: tuple[float, float]) -> None:
    verdict = typed(text, *values)
    assert (verdict.satisfied, verdict.utilisation, verdict.margin) == (True, None, 5)


def test_no_demand_is_a_utilisation_of_zero() -> None:
    assert typed("R >= E", 50, 0).utilisation == 0
    assert typed("E <= R", 0, 50).utilisation == 0


def test_a_relation_of_absolute_temperatures_has_no_utilisation() -> None:
    verdict = judge(Relation((a, b), ("<=",)), ((300.0, 350.0),), ratios=False)
    assert (verdict.satisfied, verdict.utilisation, verdict.margin) == (True, None, 50)
    verdict = judge(Relation((a, b, c), ("<=", "<=")), ((250.0, 300.0, 350.0),), ratios=False)
    assert (verdict.satisfied, verdict.utilisation) == (True, None)


# --- one-sided ----------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("left", "sign", "right"), [(-5, "<=", 10), (10, ">=", -5), (5, ">=", -10), (-10, "<=", 5)]
)
def test_a_negative_demand_against_one_positive_limit(left: float, sign: Sign, right: float) -> None:
    """It reads "satisfied on one side only", has no utilisation, and `satisfied` is true."""
    verdict = single(left, sign, right)
    assert verdict.one_sided and verdict.satisfied is True and verdict.utilisation is None
    assert verdict.words("") == "satisfied on one side only"


def test_the_mend_of_a_one_sided_criterion() -> None:
    def mend(text: str, *values: float) -> str:
        one = relation(text)
        assert isinstance(one, Relation)
        return both_sides(one, values)

    assert "`abs(s) <= 235 MPa`" in mend("s <= 235 MPa", -5, 10)
    assert "`-235 MPa <= s <= 235 MPa`" in mend("s <= 235 MPa", -5, 10)
    assert "`abs(s) <= 60 MPa`" in mend("s >= -60 MPa", 5, -10)
    assert "`abs(N) < R`" in mend("R > N", 5, -10)
    assert "`-(a + b) <= s <= a + b`" in mend("s <= a + b", -5, 10)


def test_a_chain_is_never_one_sided() -> None:
    assert not chain(-10, -5, 10).one_sided
    assert not chain(-10, -20, 10).one_sided


# --- chains -------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("low", "value", "high", "ratio", "part"),
    [
        (20, 40, 50, 0.8, 1),
        (20, 25, 50, 0.8, 0),
        (20, 10, 50, 2.0, 0),
        (20, 60, 50, 1.2, 1),
        (-50, -40, -20, 0.8, 0),
        (-50, -25, -20, 0.8, 1),
        (-50, -60, -20, 1.2, 0),
        (-50, -10, -20, 2.0, 1),
    ],
)
def test_in_a_chain_the_governing_part_counts(
    low: float, value: float, high: float, ratio: float, part: int
) -> None:
    verdict = chain(low, value, high)
    assert verdict.utilisation == pytest.approx(ratio)
    assert verdict.part == part and verdict.satisfied == (ratio <= 1)


@pytest.mark.parametrize(
    ("low", "value", "high", "ratio"),
    [(-10, 5, 20, 0.25), (-10, -5, 20, 0.5), (-10, -15, 20, 1.5), (-10, 30, 20, 1.5), (-10, 0, 20, 0)],
)
def test_for_bounds_of_opposite_sign_it_is_the_demand_over_the_bound_on_its_own_side(
    low: float, value: float, high: float, ratio: float
) -> None:
    verdict = chain(low, value, high)
    assert verdict.utilisation == ratio and verdict.satisfied == (ratio <= 1)


@pytest.mark.parametrize(
    ("low", "value", "high", "ratio", "satisfied"),
    [
        (0, 5, 10, 0.5, True),
        (0, 0, 10, 0, True),
        (0, 12, 10, 1.2, False),
        (0, -2, 10, None, False),
        (-10, -5, 0, 0.5, True),
        (-10, 0, 0, 0, True),
        (-10, 2, 0, None, False),
        (0, 0, 0, None, True),
    ],
)
def test_a_bound_of_zero_in_a_chain_counts_as_of_the_other_bounds_opposite_sign(
    low: float, value: float, high: float, ratio: float | None, satisfied: bool
) -> None:
    verdict = chain(low, value, high)
    assert (verdict.utilisation, verdict.satisfied) == (ratio, satisfied)


def test_a_chain_may_be_typed_downwards() -> None:
    up, down = chain(20, 25, 50), judge(Relation((a, b, c), (">=", ">=")), ((50.0, 25.0, 20.0),))
    assert (up.utilisation, up.demand, up.limit) == (down.utilisation, down.demand, down.limit)
    assert (up.part, down.part) == (0, 1)


def test_a_chain_with_strict_signs() -> None:
    assert chain(20, 50, 50, ("<=", "<")).satisfied is False
    assert chain(20, 50, 50, ("<=", "<")).utilisation == 1
    assert chain(20, 50, 50, ("<", "<=")).satisfied is True
    assert chain(-50, 50, 50, ("<", "<")).satisfied is False


# --- or -----------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("first", "second", "ratio", "satisfied", "part"),
    [
        ((60, 80), (60, 120), 0.75, True, 0),
        ((150, 80), (150, 120), 0.8, True, 1),
        ((100, 80), (100, 110), 1.1, False, 1),
        ((90, 80), (90, 120), 1.125, False, 0),
    ],
)
def test_with_or_the_smaller_ratio_counts(
    first: tuple[float, float], second: tuple[float, float], ratio: float, satisfied: bool, part: int
) -> None:
    """An excluded band, such as a speed away from resonance: `n <= 80 or n >= 120`."""
    verdict = either(first, second)
    assert verdict.utilisation == pytest.approx(ratio)
    assert (verdict.satisfied, verdict.part) == (satisfied, part)


def test_with_or_a_side_without_ratio_does_not_hide_one_that_is_satisfied() -> None:
    verdict = either((5, 0), (5, 3))
    assert (verdict.satisfied, verdict.part, verdict.utilisation) == (True, 1, 0.6)
    assert either((-5, 0), (-5, 3)).satisfied is True


# --- properties ---------------------------------------------------------------------------------------------

signs: st.SearchStrategy[Sign] = st.sampled_from(("<=", "<", ">=", ">"))
sizes = st.sampled_from((0.0, 1.0, -1.0, 235e6, -235e6, 1e-6, 0.9996, 1.0002, 123.4567)) | st.floats(
    -1e12, 1e12, allow_subnormal=False
)
nudges = st.sampled_from((0.0, 1e-12, 5e-10, 0.99e-9, 1.01e-9, 2e-9, 1e-7, 1e-4, 0.3))


@st.composite
def sides(draw: st.DrawFn, count: int) -> tuple[float, ...]:
    """Values of which neighbours are often nearly equal, or of opposite sign."""
    values = [draw(sizes)]
    for _ in range(count - 1):
        near = values[-1] * (1 + draw(st.sampled_from((1, -1))) * draw(nudges))
        values.append(draw(st.sampled_from((near, -near)) | sizes))
    return tuple(draw(st.permutations(values)))


@st.composite
def judged(draw: st.DrawFn) -> tuple[Node, Verdict]:
    def one() -> tuple[Relation, tuple[float, ...]]:
        if draw(st.booleans()):
            return Relation((a, b), (draw(signs),)), draw(sides(2))
        pair = draw(st.sampled_from((("<=", "<"), ("<", "<="), ("<=", "<="), (">=", ">"), (">", ">="))))
        return Relation((a, b, c), pair), draw(sides(3))

    first, values = one()
    if draw(st.booleans()):
        return first, judge(first, (values,))
    second, more = one()
    both = Logic("or", (first, second))
    return both, judge(both, (values, more))


def by_definition(node: Node, values: tuple[tuple[float, ...], ...]) -> bool:
    """Whether a criterion is satisfied, worked in another way: by exact comparison outside a billionth."""

    def holds(left: float, sign: str, right: float) -> bool:
        equal = math.isclose(left, right, rel_tol=1e-9, abs_tol=0)
        return sign[1:] == "=" if equal else (left < right) == (sign[0] == "<")

    relations = node.operands if isinstance(node, Logic) else (node,)
    return any(
        all(holds(x, sign, y) for (x, y), sign in zip(pairwise(row), one.signs, strict=True))
        for one, row in zip(relations, values, strict=True)
        if isinstance(one, Relation)
    )


@given(judged())
def test_satisfied_is_what_the_signs_say(case: tuple[Node, Verdict]) -> None:
    node, verdict = case
    rows = tuple(tuple(float(v) for v in row) for row in verdict.sides)
    assert verdict.satisfied == by_definition(node, rows)


@given(judged())
def test_a_ratio_never_contradicts_the_verdict(case: tuple[Node, Verdict]) -> None:
    """A ratio above 1 never stands beside "satisfied", one below 1 never beside "not satisfied"."""
    _, verdict = case
    if verdict.utilisation is None:
        assert ratio_text(verdict) == ""
        return
    printed = printed_ratio(verdict)
    for ratio in (verdict.utilisation, printed):
        assert math.isfinite(ratio) and ratio >= 0
        assert not (ratio > 1 and verdict.satisfied)
        assert not (ratio < 1 and not verdict.satisfied)
    assert (printed == 1) == (verdict.utilisation == 1)


def printed_ratio(verdict: Verdict) -> float:
    """The utilisation as a reader reads it; one of a thousand and more is set in powers of ten."""
    text = re.sub(r"\s", "", ratio_text(verdict))
    return float(re.sub(r"×10(.+)", lambda m: "e" + m.group(1).translate(PLAIN_DIGITS), text))


PLAIN_DIGITS = str.maketrans("⁰¹²³⁴⁵⁶⁷⁸⁹⁻", "0123456789-")


@given(judged())
def test_demand_limit_ratio_and_margin_belong_together(case: tuple[Node, Verdict]) -> None:
    _, verdict = case
    assert verdict.demand is not None and verdict.limit is not None
    if verdict.utilisation is None:
        assert verdict.margin == verdict.limit - verdict.demand
    else:
        assert verdict.margin is None and verdict.limit > 0
        assert verdict.utilisation == pytest.approx(verdict.demand / verdict.limit, rel=2e-9)
    if verdict.one_sided:
        assert verdict.satisfied and verdict.demand < 0 < verdict.limit and verdict.utilisation is None


@given(sides(2), st.integers(2, 12))
@example((1.23450000001, 1.23449999999), 4)
@example((100.00000001, 100.0), 12)
@example((0.9996, 1.0), 2)
def test_printed_sides_never_contradict_the_order_found(values: tuple[float, ...], base: int) -> None:
    """Sides that differ print in their order; sides that count as equal don't print in an order."""
    left, right = values
    digits = order_digits(values, base)
    first, second = (read_plain(plain(v, digits)) for v in values)
    if math.isclose(left, right, rel_tol=1e-9, abs_tol=0):
        assert first == second
    else:
        assert (first < second) == (left < right) and first != second


# --- words --------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("verdict", "why", "words"),
    [
        (Verdict(True), "", "satisfied"),
        (Verdict(False), "", "not satisfied"),
        (Verdict(True, conditional_on=("A1", "A2")), "", "satisfied, conditional on A1, A2"),
        (
            Verdict(True, one_sided=True, conditional_on=("A1",)),
            "",
            "satisfied on one side only, conditional on A1",
        ),
        (Verdict(None), "not computed because of line 12", "not shown: not computed because of line 12"),
        (Verdict(None, outside=("chi",)), "", "not shown: outside the range of chi"),
    ],
)
def test_words(verdict: Verdict, why: str, words: str) -> None:
    assert verdict.words(why) == words
