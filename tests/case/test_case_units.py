"""Units: exact factors, mistakes, and numbers for people that read back unchanged. Factors: SI brochure, from memory."""

import math

import pytest

from swe.case import units
from swe.case.units import DIMENSIONS, UnitMistake, parse, show


@pytest.mark.parametrize(
    ("text", "dimension", "value"),
    [
        ("4 km", units.LENGTH, 4000.0),
        ("4km", units.LENGTH, 4000.0),
        (" 0.1 mm ", units.LENGTH, 0.0001),
        ("0.3 mm", units.LENGTH, 0.0003),
        ("2.5e3 cm", units.LENGTH, 25.0),
        ("1 nmi", units.LENGTH, 1852.0),
        ("-.5 m", units.LENGTH, -0.5),
        ("90 s", units.TIME, 90.0),
        ("1.5 min", units.TIME, 90.0),
        ("6 h", units.TIME, 21600.0),
        ("10 d", units.TIME, 864000.0),
        ("54 deg", units.ANGLE, 54.0),
        ("1 rad", units.ANGLE, math.degrees(1.0)),
        ("36 km/h", units.SPEED, 10.0),
        ("1 kn", units.SPEED, 1852.0 / 3600.0),
        ("25 cm/s", units.SPEED, 0.25),
        ("981 cm/s2", units.ACCELERATION, 9.81),
        ("0.2 Pa", units.STRESS, 0.2),
        ("0.2 N/m2", units.STRESS, 0.2),
        ("0.002 hPa", units.STRESS, 0.2),
        ("0.002 mbar", units.STRESS, 0.2),
        ("1.025 g/cm3", units.DENSITY, 1025.0),
        ("10 m2/s", units.VISCOSITY, 10.0),
    ],
)
def test_quantities_become_base_units_without_round_off(text, dimension, value):
    assert parse(text, dimension) == value


@pytest.mark.parametrize("spelling", ["m2/s", "m^2/s", "m**2/s", "m2 s-1", "m² s-1", "m2 / s"])
def test_powers_are_spelt_in_several_ways(spelling):
    assert parse(f"10 {spelling}", units.VISCOSITY) == 10.0


@pytest.mark.parametrize(
    ("text", "dimension", "what", "hint"),
    [
        ("4 kms", units.LENGTH, 'unknown unit "kms"', 'did you mean "4 km"?'),
        ("4 KM", units.LENGTH, 'unknown unit "KM"', 'did you mean "4 km"?'),
        ("4 metres", units.LENGTH, 'unknown unit "metres"', 'did you mean "4 m"?'),
        ("3 hours", units.TIME, 'unknown unit "hours"', 'did you mean "3 h"?'),
        ("54°", units.ANGLE, 'unknown unit "°"', 'did you mean "54 deg"?'),
        ("4 furlong", units.LENGTH, 'unknown unit "furlong"', ""),
        ("4 km", units.TIME, '"km" is a unit of length, not of time', ""),
        ("2 hours", units.LENGTH, '"hours" is a unit of time, not of length', ""),
        ("4 m s-1", units.LENGTH, '"m s-1" is a unit of speed, not of length', ""),
        ("4", units.LENGTH, "no unit behind the number", '"4 m", or 4 without quotes'),
        ("4,5 km", units.LENGTH, "the number is not plain", "digits with a decimal point, no commas or spaces within"),
        ("4 000 m", units.LENGTH, "the number is not plain", "digits with a decimal point, no commas or spaces within"),
        ("4_000 m", units.LENGTH, "the number is not plain", "digits with a decimal point, no commas or spaces within"),
        ("four km", units.LENGTH, "no number and unit of length", 'write a number, then a unit: "1 m"'),
        ("nan m", units.LENGTH, "no number and unit of length", 'write a number, then a unit: "1 m"'),
        ("", units.TIME, "no number and unit of time", "the text is empty"),
    ],
)
def test_what_is_not_a_quantity_is_explained(text, dimension, what, hint):
    with pytest.raises(UnitMistake) as caught:
        parse(text, dimension)
    assert (str(caught.value), caught.value.hint) == (what, hint)


@pytest.mark.parametrize(
    ("value", "dimension", "text"),
    [
        (4000.0, units.LENGTH, "4 km"),
        (20.0, units.LENGTH, "20 m"),
        (0.2, units.LENGTH, "0.2 m"),
        (1e-4, units.LENGTH, "0.1 mm"),
        (0.0, units.LENGTH, "0 m"),
        (12345.678, units.LENGTH, "12345.678 m"),
        (1.0 / 3.0, units.LENGTH, "0.3333333333333333 m"),
        (120.0, units.TIME, "2 min"),
        (90.0, units.TIME, "1.5 min"),
        (864000.0, units.TIME, "10 d"),
        (100000.0, units.TIME, "100000 s"),
        (1e-5, units.VISCOSITY, "1e-5 m2/s"),
    ],
)
def test_numbers_for_people(value, dimension, text):
    assert show(value, dimension) == text


@pytest.mark.parametrize("dimension", DIMENSIONS, ids=lambda dimension: dimension.name)
def test_shown_quantities_read_back_as_the_same_double(dimension):
    mantissas = [1.0, 1.2345678901234567, 2.0 / 3.0, 5.0, 9.999999999999998]
    for value in [sign * m * 10.0**power for sign in (1, -1) for m in mantissas for power in range(-9, 10)]:
        assert parse(show(value, dimension), dimension) == value


@pytest.mark.parametrize("dimension", DIMENSIONS, ids=lambda dimension: dimension.name)
def test_the_base_unit_has_factor_one(dimension):
    assert dimension.factors[dimension.base] == 1
    assert all(unit in dimension.factors for unit, _ in dimension.shown)
