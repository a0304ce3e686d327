"""Every unit of the curated set: its factor, its dimension, its prefixes, and what is refused.

source: NIST SP 811 (2008), appendix B.8 and B.9, from memory: the definitions as exact fractions, and the
factors with the digits printed there. Held against the default registry of pint besides, whose definitions
ours don't share.
"""

from __future__ import annotations

import math
from fractions import Fraction as F

import pint
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from loadpath.units import BadUnit, is_unit, parse_unit
from loadpath.units.dimension import AREA, PLAIN, STRESS, TEMPERATURE, Dimension, dimension
from loadpath.units.unit import MOST_POWER, PREFIXED, PREFIXES, STEP_OF_DEGF, known_names

patient = settings(deadline=None)

# --- factors ------------------------------------------------------------------------------------------------

INCH, POUND, GRAVITY = F(254, 10_000), F(45_359_237, 100_000_000), F(980_665, 100_000)
FOOT, LBF = 12 * INCH, POUND * GRAVITY
PI = F(math.pi)

# name: exact factor, as printed in SP 811, powers of length, mass, time and temperature, name in pint
UNITS: dict[str, tuple[F, str, tuple[int, ...], str]] = {
    "m": (F(1), "", (1,), "meter"),
    "g": (F(1, 1000), "", (0, 1), "gram"),
    "kg": (F(1), "", (0, 1), "kilogram"),
    "s": (F(1), "", (0, 0, 1), "second"),
    "K": (F(1), "", (0, 0, 0, 1), "kelvin"),
    "N": (F(1), "", (1, 1, -2), "newton"),
    "Pa": (F(1), "", (-1, 1, -2), "pascal"),
    "J": (F(1), "", (2, 1, -2), "joule"),
    "W": (F(1), "", (2, 1, -3), "watt"),
    "Hz": (F(1), "", (0, 0, -1), "1/second"),
    "min": (F(60), "6.0 E+01", (0, 0, 1), "minute"),
    "h": (F(3600), "3.6 E+03", (0, 0, 1), "hour"),
    "day": (F(86_400), "8.64 E+04", (0, 0, 1), "day"),
    "rad": (F(1), "", (), "radian"),
    "deg": (PI / 180, "1.745329 E-02", (), "degree"),
    "%": (F(1, 100), "", (), "percent"),
    "ppm": (F(1, 10**6), "", (), "ppm"),
    "microstrain": (F(1, 10**6), "", (), "1e-6"),
    "rpm": (2 * PI / 60, "1.047198 E-01", (0, 0, -1), "rpm"),
    "bar": (F(10**5), "1.0 E+05", (-1, 1, -2), "bar"),
    "atm": (F(101_325), "1.01325 E+05", (-1, 1, -2), "atm"),
    "tonne": (F(1000), "1.0 E+03", (0, 1), "metric_ton"),
    "litre": (F(1, 1000), "1.0 E-03", (3,), "liter"),
    "kgf": (GRAVITY, "9.80665 E+00", (1, 1, -2), "kgf"),
    "hp_metric": (75 * GRAVITY, "7.354988 E+02", (2, 1, -3), "metric_horsepower"),
    "in": (INCH, "2.54 E-02", (1,), "inch"),
    "mil": (INCH / 1000, "2.54 E-05", (1,), "thou"),
    "ft": (FOOT, "3.048 E-01", (1,), "foot"),
    "yd": (3 * FOOT, "9.144 E-01", (1,), "yard"),
    "mile": (5280 * FOOT, "1.609344 E+03", (1,), "mile"),
    "lb": (POUND, "4.535924 E-01", (0, 1), "pound"),
    "slug": (LBF / FOOT, "1.459390 E+01", (0, 1), "slug"),
    "short_ton": (2000 * POUND, "9.071847 E+02", (0, 1), "short_ton"),
    "lbf": (LBF, "4.448222 E+00", (1, 1, -2), "force_pound"),
    "ozf": (LBF / 16, "2.780139 E-01", (1, 1, -2), "force_ounce"),
    "kip": (1000 * LBF, "4.448222 E+03", (1, 1, -2), "kip"),
    "short_tonf": (2000 * LBF, "8.896443 E+03", (1, 1, -2), "force_ton"),
    "psi": (LBF / INCH**2, "6.894757 E+03", (-1, 1, -2), "psi"),
    "ksi": (1000 * LBF / INCH**2, "6.894757 E+06", (-1, 1, -2), "ksi"),
    "psf": (LBF / FOOT**2, "4.788026 E+01", (-1, 1, -2), "force_pound/foot**2"),
    "ksf": (1000 * LBF / FOOT**2, "4.788026 E+04", (-1, 1, -2), "kip/foot**2"),
    "plf": (LBF / FOOT, "1.459390 E+01", (0, 1, -2), "force_pound/foot"),
    "klf": (1000 * LBF / FOOT, "1.459390 E+04", (0, 1, -2), "kip/foot"),
    "pcf": (LBF / FOOT**3, "1.570875 E+02", (-2, 1, -2), "force_pound/foot**3"),
    "kcf": (1000 * LBF / FOOT**3, "1.570875 E+05", (-2, 1, -2), "kip/foot**3"),
    "hp": (550 * FOOT * LBF, "7.456999 E+02", (2, 1, -3), "horsepower"),
    "Btu": (F("1055.05585262"), "1.055056 E+03", (2, 1, -2), "international_british_thermal_unit"),
    "US_gal": (231 * INCH**3, "3.785412 E-03", (3,), "gallon"),
}
TEMPERATURES = {"degC", "degF"}
WITH_PI = {"deg", "rpm"}

COMPOUND = {
    "ft^2": "9.290304 E-02", "in^2": "6.4516 E-04", "in^3": "1.638706 E-05", "ft^3": "2.831685 E-02",
    "in^4": "4.162314 E-07", "ft^4": "8.630975 E-03", "yd^3": "7.645549 E-01", "mile/h": "4.4704 E-01",
    "lbf*ft": "1.355818 E+00", "lbf*in": "1.129848 E-01", "lbf/in": "1.751268 E+02",
    "lb/ft": "1.488164 E+00", "lb/ft^3": "1.601846 E+01", "lb/in^3": "2.767990 E+04",
    "slug/ft^3": "5.153788 E+02", "kgf/cm^2": "9.80665 E+04", "kgf/mm^2": "9.80665 E+06",
    "lbf*s/ft^2": "4.788026 E+01", "Btu/(lb*degF)": "4.1868 E+03", "Btu/(h*ft*degF)": "1.730735 E+00",
    "Btu/(h*ft^2*degF)": "5.678263 E+00", "ft*lbf": "1.355818 E+00", "US_gal/min": "6.309020 E-05",
    "lb*ft^2": "4.214011 E-02", "1/degF": "1.8 E+00",
}  # fmt: skip
"""Compound units of SP 811, appendix B.8, with the factors printed there (from memory)."""


def close_to_printed(value: float, printed: str) -> bool:
    """Within half a unit of the last printed digit."""
    number = float(printed.replace(" ", ""))
    mantissa, _, exponent = printed.partition(" E")
    half = 0.5 * 10.0 ** (int(exponent) - len(mantissa.partition(".")[2]))
    return abs(value - number) <= half * (1 + 1e-9)


def test_the_table_covers_the_curated_set() -> None:
    assert set(UNITS) | TEMPERATURES == known_names()


@pytest.mark.parametrize("name", UNITS)
def test_factor_and_dimension(name: str) -> None:
    exact, printed, powers, _ = UNITS[name]
    unit = parse_unit(name)
    if name in WITH_PI:
        assert unit.size == pytest.approx(float(exact), rel=2e-16, abs=0)
    else:
        assert unit.factor == exact
    assert unit.dimension == dimension(*powers)
    assert (unit.text, unit.absolute, unit.atoms) == (name, False, ((name, 1),))
    if printed:
        assert close_to_printed(unit.size, printed)


@pytest.fixture(scope="module")
def registry() -> pint.UnitRegistry:
    return pint.UnitRegistry()


@pytest.mark.parametrize("name", UNITS)
def test_factor_in_the_default_registry_of_pint(name: str, registry: pint.UnitRegistry) -> None:
    theirs = registry.Quantity(UNITS[name][3]).to_base_units()
    assert parse_unit(name).size == pytest.approx(theirs.magnitude, rel=1e-13, abs=0)
    powers = [theirs.dimensionality[f"[{of}]"] for of in ("length", "mass", "time", "temperature")]
    assert list(parse_unit(name).dimension) == powers


@pytest.mark.parametrize("text", COMPOUND)
def test_compound_units_as_printed(text: str) -> None:
    assert close_to_printed(parse_unit(text).size, COMPOUND[text])


PREFIX_VALUES = {
    "da": F(10), "n": F(1, 10**9), "u": F(1, 10**6), "µ": F(1, 10**6), "μ": F(1, 10**6), "m": F(1, 1000),
    "c": F(1, 100), "d": F(1, 10), "h": F(100), "k": F(1000), "M": F(10**6), "G": F(10**9), "T": F(10**12),
}  # fmt: skip
"""source: SI Brochure, 9th edition, table 7 (from memory)."""


@pytest.mark.parametrize("unit", PREFIXED)
@pytest.mark.parametrize("prefix", PREFIXES)
def test_prefixes(prefix: str, unit: str, registry: pint.UnitRegistry) -> None:
    found = parse_unit(prefix + unit)
    assert found.factor == PREFIX_VALUES[prefix] * UNITS[unit][0]
    assert found.dimension == parse_unit(unit).dimension
    if prefix + unit != "hbar":  # a constant of physics there
        theirs = registry.Quantity(1, registry.Unit(prefix + unit)).to_base_units().magnitude
        assert found.size == pytest.approx(theirs, rel=1e-13, abs=0)


@pytest.mark.parametrize("name", sorted(known_names() - set(PREFIXED) - {"%"}))
@pytest.mark.parametrize("prefix", PREFIXES)
def test_no_other_unit_takes_a_prefix(prefix: str, name: str) -> None:
    """`min` is a minute and `Pa` no peta-are: what looks like a prefixed unit is one of its own."""
    text = prefix + name
    if text in known_names() or any(text == p + u for p in PREFIXES for u in PREFIXED):
        return
    assert not is_unit(text)
    with pytest.raises(BadUnit) as bad:
        parse_unit(text)
    assert bad.value.slug in ("unknown-unit", "gauge-unit")


READS = {
    "min": 60, "Pa": 1, "h": 3600, "in": 0.0254, "ft": 0.3048, "mil": 2.54e-5, "cm": 0.01, "m": 1, "ms": 1e-3,
    "dam": 10, "hp": 745.6998715822702, "kg": 1, "Mg": 1000, "Gs": 1e9, "lb": 0.45359237,
}  # fmt: skip


@pytest.mark.parametrize("text", READS)
def test_names_that_could_be_read_in_two_ways(text: str) -> None:
    assert parse_unit(text).size == pytest.approx(READS[text], rel=1e-15, abs=0)


# --- temperatures -------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("text", "value", "kelvin"),
    [
        # source: SP 811, appendix B.8, T = t + 273.15 and T = (t + 459.67)/1.8; fixed points from memory
        ("degC", 0, 273.15), ("degC", -273.15, 0), ("degC", 20, 293.15), ("degC", 100, 373.15),
        ("degC", 0.01, 273.16), ("degF", 32, 273.15), ("degF", 212, 373.15), ("degF", -459.67, 0),
        ("degF", 68, 293.15), ("degF", -40, 233.15),
    ],
)  # fmt: skip
def test_absolute_temperatures_are_exact(text: str, value: float, kelvin: float) -> None:
    unit = parse_unit(text)
    assert (unit.absolute, unit.dimension) == (True, TEMPERATURE)
    assert unit.to_si(value) == pytest.approx(kelvin, rel=1e-15, abs=1e-13)
    assert unit.from_si(kelvin) == pytest.approx(value, rel=1e-15, abs=1e-12)


def test_offsets_are_exact_fractions() -> None:
    assert parse_unit("degC").offset == F(27_315, 100)
    assert parse_unit("degF").offset == F(45_967, 100) * F(5, 9)
    assert parse_unit("degF").factor == F(5, 9)


@pytest.mark.parametrize(
    ("text", "factor"),
    [("1/degF", F(9, 5)), ("1/degC", F(1)), ("J/(kg*degC)", F(1)), ("Btu/(lb*degF)", F("4186.8"))],
)
def test_degrees_inside_a_compound_unit_are_steps(text: str, factor: F) -> None:
    """6.5e-6 1/degF is 11.7e-6 1/K."""
    unit = parse_unit(text)
    assert (unit.factor, unit.offset, unit.absolute) == (factor, 0, False)


def test_a_difference_in_degrees_fahrenheit_is_a_step_alone_and_in_products() -> None:
    assert (parse_unit(STEP_OF_DEGF).factor, parse_unit(STEP_OF_DEGF).absolute) == (F(5, 9), False)
    assert parse_unit(f"{STEP_OF_DEGF}/degF").factor == 1
    assert STEP_OF_DEGF not in known_names()


# --- compound units -----------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("text", "factor", "powers"),
    [
        ("kN*m", F(1000), (2, 1, -2)),
        ("kN/m", F(1000), (0, 1, -2)),
        ("N/mm^2", F(10**6), (-1, 1, -2)),
        ("J/(kg*K)", F(1), (2, 0, -2, -1)),
        ("W/(m^2*K)", F(1), (0, 1, -3, -1)),
        ("1/K", F(1), (0, 0, 0, -1)),
        ("K^-1", F(1), (0, 0, 0, -1)),
        ("mm^(2)", F(1, 10**6), (2,)),
        ("(kN*m)^2", F(10**6), (4, 2, -4)),
        ("N/(m/s)", F(1), (0, 1, -1)),
        ("m*s^-1", F(1), (1, 0, -1)),
        ("1/(m*s)", F(1), (-1, 0, -1)),
        ("(N)", F(1), (1, 1, -2)),
        ("m/m", F(1), ()),
        ("%/m", F(1, 100), (-1,)),
        ("mm^0", F(1), ()),
    ],
)
def test_compound(text: str, factor: F, powers: tuple[int, ...]) -> None:
    unit = parse_unit(text)
    assert (unit.factor, unit.dimension, unit.text) == (factor, dimension(*powers), text)


@pytest.mark.parametrize("text", ["", "1"])
def test_no_unit_is_a_plain_number(text: str) -> None:
    assert (parse_unit(text).text, parse_unit(text).dimension, parse_unit(text).factor) == ("", PLAIN, 1)


@pytest.mark.parametrize(
    ("text", "power"),
    [("mm^0.5", F(1, 2)), ("mm^(1/2)", F(1, 2)), ("mm^-1.5", F(-3, 2)), ("mm^(1/3)", F(1, 3))],
)
def test_powers_that_are_not_whole(text: str, power: F) -> None:
    unit = parse_unit(text)
    assert unit.dimension == Dimension(power)
    assert unit.size == pytest.approx(0.001 ** float(power), rel=1e-15, abs=0)


def test_atoms_carry_their_powers() -> None:
    assert parse_unit("kN*m/(mm^2*s)").atoms == (("kN", 1), ("m", 1), ("mm", -2), ("s", -1))
    assert parse_unit("(m/s)^2").atoms == (("m", 2), ("s", -2))


@pytest.mark.parametrize("parts", [2, 4, 8, 16, 32, 64])
def test_feet_and_inches_count_inches(parts: int) -> None:
    unit = parse_unit(f"ft-in 1/{parts}")
    assert (unit.text, unit.factor, unit.dimension) == (f"ft-in 1/{parts}", INCH, dimension(1))


# --- refused ------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("text", "mend"),
    [
        ("kN/m/m", "kN/m^2"), ("kN/m/s", "kN/(m*s)"), ("J/kg/K", "J/(kg*K)"), ("N/m^2/s", "N/(m^2*s)"),
        ("N/m*s", "N/(m*s)"), ("J/(kg/K)/s", "one pair of parentheses"),
    ],
)  # fmt: skip
def test_one_slash_only(text: str, mend: str) -> None:
    with pytest.raises(BadUnit) as bad:
        parse_unit(text)
    assert bad.value.slug == "bad-unit"
    assert mend in bad.value.help


@pytest.mark.parametrize(
    ("text", "plain"),
    [
        ("psig", "psi"), ("psia", "psi"), ("barg", "bar"), ("bara", "bar"), ("kPag", "kPa"),
        ("MPaa", "MPa"), ("mbarg", "mbar"), ("ksig", "ksi"),
    ],
)  # fmt: skip
def test_gauge_units(text: str, plain: str) -> None:
    with pytest.raises(BadUnit) as bad:
        parse_unit(text)
    assert (bad.value.slug, bad.value.part) == ("gauge-unit", text)
    assert f"`{plain}`" in bad.value.help
    assert "note" in bad.value.help


@pytest.mark.parametrize(
    ("text", "meant"),
    [
        ("kn", "kN"), ("KN", "kN"), ("Kn", "kN"), ("mpa", "MPa"), ("MPA", "MPa"), ("Mpa", "MPa"),
        ("gpa", "GPa"), ("kpa", "kPa"), ("n", "N"), ("Nm", "N*m"), ("kNm", "kN*m"), ("Nmm", "N*mm"),
        ("KSI", "ksi"), ("PSI", "psi"), ("Kip", "kip"), ("kips", "kip"), ("inch", "in"), ("feet", "ft"),
        ("MM", "mm"), ("sec", "s"), ("hr", "h"), ("Kg", "kg"), ("t", "tonne"), ("L", "litre"),
        ("l", "litre"), ("C", "degC"), ("°C", "degC"), ("F", "degF"), ("RPM", "rpm"), ("HP", "hp"),
        ("BTU", "Btu"), ("hz", "Hz"), ("lbs", "lb"), ("mm2", "mm^2"), ("in4", "in^4"), ("ft3", "ft^3"),
        ("KW", "kW"), ("gal", "US_gal"), ("ton", "short_ton"), ("metre", "m"), ("kpsi", "ksi"),
        ("degc", "degC"),
    ],
)  # fmt: skip
def test_near_misses(text: str, meant: str) -> None:
    with pytest.raises(BadUnit) as bad:
        parse_unit(text)
    assert bad.value.slug == "unknown-unit"
    assert f"did you mean `{meant}`?" in bad.value.help
    parse_unit(meant)


UNKNOWN = [
    "kin", "mft", "kmin", "Mday", "klb", "mkip", "kkg", "kPas", "cms", "ha", "Å", "xyz", "delta_degC", "lbm",
]  # fmt: skip


@pytest.mark.parametrize("text", UNKNOWN)
def test_unknown(text: str) -> None:
    with pytest.raises(BadUnit) as bad:
        parse_unit(text)
    assert (bad.value.slug, bad.value.part, bad.value.at) == ("unknown-unit", text, 0)


@pytest.mark.parametrize(
    ("text", "part", "at", "mend"),
    [
        ("kN/m*L", "L", 5, "`12 kN/m * L`"),
        ("kN*x", "x", 3, "`12 kN * x`"),
        ("N/(mm*b)", "b", 6, "`12 N/(mm * b`"),
        ("L*kN", "L", 0, "spaces round its `*`"),
        ("m^n", "n", 2, "typed as a number"),
    ],
)
def test_a_part_that_is_no_unit_asks_for_spaces(text: str, part: str, at: int, mend: str) -> None:
    with pytest.raises(BadUnit) as bad:
        parse_unit(text)
    assert (bad.value.slug, bad.value.part, bad.value.at) == ("unknown-unit", part, at)
    assert mend in bad.value.help


@pytest.mark.parametrize(
    "text",
    [
        "kN*", "kN/", "/s", "*", "^2", "m^", "m^+1", "m^1.", "m^(1/0)", "m^(", "m^()", "(m", "m)", "()",
        "2m", "1*m", "m/1", "kN m", "kN--m", "m^2^2", "m(s)", "ft-in 1/3", "ft-in", "m.s", "m,s", "°",
        "m^٣", f"Tm^{MOST_POWER}", f"m^{MOST_POWER + 1}", "m^(1/1001)", "((km^99)^99)^99",
        "(" * 10_000 + "m" + ")" * 10_000, "m*" * 5000 + "m", "m^" + "9" * 150,
    ],
)  # fmt: skip
def test_not_well_formed(text: str) -> None:
    with pytest.raises(BadUnit) as bad:
        parse_unit(text)
    assert bad.value.slug == "bad-unit"
    assert bad.value.message
    assert 0 <= bad.value.at < len(text)


# --- conversion ---------------------------------------------------------------------------------------------

PRODUCTS = ["kN", "MPa", "mm", "um", "kN*m", "kip*ft", "lbf/in", "mm^4", "in^4", "1/degF"]
NAMES = [*sorted(known_names()), *PRODUCTS]
ordinary = st.floats(1e-30, 1e30) | st.floats(-1e30, -1e-30)
ULP = 2.3e-16


@patient
@given(st.sampled_from(NAMES), ordinary)
def test_to_si_is_the_exact_product_rounded(name: str, value: float) -> None:
    unit = parse_unit(name)
    exact = F(value) * unit.factor + unit.offset
    assert abs(F(unit.to_si(value)) - exact) <= 4 * F(ULP) * abs(exact)


@patient
@given(st.sampled_from(NAMES), ordinary)
def test_there_and_back(name: str, value: float) -> None:
    unit = parse_unit(name)
    lost = 4 * ULP * (abs(value) + float(unit.offset / unit.factor))
    assert abs(unit.from_si(unit.to_si(value)) - value) <= lost


@pytest.mark.parametrize("value", [math.inf, -math.inf, math.nan])
@pytest.mark.parametrize("name", ["degC", "degF", "kN"])
def test_what_is_no_number_stays_none(name: str, value: float) -> None:
    assert not math.isfinite(parse_unit(name).to_si(value))
    assert not math.isfinite(parse_unit(name).from_si(value))


factors = st.sampled_from(sorted(known_names() - TEMPERATURES - {"%"}))
atoms = st.tuples(factors, st.integers(-4, 4).filter(bool))


@patient
@given(st.lists(atoms, min_size=1, max_size=4), st.lists(atoms, max_size=3))
def test_products_multiply(above: list[tuple[str, int]], below: list[tuple[str, int]]) -> None:
    top = "*".join(f"{name}^{power}" for name, power in above)
    bottom = "*".join(f"{name}^{power}" for name, power in below)
    unit = parse_unit(f"{top}/({bottom})" if below else top)
    factor, of = F(1), PLAIN
    for name, power in [*above, *((name, -power) for name, power in below)]:
        factor *= parse_unit(name).factor ** power
        of = of.times(parse_unit(name).dimension.power(F(power)))
    assert (unit.factor, unit.dimension) == (factor, of)


@patient
@given(st.text("kNm^*/()12.-%s °", max_size=30) | st.text(max_size=12))
def test_any_text_is_a_unit_or_a_reason(text: str) -> None:
    try:
        unit = parse_unit(text)
    except BadUnit as bad:
        assert bad.slug in ("bad-unit", "unknown-unit", "gauge-unit")
        assert bad.message
        assert 0 <= bad.at <= len(text)
    else:
        assert unit.factor > 0
        assert 0 < unit.size < math.inf


def test_stress_over_force_is_one_over_area() -> None:
    assert parse_unit("MPa/N").dimension == STRESS.over(parse_unit("N").dimension) == AREA.power(F(-1))
