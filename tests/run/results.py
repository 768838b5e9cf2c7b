"""Comparing two results number by number."""

from __future__ import annotations

import json
import shutil
from pathlib import Path

import netCDF4
import numpy as np

FILES = ("fields.nc", "stations.nc", "ledger.nc")

SPENT = ("steps", "model_seconds", "mass_drift_relative", "largest_mismatch", "largest_action_error", "repeats", "products")
"""Keys of a summary that do not depend on how often a run was stopped, nor on the ranks."""


def variables(folder: Path) -> dict[str, np.ndarray]:
    """Return all numbers of the result files, by "file:variable"."""
    found = {}
    for name in FILES:
        with netCDF4.Dataset(folder / name) as data:
            data.set_auto_mask(False)
            found |= {f"{name}:{key}": v[...] for key, v in data.variables.items() if v.dtype is not str}
    return found


def different(one: Path, other: Path) -> list[str]:
    """Return the names of variables that are not equal bit for bit (NaN equals NaN)."""
    first, second = variables(one), variables(other)
    assert set(first) == set(second)
    return [name for name in first if not np.array_equal(first[name], second[name], equal_nan=first[name].dtype.kind == "f")]


def largest_difference(one: Path, other: Path, names: tuple[str, ...]) -> float:
    """Return the largest absolute difference of the variables whose names end like one of `names`."""
    first, second = variables(one), variables(other)
    found = [np.max(np.abs(first[name] - second[name])) for name in first if name.split(":")[1] in names]
    assert found
    return float(max(found))


def summary(folder: Path) -> dict:
    return json.loads((folder / "summary.json").read_text())


def spent(folder: Path, *more: str) -> dict:
    return {key: summary(folder)[key] for key in (*SPENT, *more)}


def checkpoints(folder: Path) -> list[int]:
    """Return the steps of the checkpoints of a result."""
    return sorted(int(path.stem.split("-")[1]) for path in (folder / "checkpoints").glob("step-*.checkpoint"))


def broken_off(finished: Path, to: Path, after: int) -> Path:
    """Copy a result as if the run had been killed behind its checkpoint of step `after`; its files hold later records."""
    shutil.copytree(finished, to)
    for step in checkpoints(to):
        if step > after:
            (to / "checkpoints" / f"step-{step:012d}.checkpoint").unlink()
    (to / "summary.json").unlink()
    assert checkpoints(to)[-1] == after
    return to
