"""Small meshes and files that the tests of the output room share. Basins and names are invented."""

import json
import os
import signal
import subprocess
import sys
from datetime import UTC, datetime
from pathlib import Path

import numpy as np

from swe.mesh.lattice import hexagons_in
from swe.mesh.topology import Mesh, with_depth
from swe.mesh.voronoi import sphere_mesh
from swe.output.catalogue import ledger_quantities
from swe.output.fields import CHOICES, Extremes, FieldsFile
from swe.output.ledger import LedgerFile
from swe.output.records import file_attributes
from swe.output.stations import Station, StationsFile, sample

ROOT = Path(__file__).resolve().parents[2]
START = datetime(2026, 3, 1, 6, 30, tzinfo=UTC)
RADIUS = 6.37122e6


def plane() -> Mesh:
    """A rectangle of 40 km by 30 km with a sloping bed."""
    mesh = hexagons_in(40e3, 30e3, 5e3)
    return with_depth(mesh, 10 + mesh.face_xyz[:, 0] / 1e3)


def sphere() -> Mesh:
    """A cap of invented water about 20 E, 60 N."""
    generator = np.random.default_rng(5)
    lon, lat = np.radians(20 + generator.uniform(-3, 3, 260)), np.radians(60 + generator.uniform(-1.5, 1.5, 260))
    xyz = np.column_stack([np.cos(lat) * np.cos(lon), np.cos(lat) * np.sin(lon), np.sin(lat)])
    wet = (np.abs(np.degrees(lon) - 20) < 2) & (np.abs(np.degrees(lat) - 60) < 1)
    mesh = sphere_mesh(xyz, wet, RADIUS)
    return with_depth(mesh, 30 + 20 * np.cos(40 * mesh.face_xyz[:, 0] / RADIUS))


def attributes(mesh: Mesh) -> dict[str, str]:
    return file_attributes("Invented bay, test", '[case]\nname = "bay"\n', mesh.checksum(), "A citation (2026)")


def state(mesh: Mesh, time: float) -> tuple[np.ndarray, np.ndarray, np.ndarray, np.ndarray]:
    """Numbers that tell face and time apart: eta, u, first and second component."""
    face, edge = np.arange(mesh.n_faces), np.arange(mesh.n_edges)
    return 1e-3 * face + time, -1e-4 * edge - time, 0.1 * np.sin(face + time), 0.1 * np.cos(face + time)


def extremes(mesh: Mesh, end: float) -> Extremes:
    face = np.arange(mesh.n_faces, dtype=float)
    return Extremes(1 + face, 0 * face + end / 2, -1 - face, 0 * face + end / 4, 0.1 * face, 0 * face + end, (0.0, end))


def write_fields(path: Path, mesh: Mesh, times, datum="mean_sea_level", names=CHOICES, precision="double") -> Path:
    with FieldsFile.create(path, mesh, names, START, attributes(mesh), datum, precision) as file:
        for time in times:
            file.append(time, *state(mesh, time))
        if "extremes" in names and len(times):
            file.write_extremes(extremes(mesh, max(times)))
    return path


def stations(mesh: Mesh) -> list[Station]:
    if mesh.spherical:
        return [Station("Inner quay", 19.5, 59.8), Station("Skerry", 20.6, 60.4)]
    return [Station("Inner quay", 9e3, 4e3), Station("Skerry", 31e3, 22e3), Station("Mole", 0.0, 0.0)]


def station_block(times, count: int) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    grid = np.asarray(times, dtype=float)[:, None] + 0.25 * np.arange(count)
    return grid, 0.1 * grid, -0.1 * grid


def write_stations(path: Path, mesh: Mesh, times, datum="mean_sea_level") -> Path:
    sampling = sample(mesh, stations(mesh), 50e3)
    with StationsFile.create(path, mesh, sampling, START, attributes(mesh), datum) as file:
        file.append(times, *station_block(times, len(sampling.stations)))
    return path


def ledger_block(times) -> dict[str, np.ndarray]:
    return {name: np.asarray(times) * (k + 1.0) for k, name in enumerate(ledger_quantities())}


def write_ledger(path: Path, mesh: Mesh, times) -> Path:
    with LedgerFile.create(path, START, attributes(mesh)) as file:
        file.append(times, ledger_block(times))
    return path


def tool(name: str) -> str:
    """The checker beside the running Python."""
    return str(Path(sys.executable).with_name(name))


def python(code: str, *arguments, **options) -> subprocess.CompletedProcess:
    """Run code in a new process that can import the package and these examples."""
    command = [sys.executable, "-c", code, *map(str, arguments)]
    return subprocess.run(command, env=environment(), capture_output=True, text=True, timeout=120, **options)


def start(code: str, *arguments) -> subprocess.Popen:
    """Start such a process, with pipes to talk to it."""
    command = [sys.executable, "-c", code, *map(str, arguments)]
    return subprocess.Popen(command, env=environment(), stdin=subprocess.PIPE, stdout=subprocess.PIPE, text=True)


def kill(process: subprocess.Popen) -> list[str]:
    """End a started process by SIGKILL; return the lines that it wrote and nobody read."""
    with process:
        process.send_signal(signal.SIGKILL)
        lines = process.stdout.read().splitlines()
    assert process.returncode == -signal.SIGKILL
    return lines


def environment() -> dict[str, str]:
    path = os.pathsep.join([str(ROOT), str(ROOT / "tests")])
    return os.environ | {"PYTHONPATH": path, "OPENBLAS_NUM_THREADS": "1"}


def compliance(path: Path) -> list[str]:
    """All that compliance-checker has to say of a file against CF-1.11, at its strictest."""
    done = subprocess.run(
        [tool("compliance-checker"), "-t", "cf:1.11", "-c", "strict", "-f", "json", "-o", "-", str(path)],
        capture_output=True, text=True, timeout=120,
    )  # fmt: skip
    report = json.loads(done.stdout[done.stdout.index("{") :])["cf:1.11"]
    return [
        f"{check['name']}: {message}"
        for level in ("high_priorities", "medium_priorities", "low_priorities")
        for check in report[level]
        for message in check["msgs"]
    ]
