"""V and V + u at dates against two independent libraries."""

from datetime import datetime

import numpy as np
import pytest
import pyTMD.constituents
from tide_libraries import MJD_2000, ORDINAL_2000, SHARED, THEIRS, apart
from utide.harmonics import FUV

from swe.constants import DEGREE
from swe.tide.arguments import Arguments
from swe.tide.astronomy import days_since_2000, terrestrial_offset
from swe.tide.constituents import TABLE, constituents

MOMENTS = [
    datetime(1983, 1, 1),
    datetime(1992, 7, 1, 13, 30),
    datetime(2012, 2, 29, 6),
    datetime(2031, 3, 1),
    datetime(2050, 11, 9, 23),
]
DAY = 86400.0


@pytest.mark.parametrize("moment", MOMENTS, ids=str)
def test_utide(moment):
    """utide 0.4, fed with terrestrial time as its polynomials ask for: V of all shared constituents within 0.01 degrees.

    Times the cycles per day above the semidiurnal ones, which add up errors of their parts.
    """
    days = days_since_2000(moment)
    late = terrestrial_offset(days) / DAY
    arguments = Arguments.of(constituents(SHARED))
    there = ORDINAL_2000 + days
    _, _, v = FUV(there + late, there, np.array([THEIRS[name] for name in SHARED]), 45.0, [False] * 4)
    theirs = 360.0 * (v[0] - arguments.doodson[:, 0] * late)
    allowed = 0.01 * np.maximum(1.0, arguments.doodson[:, 0] / 2)
    assert np.all(np.abs(apart(arguments.astronomical(days), theirs)) < allowed)


@pytest.mark.parametrize("moment", MOMENTS, ids=str)
def test_utide_as_it_comes(moment):
    """Fed with UTC it lags by one minute of the moon's way: V within 0.03 degrees for the main constituents."""
    names = ["M2", "S2", "N2", "K2", "K1", "O1", "P1", "Q1", "Mf", "Mm"]
    days = days_since_2000(moment)
    there = ORDINAL_2000 + days
    _, _, v = FUV(there, there, np.array([THEIRS[name] for name in names]), 45.0, [False] * 4)
    off = np.abs(apart(Arguments.of(constituents(names)).astronomical(days), 360.0 * v[0]))
    assert np.all(off < 0.035) and off.max() > 0.01


PYTMD = [
    "M2",
    "S2",
    "N2",
    "K2",
    "K1",
    "O1",
    "P1",
    "Q1",
    "Mf",
    "Mm",
    "2N2",
    "mu2",
    "nu2",
    "L2",
    "T2",
    "J1",
    "OO1",
    "rho1",
    "2Q1",
    "Ssa",
]
PYTMD += ["M4", "MS4", "MN4", "M6", "M8", "MK3", "2SM2", "MSf"]


@pytest.mark.parametrize("moment", MOMENTS, ids=str)
def test_pytmd(moment):
    """pyTMD 3.0.9 with its terrestrial time: V within 0.01 degrees."""
    days = days_since_2000(moment)
    late = terrestrial_offset(days) / DAY
    names = [name.lower() for name in PYTMD]
    _, _, v = pyTMD.constituents.arguments(np.array([days + MJD_2000]), names, deltat=late, corrections="GOT")
    ours = Arguments.of(constituents(PYTMD)).astronomical(days)
    assert np.abs(apart(ours, v[0])).max() < 0.01


def test_v_runs_at_the_speed():
    """Over 30 days V gains speed times time; by definition, on the polynomials' slight curvature."""
    arguments = Arguments.of(list(TABLE.values()))
    days = days_since_2000(datetime(2031, 3, 1))
    gain = arguments.astronomical(days + 30.0) - arguments.astronomical(days)
    speeds = np.array([constituent.speed for constituent in TABLE.values()])
    assert np.abs(apart(gain, 720.0 * speeds)).max() < 1e-3


def test_many_times_equal_single_ones():
    arguments = Arguments.of(constituents(["M2", "K1", "Mf", "2SM2"]))
    days = np.array([-3000.2, 0.0, 11383.5])
    many = arguments.at(days)
    assert many.shape == (4, 3)
    for k, day in enumerate(days):
        assert np.allclose(many[:, k], arguments.at(day), rtol=1e-14)
        f, u = arguments.nodal(day)
        assert np.allclose(many[:, k], f * np.exp(1j * (u + DEGREE * arguments.astronomical(day))), rtol=1e-12)
