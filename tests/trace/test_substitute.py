"""Substitutions: printed values in place of names, and a printed factor where printed units don't cancel."""

from __future__ import annotations

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from pocket_calculator import work

import loadpath
from loadpath.formula.canonical import text
from loadpath.trace import Trace, texts


def evaluated(lines: str, units: str = "SI") -> Trace:
    """The trace of formula lines, which must hold no mistake."""
    body = "".join(f"    {line.strip()}\n" for line in lines.strip().splitlines())
    trace = loadpath.evaluate(loadpath.read_text(f"---\ntitle: T\nunits: {units}\n---\n\n{body}"))
    assert not trace.has_errors, trace.findings
    return trace


def substituted(trace: Trace, name: str) -> str:
    put = texts.step_substitution(trace, trace[name])
    assert put is not None and put.closes
    return text(put.tree)


def number_of(trace: Trace, name: str) -> tuple[str, str]:
    shown = texts.display(trace[name])
    assert shown is not None
    return shown.number, shown.unit


US = """
    L = 20 ft -- span
    b = 3 in -- width
    P = 100 lbf -- force
    w = 2 plf -- load along
    s = 30 ksi -- stress
    q = 2 ksf -- pressure
    g = 62.4 pcf -- weight of water
    n = 1750 rpm -- speed
    H = 5 hp -- power
    m = 10 lb -- mass
    k = 20 lbf/in -- spring
    al = 30 deg -- angle
"""


@pytest.mark.parametrize(
    ("line", "substitution", "result"),
    [
        # feet against inches
        ("x = b*L", "3 in * 20 ft * 12 in/ft", ("720.0", "in^2")),
        ("x [ft^2] = b*L", "3 in * 20 ft / (12 in/ft)", ("5.000", "ft^2")),
        ("x = w*L^2/8", "2 plf * (20 ft)^2 / 8 / (1000 lbf/kip)", ("0.1000", "kip*ft")),
        ("x [lbf*in] = w*L^2/8", "2 plf * (20 ft)^2 / 8 * 12 in/ft", ("1200", "lbf*in")),
        ("x = L/b", "20 ft / 3 in * 12 in/ft", ("80.00", "")),
        # the unit of the result alone differs
        ("x [ft] = 2*b", "2 * 3 in / (12 in/ft)", ("0.5000", "ft")),
        ("x [mm] = b*1", "3 in * 1 * 25.4 mm/in", ("76.20", "mm")),
        # ksi holds kip and in, ksf holds kip and ft: no factor where those cancel
        ("x [kip] = s*b^2", "30 ksi * (3 in)^2", ("270.0", "kip")),
        ("x [psi] = q*1", "2 ksf * 1 / (0.144 ksf/psi)", ("13.89", "psi")),
        ("x [psi] = g*L", "62.4 pcf * 20 ft / (144 pcf*ft/psi)", ("8.667", "psi")),
        # power and speed
        ("x [lbf*in] = H/n", "5 hp / 1750 rpm * 63025.4 lbf*in*rpm/hp", ("180.1", "lbf*in")),
        ("x [ft/min] = n*b", "1750 rpm * 3 in * 0.523599 ft/(min*rpm*in)", ("2749", "ft/min")),
        # pounds of mass and of force
        (
            "x [lbf] = m * 32.174 ft/s^2",
            "10 lb * 32.174 ft/s^2 * 0.0310810 lbf*s^2/(lb*ft)",
            ("10.00", "lbf"),
        ),
        # angles: a calculator has a key for degrees, and none for what comes out of atan
        ("x = P*sin(al)", "100 lbf * sin(30 deg) / (1000 lbf/kip)", ("0.05000", "kip")),
        ("x [deg] = atan(b/L)", "atan(3 in / 20 ft / (12 in/ft)) * 57.2958 deg", ("0.7162", "deg")),
        (
            "x [deg] = al + atan(b/L)",
            "30 deg + atan(3 in / 20 ft / (12 in/ft)) * 57.2958 deg",
            ("30.72", "deg"),
        ),
        ("x = al*L", "30 deg * 20 ft * 0.209440 in/(deg*ft)", ("125.7", "in")),
        # sums turn to the unit of the result where they can, and to that of their first term where they can't
        ("x [ft] = b + L", "3 in / (12 in/ft) + 20 ft", ("20.25", "ft")),
        ("x [in] = b + L - 2 ft", "3 in + 20 ft * 12 in/ft - 2 ft * 12 in/ft", ("219.0", "in")),
        ("x = (L + b)/(L - b)", "(20 ft + 3 in / (12 in/ft))/(20 ft - 3 in / (12 in/ft))", ("1.025", "")),
        ("x = max(b, L)", "max(3 in, 20 ft * 12 in/ft)", ("240.0", "in")),
        ("x = round_up(L, b)", "round_up(20 ft * 12 in/ft, 3 in)", ("240", "in")),
        ("x = atan2(b, L)", "atan2(3 in, 20 ft * 12 in/ft)", ("0.01250", "")),
        # roots: the factor stands under the root where it would else be a root itself
        ("x = sqrt(b*L)", "sqrt(3 in * 20 ft * 12 in/ft)", ("26.83", "in")),
        ("x [ft] = sqrt(b*L)", "sqrt(3 in * 20 ft / (12 in/ft))", ("2.236", "ft")),
        ("x = cbrt(b*L*L)", "cbrt(3 in * 20 ft * 20 ft * 144 in^2/ft^2)", ("55.70", "in")),
        ("x = (0.5*L/b)^0.3", "(0.5 * 20 ft / 3 in * 12 in/ft)^0.3", ("3.024", "")),
        (
            "x [ft/s] = sqrt(2 * 32.174 ft/s^2 * b)",
            "sqrt(2 * 32.174 ft/s^2 * 3 in / (12 in/ft))",
            ("4.011", "ft/s"),
        ),
        (
            "x [Hz] = sqrt(k/m)/(2*pi)",
            "sqrt(20 lbf/in / 10 lb * 386.089 in*lb/(s^2*lbf))/(2*pi)",
            ("4.423", "Hz"),
        ),
        (
            "x [rpm] = sqrt(k/m)",
            "sqrt(20 lbf/in / 10 lb * 386.089 in*lb/(s^2*lbf)) * 9.54930 rpm*s",
            ("265.4", "rpm"),
        ),
        # plain numbers are needed there: exponents, logarithms
        ("x = 2^(b/L)", "2^(3 in / 20 ft / (12 in/ft))", ("1.009", "")),
        ("x = ln(L/b)", "ln(20 ft / 3 in * 12 in/ft)", ("4.382", "")),
        # the plain number of a unit, for empirical formulas
        ("x [psi] = 57*sqrt((s as psi)) * 1 psi", "57*sqrt(30000) * 1 psi", ("9873", "psi")),
        ("x = (P/b^2 as psi)^0.5", "(100 lbf / (3 in)^2 as psi)^0.5", ("3.333", "")),
        ("x = (b as mm)^2", "76.2^2", ("5806", "")),
    ],
)
def test_factors_in_us_units(line: str, substitution: str, result: tuple[str, str]) -> None:
    trace = evaluated(US + line, "US")
    assert substituted(trace, "x") == substitution
    assert number_of(trace, "x") == result


SI = """
    E = 210 GPa -- modulus
    A = 10 cm^2 -- area
    L = 3 m -- length
    P = 12 kN -- force
    G = -3 kN -- force upwards
    p = 5 bar -- pressure
    D = 400 mm -- diameter
    n = 1500 rpm -- speed
    N = 7.5 kW -- power
    k = 500 N/mm -- spring
    m = 20 kg -- mass
    r = 5 % -- share
    h = 12 min -- time
"""


@pytest.mark.parametrize(
    ("line", "substitution", "result"),
    [
        # powers of ten between prefixes are left to the reader
        ("x [mm] = P*L/(E*A)", "12 kN * 3 m / (210 GPa * 10 cm^2)", ("0.1714", "mm")),
        ("x = p*D/(2 * 3 mm)", "5 bar * 400 mm / (2 * 3 mm)", ("33.33", "MPa")),
        ("x = L + D", "3 m + 400 mm", ("3400", "mm")),
        ("x [Hz] = sqrt(k/m)/(2*pi)", "sqrt(500 N/mm / 20 kg)/(2*pi)", ("25.16", "Hz")),
        ("x = r*P", "5 % * 12 kN", ("0.6000", "kN")),
        ("x [%] = P/(E*A)", "12 kN / (210 GPa * 10 cm^2)", ("0.005714", "%")),
        # what is no power of ten is printed
        ("x = N/n", "7.5 kW / 1500 rpm * 9.54930 s*rpm", ("0.04775", "kN*m")),
        ("x [m/s] = n*D/2", "1500 rpm * 400 mm / 2 * 0.104720 1/(s*rpm)", ("31.42", "m/s")),
        ("x [m/min] = L/(2*h)", "3 m / (2 * 12 min)", ("0.1250", "m/min")),
        ("x [m/s] = L/(2*h)", "3 m / (2 * 12 min) / (60 s/min)", ("0.002083", "m/s")),
        # brackets where a sign or a power needs them
        ("x = P - G", "12 kN - (-3 kN)", ("15.00", "kN")),
        ("x = -G", "-(-3 kN)", ("3.000", "kN")),
        ("x = P*G", "12 kN * (-3 kN)", ("-36.00", "kN^2")),
        ("x = G^2*L", "(-3 kN)^2 * 3 m", ("27.00", "kN^2*m")),
        ("x = P/(A*L)/L", "12 kN / (10 cm^2 * 3 m) / 3 m", ("1.333e-6", "MPa/mm^2")),
        ("x = P - (P - G)", "12 kN - (12 kN - (-3 kN))", ("-3.000", "kN")),
        ("x = P*<L - D>^1", "12 kN * <3 m - 400 mm>^1", ("31.20", "kN*m")),
    ],
)
def test_factors_in_si_units(line: str, substitution: str, result: tuple[str, str]) -> None:
    trace = evaluated(SI + line)
    assert substituted(trace, "x") == substitution
    assert number_of(trace, "x") == result


READINGS = """
    t_1 = 70 degF -- inside
    t_2 = 20 degC -- outside
    t_3 = -10 degC -- in winter
"""


@pytest.mark.parametrize(
    ("line", "substitution", "result"),
    [
        ("x = t_2 - t_3", "20 degC - (-10 degC)", ("30.00", "K")),
        (
            "x = t_1 - t_2",
            "(70 degF - (20 degC * 1.8 degF/degC + 32 delta_degF)) / (1.8 degF/K)",
            ("1.111", "K"),
        ),
        ("x [K] = t_2", "20 degC + 273.15 K", ("293.2", "K")),
        ("x [K] = t_1", "(70 degF + 459.67 delta_degF) / (1.8 degF/K)", ("294.3", "K")),
        ("x [degC] = t_1", "(70 degF - 32 delta_degF) / (1.8 degF/degC)", ("21.11", "degC")),
        ("x [degF] = t_2", "20 degC * 1.8 degF/degC + 32 delta_degF", ("68.00", "degF")),
        ("x [degF] = t_2 + 10 K", "(20 degC + 10 K) * 1.8 degF/degC + 32 delta_degF", ("86.00", "degF")),
        (
            "x [mm] = 12e-6 1/K * (t_2 - t_3) * 3 m",
            "12e-6 1/K * (20 degC - (-10 degC)) * 3 m",
            ("1.080", "mm"),
        ),
        (
            "x [degF] = max(t_1, t_2)",
            "max(70 degF, 20 degC * 1.8 degF/degC + 32 delta_degF)",
            ("70.00", "degF"),
        ),
    ],
)
def test_absolute_temperatures(line: str, substitution: str, result: tuple[str, str]) -> None:
    trace = evaluated(READINGS + line)
    assert substituted(trace, "x") == substitution
    assert number_of(trace, "x") == result


# --- any mixture of units -----------------------------------------------------------------------------------

UNITS = {
    "length": ["mm", "cm", "m", "in", "ft", "yd"],
    "force": ["N", "kN", "lbf", "kip", "kgf"],
    "time": ["s", "min", "h"],
}
RESULTS = {"length": ["mm", "m", "in", "ft"], "force": ["kN", "N", "lbf", "kip"], "time": ["s", "min"]}

a_unit = st.fixed_dictionaries({kind: st.sampled_from(units) for kind, units in UNITS.items()})
a_number = st.integers(2, 99).map(str)


def lands(trace: Trace, name: str) -> None:
    """The printed numbers, worked with a pocket calculator, give the printed result within its last digit."""
    step = trace[name]
    put, shown = texts.step_substitution(trace, step), texts.display(step)
    assert put is not None and shown is not None and put.closes
    reached, printed = work(text(put.tree), shown.unit), float(shown.number)
    assert abs(reached - printed) <= 1.5 * last_digit(printed, step.digits)


def last_digit(value: float, digits: int) -> float:
    return 10.0 ** (int(f"{abs(value):e}".split("e")[1]) - digits + 1)


@settings(max_examples=80, deadline=None)
@given(
    st.tuples(a_unit, a_unit),
    st.lists(a_number, min_size=4, max_size=4),
    st.integers(-2, 3),
    st.integers(-2, 3),
    st.data(),
)
def test_products_of_mixed_units_land(
    units: tuple[dict[str, str], dict[str, str]], n: list[str], p: int, q: int, data: st.DataObject
) -> None:
    """Force times powers of two lengths over a time, asked for in units of any system."""
    a, b = units
    asked = "*".join(
        filter(
            None,
            (
                data.draw(st.sampled_from(RESULTS["force"])),
                f"{data.draw(st.sampled_from(RESULTS['length']))}^{p + q}" if p + q else "",
            ),
        )
    )
    asked = f"{asked}/{data.draw(st.sampled_from(RESULTS['time']))}"
    trace = evaluated(
        f"""F = {n[0]} {a["force"]} -- a
        u = {n[1]} {a["length"]} -- b
        v = {n[2]} {b["length"]} -- c
        T = {n[3]} {b["time"]} -- d
        x [{asked}] = F*u^{p}*v^{q}/T"""
    )
    lands(trace, "x")


@settings(max_examples=50, deadline=None)
@given(
    st.tuples(a_unit, a_unit),
    st.lists(a_number, min_size=4, max_size=4),
    st.sampled_from(["mm", "m", "in", "ft"]),
)
def test_sums_and_roots_of_mixed_units_land(
    units: tuple[dict[str, str], dict[str, str]], n: list[str], asked: str
) -> None:
    a, b = units
    trace = evaluated(
        f"""u = {n[0]} {a["length"]} -- a
        v = {n[1]} {b["length"]} -- b
        F = {n[2]} {a["force"]} -- c
        G = {n[3]} {b["force"]} -- d
        x_1 [{asked}] = u + v/3
        x_2 [{asked}] = sqrt(u^2 + v^2)
        x_3 [{asked}] = sqrt(u*v)*F/G
        x_4 [{asked}] = cbrt(F/G*u*v*v) - max(u, v)/1000
        x_5 [{asked}] = u*(1 + F/(F + G))"""
    )
    for name in ("x_1", "x_2", "x_3", "x_4", "x_5"):
        lands(trace, name)


def test_the_factor_of_a_root_has_whole_powers() -> None:
    trace = evaluated(US + "x [in^2] = sqrt(b*L)*b", "US")
    put = texts.step_substitution(trace, trace["x"])
    assert put is not None
    assert "^(" not in text(put.tree)
