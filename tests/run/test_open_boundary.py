"""A case with an open boundary and a tide, as a user types it: from the line on the outline to the ledger."""

import json
import subprocess
import sys
from pathlib import Path

import netCDF4
import numpy as np
import pytest

from swe.cli.main import main

CASE = """
title = "A bay that is open to the west"
basin = {{ surface = "plane", coastline = "bay.geojson" }}
depth = {{ constant = "15 m", least = "2 m" }}
mesh = {{ spacing = "1.5 km" }}
earth = {{ rotation = "f-plane", latitude = "50 deg" }}
tide = {{ ramp = "1 h" }}
time = {{ begin = 2031-01-01T00:00:00Z, duration = "{hours} h", step = "120 s" }}
method = {{ stepper = "two-stage", operator = "wave", action_tolerance = 1e-6 }}
subdomains = {{ count = 2, overlap = 6, mismatch_tolerance = "1 mm" }}
output = {{ fields_every = "1 h" }}
checkpoint = {{ every = "2 h" }}

[[open]]
name = "west"
line = "west.geojson"
constants = "west.csv"
level = "0.1 m"
"""


@pytest.fixture
def bay(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    ring = [[0, 0], [30e3, 0], [30e3, 12e3], [0, 12e3], [0, 0]]
    (tmp_path / "bay.geojson").write_text(json.dumps({"type": "Polygon", "coordinates": [ring]}))
    (tmp_path / "west.geojson").write_text(json.dumps({"type": "LineString", "coordinates": [[0, 0], [0, 12e3]]}))
    (tmp_path / "west.csv").write_text("x,y,constituent,amplitude,lag\n0,0,M2,0.4,40\n0,12000,M2,0.5,50\n")
    (tmp_path / "bay.toml").write_text(CASE.format(hours=6))
    return tmp_path


def ledger(folder) -> dict[str, np.ndarray]:
    with netCDF4.Dataset(folder / "ledger.nc") as data:
        return {name: np.asarray(data[name][:]) for name in data.variables}


def test_tide_comes_in_and_every_litre_is_accounted_for(bay):
    assert main(["check", "bay.toml"]) == 0
    assert main(["run", "bay.toml", "--quiet"]) == 0
    rows = ledger(bay / "results" / "bay")
    assert np.max(np.abs(rows["mass_drift"])) < 1e-14
    assert np.max(np.abs(rows["mass_outflow"])) > 0.1 * 1025.0 * 30e3 * 12e3 * 0.1
    np.testing.assert_allclose(rows["mass_anomaly"], -rows["mass_outflow"], rtol=1e-9, atol=1.0)
    assert rows["highest_level"].max() > 0.2
    fields = bay / "results" / "bay" / "fields.nc"
    with netCDF4.Dataset(fields) as data:
        assert 5 <= np.sum(data["outer"][:]) <= 12  # one row of faces along 12 km
        assert data["outer"].mesh == "mesh" and data["outer"].location == "face"
    checked = subprocess.run([Path(sys.executable).parent / "ugrid-checker", fields], capture_output=True, text=True)
    assert checked.returncode == 0 and "No problems found" in checked.stdout, checked.stdout


def test_a_resumed_run_keeps_the_account(bay):
    assert main(["run", "bay.toml", "--quiet", "--results", "whole"]) == 0
    (bay / "bay.toml").write_text(CASE.format(hours=4))
    assert main(["run", "bay.toml", "--quiet", "--results", "parts"]) == 0
    (bay / "bay.toml").write_text(CASE.format(hours=6))
    assert main(["run", "bay.toml", "--quiet", "--results", "parts", "--resume"]) == 0
    whole, parts = ledger(bay / "whole"), ledger(bay / "parts")
    for name in ("mass_anomaly", "highest_level", "kinetic_energy"):
        assert np.array_equal(whole[name], parts[name]), name
    # the account starts a new sum at a resume
    np.testing.assert_allclose(parts["mass_outflow"], whole["mass_outflow"], rtol=1e-13)
    assert np.max(np.abs(parts["mass_drift"])) < 1e-14


@pytest.mark.parametrize(
    "change, message",
    [
        (("west.csv", "x,y,constituent,amplitude,lag\n0,0,M7,0.4,40\n"), "west.csv:2: "),
        (("west.geojson", '{"type": "LineString", "coordinates": [[90000, 0], [90000, 9000]]}'), "open boundary 'west'"),
        (("west.geojson", "{}"), "west.geojson: "),
    ],
)
def test_mistakes_at_a_boundary_leave_with_one_line_and_code_2(bay, capsys, change, message):
    name, text = change
    (bay / name).write_text(text)
    assert main(["run", "bay.toml", "--quiet"]) == 2
    said = capsys.readouterr().err
    assert message in said and said.count("\n") == 1 and "Traceback" not in said


def test_low_pressure_lifts_the_water_beyond_and_within_alike(bay):
    """Inverse barometer (checks 6.1): 10 hPa under the reference lift the sea by dp/(rho g), which flows in and stays."""
    rows = "".join(f"2031-01-01T{hour:02d}:00:00Z,1003.25\n" for hour in range(8))
    (bay / "air.csv").write_text("time,pressure\n" + rows)
    text = CASE.format(hours=6).replace('constants = "west.csv"\nlevel = "0.1 m"', "") + '\n[pressure]\nfile = "air.csv"\n'
    (bay / "bay.toml").write_text(text)
    assert main(["run", "bay.toml", "--quiet"]) == 0
    with netCDF4.Dataset(bay / "results" / "bay" / "fields.nc") as data:
        level = np.asarray(data["level"][-1])
    np.testing.assert_allclose(level, 1000.0 / (1025.0 * 9.80665), rtol=0.05)
