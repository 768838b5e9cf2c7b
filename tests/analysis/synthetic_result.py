"""A small result made by the writers of the output room: every number in it is known in closed form.

level      east-west mode with growing amplitude   eta = 0.02 k cos(pi s) m at record k, s in 0..1 from west to east
current    first component 0.1 k sin(pi s), second 0; m s-1
"""

from datetime import datetime
from pathlib import Path

import numpy as np

from swe.mesh.topology import Mesh, with_depth
from swe.mesh.voronoi import plane_mesh, sphere_mesh
from swe.output.catalogue import ledger_quantities
from swe.output.fields import Extremes, FieldsFile
from swe.output.ledger import LedgerFile
from swe.output.records import file_attributes
from swe.output.stations import Station, StationsFile, sample
from swe.output.summary import REQUIRED, write_summary

BEGIN = datetime(2031, 3, 1)
RECORDS = 5
HOUR = 3600.0
TITLE = "Test basin: a mode that grows"


def lattice(nx: int = 17, ny: int = 12):
    """Return points of a hexagonal lattice in units of the spacing, and which are water: a box with one island."""
    i, j = np.meshgrid(np.arange(-1, nx + 1), np.arange(-1, ny + 1))
    points = np.column_stack([(i + 0.5 * (j % 2)).ravel(), (j * np.sqrt(3) / 2).ravel()])
    inside = ((i >= 0) & (i < nx) & (j >= 0) & (j < ny)).ravel()
    return points, inside & (np.hypot(points[:, 0] - 9.0, points[:, 1] - 3.5) > 1.6)


def plane_basin() -> Mesh:
    """Return a basin of 2 km faces on a plane, 10 m deep in the west, 50 m in the east."""
    points, wet = lattice()
    mesh = plane_mesh(2000.0 * points, wet)
    return with_depth(mesh, 10.0 + 40.0 * along(mesh))


def sphere_basin() -> Mesh:
    """Return a basin at the date line, 45 N, faces of about 11 km, 4 to 2000 m deep."""
    points, wet = lattice()
    lon, lat = np.radians(179.0 + 0.14 * points[:, 0]), np.radians(45.0 + 0.1 * points[:, 1])
    xyz = np.column_stack([np.cos(lat) * np.cos(lon), np.cos(lat) * np.sin(lon), np.sin(lat)])
    mesh = sphere_mesh(xyz, wet, 6.37122e6)
    return with_depth(mesh, 4.0 * 500.0 ** along(mesh))


def along(mesh: Mesh) -> np.ndarray:
    """Return s (nf,): 0 at the westernmost centre, 1 at the easternmost."""
    x = np.unwrap(np.arctan2(mesh.face_xyz[:, 1], mesh.face_xyz[:, 0]) % (2 * np.pi)) if mesh.spherical else mesh.face_xyz[:, 0]
    return (x - x.min()) / (x.max() - x.min())


def fields_at(mesh: Mesh, record: int):
    """Return level, normal velocity (zero), and the two components of the current."""
    s = along(mesh)
    return 0.02 * record * np.cos(np.pi * s), np.zeros(mesh.n_edges), 0.1 * record * np.sin(np.pi * s), np.zeros(mesh.n_faces)


def stations_of(mesh: Mesh) -> list[Station]:
    """Return one station at each end."""
    west, east = int(np.argmin(along(mesh))), int(np.argmax(along(mesh)))
    places = mesh.face_xyz[[west, east]]
    if mesh.spherical:
        places = np.degrees(np.column_stack([np.arctan2(places[:, 1], places[:, 0]), np.arcsin(places[:, 2] / mesh.radius)]))
    return [Station(name, *place[:2]) for name, place in zip(("West Quay", "East Quay"), places, strict=True)]


def write_result(
    folder: Path,
    mesh: Mesh,
    records: int = RECORDS,
    names=("level", "velocity", "extremes"),
    finished: bool = True,
    subdomains: int = 4,
) -> Path:
    """Write a whole result folder; unfinished ones have no summary."""
    folder.mkdir(parents=True, exist_ok=True)
    attributes = file_attributes(TITLE, 'title = "Test basin"\n', mesh.checksum(), "none")
    with FieldsFile.create(folder / "fields.nc", mesh, names, BEGIN, attributes, "mean_sea_level", "double") as file:
        for k in range(records):
            file.append(k * HOUR, *fields_at(mesh, k))
        if "extremes" in names and records:
            file.write_extremes(extremes_of(mesh, records))
    sampling = sample(mesh, stations_of(mesh), 1e4)
    times = HOUR * np.arange(records)
    with StationsFile.create(folder / "stations.nc", mesh, sampling, BEGIN, attributes, "mean_sea_level") as file:
        values = [fields_at(mesh, k) for k in range(records)]
        level, first, second = (np.array([row[n][sampling.face] for row in values]).reshape(records, 2) for n in (0, 2, 3))
        file.append(times, level, first, second)
    with LedgerFile.create(folder / "ledger.nc", BEGIN, attributes) as file:
        file.append(times, ledger_columns(times, subdomains))
    if finished:
        write_summary(folder / "summary.json", summary_of(mesh, subdomains))
    return folder


def extremes_of(mesh: Mesh, records: int) -> Extremes:
    """Return the extremes of the closed form: the last record where the level is positive, the first one elsewhere."""
    levels = np.array([fields_at(mesh, k)[0] for k in range(records)])
    speeds = np.array([fields_at(mesh, k)[2] for k in range(records)])
    return Extremes(
        levels.max(axis=0), HOUR * levels.argmax(axis=0), levels.min(axis=0), HOUR * levels.argmin(axis=0),
        speeds.max(axis=0), HOUR * speeds.argmax(axis=0), (0.0, (records - 1) * HOUR),
    )  # fmt: skip


def ledger_columns(times: np.ndarray, subdomains: int) -> dict[str, np.ndarray]:
    """Return a ledger whose every value is easy to name in a test."""
    hours = times / HOUR
    columns = {name: np.zeros(times.size) for name in ledger_quantities()}
    columns |= {
        "mass_drift": -2e-16 * hours,
        "kinetic_energy": 3e12 * hours,
        "potential_energy": 1e12 * hours,
        "mismatch": np.where(hours > 0, 1e-7 * 10.0**-hours, 0.0) if subdomains > 1 else 0.0 * hours,
        "time_error": np.full(times.size, 2e-4),
        "repeats": 1.0 * (hours > 2),
        "products": 500.0 * hours,
    }
    return columns


def summary_of(mesh: Mesh, subdomains: int) -> dict:
    """Return a summary of a run of 4 hours at 120 s on two ranks."""
    known = {
        "case": "test", "finished": True, "ranks": 2, "subdomains": subdomains, "faces": mesh.n_faces, "stepper": "two-stage",
        "operator": "wave", "step_seconds": 120.0, "overlap": 6, "steps": 120, "model_seconds": 4 * HOUR, "wall_seconds": 12.0,
        "mass_drift_relative": -8e-16, "largest_mismatch": 1e-5, "repeats": 1, "products": 2000, "messages": 960,
        "bytes_sent": 1_200_000, "peak_memory_bytes": 150_000_000, "versions": {},
        "phases": [{"products": 6.0, "rates": 3.0, "exchange": 1.0}, {"products": 5.0, "rates": 3.0, "exchange": 2.0}],
    }  # fmt: skip
    assert set(known) == set(REQUIRED)
    return known
