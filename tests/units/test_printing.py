"""Numbers and quantities in print (contract, section 4).

source: ISO 80000-1:2022, clause 7 (numbers, units, products), and SI Brochure, 9th edition, 5.4 (the
examples), both from memory: groups of three from the decimal sign on, four digits left together, a space
before the unit and before %, none before the degree of an angle, a raised dot in products of units.
"""

from __future__ import annotations

import math
import re
from decimal import Decimal
from fractions import Fraction as F

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from loadpath.units import parse_unit
from loadpath.units.dimension import Dimension, by_force, by_mass, product
from loadpath.units.printing import (
    MINUS,
    NARROW,
    THIN,
    feet_and_inches,
    plain,
    quantity,
    read_plain,
    step_of,
    typeset,
    unit_symbol,
)

patient = settings(deadline=None)

# --- plain numbers ------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("value", "digits", "text"),
    [
        # trailing zeros
        (31.25, 4, "31.25"), (56.1, 4, "56.10"), (2.0, 4, "2.000"), (100.0, 4, "100.0"),
        (1000.0, 4, "1000"), (0.5, 4, "0.5000"), (0.001, 4, "0.001000"), (12.0, 2, "12"), (7.0, 2, "7.0"),
        (0, 4, "0"), (-0.0, 4, "0"),
        # more digits before the point than asked
        (12_345.6, 4, "12350"), (12_345.6, 2, "12000"), (99_999.0, 5, "99999"), (98_765.0, 3, "98800"),
        # powers of ten, by threes, outside 0.001 to 99 999
        (100_000.0, 4, "100.0e3"), (123_456.0, 4, "123.5e3"), (1_234_567.0, 4, "1.235e6"),
        (2.1e11, 4, "210.0e9"), (0.000_999, 3, "999e-6"), (12.5e-6, 4, "12.50e-6"), (1e-9, 2, "1.0e-9"),
        (1e-10, 3, "100e-12"), (1.5e300, 3, "1.50e300"), (4.94e-300, 3, "4.94e-300"),
        # rounding carries over
        (9.9999, 4, "10.00"), (99_999.6, 5, "100.00e3"), (0.000_999_96, 4, "0.001000"),
        (999_999.0, 3, "1.00e6"), (99_999.4, 4, "100.0e3"),
        # signs
        (-3.2, 2, "-3.2"), (-1.5e6, 2, "-1.5e6"),
        # half-way to the even digit
        (0.125, 2, "0.12"), (0.375, 2, "0.38"), (2.5, 1, "2"), (12.25, 3, "12.2"),
        # what cannot be printed as a number
        (math.inf, 4, "inf"), (math.nan, 4, "nan"),
    ],
)  # fmt: skip
def test_plain(value: float, digits: int, text: str) -> None:
    assert plain(value, digits) == text


finite = st.floats(1e-290, 1e290) | st.floats(-1e290, -1e-290) | st.just(0.0)
digits_ = st.integers(1, 15)


@patient
@given(finite, digits_)
def test_the_printed_value_is_within_half_a_unit_of_the_last_digit(value: float, digits: int) -> None:
    text = plain(value, digits)
    mantissa, _, exponent = text.partition("e")
    printed = Decimal(mantissa).scaleb(int(exponent or 0))
    if value:
        half = Decimal(5).scaleb(printed.adjusted() - digits)
        assert abs(printed - Decimal(repr(value))) <= half
    assert read_plain(text) == float(printed)


@patient
@given(finite, digits_)
def test_the_printed_value_reads_back(value: float, digits: int) -> None:
    text = plain(value, digits)
    assert abs(read_plain(text) - value) <= 0.5 * step_of(text, digits) * (1 + 1e-9) or value == 0


@patient
@given(finite)
def test_seventeen_digits_are_the_value(value: float) -> None:
    assert read_plain(plain(value, 17)) == value


@patient
@given(finite, finite, digits_)
def test_order_is_never_turned(a: float, b: float, digits: int) -> None:
    low, high = sorted((a, b))
    assert read_plain(plain(low, digits)) <= read_plain(plain(high, digits))


@patient
@given(st.floats(1e-200, 1e200), st.integers(2, 15))
def test_order_is_kept_beyond_the_last_digit(value: float, digits: int) -> None:
    larger = value * (1 + 1.1 * 10 ** (1 - digits))
    assert read_plain(plain(value, digits)) < read_plain(plain(larger, digits))


@patient
@given(finite.filter(bool), digits_)
def test_as_many_digits_as_asked_and_powers_by_threes(value: float, digits: int) -> None:
    mantissa, _, exponent = plain(value, digits).partition("e")
    counting = mantissa.lstrip("-0.").replace(".", "")
    assert len(counting) >= digits
    assert counting[digits:].strip("0") == ""
    if "." in mantissa:
        assert len(counting) == digits
    number = abs(Decimal(mantissa))
    if exponent:
        assert int(exponent) % 3 == 0
        assert 1 <= number < 1000
        assert not Decimal("0.001") <= number.scaleb(int(exponent)) <= 99_999
    else:
        assert Decimal("0.001") <= number <= 99_999


@patient
@given(finite, digits_)
def test_a_negative_value_prints_as_the_positive_one(value: float, digits: int) -> None:
    assert plain(-abs(value), digits).removeprefix("-") == plain(abs(value), digits)


@pytest.mark.parametrize(
    ("number", "digits", "step"),
    [
        ("56.10", 0, 0.01), ("12.50e6", 0, 1e4), ("12000", 0, 1000), ("12000", 4, 10), ("12000", 5, 1),
        ("12350", 0, 10), ("-3.2", 0, 0.1), ("7", 0, 1), ("100e3", 0, 1e5), ("100e3", 3, 1e3),
        ("2 1/2", 0, 0), ("0", 0, 1), ("12.50e6", 4, 1e4), ("250e-6", 3, 1e-6), ("0.001000", 4, 1e-6),
    ],
)  # fmt: skip
def test_step_of_the_last_digit(number: str, digits: int, step: float) -> None:
    assert step_of(number, digits) == step


@pytest.mark.parametrize(
    ("number", "value"),
    [
        ("56.10", 56.1), ("-12345.6", -12345.6), ("12.5e6", 12.5e6), ("1.2E3", 1200), ("2 1/2", 2.5),
        ("1/2", 0.5), ("-2 1/2", -2.5), ("12_000", 12000), ("1e-3", 0.001), ("1_0/1_6", 0.625),
    ],
)  # fmt: skip
def test_read_plain(number: str, value: float) -> None:
    assert read_plain(number) == value


# --- in running text ----------------------------------------------------------------------------------------


def spaced(text: str) -> str:
    """`_` for a thin space, `~` for the space that doesn't break."""
    return text.replace("_", THIN).replace("~", NARROW)


@pytest.mark.parametrize(
    ("number", "printed"),
    [
        # source: SI Brochure, 5.4.4 (from memory)
        ("43279.16829", "43_279.168_29"),
        ("3279.1683", "3279.1683"),
        ("299792458", "299_792_458"),
        ("0.012345", "0.012_345"),
        # four digits on one side stay together, whatever stands on the other
        ("9999", "9999"),
        ("10000", "10_000"),
        ("99999", "99_999"),
        ("1234.56789", "1234.567_89"),
        ("12345.6789", "12_345.6789"),
        ("123456", "123_456"),
        ("1234567", "1_234_567"),
        ("12_000", "12_000"),
        # signs and powers
        ("-3.20", f"{MINUS}3.20"),
        ("-12345", f"{MINUS}12_345"),
        ("12.50e6", "12.50~×~10⁶"),
        ("12.50e-6", "12.50~×~10⁻⁶"),
        ("-1.2E+15", f"{MINUS}1.2~×~10¹⁵"),
        ("1e100", "1~×~10¹⁰⁰"),
        # fractions, feet and inches
        ("2 1/2", "2 1/2"),
        ("5/8", "5/8"),
        ("12 ft 6 1/2", "12 ft 6 1/2"),
        ("1 ft 0", "1 ft 0"),
        ("-1 ft 0", f"{MINUS}1 ft 0"),
        ("0", "0"),
    ],
)
def test_typeset(number: str, printed: str) -> None:
    assert typeset(number) == spaced(printed)


@patient
@given(finite, digits_)
def test_what_is_typeset_reads_back(value: float, digits: int) -> None:
    text = typeset(plain(value, digits))
    read = text.replace(THIN, "").replace(MINUS, "-")
    if "×" in read:
        mantissa, _, power = read.partition(f"{NARROW}×{NARROW}10")
        read = mantissa + "e" + power.translate(str.maketrans("⁰¹²³⁴⁵⁶⁷⁸⁹⁻", "0123456789-"))
    assert float(read) == read_plain(plain(value, digits))
    assert all(len(group) <= 4 for group in re.split(rf"[{THIN}.]", text.lstrip(MINUS).partition(NARROW)[0]))


@pytest.mark.parametrize(
    ("unit", "printed"),
    [
        ("kN*m", "kN⋅m"), ("m*s^-1", "m⋅s⁻¹"), ("mm^4", "mm⁴"), ("J/(kg*K)", "J/(kg⋅K)"), ("1/K", "1/K"),
        ("K^-1", "K⁻¹"), ("mm^0.5", "mm⁰·⁵"), ("mm^(1/3)", "mm¹ᐟ³"), ("N/mm^2", "N/mm²"), ("%", "%"),
        ("degC", "°C"), ("degF", "°F"), ("delta_degF", "°F"), ("deg", "°"), ("um", "µm"), ("us", "µs"),
        ("uN*um", "µN⋅µm"), ("μm", "µm"), ("µm", "µm"), ("litre", "L"), ("tonne", "t"),
        ("US_gal/min", "US gal/min"), ("short_tonf", "short tonf"), ("lbf*in", "lbf⋅in"),
        ("kip*ft", "kip⋅ft"), ("hp_metric", "hp (metric)"), ("Btu/(h*ft^2*degF)", "Btu/(h⋅ft²⋅°F)"),
        ("rpm", "rpm"), ("", ""),
    ],
)  # fmt: skip
def test_unit_symbol(unit: str, printed: str) -> None:
    assert unit_symbol(unit) == printed
    parse_unit(unit)


@pytest.mark.parametrize(
    ("number", "unit", "printed"),
    [
        ("31.25", "kN*m", "31.25~kN⋅m"),
        ("12345", "N", "12_345~N"),
        ("0.25", "%", "0.25~%"),  # a space before %, source: ISO 80000-1, 7.1.4 (from memory)
        ("30", "deg", "30°"),  # none before the degree of an angle
        ("30.2", "degC", "30.2~°C"),  # one before a degree Celsius
        ("-20", "degC", f"{MINUS}20~°C"),
        ("210.0e9", "Pa", "210.0~×~10⁹~Pa"),
        ("12 ft 6 1/2", "in", "12 ft 6 1/2~in"),
        ("0.350", "", "0.350"),
        ("9.81", "m/s^2", "9.81~m/s²"),
    ],
)
def test_quantity(number: str, unit: str, printed: str) -> None:
    assert quantity(number, unit) == spaced(printed)


exponents = st.fractions(-6, 6, max_denominator=12)


@patient
@given(st.builds(Dimension, exponents, exponents, exponents, exponents))
def test_a_product_of_units_reads_back(of: Dimension) -> None:
    for powers in (by_force(of, ("kN", "mm", "s", "K")), by_mass(of, ("lb", "ft", "s", "degF"))):
        assert parse_unit(product(powers)).dimension == of


# --- feet and inches ----------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("inches", "parts", "printed"),
    [
        (150.5, 16, "12 ft 6 1/2 in"), (150.0, 16, "12 ft 6 in"), (12.0, 16, "1 ft 0 in"),
        (0.625, 16, "5/8 in"), (0.0, 16, "0 in"), (12.5, 16, "1 ft 1/2 in"), (11.999, 16, "1 ft 0 in"),
        (-30.25, 4, "-2 ft 6 1/4 in"), (-0.001, 16, "0 in"), (2.5, 8, "2 1/2 in"), (6.0, 2, "6 in"),
        (1 / 64, 64, "1/64 in"), (1 / 64, 16, "0 in"), (120_000.0, 2, "10000 ft 0 in"),
    ],
)  # fmt: skip
def test_feet_and_inches(inches: float, parts: int, printed: str) -> None:
    assert feet_and_inches(inches, parts) == printed


@patient
@given(st.floats(-1e6, 1e6), st.sampled_from([2, 4, 8, 16, 32, 64]))
def test_feet_and_inches_read_back_to_the_nearest_part(inches: float, parts: int) -> None:
    text = feet_and_inches(inches, parts)
    sign = -1 if text.startswith("-") else 1
    feet, _, rest = text.lstrip("-").rpartition(" ft ")
    whole = sum((F(piece) for piece in rest.removesuffix(" in").split()), F(0))
    assert whole < 12
    assert abs(sign * (12 * int(feet or 0) + whole) - F(inches)) <= F(1, 2 * parts)
