"""Wind and air pressure from a netCDF file after the CF conventions, one time of the window of a basin at a time.

What is what tell `cf_names` and `units`. Values may be packed, and missing.
Source: CF Metadata Conventions 1.11, sections 2.5 and 8.1.
"""

from __future__ import annotations

from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

import netCDF4
import numpy as np
from scipy import sparse

from swe.atmosphere.calendars import record_times
from swe.atmosphere.cf_names import Lines, find_lines, find_variables
from swe.atmosphere.grid import Line, Window, window
from swe.atmosphere.period import Period
from swe.atmosphere.units import PRESSURE, WIND, Kind
from swe.errors import InputError
from swe.mesh.coast import Box
from swe.mesh.surface import Surface

KEPT = 3
"""Times whose windows are held, for the subdomains of a rank that ask one after the other."""


class GriddedRecord:
    """A window of a grid file; satisfies `record.Record`. Opened by `open_wind` and `open_pressure`; `close` it."""

    def __init__(
        self, path: Path, dataset: netCDF4.Dataset, variables: list, kind: Kind, grid: Window, lines: Lines, period: Period
    ):
        self.name = f"{path} ({', '.join(variable.name for variable in variables)})"
        self._path, self._dataset, self._variables, self._kind, self._lines = path, dataset, variables, kind, lines
        self._factors = [kind.factor(f"{path}: {v.name}", str(getattr(v, "units", ""))) for v in variables]
        self._first, self.times = record_times(f"{path}: {lines.time.name}", lines.time, period)
        self._period, self.window = period, grid
        self._held: dict[int, np.ndarray] = {}

    def at(self, index: int) -> np.ndarray:
        """Return the values of one time, (k, m), SI, NaN where missing. Not collective. Raises InputError."""
        if index not in self._held:
            with _readable(self._path):
                values = [self._read(v, factor, index) for v, factor in zip(self._variables, self._factors, strict=True)]
            self._held[index] = np.stack(values)
            self._kind.believe(f"{self.name} at {self.date(index)}", self._held[index])
            if len(self._held) > KEPT:
                del self._held[next(iter(self._held))]
        return self._held[index]

    def weights(self, points: np.ndarray) -> sparse.csr_array:
        """Return bilinear weights of points (n, 2) in input coordinates, (n, m). Not collective."""
        return self.window.weights(points)

    def date(self, index: int) -> str:
        """Return the date of one time. Not collective."""
        return self._period.date(self.times[index])

    def close(self) -> None:
        """Close the file. Not collective."""
        self._dataset.close()

    def _read(self, variable: netCDF4.Variable, factor: float, index: int) -> np.ndarray:
        """Return the values of one variable, row after row of the window; only the stretches needed are read."""
        lines, rows, columns = self._lines, self.window.rows, self.window.columns
        row_range = slice(rows.index.min(), rows.index.max() + 1)
        parts = []
        for run in _runs(columns):
            where = {
                lines.time_dimension: self._first + index,
                lines.y_dimension: row_range,
                lines.x_dimension: slice(run.min(), run.max() + 1),
            }
            values = variable[tuple(where.get(dimension, 0) for dimension in variable.dimensions)]
            block = np.ma.filled(np.ma.asarray(values, dtype=float), np.nan)
            order = [dimension for dimension in variable.dimensions if dimension in (lines.y_dimension, lines.x_dimension)]
            block = block if order == [lines.y_dimension, lines.x_dimension] else block.T
            parts.append(block[:, run - run.min()])
        return factor * np.hstack(parts)[rows.index - row_range.start].ravel()


def open_wind(
    path: str | Path, surface: Surface, box: Box, period: Period, variables: tuple[str, str] | None = None
) -> GriddedRecord:
    """Open the 10 m wind round a box (input coordinates) for a period: two components, m s-1. Not collective.

    variables   names of the two components, where the standard names do not tell them
    Raises InputError, one line, naming the file: missing, not netCDF, coordinates or variables not found or ambiguous, unit,
    height, box or period not covered.
    """
    return _open(Path(path), surface, box, period, WIND, variables)


def open_pressure(path: str | Path, surface: Surface, box: Box, period: Period, variable: str | None = None) -> GriddedRecord:
    """Open the air pressure at mean sea level round a box for a period: one component, Pa. Not collective.

    Arguments and errors as for `open_wind`.
    """
    return _open(Path(path), surface, box, period, PRESSURE, None if variable is None else (variable,))


def _open(path: Path, surface: Surface, box: Box, period: Period, kind: Kind, wanted: tuple[str, ...] | None) -> GriddedRecord:
    if not path.is_file():
        raise InputError(f"{path}: no such file; give a netCDF file with {kind.name} on a grid")
    with _readable(path):
        dataset = netCDF4.Dataset(path)
    try:
        with _readable(path):
            lines = find_lines(path, dataset, surface)
            variables = find_variables(path, dataset, lines, kind, wanted)
            return GriddedRecord(path, dataset, variables, kind, window(str(path), lines.x, lines.y, surface, box), lines, period)
    except InputError:
        dataset.close()
        raise


@contextmanager
def _readable(path: Path) -> Iterator[None]:
    try:
        yield
    except (OSError, RuntimeError) as failure:
        reason = getattr(failure, "strerror", None) or str(failure)
        raise InputError(f"{path}: not a netCDF file, or cut short ({reason}); fetch it again") from None


def _runs(columns: Line) -> list[np.ndarray]:
    """Return the file indices of the columns in stretches that stand side by side in the file."""
    return np.split(columns.index, np.flatnonzero(np.abs(np.diff(columns.index)) != 1) + 1)
