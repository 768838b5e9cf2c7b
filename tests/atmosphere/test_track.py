"""The track of a storm: what is read, and every sentence that refuses one. Layout and limits are our own."""

from datetime import UTC, datetime

import numpy as np
import pytest
from weather_files import PLANE, SPHERE

from swe.atmosphere.period import Period
from swe.atmosphere.track import read_track
from swe.errors import InputError

PERIOD = Period(datetime(2031, 3, 4, tzinfo=UTC), 86400.0)
HEADER = "time,lon,lat,central_pressure,ambient_pressure,radius_of_maximum_wind,shape"
POINTS = (
    "2031-03-03T18:00,-40,43,980,1012,60,1.6",
    "2031-03-04T12:00,-36,44,970,1011,50,1.8",
    "2031-03-05,-33,45,985,1010,70,1.5",
)


def table(tmp_path, *lines):
    path = tmp_path / "t.csv"
    path.write_text("\n".join(lines) + "\n")
    return path


def refused(path, surface=SPHERE):
    with pytest.raises(InputError) as caught:
        read_track(path, surface, PERIOD)
    assert str(caught.value).startswith(str(path)) and "\n" not in str(caught.value)
    return str(caught.value)


def test_a_track_on_the_sphere(tmp_path):
    track = read_track(table(tmp_path, "# invented", HEADER, *POINTS), SPHERE, PERIOD)
    assert track.times == pytest.approx([-21600.0, 43200.0, 86400.0])
    assert track.places == pytest.approx(np.array([[-40, 43], [-36, 44], [-33, 45]]))
    assert track.central == pytest.approx([98000, 97000, 98500]) and track.ambient == pytest.approx([101200, 101100, 101000])
    assert track.radius == pytest.approx([6e4, 5e4, 7e4]) and track.shape == pytest.approx([1.6, 1.8, 1.5])
    assert track.strongest is None and track.where[1].endswith("t.csv, line 4")


def test_a_track_on_the_plane_in_other_units(tmp_path):
    header = "x [km],y,TIME,maximum_wind [kn],radius_of_maximum_wind [nmi],ambient_pressure [Pa],central_pressure [mbar],name"
    header = header.replace("[nmi]", "[m]")
    lines = ("0,5000,2031-03-04,70,40000,101300,990,a", "900,5000,2031-03-05T00:00Z,60,45000,101300,985,b")
    track = read_track(table(tmp_path, header, *lines), PLANE, PERIOD)
    assert track.places == pytest.approx(np.array([[0, 5000], [900e3, 5000]]))
    assert track.strongest == pytest.approx(np.array([70, 60]) * 1852 / 3600) and track.shape is None
    assert track.radius == pytest.approx([4e4, 4.5e4]) and track.central == pytest.approx([99000, 98500])


def test_a_storm_may_begin_and_end_within_the_run_without_a_deficit(tmp_path):
    lines = ("2031-03-04T06:00,-40,43,1012,1012,60,1.6", POINTS[1], "2031-03-04T18:00,-33,45,1010,1010,70,1.5")
    assert read_track(table(tmp_path, HEADER, *lines), SPHERE, PERIOD).times.size == 3


def change(number, old, new):
    lines = [HEADER, *POINTS]
    lines[number - 1] = lines[number - 1].replace(old, new)
    return lines


@pytest.mark.parametrize(
    "lines, said",
    [
        (
            change(1, "shape", "strength"),
            "line 1: header time,lon,lat,central_pressure,ambient_pressure,radius_of_maximum_wind,stren",
        ),
        (change(1, "lat", "y"), "needed are the columns time, lon and lat (x and y on a plane), central_pressure"),
        (
            change(1, "shape", "radius_of_maximum_wind"),
            "line 1: columns radius_of_maximum_wind and radius_of_maximum_wind mean the",
        ),
        (change(1, "central_pressure", "central_pressure [bar]"), "line 1: unit 'bar' of air pressure; allowed are Pa, hPa"),
        (change(1, "wind", "wind [mi]"), "line 1: unit 'mi' of radius_of_maximum_wind; allowed are m, km"),
        (change(3, "970", "deep"), "line 3: central_pressure is 'deep'; a finite number is needed"),
        (change(3, "970", "1020"), "line 3: central pressure 1020 hPa is above the ambient one; a storm is a low"),
        (change(3, "970", "97000"), "line 3: central pressure 97000 hPa"),
        (change(2, "980", "28.9"), "line 2: central pressure 28.9 hPa; believed are 800 to 1100: check the unit"),
        (change(4, ",70,", ",0.7,"), "line 4: radius of maximum wind 0.7 km; believed are 1 to 2000"),
        (change(4, "1.5", "9"), "line 4: shape 9; believed are 0.3 to 5"),
        (change(4, "-33,45", "45,133"), "line 4: latitude 133 or its longitude is no place on Earth: are they swapped?"),
        (change(4, "2031-03-05", "2031-03-04T12:00"), "line 4: its time does not rise: sort the lines"),
        (change(4, "2031-03-05", "soon"), "line 4: time is 'soon'; a date such as"),
        (change(3, "-36", "36"), "line 3: the storm travels at 88 m s-1 to get here; believed are up to 60: check place"),
        (
            change(2, "03T18:00", "04T06:00"),
            "line 2: the track begins within the run (2031-03-04T00:00:00Z to 2031-03-05T00:00:00Z) with a d",
        ),
        (
            change(4, "05,", "04T20:00,"),
            "with a deficit of 25 hPa; carry it on, or give it the ambient pressure in the centre there",
        ),
        ([HEADER, POINTS[0]], "holds 1 points; a track needs at least 2"),
        ([HEADER + ",maximum_wind", POINTS[0] + ",30", POINTS[1] + ",30"], "shape or maximum_wind"),
        ([HEADER.replace("shape", "maximum_wind"), POINTS[0].replace("1.6", "-3"), POINTS[1]], "line 2: maximum wind -3 m s-1"),
    ],
)
def test_mistakes_are_named_with_their_line(tmp_path, lines, said):
    assert said in refused(table(tmp_path, *lines))


def test_coordinates_of_the_other_surface(tmp_path):
    assert "needed are the columns time, lon and lat (x and y on a plane)" in refused(table(tmp_path, HEADER, *POINTS), PLANE)
