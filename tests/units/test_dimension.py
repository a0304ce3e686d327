"""Dimensions as exponents, and their names in words."""

from __future__ import annotations

import itertools
from fractions import Fraction as F

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from loadpath.units import PLAIN, say
from loadpath.units import dimension as d
from loadpath.units.dimension import Dimension

patient = settings(deadline=None)

exponents = st.fractions(-6, 6, max_denominator=12)
dimensions = st.builds(Dimension, exponents, exponents, exponents, exponents)


@patient
@given(dimensions, dimensions)
def test_products_and_quotients_undo_each_other(a: Dimension, b: Dimension) -> None:
    assert a.times(b).over(b) == a
    assert a.over(a) == PLAIN
    assert a.times(b) == b.times(a)


@patient
@given(dimensions, st.fractions(-5, 5, max_denominator=9).filter(bool))
def test_a_root_undoes_its_power(a: Dimension, power: F) -> None:
    assert a.power(power).power(1 / power) == a


def test_only_a_plain_number_is_plain() -> None:
    assert PLAIN.is_plain
    assert d.LENGTH.over(d.LENGTH).is_plain
    assert not d.LENGTH.is_plain


@pytest.mark.parametrize(
    ("made", "known"),
    [
        (d.FORCE.over(d.AREA), d.STRESS),
        (d.FORCE.times(d.LENGTH), d.MOMENT),
        (d.MOMENT.over(d.TIME), d.POWER),
        (d.FORCE.over(d.LENGTH), d.LINE_LOAD),
        (d.MASS.times(d.ACCELERATION), d.FORCE),
        (d.FORCE.over(d.VOLUME), d.UNIT_WEIGHT),
        (d.STRESS.times(d.FOURTH), d.BENDING_STIFFNESS),
        (d.MASS.over(d.VOLUME), d.DENSITY),
        (d.PLAIN.over(d.TIME), d.FREQUENCY),
    ],
)
def test_mechanics(made: Dimension, known: Dimension) -> None:
    assert made == known


@pytest.mark.parametrize(
    ("of", "words"),
    [
        (PLAIN, "a plain number"),
        (d.LENGTH, "length"),
        (d.FORCE, "force"),
        (d.STRESS, "stress"),
        (d.MOMENT, "moment"),
        (d.VOLUME, "volume or section modulus"),
        (d.FORCE.times(d.TIME), "force*time"),
        (d.FORCE.over(d.TEMPERATURE), "force/temperature"),
        (d.STRESS.over(d.TEMPERATURE), "force/(length^2*temperature)"),
        (d.LENGTH.over(d.FORCE), "length/force"),
        (d.STRESS.times(d.LENGTH.power(F(1, 2))), "force/length^1.5"),
        (d.LENGTH.power(F(1, 3)), "length^(1/3)"),
        (d.FREQUENCY.power(F(2)), "1/time^2"),
        (d.MASS.times(d.AREA), "mass*length^2"),
        (d.LENGTH.power(F(-1)), "1/length"),
    ],
)
def test_in_words(of: Dimension, words: str) -> None:
    assert say(of) == words


def test_two_dimensions_of_mechanics_never_share_their_words() -> None:
    ranges = (range(-4, 7), range(-1, 3), range(-4, 3), range(-1, 2))
    every = [d.dimension(*powers) for powers in itertools.product(*ranges)]
    assert len({say(of) for of in every}) == len(every)


def test_reach() -> None:
    assert Dimension(F(24), F(1, 1000)).is_within_reach
    assert not Dimension(F(25)).is_within_reach
    assert not Dimension(F(1, 1001)).is_within_reach
