"""Harmonic constants along a boundary: linear between points, every mistake named with its line."""

import numpy as np
import pytest
import shapely

from swe.errors import InputError
from swe.tide.boundary_constants import read_constants

LINE = shapely.from_wkt("LINESTRING(0 0, 0 10)")

GOOD = "lon,lat,constituent,amplitude,lag\n0.1,2,M2,1.0,350\n0.1,2,K1,0.4,100\n-0.1,8,K1,0.2,140\n-0.1,8,M2,0.6,30\n"


def read(tmp_path, text):
    path = tmp_path / "mouth.csv"
    path.write_text(text)
    return read_constants(path, ("lon", "lat"))


def test_constants_are_linear_in_the_complex_plane_and_constant_beyond(tmp_path):
    found = read(tmp_path, GOOD)
    assert set(found.names) == {"M2", "K1"}
    amplitude, lag = found.along(LINE, np.array([[0.3, 2.0], [0.0, 5.0], [0.0, 9.5], [0.0, 0.0]]), spherical=True)
    m2 = found.names.index("M2")
    middle = 0.5 * (np.exp(-1j * np.radians(350)) + 0.6 * np.exp(-1j * np.radians(30)))
    np.testing.assert_allclose(amplitude[m2], [1.0, abs(middle), 0.6, 1.0], rtol=1e-12)
    np.testing.assert_allclose(lag[m2], [350.0, np.degrees(-np.angle(middle)) % 360, 30.0, 350.0], rtol=1e-12)


def test_one_point_serves_the_whole_line(tmp_path):
    found = read(tmp_path, "lon,lat,constituent,amplitude,lag\n3,4,S2,0.5,12\n")
    amplitude, lag = found.along(LINE, np.array([[0.0, 0.0], [0.0, 9.0]]), spherical=True)
    np.testing.assert_allclose(amplitude, 0.5)
    np.testing.assert_allclose(lag, 12.0)


@pytest.mark.parametrize(
    "text, message",
    [
        (
            "lon,lat,name,amplitude,lag\n",
            r"mouth.csv:1: column constituent is missing, found lon, lat, name.*must name lon,lat,constituent,amplitude,lag",
        ),
        ("", r"mouth.csv:1: column lon is missing, found nothing"),
        (GOOD.replace("0.6", "much"), r"mouth.csv:5: amplitude is 'much'; a number is needed"),
        (GOOD.replace("0.6", "-0.6"), r"mouth.csv:5: amplitude -0.6 m.*allowed are 0 to 20 m"),
        (GOOD.replace("-0.1,8,M2", "-0.1,98,M2"), r"mouth.csv:5: longitude -0.1, latitude 98; .*swapped"),
        (GOOD.replace("K1", "K9"), r"mouth.csv:3: .*K9"),
        (GOOD.replace("-0.1,8,K1", "-0.1,8,O1"), r"mouth.csv: constituent (K1|O1) is not given for every point"),
        (GOOD.replace("-0.1,8,K1", "-0.1,8,M2"), r"mouth.csv:5: M2 is given twice"),
        ("lon,lat,constituent,amplitude,lag\n", r"mouth.csv: holds no constants"),
    ],
)
def test_mistakes_name_the_line(tmp_path, text, message):
    with pytest.raises(InputError, match=message):
        read(tmp_path, text)


def test_a_missing_file_is_named(tmp_path):
    with pytest.raises(InputError, match=r"none.csv: cannot be read"):
        read_constants(tmp_path / "none.csv", ("x", "y"))
