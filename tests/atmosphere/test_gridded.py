"""Wind and pressure on grids: what is read equals what was written, however it was written; what cannot serve is refused.

Sources: a field that is bilinear in place and linear in time is reproduced exactly by such interpolation; attributes after the
CF conventions 1.11.
"""

from datetime import UTC, datetime

import netCDF4
import numpy as np
import pytest
from weather_files import BEGIN, BOX, HOURS, LAT, LON, PERIOD, PLANE, POINTS, SPHERE, truth, write

from swe.atmosphere.gridded import open_pressure, open_wind
from swe.atmosphere.in_time import InTime, refuse_gaps
from swe.atmosphere.period import Period
from swe.errors import InputError

OPEN = {"wind": open_wind, "pressure": open_pressure}
TIMES = (0.0, 1.0, 3600.0, 9999.0, 36 * 3600.0, 20000.0, 86400.0, 86399.0)


def read(path, kind="wind", surface=SPHERE, box=BOX, period=PERIOD, **named):
    return OPEN[kind](path, surface, box, period, **named)


def refused(path, *arguments, **named):
    with pytest.raises(InputError) as caught:
        read(path, *arguments, **named)
    assert str(caught.value).startswith(str(path)) and "\n" not in str(caught.value)
    return str(caught.value)


def agrees(record, kind="wind", points=POINTS, tolerance=1e-11):
    values = InTime(record, points)
    for seconds in TIMES:
        expected = truth(kind, seconds, POINTS)
        assert np.abs(values(seconds) - expected).max() <= tolerance * np.abs(expected).max()
    refuse_gaps(record, points)
    record.close()


@pytest.mark.parametrize("kind", ["wind", "pressure"])
@pytest.mark.parametrize("dimensions", ["tyx", "txy", "xty", "yxt"])
def test_values_in_any_order_of_dimensions(tmp_path, kind, dimensions):
    agrees(read(write(tmp_path / "w.nc", kind, dimensions=dimensions), kind), kind)


@pytest.mark.parametrize("east", [1, -1])
@pytest.mark.parametrize("north", [1, -1])
def test_values_in_any_order_of_rows_and_columns(tmp_path, east, north):
    agrees(read(write(tmp_path / "w.nc", lon=LON[::east], lat=LAT[::north])))


@pytest.mark.parametrize("turn", [360.0, -360.0])
@pytest.mark.parametrize("grid_turn", [0.0, 360.0])
def test_either_convention_of_longitude(tmp_path, turn, grid_turn):
    """Grid from 354 to 364 or from -6 to 4; basin given as it pleases."""
    path = write(tmp_path / "w.nc")
    with netCDF4.Dataset(path, "a") as file:
        file["lon"][:] = LON + grid_turn
    agrees(read(path, box=(BOX[0] + turn, BOX[1], BOX[2] + turn, BOX[3])), points=POINTS + [turn, 0.0])


def test_longitudes_that_jump_at_greenwich(tmp_path):
    path = write(tmp_path / "w.nc")
    with netCDF4.Dataset(path, "a") as file:
        file["lon"][:] = np.mod(LON, 360.0)
    agrees(read(path))


@pytest.mark.parametrize("start", [0.0, -180.0, -179.5, 17.0])
@pytest.mark.parametrize("way", [1, -1])
@pytest.mark.parametrize("seam_twice", [0, 1])
@pytest.mark.parametrize("west", [-2.5, 178.0, -183.0])
def test_a_global_grid_has_no_edge(tmp_path, start, way, seam_twice, west):
    """A periodic wind, cos of the longitude in steps of 1 degree, everywhere within interpolation error (pi/180)^2/8 = 4e-5."""
    lon = (start + np.arange(360.0 + seam_twice))[::way]

    def wave(values, number):
        return 0 * values + np.cos(np.radians(lon) + number)

    path = write(tmp_path / "w.nc", lon=lon, change=wave, kind_of_number="f4")
    record = read(path, box=(west, 50.0, west + 6.0, 54.0))
    assert record.window.shape[1] <= 9, "only the window is read"
    points = POINTS + [west + 4.0, 0.0]
    expected = np.stack([np.cos(np.radians(points[:, 0])), np.cos(np.radians(points[:, 0]) + 1)])
    for turn in (0.0, 360.0, -360.0):
        assert np.abs(InTime(record, points + [turn, 0.0])(7777.0) - expected).max() < 4.5e-5
    record.close()


def test_water_round_the_earth(tmp_path):
    lon = np.arange(0.0, 360.0, 5.0)
    path = write(tmp_path / "w.nc", lon=lon, change=lambda values, number: 0 * values + np.cos(np.radians(lon)))
    record = read(path, box=(-180.0, 50.0, 180.0, 54.0))
    points = np.column_stack([np.linspace(-180, 180, 200), np.full(200, 52.0)])
    assert np.abs(InTime(record, points)(0.0)[0] - np.cos(np.radians(points[:, 0]))).max() < 1e-3
    record.close()


@pytest.mark.parametrize(
    "kind, unit, factor",
    [
        ("wind", "m/s", 1.0), ("wind", "km h-1", 3.6), ("wind", "km/h", 3.6), ("wind", "knots", 3600 / 1852),
        ("wind", "kn", 3600 / 1852),
        ("pressure", "hPa", 0.01), ("pressure", "mbar", 0.01), ("pressure", "millibar", 0.01), ("pressure", "kPa", 0.001),
    ],
)  # fmt: skip
def test_units(tmp_path, kind, unit, factor):
    agrees(read(write(tmp_path / "w.nc", kind, units=unit, factor=factor), kind), kind)


def test_packed_values(tmp_path):
    packing = {"scale_factor": 0.001, "add_offset": 4.0}
    path = write(tmp_path / "w.nc", kind_of_number="i2", fill=-32768, **packing)
    agrees(read(path), tolerance=1e-3)


@pytest.mark.parametrize(
    "since, scale, shift",
    [
        ("days since 1900-01-01", 1 / 24, 47906.0),
        ("seconds since 2031-03-01 02:00:00 +02:00", 3600.0, 0.0),
        ("minutes since 2031-02-28 23:00 -01:00", 60.0, 0.0),
        ("hours since 1-1-1 00:00", 1.0, 24 * 741503.0),
    ],
)
def test_units_of_time(tmp_path, since, scale, shift):
    """2031-03-01 is 47906 days after 1900-01-01; 741503 after 1-1-1 of the standard calendar, whose past is Julian."""
    agrees(read(write(tmp_path / "w.nc", times=HOURS * scale + shift, hours=HOURS, since=since)), tolerance=1e-8)


@pytest.mark.parametrize(
    "calendar, since",
    [
        ("gregorian", "hours since 2031-03-01"), ("proleptic_gregorian", "hours since 2031-03-01"),
        ("julian", "hours since 2031-02-16"),
        ("noleap", "hours since 2031-03-01"), ("365_day", "hours since 2031-03-01"), ("all_leap", "hours since 2031-03-01"),
        ("360_day", "hours since 2031-03-01"),
    ],
)  # fmt: skip
def test_calendars_that_serve(tmp_path, calendar, since):
    """The first days of March are the same in all of them; the Julian calendar is 13 days behind."""
    agrees(read(write(tmp_path / "w.nc", calendar=calendar, since=since)))


LEAP = Period(datetime(2028, 2, 28, tzinfo=UTC), 2 * 86400.0)


@pytest.mark.parametrize(
    "calendar, begin, said",
    [
        ("noleap", datetime(2028, 2, 28, tzinfo=UTC), "noleap and the real one part by 2028-03-01T00:00:00"),
        ("noleap", datetime(2028, 2, 29, tzinfo=UTC), "2028-02-29T00:00:00Z, the beginning of the run, is no date of"),
        ("all_leap", datetime(2031, 2, 28, tzinfo=UTC), "all_leap and the real one part by 2031-02-29T00:00:00"),
        ("360_day", datetime(2031, 3, 30, tzinfo=UTC), "360_day and the real one part by 2031-04-01T00:00:00"),
        ("360_day", datetime(2031, 3, 31, tzinfo=UTC), "2031-03-31T00:00:00Z, the beginning of the run, is no date"),
        ("tai", datetime(2031, 3, 1, tzinfo=UTC), "calendar 'tai'; allowed are standard"),
    ],
)
def test_calendars_with_other_days_are_refused(tmp_path, calendar, begin, said):
    since = f"hours since {begin:%Y}-02-01"
    path = write(tmp_path / "w.nc", calendar=calendar, since=since, times=np.arange(0, 2000.0, 24.0))
    assert said in refused(path, period=Period(begin, 2 * 86400.0))


def test_units_of_time_that_cannot_be(tmp_path):
    assert "allowed is <unit> since <date>" in refused(write(tmp_path / "w.nc", since="fortnights since 2031-03-01"))


def test_a_record_too_short_is_refused_with_dates(tmp_path):
    said = "from 2031-03-01T00:00:00Z to 2031-03-02T15:00:00Z; the run needs 2031-03-01T06:00:00Z to 2031-03-02T18:00:00Z"
    assert said in refused(write(tmp_path / "w.nc", times=HOURS[:14]))
    assert "has from 2031-03-01T09:00:00Z to" in refused(write(tmp_path / "w.nc", times=HOURS[3:]))
    agrees(read(write(tmp_path / "w.nc", times=HOURS[2:15])))  # just enough


def test_a_gap_is_refused_with_dates_unless_outside_the_run(tmp_path):
    gap = np.delete(HOURS, 8)
    said = "nothing between 2031-03-01T21:00:00Z and 2031-03-02T03:00:00Z, where 10800 s is the usual interval"
    assert said in refused(write(tmp_path / "w.nc", times=gap))
    agrees(read(write(tmp_path / "w.nc", times=np.delete(HOURS, 15))))


def test_times_that_do_not_rise_or_are_missing(tmp_path):
    path = write(tmp_path / "w.nc", times=HOURS[[0, 1, 2, 4, 3, *range(5, 17)]])
    assert "2031-03-01T09:00:00Z follows 2031-03-01T12:00:00Z; times must rise" in refused(path)
    path = write(tmp_path / "w.nc", times=np.ma.masked_equal(HOURS, 9.0))
    assert "time 4 of 17 is missing" in refused(path)


def hole(values, number, hours=(12.0,), rows=slice(3, 5), columns=slice(8, 10)):
    where = np.zeros(values.shape, dtype=bool)
    for hour in hours:
        where[int(hour / 3), rows, columns] = number == 1
    return np.ma.array(values, mask=where)


def test_missing_values_are_refused_with_the_dates(tmp_path):
    record = read(write(tmp_path / "w.nc", fill=-1e30, change=lambda values, number: hole(values, number, (12.0, 15.0, 30.0))))
    with pytest.raises(InputError) as caught:
        refuse_gaps(record, POINTS)
    assert "missing in the water at 3 of 13 times, first 2031-03-01T12:00:00Z, last 2031-03-02T06:00:00Z" in str(caught.value)
    values = InTime(record, POINTS)
    assert np.isfinite(values(2 * 3600.0)).all()
    with pytest.raises(InputError, match="no value at 2031-03-01T12:00:00Z for [1-9][0-9]? of 60 points of the water"):
        values(3.5 * 3600.0)
    record.close()


def test_missing_values_away_from_the_water_do_no_harm(tmp_path):
    record = read(write(tmp_path / "w.nc", fill=-1e30, change=lambda v, n: hole(v, n, HOURS, slice(0, 2), slice(0, 21))))
    agrees(record)


def test_a_grid_that_does_not_cover_the_basin_is_refused_with_both_boxes(tmp_path):
    path = write(tmp_path / "w.nc", lon=LON[:12], lat=LAT[6:])
    said = refused(path)
    assert "does not cover the basin in the east and south: grid longitude -6 to -0.5, latitude 52 to 55 degrees; basin" in said
    assert "longitude -4 to 2, latitude 50 to 54 degrees; give a larger grid" in said
    assert "in the east: grid longitude -6 to -0.5" in refused(path, box=(100.0, 52.5, 160.0, 54.0))
    with pytest.raises(InputError, match="west"):
        read(write(tmp_path / "w.nc", lon=LON[:3] + 40.0), box=BOX)


def test_half_a_step_beyond_the_last_column_is_covered(tmp_path):
    record = read(write(tmp_path / "w.nc", lon=LON[4:] + 0.25))
    assert np.isfinite(InTime(record, POINTS)(0.0)).all()
    record.close()


METRE = ({"standard_name": "projection_x_coordinate", "units": "km"}, {"standard_name": "projection_y_coordinate", "units": "m"})


def test_a_plane(tmp_path):
    """x in km, y in m, x_wind and y_wind."""

    def rename(file):
        file.renameVariable("lon", "x")
        file.renameVariable("lat", "y")

    path = write(tmp_path / "w.nc", axes=METRE, names=("x_wind", "y_wind"), extra=rename)
    record = read(path, surface=PLANE, box=(-4000.0, 50.0, 2000.0, 54.0))
    agrees(record, points=POINTS * [1000.0, 1.0])
    assert "it has those of the other surface" in refused(path)


def test_variables_not_found_or_ambiguous(tmp_path):
    path = write(tmp_path / "w.nc", names=("eastward_wind", "upward_air_velocity"))
    said = refused(path)
    assert "no wind at 10 m by its standard_name (eastward_wind and northward_wind or x_wind and y_wind)" in said
    assert "found band0 (eastward_wind), band1 (upward_air_velocity); name the variables to use" in said
    agrees(read(path, variables=("band0", "band1")))
    assert "no variables band0, band7 on time and grid" in refused(path, variables=("band0", "band7"))
    path = write(tmp_path / "w.nc", names=("eastward_wind", "eastward_wind"))
    assert "band0, band1 all look like wind" in refused(path)
    assert "no air pressure by" in refused(path, "pressure")


@pytest.mark.parametrize("height, serves", [(10.0, True), (100.0, False)])
def test_wind_at_another_height_is_not_taken(tmp_path, height, serves):
    def mast(file):
        file.createVariable("height", "f8", ())[...] = height
        file["height"].setncatts({"standard_name": "height", "units": "m"})

    path = write(tmp_path / "w.nc", extra=mast, attributes={"coordinates": "height"})
    if serves:
        agrees(read(path))
    else:
        assert "no wind at 10 m" in refused(path)


def test_no_time(tmp_path):
    with netCDF4.Dataset(tmp_path / "w.nc", "w") as file:
        for name, values in (("lon", LON), ("lat", LAT)):
            file.createDimension(name, len(values))
            file.createVariable(name, "f8", (name,))[:] = values
    assert "no time coordinate; found lon, lat" in refused(tmp_path / "w.nc")


def test_a_grid_with_two_dimensional_coordinates_is_refused_with_a_way_out(tmp_path):
    def bend(file):
        file.renameVariable("lon", "column")
        file.renameVariable("lat", "row")
        for name in ("column", "row"):
            file[name].delncattr("units")
        for name, unit in (("longitude", "degrees_east"), ("latitude", "degrees_north")):
            file.createVariable(name, "f8", ("lat", "lon")).setncatts({"standard_name": name, "units": unit})

    path = write(tmp_path / "w.nc", extra=bend)
    assert "are two-dimensional: bring it to a grid of longitudes and latitudes first" in refused(path)


def test_units_that_are_unknown_missing_or_wrong(tmp_path):
    assert "band0: unit 'furlong' of wind; allowed are m s-1, km/h, kn" in refused(write(tmp_path / "w.nc", units="furlong"))
    assert "band0: no unit of wind" in refused(write(tmp_path / "w.nc", units=" "))
    record = read(write(tmp_path / "w.nc", "pressure", units="hPa"), "pressure")
    with pytest.raises(InputError, match=r"at 2031-03-01T06:00:00Z: air pressure of 1.00\d+e\+07 Pa; believed are 80000 to"):
        record.at(0)
    record.close()


def test_files_that_cannot_be_read(tmp_path):
    assert "no such file" in refused(tmp_path / "w.nc")
    (tmp_path / "w.nc").write_bytes(b"CDF\x01 cut")
    assert "not a netCDF file, or cut short" in refused(tmp_path / "w.nc")


def test_memory_does_not_grow_with_the_record_and_nothing_is_read_twice(tmp_path, monkeypatch):
    hours = np.arange(0.0, 500.0)
    record = read(write(tmp_path / "w.nc", times=hours), period=Period(BEGIN, 400 * 3600.0))
    parts = [InTime(record, POINTS[:30]), InTime(record, POINTS[30:])]
    reads = []
    once = record._read
    monkeypatch.setattr(record, "_read", lambda variable, factor, index: reads.append(index) or once(variable, factor, index))
    step = 600.0
    for time in np.arange(0.0, 400 * 3600.0, step):
        for stage in (time, time + step, time + step / 2, time):  # to and fro within a step
            for part in parts:
                part(stage)
        assert len(record._held) <= 3 and all(len(part._held) <= 3 for part in parts)
    assert len(reads) == 2 * 401 and sorted(set(reads)) == list(range(401))
    record.close()


def test_a_run_may_begin_anywhere_in_the_record(tmp_path):
    """As after a resume: the first time asked for is in the middle, and later ones before it."""
    record = read(write(tmp_path / "w.nc"))
    values = InTime(record, POINTS)
    for seconds in (30 * 3600.0, 2.5 * 3600.0, 36 * 3600.0, 36 * 3600.0 + 1e-4, -1e-4):
        assert values(seconds) == pytest.approx(truth("wind", seconds, POINTS), abs=1e-6)
    with pytest.raises(InputError, match="asked for model time 140000 s, has 2031-03-01T06:00:00Z to 2031-03-02T18:00:00Z"):
        values(140000.0)
    record.close()
