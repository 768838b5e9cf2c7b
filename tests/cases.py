"""Tiny cases for tests through the command line: an invented lake of 20 km by 10 km, some 230 faces, 30 steps.

    path = write_case(tmp_path, {"time.step": '"60 s"', "wind.east": None})
    done = call(tmp_path, "run", path.name)

`call` stays in this process and is quick; `process` and `ranks` start processes of their own.
"""

from __future__ import annotations

import contextlib
import io
import json
import subprocess
import sys
import time
from dataclasses import dataclass
from pathlib import Path

import launch
import netCDF4
import numpy as np

from swe.cli.main import main

LAKE = {
    "title": '"Tarrow Lake, a test"',
    "basin.surface": '"plane"',
    "basin.coastline": '"coast.geojson"',
    "depth.constant": '"20 m"',
    "depth.least": '"5 m"',
    "mesh.spacing": '"1 km"',
    "mesh.sweeps": "20",
    "earth.rotation": '"f-plane"',
    "earth.latitude": '"50 deg"',
    "wind.east": '"0.3 Pa"',
    "start.kind": '"hump"',
    "start.height": '"0.5 m"',
    "start.radius": '"3 km"',
    "start.x": '"7 km"',
    "start.y": '"4 km"',
    "time.begin": "2031-01-01T00:00:00Z",
    "time.duration": '"1 h"',
    "time.step": '"120 s"',
    "method.stepper": '"two-stage"',
    "method.operator": '"wave"',
    "method.action_tolerance": "1e-6",
    "subdomains.count": "3",
    "subdomains.overlap_tolerance": "1e-6",
    "subdomains.mismatch_tolerance": '"0.1 mm"',
    "output.fields_every": '"20 min"',
    "output.stations_every": '"4 min"',
    "output.ledger_every": '"4 min"',
    "checkpoint.every": '"16 min"',
}
"""A sound case; keys of one section follow each other."""

STATIONS = {"West": ('"2 km"', '"5 km"'), "East": ('"17.5 km"', '"5 km"')}
"""Name, x and y of the stations, as TOML."""

SHORE = [(0.0, 0.0), (20e3, 0.0), (20e3, 10e3), (0.0, 10e3), (0.0, 0.0)]
"""The coast, m."""

ONE_STAGE = {"method.stepper": '"one-stage"', "method.operator": None}
EXPLICIT = {
    "method.stepper": '"runge-kutta-4"',
    "method.operator": None,
    "method.action_tolerance": None,
    "subdomains.overlap_tolerance": None,
    "subdomains.mismatch_tolerance": None,
    "time.step": '"20 s"',
}
"""Changes for the other steppers."""

MOUTH = '\n[[open]]\nname = "mouth"\nline = "mouth.geojson"\nconstants = "mouth.csv"\n'
"""Text for an open boundary in the east, whose files `write_mouth` makes."""

WITH_GRID = {"depth.constant": None, "depth.grid": '"depth.nc"'}
"""Changes for a depth grid, which `write_depth` makes."""

ON_THE_SPHERE = {
    "basin.surface": '"sphere"',
    "earth.rotation": '"sphere"',
    "earth.latitude": None,
    "start.x": None,
    "start.y": None,
    "start.lon": "7.1",
    "start.lat": "55.05",
}
"""Changes for the same lake on the sphere, about 7 E, 55 N; its coast is `DEGREES`."""

DEGREES = [(7.0, 55.0), (7.3, 55.0), (7.3, 55.1), (7.0, 55.1), (7.0, 55.0)]
"""The coast on the sphere, longitude and latitude."""


@dataclass(frozen=True)
class Done:
    """What a command did: exit code and what it wrote."""

    code: int
    out: str
    err: str

    @property
    def line(self) -> str:
        """The only line on stderr."""
        lines = self.err.splitlines()
        assert len(lines) == 1, f"one line was expected on stderr, found {len(lines)}:\n{self.err}"
        return lines[0]


def case_text(changes: dict[str, str | None] | None = None, stations: dict | None = None) -> str:
    """Return the text of `LAKE` with keys changed, added, or left out (None)."""
    blocks: dict[str, list[str]] = {"": []}
    for name, value in (LAKE | (changes or {})).items():
        section, _, key = name.rpartition(".")
        blocks.setdefault(section, [])
        if value is not None:
            blocks[section].append(f"{key} = {value}")
    parts = ["\n".join([f"[{section}]"] * bool(section) + rows) for section, rows in blocks.items() if rows]
    x, y = ("lon", "lat") if (changes or {}).get("basin.surface") == '"sphere"' else ("x", "y")
    for name, place in (STATIONS if stations is None else stations).items():
        parts.append(f'[[station]]\nname = "{name}"\n{x} = {place[0]}\n{y} = {place[1]}')
    return "\n".join(parts) + "\n"


def write_case(folder: Path, changes=None, stations=None, shore=SHORE, name="lake") -> Path:
    """Write coast.geojson and NAME.toml into `folder`; return the path of the case."""
    write_coast(folder / "coast.geojson", shore)
    path = folder / f"{name}.toml"
    path.write_text(case_text(changes, stations))
    return path


def write_coast(path: Path, shore) -> Path:
    path.write_text(json.dumps({"type": "Polygon", "coordinates": [[list(map(float, corner)) for corner in shore]]}))
    return path


def write_mouth(folder: Path) -> None:
    """Write the line and the harmonic constants of `MOUTH`."""
    line = {"type": "LineString", "coordinates": [[20e3, 2e3], [20e3, 8e3]]}
    (folder / "mouth.geojson").write_text(json.dumps(line))
    (folder / "mouth.csv").write_text("x,y,constituent,amplitude,lag\n20000,5000,M2,0.5,30\n20000,5000,M4,0.1,60\n")


def write_depth(path: Path, x=(-2e3, 22e3), y=(-2e3, 12e3), depth=20.0, names=("x", "y"), slope=0.0, attributes=None) -> Path:
    """Write a depth grid of 13 by 8 points: `depth` + `slope` x, m, from the first to the last of `x` and `y`."""
    marks = {
        "x": {"standard_name": "projection_x_coordinate", "units": "m"},
        "y": {"standard_name": "projection_y_coordinate", "units": "m"},
        "lon": {"standard_name": "longitude", "units": "degrees_east"},
        "lat": {"standard_name": "latitude", "units": "degrees_north"},
    }
    first, second = np.linspace(*x, 13), np.linspace(*y, 8)
    with netCDF4.Dataset(path, "w") as data:
        for name, values in zip(names, (first, second)):
            data.createDimension(name, values.size)
            axis = data.createVariable(name, "f8", (name,))
            axis.setncatts(marks.get(name, {}))
            axis[:] = values
        variable = data.createVariable("depth", "f8", names[::-1])
        variable.setncatts(
            {"standard_name": "sea_floor_depth_below_mean_sea_level", "units": "m"} if attributes is None else attributes
        )
        variable[:] = depth + slope * first[None, :] + 0.0 * second[:, None]
    return path


def call(folder: Path, *words) -> Done:
    """Run `swe WORDS` in this process, in `folder`."""
    out, err = io.StringIO(), io.StringIO()
    with contextlib.chdir(folder), contextlib.redirect_stdout(out), contextlib.redirect_stderr(err):
        try:
            code = main([str(word) for word in words])
        except SystemExit as left:  # argparse
            code = left.code
    return Done(code, out.getvalue(), err.getvalue())


def process(folder: Path, *words, timeout=120, **environment: str) -> Done:
    """Run `swe WORDS` in a process of its own, in `folder`."""
    done = subprocess.run(
        command(*words), cwd=folder, env=surroundings(**environment), capture_output=True, text=True, timeout=timeout
    )
    return Done(done.returncode, done.stdout, done.stderr)


def started(folder: Path, *words) -> subprocess.Popen:
    """Start `swe WORDS` in a process of its own, in `folder`, with pipes for its output."""
    pipes = {"stdout": subprocess.PIPE, "stderr": subprocess.PIPE, "text": True}
    return subprocess.Popen(command(*words), cwd=folder, env=surroundings(), **pipes)


def started_on_ranks(count: int, folder: Path, *words) -> subprocess.Popen:
    """Start `swe WORDS` on `count` ranks, in `folder`, in a session of its own, with a pipe for all its output."""
    pipes = {"stdout": subprocess.PIPE, "stderr": subprocess.STDOUT, "text": True}
    return subprocess.Popen(
        launch.command(count, *command(*words)), cwd=folder, env=surroundings(), start_new_session=True, **pipes
    )


def children(pid: int) -> list[int]:
    """Return the processes that a process has started and that still run."""
    return [int(child) for task in Path(f"/proc/{pid}/task").iterdir() for child in (task / "children").read_text().split()]


def wait_until(condition, job: subprocess.Popen, seconds: float = 60.0) -> None:
    """Wait for a condition; fail when the job ends before, or after `seconds`."""
    end = time.monotonic() + seconds
    while not condition():
        assert job.poll() is None, f"ended with {job.returncode}: {job.communicate()}"
        assert time.monotonic() < end, "waited in vain"
        time.sleep(0.02)


def wait_for_claim(folder: Path, seconds: float = 20.0) -> None:
    """Wait until the process that claims a result folder has ended: mpiexec may leave before the ranks that it killed."""
    end = time.monotonic() + seconds
    while (claim := folder / "in-use").exists() and Path(f"/proc/{json.loads(claim.read_text())['pid']}").exists():
        assert time.monotonic() < end, "the claim is still held"
        time.sleep(0.02)


def ranks(count: int, folder: Path, *words, timeout=120, **environment: str) -> Done:
    """Run `swe WORDS` on `count` ranks, in `folder`; all output counts as `out`."""
    done = launch.on_ranks(count, *command(*words), cwd=folder, timeout=timeout, **surroundings(**environment))
    return Done(done.returncode, done.stdout, "")


def command(*words) -> list[str]:
    return [sys.executable, "-W", "error", "-m", "swe.cli.main", *map(str, words)]


def surroundings(**more: str) -> dict[str, str]:
    return launch.environment(PYTHONPATH=str(launch.ROOT), OPENBLAS_NUM_THREADS="1", **more)
