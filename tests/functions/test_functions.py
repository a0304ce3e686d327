"""The built-in functions: examples, values, domains, rounding to steps.

source: mpmath at 40 digits and scipy.special, general libraries that share no code with `math`.
"""

from __future__ import annotations

import math
import re
from collections.abc import Callable
from fractions import Fraction

import mpmath
import pytest
import scipy.special
from hypothesis import assume, given, settings
from hypothesis import strategies as st

import loadpath
from loadpath.formula.names import RESERVED
from loadpath.functions import FUNCTIONS, NAMES, SPECIAL
from loadpath.functions.special import COLUMNS, EXAMPLE_TABLE
from loadpath.trace import Trace
from loadpath.units import Dimension
from loadpath.units import dimension as d

patient = settings(deadline=None)

CONTRACT = {
    "sqrt", "cbrt", "abs", "exp", "ln", "log10", "sin", "cos", "tan", "sec", "asin", "acos", "atan",
    "atan2", "sinh", "cosh", "tanh", "min", "max", "sum", "count", "round_up", "round_down", "interp",
    "lookup", "integral", "derivative", "limit_of", "largest", "smallest", "where_largest",
    "where_smallest", "simplified",
}  # fmt: skip
"""source: the contract of the language, section 3."""


def evaluated(*lines: str, above: str = "") -> Trace:
    body = "\n".join(f"    {line}" for line in lines)
    return loadpath.evaluate(loadpath.read_text(f"---\ntitle: Functions\n---\n\n{above}\n{body}\n"))


def errors_of(trace: Trace) -> list[str]:
    return [f.slug for f in trace.findings if f.severity == "error"]


def test_the_functions_are_those_of_the_contract() -> None:
    assert NAMES == CONTRACT
    assert not set(FUNCTIONS) & set(SPECIAL)
    assert not NAMES & RESERVED
    assert all(name == function.name for name, function in (FUNCTIONS | SPECIAL).items())


# --- examples -----------------------------------------------------------------------------------------------


@pytest.mark.parametrize("name", FUNCTIONS)
def test_the_example_gives_what_it_says(name: str) -> None:
    line, _, value = (part.strip() for part in FUNCTIONS[name].example.partition("|"))
    assert f"{name}(" in line
    trace = evaluated(line, f"said = {value}")
    assert [f.message for f in trace.findings if f.severity == "error"] == []
    assert trace["x"].si == pytest.approx(trace["said"].si, rel=1e-14, abs=1e-15)
    assert trace["x"].unit.dimension == trace["said"].unit.dimension


@pytest.mark.parametrize("name", FUNCTIONS)
def test_too_few_and_too_many_arguments(name: str) -> None:
    function = FUNCTIONS[name]
    for count in (function.least - 1, function.most + 1):
        trace = evaluated(f"x = {name}({', '.join(['0.5'] * count)})")
        assert [f.slug for f in trace.findings if f.severity == "error"] == ["wrong-arguments"]


@pytest.mark.parametrize("name", FUNCTIONS)
def test_what_the_dimension_check_makes_of_newtons(name: str) -> None:
    function = FUNCTIONS[name]
    arguments = ", ".join(["2 N"] * max(function.least, 2 if function.rule == "choose" else 1))
    trace = evaluated("u = 1 N -- unit", f"x = {name}({arguments})", "y = x")
    errors = [f.slug for f in trace.findings if f.severity == "error"]
    if function.rule == "plain":
        assert errors == ["needs-plain-number"]
        return
    assert errors == []
    given: dict[str, Dimension] = {
        "root": d.FORCE.power(Fraction(1, function.root)), "same": d.FORCE, "choose": d.FORCE,
        "steps": d.FORCE, "like-first": d.PLAIN,
    }  # fmt: skip
    assert trace["y"].unit.dimension == given[function.rule]


# --- functions of whole expressions and of columns ----------------------------------------------------------

OF_COLUMNS = {function.name for function in COLUMNS}


def worked_example(name: str) -> Trace:
    """The trace of a special function's example, the value it says beside it as `said`."""
    typed, _, value = SPECIAL[name].example.partition(" | ")
    above = EXAMPLE_TABLE if name in OF_COLUMNS else ""
    return evaluated(*typed.split("; "), f"said = {value}", above=above)


@pytest.mark.parametrize("name", SPECIAL)
def test_the_special_example_gives_what_it_says(name: str) -> None:
    assert f"{name}(" in SPECIAL[name].example
    trace = worked_example(name)
    assert errors_of(trace) == []
    assert trace["x"].si == pytest.approx(trace["said"].si, rel=1e-14, abs=1e-15)
    assert trace["x"].unit.dimension == trace["said"].unit.dimension


@pytest.mark.parametrize("name", SPECIAL)
def test_forms_of_a_special_function_are_calls_of_it(name: str) -> None:
    function = SPECIAL[name]
    assert all(re.fullmatch(rf"{name}\((\w+)(, \w+)*\)", form) for form in function.forms)
    assert len(set(function.forms)) == len(function.forms) == len(function.counts)


@pytest.mark.parametrize("call", ["min(P)", "max(P)", "sum(P)", "count(P)", "min(2 kN)", "sum(2 kN)"])
def test_one_value_where_a_column_is_brought_back_to_one_number(call: str) -> None:
    assert errors_of(evaluated("P = 3 kN", f"x = {call}")) == ["needs-column"]


@pytest.mark.parametrize(
    ("call", "value"),
    [("min(demo.b)", 2e3), ("max(demo.b)", 5e3), ("sum(demo.b)", 11e3), ("count(demo.b)", 3)],
)
def test_a_column_is_brought_back_to_one_number(call: str, value: float) -> None:
    trace = evaluated(f"x = {call}", above=EXAMPLE_TABLE)
    assert errors_of(trace) == []
    assert trace["x"].si == value


@pytest.mark.parametrize(
    ("call", "values"),
    [("min(demo.b, 3 kN)", [2e3, 3e3, 3e3]), ("max(demo.b, 3 kN, 4.5 kN)", [4.5e3, 4.5e3, 5e3])],
)
def test_with_several_arguments_the_smallest_and_largest_go_row_by_row(
    call: str, values: list[float]
) -> None:
    trace = evaluated(f"x = {call}", above=EXAMPLE_TABLE)
    assert errors_of(trace) == []
    assert list(trace["x"].si) == values


@pytest.mark.parametrize("name", SPECIAL)
@pytest.mark.parametrize("within_a_function", [False, True])
def test_a_special_function_with_another_number_of_arguments(name: str, within_a_function: bool) -> None:
    """Each count from none to one more than the longest form has, wherever the call stands."""
    wrong = set(range(1, max(SPECIAL[name].counts) + 2)) - set(SPECIAL[name].counts)
    assert wrong
    for count in (0, *sorted(wrong)):
        call = f"{name}({', '.join(['t', 't', '0', '1', '2'][:count])})"
        lines = [f"f(t [1]) = {call}", "x = f(1)"] if within_a_function else ["t = 0.5", f"x = {call}"]
        assert errors_of(evaluated(*lines)) == ["wrong-arguments"], (count, call)


# --- values -------------------------------------------------------------------------------------------------

MP: dict[str, Callable[[mpmath.mpf], mpmath.mpf]] = {
    "sqrt": mpmath.sqrt, "cbrt": lambda x: mpmath.sign(x) * mpmath.cbrt(abs(x)), "abs": abs,
    "exp": mpmath.exp, "ln": mpmath.log, "log10": mpmath.log10, "sin": mpmath.sin, "cos": mpmath.cos,
    "tan": mpmath.tan, "sec": mpmath.sec, "asin": mpmath.asin, "acos": mpmath.acos, "atan": mpmath.atan,
    "sinh": mpmath.sinh, "cosh": mpmath.cosh, "tanh": mpmath.tanh,
}  # fmt: skip
DOMAIN: dict[str, tuple[float, float]] = {
    "sqrt": (0, 1e12), "ln": (1e-300, 1e300), "log10": (1e-300, 1e300), "asin": (-1, 1), "acos": (-1, 1),
    "exp": (-700, 700), "sinh": (-700, 700), "cosh": (-700, 700), "sin": (-1000, 1000), "cos": (-1000, 1000),
    "tan": (-1.57, 1.57), "sec": (-1.57, 1.57),
}  # fmt: skip


def test_every_function_of_one_number_is_held_against_mpmath() -> None:
    assert set(MP) == {f.name for f in FUNCTIONS.values() if f.most == 1}


@patient
@given(st.data())
@pytest.mark.parametrize("name", MP)
def test_against_mpmath(name: str, data: st.DataObject) -> None:
    low, high = DOMAIN.get(name, (-1e6, 1e6))
    x = data.draw(st.floats(low, high, allow_subnormal=False))
    with mpmath.workdps(40):
        wanted = MP[name](mpmath.mpf(x))
    # a sine or cosine near 0 is as good as its angle
    size = max(abs(wanted), abs(x)) if name in ("sin", "cos") else abs(wanted)
    assert abs(FUNCTIONS[name].work(x) - wanted) <= 4e-16 * size


@pytest.mark.parametrize("degrees", [-1230.0, -91.5, -30.0, 0.0, 17.3, 45.0, 60.0, 89.0, 200.0, 719.0])
def test_trigonometry_against_scipy(degrees: float) -> None:
    x = math.radians(degrees)
    special = {"sin": scipy.special.sindg, "cos": scipy.special.cosdg, "tan": scipy.special.tandg}
    for name, theirs in special.items():
        assert FUNCTIONS[name].work(x) == pytest.approx(float(theirs(degrees)), rel=1e-13, abs=4e-15)


@pytest.mark.parametrize("name", ["cbrt", "exp", "log10"])
@pytest.mark.parametrize("x", [1e-9, 0.2, 1.0, 8.0, 27.0, 300.0])
def test_against_scipy(name: str, x: float) -> None:
    theirs = {"cbrt": scipy.special.cbrt, "exp": lambda v: scipy.special.exp10(v / math.log(10))}
    wanted = float(theirs[name](x)) if name in theirs else math.log2(x) / math.log2(10)
    assert FUNCTIONS[name].work(x) == pytest.approx(wanted, rel=1e-12)


@patient
@given(st.floats(-1e6, 1e6), st.floats(-1e6, 1e6))
def test_atan2_against_mpmath(y: float, x: float) -> None:
    assume(x != 0 or y != 0)
    assume(all(v == 0 or abs(v) > 1e-100 for v in (x, y)))
    with mpmath.workdps(40):
        wanted = mpmath.atan2(mpmath.mpf(y), mpmath.mpf(x))
    assert abs(FUNCTIONS["atan2"].work(y, x) - wanted) <= 4e-16 * max(abs(wanted), 1e-300) + 1e-300


def test_a_zero_has_no_sign() -> None:
    assert FUNCTIONS["atan2"].work(-0.0, -1.0) == math.pi


@pytest.mark.parametrize("turns", range(-40, 41))
def test_whole_and_half_turns_are_exact(turns: int) -> None:
    """sin(180 deg) is 0, though the float nearest to pi is not pi."""
    sign = "-" if turns < 0 else ""
    trace = evaluated(f"a = {90 * abs(turns)} deg -- angle", f"s = sin({sign}a)", "c = cos(a)")
    assert trace["s"].si == [0, 1, 0, -1][turns % 4]
    assert trace["c"].si == [1, 0, -1, 0][turns % 4]


@pytest.mark.parametrize("x", [1e-20, -1e-20, 1e-300, 1e-9, 0.5])
def test_small_angles_keep_their_sine(x: float) -> None:
    assert FUNCTIONS["sin"].work(x) == pytest.approx(x, rel=0.05)
    assert FUNCTIONS["tan"].work(x) == pytest.approx(x, rel=0.1)


@patient
@given(st.lists(st.floats(-1e9, 1e9), min_size=2, max_size=6))
def test_min_and_max_give_one_of_their_arguments(values: list[float]) -> None:
    assert FUNCTIONS["min"].work(*values) == sorted(values)[0]
    assert FUNCTIONS["max"].work(*values) == sorted(values)[-1]


# --- domains ------------------------------------------------------------------------------------------------

OUTSIDE = {
    "sqrt(-1)": "0 or more", "ln(0)": "above 0", "ln(-2)": "above 0", "log10(0)": "above 0",
    "log10(-1)": "above 0", "asin(1.001)": "from -1 to 1", "asin(-1.001)": "from -1 to 1",
    "acos(2)": "from -1 to 1", "tan(90 deg)": "cosine", "tan(270 deg)": "cosine", "tan(3690 deg)": "cosine",
    "sec(90 deg)": "cosine", "sec(-90 deg)": "cosine", "atan2(0, 0)": "both", "round_up(3, 0)": "above 0",
    "round_down(3, -1)": "above 0", "exp(1000)": "too large", "sinh(1000)": "too large",
    "cosh(-1000)": "too large", "round_up(1e300, 1e-300)": "",
}  # fmt: skip


@pytest.mark.parametrize("call", OUTSIDE)
def test_outside_its_domain_is_one_finding_that_says_what_is_needed(call: str) -> None:
    trace = evaluated(f"x = {call}", "y = 2*x")
    errors = [f for f in trace.findings if f.severity == "error"]
    assert [f.slug in ("outside-domain", "root-of-negative", "not-finite") for f in errors] == [True]
    assert OUTSIDE[call] in errors[0].message
    assert trace["x"].si is None
    assert trace["y"].si is None


@pytest.mark.parametrize(("name", "value"), [("asin", math.pi / 2), ("acos", 0.0)])
def test_a_ratio_that_rounding_carried_over_one_is_one(name: str, value: float) -> None:
    assert FUNCTIONS[name].work(1 + 1e-15) == value
    assert FUNCTIONS["asin"].work(-1 - 1e-15) == -math.pi / 2
    with pytest.raises(ValueError, match="from -1 to 1"):
        FUNCTIONS[name].work(1 + 1e-11)


@pytest.mark.parametrize("name", FUNCTIONS)
@pytest.mark.parametrize("value", [0.0, -1.0, 1e308, -1e308, 5e-324, math.inf, -math.inf, math.nan])
def test_nothing_but_arithmetic_and_value_errors(name: str, value: float) -> None:
    for other in (1.0, -1.0, 0.0, 5e-324, 1e308):
        try:
            FUNCTIONS[name].work(*([value] if FUNCTIONS[name].most == 1 else [value, other]))
        except (ArithmeticError, ValueError) as error:
            assert str(error)


# --- rounding to steps --------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("call", "value"),
    [
        ("round_up(7.1 mm, 2 mm)", "8 mm"), ("round_down(7.1 mm, 2 mm)", "6 mm"),
        ("round_up(8 mm, 2 mm)", "8 mm"), ("round_down(8 mm, 2 mm)", "8 mm"),
        ("round_up(0 mm, 5 mm)", "0 mm"), ("round_up(-7.1, 2)", "-6"), ("round_down(-7.1, 2)", "-8"),
        ("round_up(0.3, 0.1)", "0.3"), ("round_down(0.3, 0.1)", "0.3"),
        ("round_up(2.01 in, 1/8 in)", "2 1/8 in"), ("round_down(2.01 in, 1/8 in)", "2 in"),
        ("round_up(1 in, 1 mm)", "26 mm"), ("round_down(1 in, 1 mm)", "25 mm"),
        ("round_up(6 in, 0.5 in)", "6 in"), ("round_up(1.1*3, 1.1)", "3.3"),
        ("round_up(0.1 + 0.2, 0.1)", "0.3"), ("round_up(3.0001, 1)", "4"), ("round_down(2.9999, 1)", "2"),
    ],
)  # fmt: skip
def test_rounding_to_steps(call: str, value: str) -> None:
    trace = evaluated(f"x = {call}", f"said = {value}")
    assert trace["x"].si == pytest.approx(trace["said"].si, rel=1e-14, abs=1e-18)


@patient
@given(st.integers(-10_000, 10_000), st.sampled_from([0.1, 0.05, 0.25, 1 / 3, 0.7, 1.1, 2.54e-3, 5.0]))
def test_a_whole_number_of_steps_stays_however_it_was_reached(count: int, step: float) -> None:
    for value in (count * step, sum([step] * (count % 50)), count / (1 / step)):
        for name in ("round_up", "round_down"):
            assert FUNCTIONS[name].work(value, step) == pytest.approx(value, rel=1e-12, abs=1e-12)


@patient
@given(st.floats(-1e6, 1e6), st.sampled_from([0.1, 0.25, 0.7, 1.1, 5.0]))
def test_up_is_not_below_and_down_not_above_and_both_within_one_step(value: float, step: float) -> None:
    up, down = FUNCTIONS["round_up"].work(value, step), FUNCTIONS["round_down"].work(value, step)
    slack = 1e-9 * max(step, abs(value))
    assert value - slack <= up < value + step + slack
    assert value - step - slack < down <= value + slack
    assert round((up - down) / step) in (0, 1)


@pytest.mark.parametrize("name", ["round_up", "round_down"])
def test_both_arguments_of_a_rounding_have_one_dimension(name: str) -> None:
    trace = evaluated(f"x = {name}(7 mm, 2 kN)")
    assert [f.slug for f in trace.findings if f.severity == "error"] == ["unit-mismatch"]
