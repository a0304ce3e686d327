"""What a step says: who works the printed numbers lands on the printed result, or is told why not."""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass
from functools import cache
from pathlib import Path

import pytest
from pocket_calculator import DoesNotCancel, work

import loadpath
from loadpath.formula.canonical import text
from loadpath.trace import Called, Operand, Trace, Working, texts
from loadpath.trace.substitute import shown
from loadpath.units.printing import read_plain

ROOT = Path(__file__).parents[2]
SHEETS = sorted(
    [*(ROOT / "calcsheets").glob("*.sheet.md"), *(ROOT / "tests" / "published").glob("*.sheet.md")]
)


@cache
def trace_of(path: Path) -> Trace:
    return loadpath.evaluate(loadpath.read(path))


def evaluated(lines: str, front: str = "") -> Trace:
    """The trace of formula lines, which must hold no mistake; a deeper line belongs to the one above."""
    body = "".join(f"    {line}\n" for line in lines.strip("\n").splitlines())
    trace = loadpath.evaluate(loadpath.read_text(f"---\ntitle: T\n{front}---\n\n{body}"))
    assert not trace.has_errors, trace.findings
    return trace


# --- landing on the result ----------------------------------------------------------------------------------


@dataclass(frozen=True)
class Printed:
    """A printed equation: `formula = number unit`."""

    where: str
    formula: str
    number: str
    unit: str
    digits: int
    closes: bool


def printed_equations(trace: Trace) -> Iterator[Printed]:
    """Every substitution of a trace with the result beside it, those of calls included."""
    for step in trace:
        if step.working is None:
            continue
        put, result = texts.step_substitution(trace, step), texts.operand(step)
        if put is not None and result is not None:
            yield _printed(step.id, text(put.tree), result, put.closes)
        yield from _of_calls(trace, step.id, step.working)


def _of_calls(trace: Trace, where: str, working: Working) -> Iterator[Printed]:
    called: Called
    for called in working.calls:
        put = texts.call_substitution(trace, called)
        if put is not None:
            yield _printed(f"{where}, {text(called.call)}", text(put.tree), called.value, put.closes)
        yield from _of_calls(trace, where, called.working)


def _printed(where: str, formula: str, result: Operand, closes: bool) -> Printed:
    value = shown(result)
    return Printed(where, formula, value.number, value.unit, result.digits, closes)


def trouble(printed: Printed) -> str:
    """What a pocket calculator has against a printed equation; "" where it lands within the last digit."""
    try:
        reached = work(printed.formula, printed.unit)
    except DoesNotCancel as error:
        return f"{printed.where}: {printed.formula} = {printed.number} {printed.unit}: {error}"
    value = read_plain(printed.number)
    last = 10.0 ** (math.floor(math.log10(abs(value))) - printed.digits + 1) if value else 1e-12
    if abs(reached - value) <= 1.5 * last:
        return ""
    return (
        f"{printed.where}: {printed.formula} = {printed.number} {printed.unit}, a calculator says {reached}"
    )


@pytest.mark.parametrize("path", SHEETS, ids=lambda p: p.name.removesuffix(".sheet.md"))
def test_printed_numbers_lead_to_the_printed_result(path: Path) -> None:
    equations = list(printed_equations(trace_of(path)))
    assert [said for printed in equations if printed.closes and (said := trouble(printed))] == []


def test_nearly_every_equation_closes_without_unrounded_values() -> None:
    equations = [printed for path in SHEETS for printed in printed_equations(trace_of(path))]
    assert len(equations) > 500
    assert sum(not printed.closes for printed in equations) <= len(equations) // 100


@pytest.mark.parametrize(
    ("formula", "number", "unit", "says"),
    [
        ("3 in * 20 ft", "720.0", "in^2", "is not"),  # the factor left out
        ("3 in * 20 ft * 12 in/ft", "721.0", "in^2", "a calculator says 720"),
        ("7.5 kW / 1500 rpm", "47.75", "N*m", "is not"),
        ("3 in + 20 ft", "23.00", "in", "ft"),
        ("atan(0.5)", "26.57", "deg", "is not"),
        ("2*3.15", "6.298", "", "a calculator says 6.3"),
    ],
)
def test_the_calculator_itself_refuses(formula: str, number: str, unit: str, says: str) -> None:
    assert says in trouble(Printed("x", formula, number, unit, 4, True))


@pytest.mark.parametrize(
    ("formula", "unit", "number"),
    [
        ("2*3 + 4^2/8 - -1", "", 9.0),
        ("-2^2", "", -4.0),
        ("2^-1^2", "", 0.5),
        ("12 ft 6 1/2 in", "in", 150.5),
        ("8/3 * 3 in", "in", 8.0),
        ("1/2 in * 4", "in", 2.0),
        ("sqrt((3 in)^2 + (4 in)^2)", "in", 5.0),
        ("<3 m - 1 m>^2 + <1 m - 3 m>^2", "m^2", 4.0),
        ("(5 MPa * 2 as kPa)^0.5", "", 100.0),
        ("sin(30 deg) * 10 kN", "N", 5000.0),
        ("0.24 J/(kg*K) * 2 kg * 3 K", "J", 1.44),
        ("35 plf * 20 ft", "kip", 0.7),
    ],
)
def test_the_calculator_itself_reckons(formula: str, unit: str, number: float) -> None:
    assert work(formula, unit) == pytest.approx(number, rel=1e-12)


def test_more_digits_where_those_printed_would_not_lead_there() -> None:
    """25.41 less 25 is known to two digits; a result of four asks for two more."""
    trace = evaluated("a = 76.234 mm -- a\nb = a/3\nc = b - 25 mm\nd = b + 1 mm")
    put = texts.step_substitution(trace, trace["c"])
    assert put is not None and put.closes
    assert text(put.tree) == "25.4113 mm - 25 mm"
    assert texts.display(trace["c"]).number == "0.4113"  # type: ignore[union-attr]
    other = texts.step_substitution(trace, trace["d"])
    assert other is not None
    assert text(other.tree) == "25.41 mm + 1 mm"


def test_unrounded_values_are_owned_up_to() -> None:
    trace = evaluated("a = 1 m -- a\nb = a/3\nc = b - 0.3333333 m")
    put = texts.step_substitution(trace, trace["c"])
    assert put is not None
    assert not put.closes
    assert text(put.tree) == "333.3 mm - 0.3333333 m"


def test_the_last_digit_of_a_round_number_is_the_last_that_was_asked_for() -> None:
    """12 000 to three digits is known to 100: what leads to 12 240 takes one digit more."""
    trace = evaluated("a = 3 -- a\nb = a/7\nc = 12000*(b*7/3)^20", "digits: 3\n")
    put = texts.step_substitution(trace, trace["c"])
    assert put is not None and put.closes
    assert text(put.tree) == "12000*(0.4286*7/3)^20"


# --- values -------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("line", "number", "unit"),
    [
        ("x = 1.10 -- a", "1.10", ""),
        ("x = 20 kN -- a", "20", "kN"),
        ("x = 29_000 ksi -- a", "29000", "ksi"),
        ("x = 2*45 mm -- a", "90", "mm"),
        ("x [cm] = 90 mm -- a", "9", "cm"),
        ("x = 2 1/2 in -- a", "2.5", "in"),
        ("x = 12 ft 6 in -- a", "150", "in"),
        ("x = 1/3 -- a", "0.3333", ""),
        ("x = 12.5e6 Pa -- a", "12.5e6", "Pa"),
        ("x = -20 degC -- a", "-20", "degC"),
        ("k = 1 -- a\nx = k*20 kN", "20.00", "kN"),
        ("k = 1 -- a\nx [N] = k*123456 N", "123.5e3", "N"),
        ("k = 1 -- a\nx [ft-in 1/16] = k*64.93 in", "5 ft 4 15/16", "in"),
    ],
)
def test_a_value_as_printed(line: str, number: str, unit: str) -> None:
    value = texts.display(evaluated(line)["x"])
    assert value is not None
    assert (value.number, value.unit) == (number, unit)


def test_a_choice_prints_its_word() -> None:
    trace = evaluated('c = "b" of "a", "b" -- curve\nx = cases\n    1 when c = "a"\n    2 otherwise')
    value = texts.display(trace["c"])
    assert value is not None
    assert (value.number, value.word) == ("b", True)


# --- relations ----------------------------------------------------------------------------------------------


def compared(trace: Trace, id: str) -> list[tuple[str, str]]:
    """Of each relation: with values in place of names, "" where that is the same; each side as one number."""
    found = texts.compared(trace, trace[id])
    return [(text(c.substituted) if c.substituted else "", text(c.evaluated)) for c in found]


JUDGED = """
a = 3 mm -- a
b = 2*a
s = -40 MPa -- s
"""


@pytest.mark.parametrize(
    ("line", "id", "printed"),
    [
        ("limit x: a <= 5 mm", "limit x", [("", "3 mm <= 5 mm")]),
        ("limit x: b <= 5 cm", "limit x", [("", "6.000 mm <= 50 mm")]),
        ("limit x: a + b <= 2*b", "limit x", [("3 mm + 6.000 mm <= 2 * 6.000 mm", "9.000 mm <= 12.00 mm")]),
        ("limit x: 1 mm <= b <= 8 mm", "limit x", [("", "1 mm <= 6.000 mm <= 8 mm")]),
        (
            "limit x: b <= 1 mm or b >= 2*a",
            "limit x",
            [("", "6.000 mm > 1 mm"), ("6.000 mm >= 2 * 3 mm", "6.000 mm >= 6.000 mm")],
        ),
        ("limit x: s >= -60 MPa", "limit x", [("", "-40 MPa >= -60 MPa")]),
        (
            "check: a + a = b within 1 %",
            "check: a + a = b",
            [("3 mm + 3 mm = 6.000 mm", "6.000 mm = 6.000 mm")],
        ),
        (
            "valid: 0 <= a/b < 1 for b",
            "valid: 0 <= a/b < 1",
            [("0 <= 3 mm / 6.000 mm < 1", "0 <= 0.5000 < 1")],
        ),
    ],
)
def test_a_relation_with_its_numbers(line: str, id: str, printed: list[tuple[str, str]]) -> None:
    assert compared(evaluated(JUDGED + line), id) == printed


@pytest.mark.parametrize(
    ("deflection", "limit", "as_length"),
    [
        ("12.003 mm", "L/500", "499.9"),
        ("12 mm", "L/500", "500.0"),
        ("11.9 mm", "L/500", "504.2"),
        ("12.0001 mm", "L/500", "499.996"),
        ("-3 mm", "L/500", "2000"),
    ],
)
def test_a_deflection_against_a_share_of_the_span(deflection: str, limit: str, as_length: str) -> None:
    """Its number never stands on the other side of the one asked for."""
    trace = evaluated(f"L = 6 m -- span\nk = 1 -- k\nd = k*{deflection}\nstiffness x: abs(d) <= {limit}")
    (found,) = texts.compared(trace, trace["stiffness x"])
    assert found.per_length is not None
    index, length, number = found.per_length
    assert (index, length.name, number) == (0, "L", as_length)
    verdict = trace["stiffness x"].verdict
    assert verdict is not None
    assert (float(number) >= 500) == verdict.satisfied


@pytest.mark.parametrize(
    "line", ["strength x: V <= V_R/2", "limit x: d <= L/n", "limit x: d <= 2*L", "limit x: 0 mm <= d <= L/2"]
)
def test_only_a_length_against_a_length_over_a_typed_number(line: str) -> None:
    trace = evaluated(f"V = 1 kN -- a\nV_R = 3 kN -- b\nL = 6 m -- c\nd = 1 mm -- d\nn = 3 -- e\n{line}")
    assert all(c.per_length is None for c in texts.compared(trace, trace[line.partition(":")[0]]))


# --- branches and calls -------------------------------------------------------------------------------------


def test_the_condition_of_the_branch_taken_with_its_numbers() -> None:
    trace = evaluated(
        "a = 3 -- a\nb = 4 -- b\nx = cases\n"
        "    1 when a > 5\n    a*b when a*2 >= b and b < 10\n    3 otherwise"
    )
    working = trace["x"].working
    assert working is not None and working.taken is not None
    assert working.taken.index == 1
    seen = [[text(c.evaluated) for c in compared] for compared in texts.conditions(trace, working)]
    assert seen == [["3 <= 5"], ["6.000 >= 4", "4 < 10"]]
    put = texts.step_substitution(trace, trace["x"])
    assert put is not None
    assert text(put.tree) == "3*4"


def test_a_call_prints_its_value_and_a_line_of_its_own() -> None:
    trace = evaluated("R = 25 kN -- r\nM(x [m]) [kN*m] = R*x/2\nM_1 = M(2 m) + M(50 cm)")
    put = texts.step_substitution(trace, trace["M_1"])
    assert put is not None
    assert text(put.tree) == "25.00 kN*m + 6.250 kN*m"
    working = trace["M_1"].working
    assert working is not None
    lines = [texts.call_substitution(trace, called) for called in working.calls]
    assert [text(line.tree) for line in lines if line] == ["25 kN * 2 m / 2", "25 kN * 50 cm / 2"]


def test_steps_without_a_substitution() -> None:
    trace = evaluated("a = 3 mm -- a\nb = 2*a\nlimit x: b <= 5 mm\nf(x) = 2*x\nc = f(1)")
    for name in ("a", "limit x", "f"):
        assert texts.step_substitution(trace, trace[name]) is None
