"""Printed values on small sheets, a test for each sentence of the contract, section 4."""

from __future__ import annotations

import pytest

import loadpath
from loadpath.trace.file import StepRecord, record
from loadpath.units.printing import NARROW, THIN

HEAD = "---\ntitle: Printed\nunits: {units}\ndigits: {digits}\n---\n\n"


def steps(lines: str, units: str = "SI", digits: int = 4) -> dict[str, StepRecord]:
    body = "\n".join("    " + line.strip() for line in lines.strip().splitlines())
    trace = loadpath.evaluate(loadpath.read_text(HEAD.format(units=units, digits=digits) + body + "\n"))
    assert [finding.message for finding in trace.findings if finding.severity == "error"] == []
    return {step.id: step for step in record(trace, "0").steps}


def shown(lines: str, units: str = "SI", digits: int = 4) -> dict[str, str]:
    """Displays with ordinary spaces: easier to read below; the spaces themselves are tested on their own."""
    made = steps(lines, units, digits)
    return {name: step.display.replace(NARROW, " ").replace(THIN, " ") for name, step in made.items()}


def test_a_result_has_the_digits_of_the_sheet_with_trailing_zeros() -> None:
    lines = "F = 12 kN -- load\nA = 240 mm^2 -- area\ns = F/A"
    assert [shown(lines, digits=digits)["s"] for digits in (2, 3, 4, 6, 12)] == [
        "50 MPa", "50.0 MPa", "50.00 MPa", "50.0000 MPa", "50.000 000 0000 MPa".replace(" 0000", " 000 0"),
    ]  # fmt: skip


@pytest.mark.parametrize(
    ("typed", "printed"),
    [
        ("12.50 kN", "12.50 kN"), ("12 kN", "12 kN"), ("12_000 N", "12 000 N"),
        ("1.20e6 N", "1.20 × 10⁶ N"), ("0.5 %", "0.5 %"), ("35 deg", "35°"), ("-20 degC", "−20 °C"),
        ("3 K^-1", "3 K⁻¹"), ("12e-6 1/K", "12 × 10⁻⁶ 1/K"), ("0.24 J/(kg*K)", "0.24 J/(kg⋅K)"),
        ("9.81 m/s^2", "9.81 m/s²"), ("210 GPa", "210 GPa"), ("250", "250"),
    ],
)  # fmt: skip
def test_an_input_is_printed_as_typed(typed: str, printed: str) -> None:
    assert shown(f"a = {typed} -- input")["a"] == printed


@pytest.mark.parametrize(
    ("typed", "value"),
    [
        ("5/8 in", "0.625 in"), ("2 1/2 in", "2.5 in"), ("12 ft 6 in", "150 in"),
        ("12 ft 6 1/2 in", "150.5 in"), ("2 * 45 mm", "90 mm"), ("1/3", "0.3333"),
    ],
)  # fmt: skip
def test_an_input_is_shown_as_typed_and_its_value_where_that_differs(typed: str, value: str) -> None:
    made = steps(f"a = {typed} -- input")["a"]
    assert (made.formula, made.display.replace(NARROW, " ")) == (typed, value)


def test_powers_of_ten_by_threes_outside_a_thousandth_to_99_999() -> None:
    lines = """
        L = 1 mm -- length
        a = 99999*L
        b = 100000*L
        c = L/1000
        d = L/1001
        e = 1234567*L
    """
    assert shown(lines, digits=5) | {"L": ""} == {
        "L": "", "a": "99 999 mm", "b": "100.00 × 10³ mm", "c": "0.001 0000 mm".replace(" 0000", " 000 0"),
        "d": "999.00 × 10⁻⁶ mm", "e": "1.2346 × 10⁶ mm",
    }  # fmt: skip


def test_a_space_that_does_not_break_stands_before_the_unit_and_thin_ones_between_groups() -> None:
    display = steps("P = 12345 N -- load")["P"].display
    assert display == f"12{THIN}345{NARROW}N"


def test_a_torque_is_never_in_joules_and_an_energy_is_asked_for_by_its_unit() -> None:
    lines = "F = 3 kN -- force\ns = 2 m -- way\nT = F*s\nW [kJ] = F*s\nE [J] = F*s"
    made = shown(lines)
    assert (made["T"], made["W"], made["E"]) == ("6.000 kN⋅m", "6.000 kJ", "6000 J")


def test_angles_and_ratios_print_as_asked() -> None:
    lines = """
        a = 1 m -- rise
        b = 2 m -- run
        p = atan2(a, b)
        q [deg] = atan2(a, b)
        r [%] = a/b
        s [1] = a/b
        t [rad] = 1*p
    """
    made = shown(lines)
    assert (made["p"], made["q"], made["r"], made["s"]) == ("0.4636", "26.57°", "50.00 %", "0.5000")
    assert made["t"] == "0.4636 rad"


@pytest.mark.parametrize(
    ("length", "parts", "printed"),
    [
        ("150.5 in", 16, "12 ft 6 1/2 in"),
        ("12 in", 16, "1 ft 0 in"),
        ("150.49 in", 8, "12 ft 6 1/2 in"),
        ("5/8 in", 2, "1/2 in"),
    ],
)
def test_a_length_in_feet_and_inches(length: str, parts: int, printed: str) -> None:
    assert shown(f"a = {length} -- length\nb [ft-in 1/{parts}] = 1*a")["b"] == printed


@pytest.mark.parametrize(
    ("lines", "units", "factor", "printed"),
    [
        # the printed units don't cancel to those of the result: the factor is printed
        ("w = 2 kip/ft -- load\na = 30 in -- length\nx [kip] = w*a", "US", "/ (12 in/ft)", "5.000 kip"),
        ("n = 1450 rpm -- speed\nP = 15 kW -- power\nx [N*m] = P/n", "SI", "rpm", "98.79 N⋅m"),
        ("T = 200 lbf*ft -- torque\nn = 1750 rpm -- speed\nx [hp] = T*n", "US machine", "hp", "66.64 hp"),
        ("a = 30 deg -- angle\nr = 2 m -- radius\nx [m] = r*a", "SI", "deg", "1.047 m"),
    ],
)
def test_a_factor_where_units_do_not_cancel(lines: str, units: str, factor: str, printed: str) -> None:
    made = steps(lines, units)
    assert made["x"].display.replace(NARROW, " ") == printed
    assert factor in made["x"].substitution


def test_powers_of_ten_between_prefixes_are_left_to_the_reader() -> None:
    made = steps("F = 12 kN -- load\nA = 240 mm^2 -- area\ns [MPa] = F/A")
    assert made["s"].substitution == "12 kN / 240 mm^2"


def test_temperatures() -> None:
    """85 degC is 358.15 K, half-way between two numbers of four digits: the even one is printed."""
    lines = """
        T_1 = 20 degC -- cold
        T_2 = 85 degC -- hot
        D = T_2 - T_1
        K [K] = T_2
        a = 12e-6 1/K -- expansion
        e = a*D
    """
    made = shown(lines)
    assert (made["D"], made["K"], made["e"]) == ("65.00 K", "358.2 K", "780.0 × 10⁻⁶")


def test_temperatures_in_degrees_fahrenheit() -> None:
    lines = """
        T_1 = 70 degF -- cold
        T_2 = 250 degF -- hot
        D = T_2 - T_1
        a = 6.5e-6 1/degF -- expansion
        L = 100 in -- length
        e = a*D*L
    """
    made = shown(lines, "US")
    assert (made["D"], made["e"]) == ("180.0 °F", "0.1170 in")


def test_bar_stays_bar_in_the_pressure_system() -> None:
    assert shown("p = 12 bar -- pressure\nq = 1.5*p", "SI pressure")["q"] == "18.00 bar"
    assert shown("p = 12 bar -- pressure\nq = 1.5*p")["q"] == "1.800 MPa"
