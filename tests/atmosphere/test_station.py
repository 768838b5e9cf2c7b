"""The weather of one station: what is read, and every sentence that refuses a table.

Source: a wind from direction d blows towards d + 180 degrees; linear interpolation of a linear record is exact.
"""

from datetime import UTC, datetime

import numpy as np
import pytest

from swe.atmosphere.in_time import InTime
from swe.atmosphere.period import Period
from swe.atmosphere.record import Uniform
from swe.atmosphere.station import read_station
from swe.errors import InputError

PERIOD = Period(datetime(2031, 3, 1, tzinfo=UTC), 2 * 3600.0)
PLACES = np.zeros((3, 2))


def table(tmp_path, *lines):
    path = tmp_path / "s.csv"
    path.write_text("\n".join(lines) + "\n")
    return path


def hourly(header, *values):
    """Lines at 0, 1, 2, ... h."""
    return header, *(f"2031-03-01T{hour:02d}:00Z,{value}" for hour, value in enumerate(values))


def refused(path):
    with pytest.raises(InputError) as caught:
        read_station(path, PERIOD)
    assert str(caught.value).startswith(str(path)) and "\n" not in str(caught.value)
    return str(caught.value)


@pytest.mark.parametrize(
    "direction, towards", [(0, (0, -1)), (90, (-1, 0)), (180, (0, 1)), (225, (0.5**0.5, 0.5**0.5)), (-90, (1, 0)), (360, (0, -1))]
)
def test_direction_is_where_the_wind_comes_from(tmp_path, direction, towards):
    station = read_station(table(tmp_path, *hourly("time,speed,from", *[f"10,{direction}"] * 3)), PERIOD)
    assert station.pressure is None
    values = InTime(station.wind, PLACES)(1800.0)
    assert values.shape == (2, 3)
    assert values == pytest.approx(10 * np.repeat(np.array(towards, dtype=float)[:, None], 3, axis=1), abs=1e-14)


def test_components_are_linear_in_time(tmp_path):
    """From 6 m/s northward to 8 m/s eastward: half way (4, 3), though the speed there was 7."""
    station = read_station(table(tmp_path, *hourly("time,speed,from", "6,180", "8,270", "8,270")), PERIOD)
    assert InTime(station.wind, PLACES)(1800.0)[:, 0] == pytest.approx([4.0, 3.0])


@pytest.mark.parametrize(
    "header, unit",
    [
        ("u,v", 1.0),
        ("u [km/h],v [km/h]", 1 / 3.6),
        ("eastward_wind [kn],northward_wind [kn]", 1852 / 3600),
        ("x_wind,y_wind", 1.0),
    ],
)
def test_components_and_units(tmp_path, header, unit):
    path = table(tmp_path, *hourly(f"time,{header},remark", "3,-4,a", "5,-6,b", "7,-8,c"))
    assert InTime(read_station(path, PERIOD).wind, PLACES)(5400.0)[:, 1] == pytest.approx([6 * unit, -7 * unit])


@pytest.mark.parametrize(
    ("heading", "factor"), [("pressure", 1), ("pressure [hPa]", 1), ("pressure [Pa]", 100), ("pressure [mbar]", 1)]
)
def test_pressure_in_hpa_unless_told(tmp_path, heading, factor):
    path = table(tmp_path, *hourly(f"time,{heading}", *(factor * value for value in (1000, 990, 985))))
    station = read_station(path, PERIOD)
    assert station.wind is None
    assert InTime(station.pressure, PLACES)(5400.0) == pytest.approx(np.full((1, 3), 98750.0))


def test_dates_with_offsets_remarks_and_blanks(tmp_path):
    path = table(
        tmp_path,
        "# invented",
        " Time , PRESSURE , from,speed [kn]",
        "2031-03-01T01:00+01:00, 1000, , 0",
        "",
        "2031-03-01 01:00:00,1001, 90 ,10",
        "# a break",
        "2031-03-01T02:00:00Z,1002,90,10",
    )
    station = read_station(path, PERIOD)
    assert station.wind.times == pytest.approx([0.0, 3600.0, 7200.0])
    assert station.wind.at(0)[:, 0] == pytest.approx([0.0, 0.0])
    assert station.pressure.at(2)[0, 0] == pytest.approx(100200.0)


def test_only_the_lines_of_the_period_are_kept(tmp_path):
    path = table(tmp_path, "time,u,v", *(f"2031-{m:02d}-01T{h:02d}:30,1,{h}" for m in (1, 2, 3, 4) for h in range(24)))
    path = table(tmp_path, *path.read_text().replace("2031-03-01T00:30", "2031-03-01T00:00").splitlines())
    record = read_station(path, PERIOD).wind
    assert record.times == pytest.approx([0.0, 5400.0, 9000.0]) and record.at(2)[1, 0] == 2.0


@pytest.mark.parametrize(
    "lines, said",
    [
        (["time,speed", "2031-03-01,3"], "line 1: header time,speed; needed are the columns time, and speed and from, or u"),
        (["speed,from", "3,4"], "line 1: header speed,from; needed are the columns time"),
        (["time,speed,from,u,v", "2031-03-01,1,2,3,4"], "line 1: header"),
        (["time,u,v,x_wind", "2031-03-01,1,2,3"], "line 1: columns u and x_wind mean the same; leave one out"),
        (["time,u [ft/s],v", "2031-03-01,1,2"], "line 1: unit 'ft/s' of wind; allowed are m s-1, km/h, kn"),
        (["time,u [,v", "2031-03-01,1,2"], "line 1: 'u [' is no name of a column"),
        (["time,speed,from [rad]", "2031-03-01,1,2"], "line 1: unit 'rad' of from; allowed is deg"),
        (hourly("time,u,v", "1,2", "1,gale", "1,2"), "line 3: v is 'gale'; a finite number is needed"),
        (hourly("time,u,v", "1,2", "1,", "1,2"), "line 3: v is ''; a finite number is needed"),
        (hourly("time,u,v", "1,2", "nan,2", "1,2"), "line 3: u is 'nan'"),
        (hourly("time,u,v", "1,2", "1,2,3"), "line 3: 4 fields where the header has 3"),
        (hourly("time,u,v", "1,2", "1,800"), "line 3: wind of 800 m s-1; believed are -150 to 150"),
        (hourly("time,speed,from", "-1,20"), "line 2: speed is -1; allowed is 0 and more"),
        (hourly("time,speed,from", "1,2000"), "line 2: from is 2000; allowed are -360 to 360"),
        (hourly("time,speed,from", "1,"), "line 2: from is ''; a finite number is needed"),
        (hourly("time,pressure", "100000"), "line 2: air pressure of 1e+07 Pa; believed are 80000 to 110000: check the unit"),
        (["time,u,v", "1.3.2031,1,2"], "line 2: time is '1.3.2031'; a date such as 2031-01-31T18:00Z is needed"),
        (["time,u,v", "2031-03-01T01:00Z,1,2", "2031-03-01T00:00Z,1,2"], "line 3: 2031-03-01T00:00:00Z follows 2031"),
        (["time,u,v"], "has no times; the run needs 2031-03-01T00:00:00Z to 2031-03-01T02:00:00Z"),
        (hourly("time,u,v", "1,2", "1,2"), "has from 2031-03-01T00:00:00Z to 2031-03-01T01:00:00Z; the run needs"),
        (
            ["time,u,v", *(f"2031-03-01T{time},1,2" for time in ("00:00", "00:10", "00:20", "00:30", "01:00", "02:00"))],
            "nothing between 2031-03-01T01:00:00Z and 2031-03-01T02:00:00Z, where 600 s is the usual interval",
        ),
        ([""], "empty; give a header such as time,speed,from,pressure"),
    ],
)  # fmt: skip
def test_mistakes_are_named_with_their_line(tmp_path, lines, said):
    assert said in refused(table(tmp_path, *lines))


def test_files_that_cannot_be_read(tmp_path):
    assert "no such file; give a CSV file with wind or pressure of a station" in refused(tmp_path / "s.csv")
    (tmp_path / "s.csv").write_bytes(b"\xff\xfe\x00\x81")
    assert "cannot be read as CSV text" in refused(tmp_path / "s.csv")


def test_a_constant_holds_for_ever():
    values = InTime(Uniform.constant("a steady wind", 3.0, -4.0), PLACES)
    for time in (-1e9, 0.0, 1e9):
        assert values(time) == pytest.approx(np.array([[3.0] * 3, [-4.0] * 3]))
