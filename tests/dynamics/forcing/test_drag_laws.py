"""Drag coefficients of the wind, against published figures.

Sources: Large & Pond 1981 (J. Phys. Oceanogr. 11, 324), Garratt 1977 (Mon. Wea. Rev. 105, 915); Wu 1982, Smith 1980 and the
constants of Smith 1988 from memory. Figures of Smith 1988 were computed by an independent iteration.
"""

import numpy as np
import pytest

from swe.constants import AIR_DENSITY, GRAVITY
from swe.dynamics.forcing.drag_laws import LAWS, Capped, constant, drag_law, surface_stress
from swe.errors import InputError

FIGURES = {  # wind speed, m s-1: 1000 times the coefficient
    "large-pond-1981": {4: 1.200, 10: 1.200, 11: 1.205, 20: 1.790, 25: 2.115},
    "garratt-1977": {4: 1.018, 10: 1.420, 20: 2.090, 21: 2.157},
    "wu-1982": {0: 0.800, 10: 1.450, 20: 2.100, 40: 3.400},
    "smith-1980": {6: 0.988, 10: 1.240, 22: 1.996},
    "smith-1988": {5: 1.030, 10: 1.297, 15: 1.557, 20: 1.803, 25: 2.043},
}


@pytest.mark.parametrize("name", LAWS)
def test_published_figures(name):
    for speed, expected in FIGURES[name].items():
        assert 1e3 * drag_law(name).coefficient(np.array([speed])) == pytest.approx(expected, abs=1e-3)


@pytest.mark.parametrize("name", LAWS)
def test_a_law_has_no_step_and_grows_with_the_wind_where_it_was_measured(name):
    law = drag_law(name)
    speed = np.linspace(law.lowest, law.highest, 20001)
    change = np.diff(law.coefficient(speed))
    assert np.abs(change).max() < 2e-6
    assert change[speed[1:] > 4].min() > -1e-15 and law.coefficient(speed).min() > 0


def test_implicit_law_solves_its_equation():
    """C_d = (0.4 / ln(10/z))^2 with z = 0.011 s^2/g + 0.11 nu/s and s = U C_d^(1/2), by substitution."""
    speed = np.array([2.05, 3.33, 12.34, 44.4])
    friction = speed * np.sqrt(drag_law("smith-1988").coefficient(speed))
    length = 0.011 * friction**2 / GRAVITY + 0.11 * 1.42e-5 / friction
    assert friction == pytest.approx(0.4 * speed / np.log(10.0 / length), rel=1e-4)


def test_a_calm_has_no_stress():
    for law in (*LAWS.values(), constant(1e-3)):
        assert not surface_stress(law, AIR_DENSITY, np.zeros((2, 3))).any()


def test_stress_points_with_the_wind():
    """10 m/s with 0.0013 and 1.25 kg m-3 make 0.1625 Pa."""
    wind = np.array([[6.0, -10.0, 0.0], [8.0, 0.0, 0.0]])
    stress = surface_stress(constant(1.3e-3), 1.25, wind)
    assert stress == pytest.approx(0.01625 * wind, rel=1e-14)
    assert np.hypot(*stress)[:2] == pytest.approx(0.1625)


def test_laws_differ_by_a_fifth_in_stress():
    wind = np.array([[10.0], [0.0]])
    by_law = {name: surface_stress(law, 1.2, wind)[0, 0] for name, law in LAWS.items()}
    assert by_law["wu-1982"] / by_law["large-pond-1981"] == pytest.approx(1.45 / 1.2)


def test_a_cap_holds_the_coefficient():
    law = drag_law("wu-1982", 2.5e-3)
    assert isinstance(law, Capped) and law.source.endswith("at most 0.0025")
    assert law.coefficient(np.array([10.0, 26.0, 27.0, 60.0])) == pytest.approx([1.45e-3, 2.49e-3, 2.5e-3, 2.5e-3])
    assert (law.lowest, law.highest) == (0.0, 40.0)


def test_an_unknown_law_is_refused():
    with pytest.raises(InputError, match="'wu': unknown; allowed are large-pond-1981, .*smith-1988"):
        drag_law("wu")
