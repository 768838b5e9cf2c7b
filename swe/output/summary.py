"""summary.json: what a run was, what it cost and how far it can be trusted, for people and for scripts.

JSON knows no NaN and no infinity: such a number is written as null, and its place is listed under "not_finite".
"""

from __future__ import annotations

import json
import math
import platform
from collections.abc import Mapping
from importlib import metadata
from pathlib import Path

import netCDF4
import numpy as np

from swe import __version__
from swe.constants import CAUTION
from swe.output.durable import atomic_write, file_trouble

REQUIRED = {
    "case": "name of the case",
    "finished": "True when the run reached its end",
    "ranks": "MPI ranks",
    "subdomains": "subdomains of the mesh",
    "faces": "faces of the mesh",
    "stepper": "method of the time step",
    "operator": "linear operator of the exponential",
    "step_seconds": "length of a step",
    "overlap": "layers of faces",
    "steps": "steps taken",
    "model_seconds": "model time reached",
    "wall_seconds": "wall time of the whole run, all sessions",
    "mass_drift_relative": "change of mass over mass at the start",
    "largest_mismatch": "between overlapping subdomains, as a level, m",
    "repeats": "repeated stages",
    "products": "products of the operator, all subdomains",
    "messages": "messages sent, all ranks",
    "bytes_sent": "bytes sent, all ranks",
    "peak_memory_bytes": "largest resident memory of a rank",
    "phases": "wall seconds by phase, one entry a rank",
    "versions": "of the program and what it stands on",
}
"""What a summary must say. Further keys are welcome."""


def write_summary(path: str | Path, summary: Mapping) -> None:
    """Write summary.json durably, the caution added. Not collective.

    summary   at least the keys of REQUIRED; numpy numbers and arrays are welcome
    Raises FileError, ValueError when a key is missing.
    """
    missing = [key for key in REQUIRED if key not in summary]
    if missing:
        raise ValueError(f"the summary lacks {', '.join(missing)}")
    not_finite: list[str] = []
    plain = {str(key): _plain(value, str(key), not_finite) for key, value in summary.items()}
    plain |= {"not_finite": not_finite, "caution": CAUTION}
    atomic_write(path, (json.dumps(plain, indent=2, allow_nan=False, ensure_ascii=False) + "\n").encode())


def read_summary(path: str | Path) -> dict:
    """Read a summary. Not collective. Raises FileError when it is missing or not JSON."""
    with file_trouble(path, "reading the summary"):
        try:
            return json.loads(Path(path).read_text(encoding="utf-8"))
        except ValueError as failure:
            raise OSError(f"not JSON: {failure}") from failure


def versions(mpi_library: str) -> dict[str, str]:
    """Return the versions of the program and what it stands on; PETSc when it is installed. Not collective.

    mpi_library   what the MPI library says of itself
    """
    found = {
        "swe": __version__,
        "python": platform.python_version(),
        "numpy": np.__version__,
        "mpi": mpi_library.strip().splitlines()[0] if mpi_library.strip() else "unknown",
        "netCDF": netCDF4.__netcdf4libversion__,
        "HDF5": netCDF4.__hdf5libversion__,
        "system": f"{platform.system()} {platform.machine()}",
    }
    for label, package in (("scipy", "scipy"), ("mpi4py", "mpi4py"), ("netCDF4", "netCDF4"), ("petsc", "petsc4py")):
        try:
            found[label] = metadata.version(package)
        except metadata.PackageNotFoundError:
            continue
    return found


def _plain(value, place: str, not_finite: list[str]):
    """Return a JSON value; note the places of numbers that JSON cannot carry."""
    if isinstance(value, Mapping):
        return {str(key): _plain(inner, f"{place}.{key}", not_finite) for key, inner in value.items()}
    if isinstance(value, np.ndarray | np.generic):
        return _plain(value.tolist(), place, not_finite)
    if isinstance(value, list | tuple):
        return [_plain(inner, f"{place}[{k}]", not_finite) for k, inner in enumerate(value)]
    if isinstance(value, float) and not math.isfinite(value):
        not_finite.append(place)
        return None
    return value
