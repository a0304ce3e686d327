"""The dimension check: what each expression is, and what does not go together."""

from __future__ import annotations

from fractions import Fraction

import pytest
from sheets import entry, findings, resolve, slugs

from loadpath.units import parse_unit
from loadpath.units.dimension import FORCE, LENGTH, PLAIN, STRESS, TEMPERATURE

GIVEN = (
    "P = 20 kN", "L = 3 m", "A = 400 mm^2", "f = 355 MPa", "n = 2", "T = 60 degC", "dT = 20 K",
    'w = "a" of "a", "b"', "g(x [m]) [kN] = P*x/L", "h(x) = 2*x", "G = 2000 kg", "k = 3 kN/mm", "p = 3 bar",
)  # fmt: skip


def unit_of(expression: str) -> str:
    """The unit in which the result of an expression is shown."""
    resolved = resolve(*GIVEN, f"r = {expression}")
    assert resolved.findings == ()
    return entry(resolved, "r").unit.text


@pytest.mark.parametrize(
    ("expression", "unit"),
    [
        ("P/A", "MPa"),
        ("P*L", "kN*m"),
        ("P/L", "kN/m"),
        ("L*L", "mm^2"),
        ("sqrt(A)", "mm"),
        ("cbrt(A*L)", "mm"),
        ("A^0.5*n", "mm"),
        ("A^(1/2)*n", "mm"),
        ("L^-1*L", ""),
        ("f/f", ""),
        ("P + 0", "kN"),
        ("0 - P", "kN"),
        ("max(0, P)", "kN"),
        ("abs(-P)", "kN"),
        ("round_up(L, 5 mm)", "mm"),
        ("atan2(P, 2*P)", ""),
        ("exp(n) + sin(L/L)", ""),
        ("<L - 1 m>^2", "mm^2"),
        ("<L - 1 m>^0*n", ""),
        ("(f as psi)*n", ""),
        ("g(2 m)", "kN"),
        ("g(0)", "kN"),
        ("h(P)", "kN"),
        ("h(n)", ""),
        ("T - 20 degC", "K"),
        ("T + dT", "degC"),
        ("T - dT", "degC"),
        ("dT*n", "K"),
        ("pi*n", ""),
        ("2^n", ""),
        ("A^pi^0*n", ""),
    ],
)
def test_kinds_of_results(expression: str, unit: str) -> None:
    if expression == "A^pi^0*n":
        assert slugs(*GIVEN, f"r = {expression}") == ["dimension-exponent"]
        return
    assert unit_of(expression) == unit


@pytest.mark.parametrize(
    ("expression", "slug", "place", "says"),
    [
        ("P + L", "unit-mismatch", "+", "a force and a length"),
        ("P - n", "unit-mismatch", "-", "a plain number"),
        ("P + 3", "unit-mismatch", "+", "a plain number"),
        ("max(P, L)", "unit-mismatch", "L", "`max`"),
        ("atan2(P, L)", "unit-mismatch", "L", "`atan2`"),
        ("round_up(L, 2)", "unit-mismatch", "2", "`round_up`"),
        ("sin(P)", "needs-plain-number", "P", "`sin`"),
        ("exp(dT)", "needs-plain-number", "dT", "temperature"),
        ("2^P", "needs-plain-number", "P", "exponent"),
        ("L^n", "dimension-exponent", "n", "typed"),
        ("L^(n/2)", "dimension-exponent", "n/2", "typed"),
        ("(P as MPa)", "unit-mismatch", "MPa", "a stress"),
        ("g(P)", "unit-mismatch", "P", "a length"),
        ("g(n)", "unit-mismatch", "n", "a length"),
        ("h(w)", "unknown-choice", "w", "`w`"),
        ("w*n", "unknown-choice", "w", "`w`"),
        ("g*n", "wrong-arguments", "g", "`g`"),
        ("g(L, L)", "wrong-arguments", "g", "1 argument"),
        ("sqrt()", "wrong-arguments", "sqrt", "1 argument"),
        ("max(P)", "needs-column", "P", "one value"),
        ("T*n", "absolute-temperature", "*", "multiplied"),
        ("-T", "absolute-temperature", "-T", "negated"),
        ("T^2", "absolute-temperature", "^", "raised"),
        ("T + T", "absolute-temperature", "+", "added"),
        ("dT - T", "absolute-temperature", "-", "difference"),
        ("T + P", "unit-mismatch", "+", "a force"),
        ("T + 0", "absolute-temperature", "+", "bare `0`"),
        ("max(T, dT)", "absolute-temperature", "dT", "difference"),
        ("max(T, 0)", "absolute-temperature", "0", "bare `0`"),
        ("abs(T)", "absolute-temperature", "abs", "multiplied"),
        ("sqrt(T)", "absolute-temperature", "sqrt", "multiplied"),
        ("round_up(T, dT)", "absolute-temperature", "round_up", "multiplied"),
        ("<T>^1", "absolute-temperature", "<T>^1", "raised"),
        ("(T as K)", "absolute-temperature", "K", "scale"),
        ("(dT as degC)", "absolute-temperature", "degC", "scale"),
        ("G + P", "mass-as-force", "kg", "`kg`"),
        ("2 kN/m/m", "bad-unit", "/m", "two `/`"),
        ("2 kn", "unknown-unit", "kn", "`kn`"),
        ("2 bargs", "unknown-unit", "bargs", "`bargs`"),
        ("2 L", "implied-multiplication", "L", "`L`"),
        ("2 kN/m*L", "unknown-unit", "L", "`L`"),
        ("P(2)", "implied-multiplication", "(", "`P`"),
    ],
)
def test_what_does_not_go_together(expression: str, slug: str, place: str, says: str) -> None:
    (found,) = findings(*GIVEN, f"r = {expression}")
    assert found.slug == slug and found.help
    assert says in found.message
    assert found.span is not None and found.source.cut(found.span) == place


@pytest.mark.parametrize(
    ("relation", "slug"),
    [
        ("P <= L", "unit-mismatch"),
        ("P <= 3", "unit-mismatch"),
        ("1 kN <= P <= 3 m", "unit-mismatch"),
        ("1 kN <= 0 <= 3 m", "unit-mismatch"),
        ("P <= 1 kN or P >= 3 m", "unit-mismatch"),
        ("T <= 20 K", "absolute-temperature"),
        ("T >= 0", "absolute-temperature"),
        ("w <= P", "unknown-choice"),
        ('P <= "a"', "unknown-choice"),
    ],
)
def test_relations_that_compare_nothing(relation: str, slug: str) -> None:
    assert slugs(*GIVEN, f"limit: {relation}") == [slug]


@pytest.mark.parametrize(
    "relation",
    ["P <= 3 kN", "0 <= P", "0 <= P <= 3 kN", "T <= 80 degC", "T - 20 degC <= 60 K", "P/A <= f or n >= 3"],
)
def test_relations_that_hold_together(relation: str) -> None:
    assert slugs(*GIVEN, f"limit: {relation}") == []


def test_every_branch_is_checked() -> None:
    found = findings(*GIVEN, "r = cases", "    P  when n <= 2", "    L  when P <= L", "    A  otherwise")
    assert [f.slug for f in found] == ["unit-mismatch"]
    found = findings(*GIVEN, "r = cases", "    P  when n <= 2", "    L  otherwise")
    assert [(f.slug, f.line) for f in found] == [("unit-mismatch", len(GIVEN) + 8)]


def test_conditions_on_words_and_whole_numbers() -> None:
    lines = ("r = cases", '    P  when w = "a" and n = 2', "    2*P  otherwise")
    assert slugs(*GIVEN, *lines) == []
    assert slugs(*GIVEN, "r = cases", '    P  when w = "c"', "    P  otherwise") == ["unknown-choice"]
    assert slugs(*GIVEN, "r = cases", '    P  when w <= "a"', "    P  otherwise") == ["unknown-choice"]
    assert slugs(*GIVEN, "r = cases", '    P  when n = "a"', "    P  otherwise") == ["unknown-choice"]
    assert slugs(*GIVEN, "r = cases", "    P  when P = 3 kN", "    P  otherwise") == ["bad-syntax"]


# --- units shown --------------------------------------------------------------------------------------------


def test_a_result_asks_for_its_unit() -> None:
    resolved = resolve(*GIVEN, "s [N/mm^2] = P/A", "e [%] = P/(A*f)", "a [1] = n", "i [ft-in 1/16] = L")
    assert [entry(resolved, n).unit.text for n in ("s", "e", "a", "i")] == ["N/mm^2", "%", "", "ft-in 1/16"]
    assert entry(resolved, "s").asked and not entry(resolved, "P").asked


def test_a_unit_of_another_dimension_names_both_and_one_that_fits() -> None:
    (found,) = findings(*GIVEN, "s [kN] = P/A")
    assert found.source.cut(found.span or pytest.fail("no place")) == "kN"
    assert "a stress" in found.message and "a force" in found.message and "[MPa]" in found.help


def test_an_input_keeps_the_unit_that_it_was_typed_in() -> None:
    resolved = resolve("a = 2*45 mm", "b = 3 bar", "c = 20 ksi", "d = 12 ft 6 in", "e = 3")
    assert [entry(resolved, n).unit.text for n in "abcde"] == ["mm", "bar", "ksi", "in", ""]


def test_a_bare_zero_fits_any_dimension_but_a_name_has_one() -> None:
    assert slugs(*GIVEN, "e = 0", "r = P + e") == ["unit-mismatch"]
    assert slugs(*GIVEN, "e [kN] = 0", "r = P + e") == []
    assert slugs(*GIVEN, "e [degC] = 0") == ["absolute-temperature"]


def test_a_difference_of_temperatures_has_no_place_on_a_scale() -> None:
    assert slugs(*GIVEN, "d [degC] = T - 20 degC") == ["absolute-temperature"]
    resolved = resolve(*GIVEN, "T_K [K] = T", "r = 2*T_K")
    assert resolved.findings == ()
    assert entry(resolved, "r").type.dimension == TEMPERATURE


def test_both_sides_of_a_relation_are_shown_in_one_unit() -> None:
    resolved = resolve(
        *GIVEN, "s [N/mm^2] = P/A", "limit a: s <= f", "limit b: 3 kN <= 2*P", "check: P = 2e4 N within 0.1 %"
    )
    assert [e.side_units[0].text for e in resolved.entries[-3:]] == ["N/mm^2", "kN", "kN"]


# --- frequencies and names in units -------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("lines", "count"),
    [
        (("a = 12 Hz", "b = 300 rpm", "r = a - b"), 1),
        (("a = 12 Hz", "b = 30 rad/s", "r = max(a, b)"), 1),
        (("a [Hz] = sqrt(k/G)",), 1),
        (("a [Hz] = sqrt(k/G)/(2*pi)",), 0),
        (("a [rad/s] = sqrt(k/G)",), 0),
        (("a = 12 Hz", "b [rpm] = a",), 1),
        (("a = 12 Hz", "b [rad/s] = 2*pi*a"), 0),
        (("a = 12 Hz", "b [Hz] = 0.8*a"), 0),
        (("a = 300 rpm", "b [rad/s] = a"), 0),
        (("t = 3 s", "a [Hz] = 1/t"), 0),
    ],
)  # fmt: skip
def test_hertz_counts_turns_and_rpm_counts_radians(lines: tuple[str, ...], count: int) -> None:
    found = findings(*GIVEN, *lines)
    assert [f.slug for f in found] == ["frequency-and-speed"] * count
    assert all("2*pi" in f.message for f in found)


def test_a_unit_that_is_also_a_name_is_a_warning_once_and_behind_an_operator_only() -> None:
    assert slugs("N = 3 kN", "a = 12 N/mm^2", "b = 3 N*mm") == []
    assert slugs("mm = 3", "a = 12 N/mm^2", "b = 3 N*mm", "c = 3 mm") == ["unit-or-name"]
    assert slugs("m = 3", "a = 12 mm/s") == []
    assert slugs("K = 3", "a = 12e-6 1/K", "s = 2", "c = 3 J/(kg*K)") == ["unit-or-name"]


def test_powers_that_get_out_of_hand_are_refused() -> None:
    lines = ["a_0 = 2 m"] + [f"a_{i + 1} = a_{i}^300" for i in range(40)]
    assert slugs(*lines) == ["over-limit"]
    lines = ["a_0 = 2 m"] + [f"a_{i + 1} = a_{i}^0.123" for i in range(40)]
    assert slugs(*lines) == ["over-limit"]
    lines = ["a_0 = 2 m"] + [f"a_{i + 1} = a_{i}*a_{i}" for i in range(40)]
    assert slugs(*lines) == ["over-limit"]


def test_types_carry_their_dimension() -> None:
    resolved = resolve(*GIVEN)
    of = {e.name: e.type.dimension for e in resolved.entries}
    assert (of["P"], of["L"], of["n"], of["f"]) == (FORCE, LENGTH, PLAIN, STRESS)
    assert of["k"] == FORCE.over(LENGTH)
    assert parse_unit("kN/mm").dimension == of["k"]
    assert FORCE.power(Fraction(0)) == PLAIN
