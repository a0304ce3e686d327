"""Digits grow until what is printed no longer contradicts what was found."""

from __future__ import annotations

from dataclasses import dataclass
from itertools import pairwise

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

import loadpath
from loadpath.formula.tree import Negative, Number, Part, Quantity
from loadpath.trace import Step, Trace, Verdict, texts
from loadpath.trace.digits import exact_digits, in_order, order_digits, ratio_text, typed_number
from loadpath.units import parse_unit
from loadpath.units.printing import plain, read_plain

NEARLY = 1e-9
"""Sides within this of the larger are equal (the contract, section 2)."""

magnitudes = st.floats(1e-6, 1e9)
apart = st.sampled_from([1e-13, 1e-10, 3e-9, 1e-7, 2e-6, 5e-5, 4e-4, 1e-3, 0.2]).flatmap(
    lambda size: st.floats(-size, size)
)
well_apart = apart.filter(lambda step: abs(step) > 2 * NEARLY)


def equal(a: float, b: float) -> bool:
    return abs(a - b) <= NEARLY * max(abs(a), abs(b))


# --- order of two and more printed numbers ------------------------------------------------------------------


@pytest.mark.parametrize(
    ("values", "base", "digits"),
    [
        ([2.0, 1.0], 4, 4),
        ([1.0002, 1.0], 4, 5),
        ([0.99996, 1.0], 4, 5),
        ([1.0, 1.0], 4, 4),
        ([235.0, 235.0000001], 4, 4),  # equal within 1e-9
        ([235.0, 235.000001], 4, 9),  # not equal
        ([0.0, 0.0], 4, 4),
        ([0.0, 1e-12], 4, 4),
        ([-1.0002, -1.0], 4, 5),
        ([1.0005000000001, 1.0004999999999], 4, 5),  # equal, on either side of where 4 digits are rounded
        ([1.049, 1.051], 2, 2),
        ([1.0, 1.049, 1.051], 2, 4),  # at 3 digits the last two would print alike again
        ([1.0000000004, 1.0000000012], 12, 9),  # equal, and parted by 10 digits and more
    ],
)
def test_digits_that_keep_the_order(values: list[float], base: int, digits: int) -> None:
    assert order_digits(values, base) == digits


@given(
    magnitudes,
    apart.map(lambda step: [step]) | st.lists(well_apart, min_size=2, max_size=3),
    st.integers(2, 12),
)
def test_printed_numbers_stand_as_the_numbers_do(first: float, steps: list[float], base: int) -> None:
    values = [first]
    for step in steps:
        values.append(values[-1] * (1 + step))
    printed = [read_plain(plain(v, order_digits(values, base))) for v in values]
    for (a, b), (left, right) in zip(pairwise(values), pairwise(printed), strict=True):
        if equal(a, b):
            assert left == right
        else:
            assert left != right
            assert (left < right) == (a < b)


@given(magnitudes, apart, st.integers(2, 12))
def test_no_digit_more_than_needed(a: float, step: float, base: int) -> None:
    b = a * (1 + step)
    digits = order_digits([a, b], base)
    for fewer in range(base, digits) if digits >= base else range(base, 16):
        assert not in_order(a, b, plain(a, fewer), plain(b, fewer))


# --- ratios -------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("ratio", "text"),
    [
        (None, ""),
        (0.0, "0.000"),
        (0.2627, "0.263"),
        (0.9994, "0.999"),
        (0.9996, "0.9996"),
        (0.99999999, "0.99999999"),
        (1.0, "1.000"),
        (1.0002, "1.0002"),
        (1.0000004, "1.0000004"),
        (1.2345, "1.234"),
        (999.9, "999.900"),
        (12_345.6, "12\u2009350"),
    ],
)
def test_ratio_as_printed(ratio: float | None, text: str) -> None:
    assert ratio_text(Verdict(True, ratio)) == text


@given(
    st.one_of(
        st.floats(1e-9, 999),
        st.sampled_from([-1.0, 1.0]).flatmap(lambda s: st.floats(2e-9, 1e-3).map(lambda e: 1 + s * e)),
    )
)
def test_printed_ratio_never_stands_on_the_other_side_of_one(ratio: float) -> None:
    printed = float(ratio_text(Verdict(ratio <= 1, ratio)))
    assert (printed < 1) == (ratio < 1)
    assert (printed > 1) == (ratio > 1)


# --- what is typed ------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("value", "digits"),
    [
        (0.25, 2),
        (29_000.0, 2),
        (0.414963, 6),
        (100.0, 1),
        (78.0, 2),
        (1 / 3, 7),
        (12_345_678_901.0, 7),
        (0.1 + 0.2, 1),
    ],
)
def test_fewest_digits_that_print_a_typed_value(value: float, digits: int) -> None:
    assert exact_digits(value, otherwise=7) == digits


@pytest.mark.parametrize(
    ("node", "unit", "typed"),
    [
        (Number("1.10"), "", "1.10"),
        (Number("12_000"), "", "12000"),
        (Number("1.2E+6"), "", "1.2e6"),
        (Negative(Number("3")), "", "-3"),
        (Number("3"), "mm", ""),
        (Quantity((Part("20", None, "kN"),)), "kN", "20"),
        (Quantity((Part("20", None, "kN"),)), "N", ""),
        (Quantity((Part("2", ("1", "2"), "in"),)), "in", ""),
        (Quantity((Part("6", None, "ft"), Part("6", None, "in"))), "in", ""),
    ],
)
def test_number_as_typed(node: Number, unit: str, typed: str) -> None:
    assert typed_number(node, parse_unit(unit)) == typed


# --- on sheets ----------------------------------------------------------------------------------------------


@dataclass(frozen=True)
class Judged:
    """A criterion as printed: the two sides, the ratio, and what was found."""

    left: float
    right: float
    ratio: str
    satisfied: bool | None


def judged(limit: str, demand: str, sign: str) -> tuple[Judged, Step, Trace]:
    sheet = f"---\ntitle: T\n---\n\n    k = 1 -- a\n    x = k*{demand}\n    limit a: x {sign} {limit}\n"
    trace = loadpath.evaluate(loadpath.read_text(sheet))
    assert not trace.has_errors
    step = trace["limit a"]
    (compared,) = texts.compared(trace, step)
    left, right = (read_plain(o.number) for o in compared.evaluated.operands)  # type: ignore[attr-defined]
    assert step.verdict is not None
    return Judged(left, right, ratio_text(step.verdict), step.verdict.satisfied), step, trace


@settings(max_examples=200, deadline=None)
@given(
    st.decimals("0.001", "99999", places=4).filter(lambda d: d > 0),
    apart,
    st.sampled_from(["<=", "<", ">=", ">"]),
)
def test_a_printed_criterion_never_contradicts_its_verdict(limit: object, step: float, sign: str) -> None:
    """Both sides as printed, the limit as typed, and the ratio beside them, read on their own."""
    demand = repr(float(str(limit)) * (1 + step))
    seen, _, _ = judged(str(limit), demand, sign)
    said = {
        "<=": seen.left <= seen.right,
        "<": seen.left < seen.right,
        ">=": seen.left >= seen.right,
        ">": seen.left > seen.right,
    }
    assert said[sign] == seen.satisfied
    if seen.ratio:
        ratio = float(seen.ratio)
        assert ratio <= 1 if seen.satisfied else ratio >= 1
        assert ratio != 1 or seen.left == seen.right


def test_a_result_that_is_a_side_is_printed_to_the_digits_of_its_criterion() -> None:
    seen, step, trace = judged("1", "1.0002", "<=")
    assert seen == Judged(1.0002, 1.0, "1.0002", False)
    result = texts.display(trace["x"])
    assert result is not None
    assert result.number == "1.0002"
    assert step.digits == 4
