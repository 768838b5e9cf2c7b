"""Mean longitudes of moon and sun at a date, and their rates.

    tau = 15 deg x (hours UTC since midnight) + h - s       mean lunar time, from the moon's lower transit at Greenwich
    s   mean longitude of the moon                          p   longitude of the lunar perigee
    h   mean longitude of the sun                           N'  minus the longitude of the moon's ascending node
                                                            p'  longitude of the solar perigee

s to p' are polynomials in centuries of terrestrial time (TT) since 2000-01-01 12:00, on the mean equinox of date; degrees.
Source: Meeus 1998, Astronomical Algorithms, 2nd ed., eqs. 25.2, 47.1, 47.7 and chapters 22, 25; perigee of the sun: Simon et
al. 1994, Astron. Astrophys. 282, 663.

    TT = UTC + 32.184 s + (leap seconds, IERS Bulletin C)

The moon moves 0.01 deg in 65 s, which is what this correction amounts to. UTC stands for UT1; they differ by less than a
second, 0.004 deg of tau. Before 1972 the first step of leap seconds is kept (within 45 s back to 1900: 0.007 deg of s), after
the last one known that one.
"""

from __future__ import annotations

from datetime import UTC, datetime, timedelta

import numpy as np

from swe.errors import InputError

NAMES = ("tau", "s", "h", "p", "N'", "p'")
"""The arguments, in the order of Doodson numbers."""

EPOCH = datetime(2000, 1, 1, 12)
DAYS_PER_CENTURY = 36525.0
YEARS = (1900, 2100)
"""First and last year: beyond them the difference between TT and UTC is not known to a minute or so."""

# Rows: s, h, p, N', p'. Columns: powers 0 to 3 of centuries TT. Degrees.
POLYNOMIALS = np.array(
    [
        [218.3164477, 481267.88123421, -0.0015786, 1.0 / 538841.0],
        [280.46646, 36000.76983, 0.0003032, 0.0],
        [83.3532465, 4069.0137287, -0.0103200, -1.0 / 80053.0],
        [-125.0445479, 1934.1362891, -0.0020754, -1.0 / 467441.0],
        [282.93735, 1.71946, 0.00046, 0.0],
    ]
)

ATOMIC_TO_TERRESTRIAL = 32.184
"""TT minus international atomic time, s; definition."""

# TAI minus UTC rose by one second at each of these dates, from 10 s on the first. Source: IERS Bulletin C.
LEAP_DATES = (
    "1972-01-01 1972-07-01 1973-01-01 1974-01-01 1975-01-01 1976-01-01 1977-01-01 1978-01-01 1979-01-01 1980-01-01 "
    "1981-07-01 1982-07-01 1983-07-01 1985-07-01 1988-01-01 1990-01-01 1991-01-01 1992-07-01 1993-07-01 1994-07-01 "
    "1996-01-01 1997-07-01 1999-01-01 2006-01-01 2009-01-01 2012-07-01 2015-07-01 2017-01-01"
).split()
FIRST_LEAP = 10.0
_LEAP_DAYS = np.array([(datetime.fromisoformat(date) - EPOCH) / timedelta(days=1) for date in LEAP_DATES])


def days_since_2000(moment: datetime) -> float:
    """Return days of 86400 s of UTC since 2000-01-01 12:00; a moment without zone is UTC. Not collective.

    Raises InputError outside the years 1900 to 2100.
    """
    if not YEARS[0] <= moment.year <= YEARS[1]:
        raise InputError(f"tide: the year {moment.year} is outside {YEARS[0]} to {YEARS[1]}; give a date within them")
    if moment.tzinfo is not None:
        moment = moment.astimezone(UTC).replace(tzinfo=None)
    return (moment - EPOCH) / timedelta(days=1)


def terrestrial_offset(days):
    """Return TT - UTC, s, at days of UTC since 2000-01-01 12:00; any shape. Not collective."""
    steps = np.maximum(np.searchsorted(_LEAP_DAYS, days, side="right") - 1, 0)
    return ATOMIC_TO_TERRESTRIAL + FIRST_LEAP + steps


def mean_longitudes(days) -> np.ndarray:
    """Return tau, s, h, p, N', p' in degrees, 0 to 360, at days of UTC since 2000-01-01 12:00. Not collective.

    days: any shape; returns (6, *shape).
    """
    days = np.asarray(days, dtype=float)
    centuries = (days + terrestrial_offset(days) / 86400.0) / DAYS_PER_CENTURY
    slow = np.polynomial.polynomial.polyval(centuries, POLYNOMIALS.T)
    tau = 360.0 * np.mod(days + 0.5, 1.0) + slow[1] - slow[0]
    return np.mod(np.concatenate([tau[np.newaxis], slow]), 360.0)


def rates() -> np.ndarray:
    """Return the rates of tau, s, h, p, N', p' at 2000-01-01 12:00, (6,), degrees per hour. Not collective."""
    slow = POLYNOMIALS[:, 1] / (24.0 * DAYS_PER_CENTURY)
    return np.array([15.0 + slow[1] - slow[0], *slow])
