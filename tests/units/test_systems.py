"""The unit that a result is shown in where its line doesn't ask for one (contract, section 4)."""

from __future__ import annotations

import itertools
from fractions import Fraction as F

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

import loadpath
from loadpath.units import KINDS, SYSTEMS, UnitSystem, parse_unit
from loadpath.units import dimension as d
from loadpath.units.dimension import MOST_POWER, Dimension

patient = settings(deadline=None)

TOUGHNESS = d.STRESS.times(d.LENGTH.power(F(1, 2)))

# --- the kinds that the contract names ----------------------------------------------------------------------

BY_CONTRACT = {
    "SI": {
        d.FORCE: "kN", d.LENGTH: "mm", d.STRESS: "MPa", d.MOMENT: "kN*m", d.AREA: "mm^2", d.VOLUME: "mm^3",
        d.FOURTH: "mm^4", d.LINE_LOAD: "kN/m",
    },
    "US": {
        d.FORCE: "kip", d.LENGTH: "in", d.STRESS: "ksi", d.MOMENT: "kip*ft", d.AREA: "in^2", d.VOLUME: "in^3",
        d.FOURTH: "in^4", d.LINE_LOAD: "kip/ft",
    },
    "SI machine": {d.FORCE: "N", d.LENGTH: "mm", d.STRESS: "MPa", d.MOMENT: "N*m", d.LINE_LOAD: "N/mm"},
    "US machine": {
        d.FORCE: "lbf", d.LENGTH: "in", d.STRESS: "psi", d.MOMENT: "lbf*in", d.LINE_LOAD: "lbf/in",
    },
    "SI pressure": {d.FORCE: "N", d.LENGTH: "mm", d.STRESS: "MPa", d.MOMENT: "N*m", d.LINE_LOAD: "N/mm"},
}  # fmt: skip
"""source: the contract of the language, section 4, word for word."""


@pytest.mark.parametrize("system", BY_CONTRACT)
def test_the_kinds_of_the_contract(system: str) -> None:
    wanted = BY_CONTRACT[system]
    assert {of: UnitSystem(system).unit_for(of).text for of in wanted} == wanted


def test_there_are_five_systems() -> None:
    assert set(SYSTEMS) == set(BY_CONTRACT)


def test_bar_stays_bar_in_the_pressure_system_only() -> None:
    assert UnitSystem("SI pressure").unit_for(d.STRESS, bar=True).text == "bar"
    assert UnitSystem("SI machine").unit_for(d.STRESS, bar=True).text == "MPa"
    assert UnitSystem("SI pressure", (("stress", "kPa"),)).unit_for(d.STRESS, bar=True).text == "kPa"


# --- any other kind -----------------------------------------------------------------------------------------

OTHERS = {
    # what it is: dimension, then SI, SI machine, US, US machine (common practice of the trades)
    "impulse": (d.FORCE.times(d.TIME), "kN*s", "N*s", "kip*s", "lbf*s"),
    "fracture toughness": (TOUGHNESS, "MPa*mm^0.5", "MPa*mm^0.5", "ksi*in^0.5", "psi*in^0.5"),
    "compliance": (d.LENGTH.over(d.FORCE), "mm/kN", "mm/N", "in/kip", "in/lbf"),
    "square of a stress": (d.STRESS.power(F(2)), "MPa^2", "MPa^2", "ksi^2", "psi^2"),
    "one over a stress": (d.STRESS.power(F(-1)), "1/MPa", "1/MPa", "1/ksi", "1/psi"),
    "bending stiffness": (d.FORCE.times(d.AREA), "kN*m^2", "N*mm^2", "kip*in^2", "lbf*in^2"),
    "load times length cubed": (d.FORCE.times(d.VOLUME), "kN*m^3", "N*m^3", "kip*ft^3", "lbf*in^3"),
    "turn per moment": (d.MOMENT.power(F(-1)), "1/(kN*m)", "1/(N*m)", "1/(kip*ft)", "1/(lbf*in)"),
    "curvature": (d.LENGTH.power(F(-1)), "1/mm", "1/mm", "1/in", "1/in"),
    "warping constant": (d.LENGTH.power(F(6)), "mm^6", "mm^6", "in^6", "in^6"),
    "stress per kelvin": (d.STRESS.over(d.TEMPERATURE), "MPa/K", "MPa/K", "ksi/degF", "psi/degF"),
    "expansion": (d.TEMPERATURE.power(F(-1)), "1/K", "1/K", "1/degF", "1/degF"),
    "unit weight": (d.UNIT_WEIGHT, "kN/m^3", "kN/m^3", "pcf", "pcf"),
    "viscosity": (d.STRESS.times(d.TIME), "MPa*s", "MPa*s", "ksi*s", "psi*s"),
    "damping": (d.FORCE.over(d.VELOCITY), "kN*s/m", "N*s/mm", "kip*s/in", "lbf*s/in"),
    "flow": (d.VOLUME.over(d.TIME), "m^3/s", "m^3/s", "ft^3/s", "ft^3/s"),
    "moment of inertia": (d.MASS.times(d.AREA), "kg*m^2", "kg*m^2", "lb*ft^2", "lb*ft^2"),
    "mass of a plate": (d.MASS.over(d.AREA), "kg/m^2", "kg/m^2", "lb/ft^2", "lb/ft^2"),
    "density": (d.DENSITY, "kg/m^3", "kg/m^3", "lb/ft^3", "lb/ft^3"),
    "speed": (d.VELOCITY, "m/s", "m/s", "ft/s", "ft/s"),
    "acceleration": (d.ACCELERATION, "m/s^2", "m/s^2", "ft/s^2", "ft/s^2"),
    "square of an angular speed": (d.FREQUENCY.power(F(2)), "1/s^2", "1/s^2", "1/s^2", "1/s^2"),
    "angular speed": (d.FREQUENCY, "1/s", "1/s", "1/s", "1/s"), "power": (d.POWER, "kW", "kW", "hp", "hp"),
    "conductivity": (d.CONDUCTIVITY, "W/(m*K)", "W/(m*K)", "Btu/(h*ft*degF)", "Btu/(h*ft*degF)"),
    "difference of temperature": (d.TEMPERATURE, "K", "K", "delta_degF", "delta_degF"),
    "plain number": (d.PLAIN, "", "", "", ""),
}  # fmt: skip


@pytest.mark.parametrize("what", OTHERS)
def test_any_other_kind_is_in_units_that_an_engineer_would_write(what: str) -> None:
    of, *units = OTHERS[what]
    systems = ("SI", "SI machine", "US", "US machine")
    assert [UnitSystem(system).unit_for(of).text for system in systems] == units
    assert UnitSystem("SI pressure").unit_for(of).text == units[1]


def test_absolute_temperatures() -> None:
    assert [UnitSystem(s).unit_for(d.TEMPERATURE, absolute=True).text for s in SYSTEMS] == [
        "degF" if s.startswith("US") else "degC" for s in SYSTEMS
    ]


exponents = st.fractions(-4, 4, max_denominator=6)
within = st.builds(Dimension, exponents, exponents, exponents, exponents)


@patient
@given(within, st.sampled_from(sorted(SYSTEMS)))
def test_the_unit_has_the_dimension_it_is_for_and_reads_back(of: Dimension, system: str) -> None:
    unit = UnitSystem(system).unit_for(of)
    assert unit.dimension == of
    assert parse_unit(unit.text) == unit
    assert not unit.absolute


@pytest.mark.parametrize("system", SYSTEMS)
def test_every_dimension_within_reach_has_a_unit(system: str) -> None:
    for corner in itertools.product((-1, 0, 1), repeat=4):
        of = Dimension(*(F(MOST_POWER * e) for e in corner))
        assert of.is_within_reach
        assert UnitSystem(system).unit_for(of).dimension == of


# --- a sheet's own choices ----------------------------------------------------------------------------------


def test_a_mapping_overrides_by_kind() -> None:
    system = UnitSystem("SI", (("length", "m"), ("stress", "N/mm^2"), ("second_moment", "cm^4")))
    assert [system.unit_for(of).text for of in (d.LENGTH, d.STRESS, d.FOURTH, d.AREA, d.FORCE)] == [
        "m", "N/mm^2", "cm^4", "mm^2", "kN",
    ]  # fmt: skip


OWN = {
    "force": ("kgf", d.FORCE), "length": ("ft-in 1/16", d.LENGTH), "stress": ("kgf/cm^2", d.STRESS),
    "pressure": ("bar", d.STRESS), "moment": ("kgf*cm", d.MOMENT), "area": ("cm^2", d.AREA),
    "mass": ("tonne", d.MASS), "section_modulus": ("cm^3", d.VOLUME), "second_moment": ("cm^4", d.FOURTH),
    "line_load": ("kgf/m", d.LINE_LOAD), "temperature": ("degF", d.TEMPERATURE),
    "power": ("hp_metric", d.POWER), "energy": ("kJ", d.MOMENT),
}  # fmt: skip


def test_the_kinds_are_those_of_the_contract() -> None:
    assert set(KINDS) == set(OWN)
    assert all(KINDS[kind] == of for kind, (_, of) in OWN.items())


@pytest.mark.parametrize("kind", [kind for kind in OWN if kind not in ("energy", "temperature")])
def test_each_kind_can_be_chosen(kind: str) -> None:
    unit, of = OWN[kind]
    assert UnitSystem("SI", ((kind, unit),)).unit_for(of).text == unit


def test_an_energy_never_turns_a_torque_into_joules() -> None:
    assert UnitSystem("SI", (("energy", "kJ"),)).unit_for(d.MOMENT).text == "kN*m"


@pytest.mark.parametrize(("scale", "step"), [("degC", "K"), ("degF", "delta_degF"), ("K", "K")])
def test_a_scale_of_temperature_goes_with_its_steps(scale: str, step: str) -> None:
    system = UnitSystem("SI", (("temperature", scale),))
    assert system.unit_for(d.TEMPERATURE, absolute=True).text == scale
    assert system.unit_for(d.TEMPERATURE).text == step


@patient
@given(within, st.lists(st.sampled_from(sorted(OWN)), unique=True), st.sampled_from(sorted(SYSTEMS)))
def test_own_choices_never_break_a_product(of: Dimension, kinds: list[str], name: str) -> None:
    system = UnitSystem(name, tuple((kind, OWN[kind][0]) for kind in kinds))
    assert system.unit_for(of).dimension == of


# --- on a sheet ---------------------------------------------------------------------------------------------

SHEET = """---
title: Kinds
units: {system}
---

    P = 2 kN -- load
    a = 3 m -- length
    t = 4 s -- time
    M = P*a
    w = P/a
    sigma = P/a^2
    A = a*a
    W = a*A
    I = A*A
    F = 2*P
    l = 2*a
    J = P*t
    K = sigma*a^0.5
    c = a/P
"""


@pytest.mark.parametrize(
    ("system", "units"),
    [
        ("SI", "kN*m kN/m MPa mm^2 mm^3 mm^4 kN mm kN*s MPa*mm^0.5 mm/kN"),
        ("SI machine", "N*m N/mm MPa mm^2 mm^3 mm^4 N mm N*s MPa*mm^0.5 mm/N"),
        ("SI pressure", "N*m N/mm MPa mm^2 mm^3 mm^4 N mm N*s MPa*mm^0.5 mm/N"),
        ("US", "kip*ft kip/ft ksi in^2 in^3 in^4 kip in kip*s ksi*in^0.5 in/kip"),
        ("US machine", "lbf*in lbf/in psi in^2 in^3 in^4 lbf in lbf*s psi*in^0.5 in/lbf"),
    ],
)
def test_results_without_a_unit_of_their_own(system: str, units: str) -> None:
    trace = loadpath.evaluate(loadpath.read_text(SHEET.format(system=system)))
    assert [f for f in trace.findings if f.severity == "error"] == []
    names = ("M", "w", "sigma", "A", "W", "I", "F", "l", "J", "K", "c")
    assert " ".join(trace[name].unit.text for name in names) == units
    assert trace["K"].si == pytest.approx(2000 / 9 * 3**0.5, rel=1e-15)
    assert trace["c"].value == pytest.approx(parse_unit(units.split()[-1]).from_si(3 / 2000), rel=1e-14)
