"""Cases with wind and pressure from files, a storm, and Manning's friction, as a user types them."""

import json

import netCDF4
import numpy as np
import pytest

from swe.case.schema_forcing import WIND_LAWS
from swe.cli.main import main
from swe.constants import AIR_DENSITY
from swe.dynamics.forcing.drag_laws import LAWS

CASE = """
title = "A pond under the air"
basin = {{ surface = "plane", coastline = "pond.geojson" }}
depth = {{ constant = "8 m", least = "2 m" }}
mesh = {{ spacing = "1 km" }}
earth = {{ rotation = "f-plane", latitude = "50 deg" }}
time = {{ begin = 2031-01-01T00:00:00Z, duration = "3 h", step = "60 s" }}
method = {{ stepper = "two-stage", operator = "wave", action_tolerance = 1e-8{method} }}
subdomains = {{ count = 2, overlap = 6, mismatch_tolerance = "1 mm" }}
output = {{ fields_every = "1 h" }}
{more}
"""

RECORD = "time,speed,from,pressure\n" + "".join(f"2031-01-01T{hour:02d}:00:00Z,12,270,{{p{hour}}}\n" for hour in range(5))
"""A west wind of 12 m/s; pressure in hPa."""


@pytest.fixture
def pond(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    ring = [[0, 0], [20e3, 0], [20e3, 10e3], [0, 10e3], [0, 0]]
    (tmp_path / "pond.geojson").write_text(json.dumps({"type": "Polygon", "coordinates": [ring]}))
    (tmp_path / "station.csv").write_text(RECORD.format(**{f"p{hour}": 1010 for hour in range(5)}))
    return tmp_path


def level_of(folder, more: str, method: str = "") -> np.ndarray:
    """Level of the last record of a case with more sections."""
    (folder / "pond.toml").write_text(CASE.format(more=more, method=method))
    assert main(["check", "pond.toml"]) == 0
    assert main(["run", "pond.toml", "--quiet", "--overwrite"]) == 0
    with netCDF4.Dataset(folder / "results" / "pond" / "fields.nc") as data:
        return np.asarray(data["level"][-1])


def test_laws_of_the_schema_are_those_of_the_dynamics():
    assert WIND_LAWS == tuple(LAWS)


def test_a_steady_wind_of_a_station_is_its_constant_stress(pond):
    wind = level_of(pond, '[wind]\nfile = "station.csv"\nlaw = "garratt-1977"\n')
    stress = AIR_DENSITY * float(LAWS["garratt-1977"].coefficient(np.array([12.0]))[0]) * 12.0**2
    constant = level_of(pond, f"[wind]\neast = {stress!r}\n")
    assert np.max(np.abs(wind)) > 0.01
    np.testing.assert_allclose(wind, constant, atol=1e-9)


def test_a_uniform_pressure_moves_nothing(pond):
    assert np.max(np.abs(level_of(pond, '[pressure]\nfile = "station.csv"\n'))) < 1e-12


def test_a_storm_raises_the_water_under_its_centre(pond):
    """About 1 cm for 1 hPa where it has stood long (inverse barometer; common practice), less while it moves."""
    track = "time,x,y,central_pressure,ambient_pressure,radius_of_maximum_wind,shape\n"
    for hour, central in enumerate((1010, 970, 970, 1010)):
        track += f"2031-01-01T{hour:02d}:00:00Z,{5000 + 2000 * hour},5000,{central},1010,8,1.5\n"
    (pond / "storm.csv").write_text(track)
    storm = '[wind]\nlaw = "wu-1982"\ncap = 0.0025\n[storm]\ntrack = "storm.csv"\n'
    storm += 'reduction = 0.8\ninflow = "20 deg"\ntranslation_share = 0.5\n'
    assert 0.05 < np.max(np.abs(level_of(pond, storm))) < 3.0


def test_manning_equals_the_quadratic_law_at_one_depth(pond):
    """C_d = g n^2 / h^(1/3): n = 0.025 in 8 m of water (checks 7, conversions); friction in the operator changes little."""
    wind = "[wind]\neast = 0.3\n"
    coefficient = 9.80665 * 0.025**2 / 8.0 ** (1 / 3)
    manning = level_of(pond, wind + "[drag]\nmanning = 0.025\n")
    quadratic = level_of(pond, wind + f"[drag]\nbottom = {coefficient!r}\n")
    inside = level_of(pond, wind + "[drag]\nmanning = 0.025\n", ", friction_in_operator = true")
    np.testing.assert_allclose(manning, quadratic, atol=2e-5)
    np.testing.assert_allclose(manning, inside, atol=1e-4)
    assert np.max(np.abs(manning)) > 0.01


def test_a_record_that_is_too_short_is_refused_with_its_dates(pond, capsys):
    lines = (pond / "station.csv").read_text().splitlines()[:3]
    (pond / "station.csv").write_text("\n".join(lines) + "\n")
    (pond / "pond.toml").write_text(CASE.format(more='[wind]\nfile = "station.csv"\nlaw = "wu-1982"\n', method=""))
    assert main(["run", "pond.toml", "--quiet"]) == 2
    said = capsys.readouterr().err
    assert "station.csv" in said and "2031-01-01" in said and "Traceback" not in said
