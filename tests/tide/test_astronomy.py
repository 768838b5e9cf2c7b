"""Mean longitudes, their rates, and the time scales."""

from datetime import UTC, datetime, timedelta, timezone
from importlib.util import find_spec
from pathlib import Path

import numpy as np
import pytest
from tide_libraries import ORDINAL_2000, apart
from utide.astronomy import ut_astron

from swe.errors import InputError
from swe.tide import astronomy
from swe.tide.astronomy import days_since_2000, mean_longitudes, rates, terrestrial_offset

MOMENTS = [datetime(year, 1 + year % 12, 5, year % 24, 17) for year in range(1901, 2100, 9)]


@pytest.mark.parametrize("moment", MOMENTS, ids=str)
def test_longitudes_of_an_independent_library(moment):
    """utide 0.4: other polynomials (Explanatory Supplement 1961), to be fed with terrestrial time; within 0.005 degrees."""
    days = days_since_2000(moment)
    late = terrestrial_offset(days) / 86400.0
    theirs = 360.0 * ut_astron(ORDINAL_2000 + days + late)[0][:, 0]
    theirs[0] -= 360.0 * late  # the day's hours in tau are UTC
    assert np.abs(apart(mean_longitudes(days), theirs)).max() < 0.005


def test_longitudes_of_an_almanac():
    """Mean longitude of the moon 134.290182 deg at 1992-04-12 00:00 TT (Meeus 1998, example 47.a)."""
    days = days_since_2000(datetime(1992, 4, 12)) - terrestrial_offset(days_since_2000(datetime(1992, 4, 12))) / 86400.0
    assert mean_longitudes(days)[1] == pytest.approx(134.290182, abs=1e-5)


def test_rates():
    """Degrees per day, as in two tidal libraries."""
    assert 24.0 * rates()[1:5] == pytest.approx([13.17639648, 0.98564734, 0.11140353, 0.05295376], abs=3e-8)
    assert 24.0 * rates()[0] == pytest.approx(360.0 - 13.17639648 + 0.98564734, abs=3e-8)


def test_rates_are_the_slopes_of_the_longitudes():
    slope = apart(mean_longitudes(5.0), mean_longitudes(-5.0))
    assert np.abs(apart(slope, 240.0 * rates())).max() < 1e-7


def test_arrays_equal_single_moments():
    days = np.array([[-20000.3, 0.0], [4321.25, 11000.9]])
    many = mean_longitudes(days)
    assert many.shape == (6, 2, 2)
    for place in np.ndindex(2, 2):
        assert np.array_equal(many[:, *place], mean_longitudes(days[place]))


def test_leap_seconds():
    """Against the list of the time library timescale 0.1.3 (IERS)."""
    rows = (Path(find_spec("timescale").submodule_search_locations[0]) / "data" / "leap-seconds.list").read_text().splitlines()
    rows = [row.split()[:2] for row in rows if row and not row.startswith("#")]
    theirs = [(datetime(1900, 1, 1) + timedelta(seconds=int(since)), float(count)) for since, count in rows]
    assert [datetime.fromisoformat(date) for date in astronomy.LEAP_DATES] == [date for date, _ in theirs]
    for date, count in theirs:
        assert terrestrial_offset(days_since_2000(date)) == 32.184 + count
    assert terrestrial_offset(days_since_2000(datetime(1960, 1, 1))) == 42.184


def test_zones():
    moment = datetime(2031, 3, 1, 6)
    there = moment.replace(tzinfo=UTC).astimezone(timezone(timedelta(hours=-7)))
    assert days_since_2000(there) == days_since_2000(moment) == days_since_2000(datetime(2031, 3, 1)) + 0.25


def test_years_out_of_range():
    with pytest.raises(InputError, match="the year 203 is outside 1900 to 2100; give a date within them"):
        days_since_2000(datetime(203, 3, 1))
