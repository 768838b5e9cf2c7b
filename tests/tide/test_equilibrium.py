"""The equilibrium tide: the formula, the shapes, and the moon and sun themselves."""

from dataclasses import replace
from datetime import datetime

import numpy as np
import pytest
import pyTMD.astro
import tide_catalogues
from tide_libraries import MJD_2000

from swe.constants import DEGREE
from swe.errors import InputError
from swe.tide.arguments import Arguments
from swe.tide.astronomy import days_since_2000, mean_longitudes, terrestrial_offset
from swe.tide.constituents import TABLE, constituents
from swe.tide.equilibrium import EquilibriumTide, fields

START = datetime(2031, 3, 1, 6)
ALL = [constituent.name for constituent in TABLE.values() if constituent.amplitude]
MAIN = ["M2", "S2", "N2", "K2", "K1", "O1", "P1", "Q1", "Mf", "Mm"]
RNG = np.random.default_rng(11)
LON, LAT = RNG.uniform(-180.0, 180.0, 50), RNG.uniform(-90.0, 90.0, 50)


def shape(species, lat):
    """The published shapes, written out."""
    phi = np.radians(lat)
    return [0.5 - 1.5 * np.sin(phi) ** 2, np.sin(2 * phi), np.cos(phi) ** 2][species]


@pytest.mark.parametrize("names", [[name] for name in MAIN] + [ALL], ids=lambda names: "+".join(names)[:20])
def test_the_formula(names):
    """gamma A f shape(lat) cos(V + u + species lon), summed in a plain loop; round-off."""
    tide = EquilibriumTide.at(LON, LAT, names, START, 0.0)
    for time in (0.0, 5432.1, 30 * 86400.0):
        days = days_since_2000(START) + time / 86400.0
        expected = np.zeros(50)
        for constituent in constituents(names):
            one = Arguments.of([constituent])
            f, u = one.nodal(days)
            phase = np.radians(one.astronomical(days)[0] + constituent.species * LON) + u[0]
            size = constituent.love_factor * constituent.amplitude * f[0]
            expected += size * shape(constituent.species, LAT) * np.cos(phase)
        assert np.abs(tide.level(time) - expected).max() < 1e-13


@pytest.mark.parametrize("row", range(5))
def test_shapes_have_no_mean_over_the_sphere(row):
    """Gauss-Legendre in sin(lat), equal steps in lon: exact for these."""
    z, weight = np.polynomial.legendre.leggauss(12)
    lon, lat = np.meshgrid(np.arange(0.0, 360.0, 30.0), np.degrees(np.arcsin(z)))
    field = fields(lon.ravel(), lat.ravel())[row].reshape(lon.shape)
    assert abs((weight @ field).sum()) < 1e-13 < np.abs(field).max()


def test_noon_at_the_june_solstice():
    """The sun at its highest over the northern tropic lifts the sea there: S2, K1 and P1 all near their crest.

    Against a noon or midnight mix-up, which would turn the sign of K1 and P1. By geometry.
    """
    for name in ("S2", "K1", "P1"):
        tide = EquilibriumTide.at([0.0], [23.4], [name], datetime(2031, 6, 21, 12), 0.0)
        crest = TABLE[name].amplitude * TABLE[name].love_factor * shape(TABLE[name].species, 23.4)
        f = Arguments.of([TABLE[name]]).nodal(days_since_2000(datetime(2031, 6, 21, 12)))[0][0]
        assert tide.level(0.0)[0] > 0.95 * f * crest


def attraction(days, lon, lat):
    """Level of the degree-2 potential of moon and sun in m, from their places: eta = (m/M) a^4/d^3 P2(cos zenith distance).

    Places in the sky: pyTMD 3.0.9 (series of Meeus 1998). Sidereal time of Greenwich: Meeus 1998, eq. 12.4.
    """
    sky = pyTMD.astro
    now = np.array([days + terrestrial_offset(days) / 86400.0 + MJD_2000])
    moon = sky.lunar_longitude(now), sky.lunar_latitude(now), sky.lunar_distance(now), 0.0123000371
    sun = sky.solar_longitude(now), np.zeros(1), sky.solar_distance(now), 332946.05
    tilt = sky.mean_obliquity(now)
    sidereal = DEGREE * (280.46061837 + 360.98564736629 * days)
    radius, up = 6378137.0, np.array([np.cos(lat) * np.cos(lon), np.cos(lat) * np.sin(lon), np.sin(lat)])
    level = 0.0
    for along, above, distance, mass in (moon, sun):
        x, y, z = np.cos(above) * np.cos(along), np.cos(above) * np.sin(along), np.sin(above)
        y, z = y * np.cos(tilt) - z * np.sin(tilt), y * np.sin(tilt) + z * np.cos(tilt)
        turned = np.array([x * np.cos(sidereal) + y * np.sin(sidereal), y * np.cos(sidereal) - x * np.sin(sidereal), z])
        level = level + mass * radius**4 / distance**3 * (1.5 * (up.T @ turned)[:, 0] ** 2 - 0.5)
    return level


def test_moon_and_sun_themselves():
    """All constituents together follow the attraction of the two bodies at their true places, on an undeformed earth.

    Left over are lines below 1.3 mm, degree 3 and the series' own errors: a standard deviation of 2 % at the most, where
    a wrong sign of any main constituent leaves 10 % or more. The constant and the 18.6-year line belong to no constituent.
    """
    names = constituents(ALL)
    tide = EquilibriumTide.at(LON, LAT, ALL, START, 0.0)
    stiff = np.zeros((3, len(names)))
    for k, constituent in enumerate(names):
        stiff[constituent.species, k] = constituent.amplitude
    tide = replace(tide, weights=stiff)
    table = tide_catalogues.lines("hw1995")
    ours, theirs = [], []
    for when in np.arange(0.0, 400.0, 3.37):
        days = days_since_2000(datetime(2009, 5, 1)) + when
        node = DEGREE * mean_longitudes(days)[4]
        still = table[0, 0, 0, 0, 0, 0] + table[0, 0, 0, 0, 1, 0] * np.cos(node) + table[0, 0, 0, 0, 2, 0] * np.cos(2 * node)
        ours.append(replace(tide, start=days).level(0.0) - still * tide_catalogues.SIZE[0] * shape(0, LAT))
        theirs.append(attraction(days, DEGREE * LON, DEGREE * LAT))
    ours, theirs = np.array(ours), np.array(theirs)
    left = np.std(ours - theirs) / np.std(theirs)
    print(f"left over {left:.4f}, worst {np.abs(ours - theirs).max():.4f} m of {np.abs(theirs).max():.3f} m")
    assert left < 0.02


def test_ramp():
    """Nothing before the start, half at half time, all at the end; the slope vanishes at both ends."""
    full = EquilibriumTide.at(LON, LAT, MAIN, START, 0.0)
    slow = EquilibriumTide.at(LON, LAT, MAIN, START, 86400.0)
    assert not slow.level(-5.0).any() and not slow.level(0.0).any()
    for time, part in ((43200.0, 0.5), (86400.0, 1.0), (1e6, 1.0)):
        assert np.allclose(slow.level(time), part * full.level(time), rtol=1e-12)
    assert np.abs(slow.level(86.4)).max() < 3e-6 * np.abs(full.level(86.4)).max()


def test_constituent_without_equilibrium_tide():
    with pytest.raises(InputError, match="equilibrium tide: M4 has none; leave it to the open boundaries"):
        EquilibriumTide.at(LON, LAT, ["M2", "M4"], START, 0.0)
