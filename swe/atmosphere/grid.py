"""The part of a rectilinear grid that a basin needs, and bilinear weights on it.

A point between columns x_i, x_{i+1} and rows y_j, y_{j+1} takes, with the fractions s and t of the way,

    (1-s)(1-t) a_ij + s (1-t) a_i+1,j + (1-s) t a_i,j+1 + s t a_i+1,j+1

A grid whose last column ends up to half a step before the water counts as covering it; its last value holds there. A grid
round the whole Earth has no last column. Longitudes may follow either convention (0 to 360, -180 to 180); columns and rows may
stand in any order.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from scipy import sparse

from swe.errors import InputError
from swe.mesh.coast import Box, box_text
from swe.mesh.surface import Surface, near_longitude

ROUND = 1e-3
"""Of a step: what is nearer counts as the same column. Files often hold coordinates in single precision."""


@dataclass(frozen=True, eq=False)
class Line:
    """Part of an axis: values (m,) rising, in input coordinates; index (m,) of each in the file."""

    values: np.ndarray
    index: np.ndarray

    def bracket(self, wanted: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
        """Return the number of the value before, and the fraction of the way to the next; ends hold. Not collective."""
        before = np.clip(np.searchsorted(self.values, wanted, side="right") - 1, 0, self.values.size - 2)
        step = self.values[before + 1] - self.values[before]
        return before, np.clip((wanted - self.values[before]) / step, 0.0, 1.0)

    def reaches(self, low: float, high: float) -> tuple[bool, bool]:
        """Return whether the line reaches a low and a high value, but for half a step. Not collective."""
        steps, slack = np.diff(self.values), 0.5 + ROUND
        return bool(low >= self.values[0] - slack * steps[0]), bool(high <= self.values[-1] + slack * steps[-1])

    def between(self, low: float, high: float) -> "Line":
        """Return the part from the value before `low` to the one behind `high`. Not collective."""
        first = int(np.clip(np.searchsorted(self.values, low, side="right") - 1, 0, self.values.size - 2))
        last = int(np.clip(np.searchsorted(self.values, high, side="left"), first + 1, self.values.size - 1))
        return Line(self.values[first : last + 1], self.index[first : last + 1])


@dataclass(frozen=True, eq=False)
class Window:
    """Columns and rows round a basin; values on it are (rows, columns). centre: longitude about which points lie, or None."""

    columns: Line
    rows: Line
    centre: float | None

    @property
    def shape(self) -> tuple[int, int]:
        return self.rows.values.size, self.columns.values.size

    def weights(self, points: np.ndarray) -> sparse.csr_array:
        """Return bilinear weights, (n, rows times columns), of points (n, 2) in input coordinates. Not collective."""
        x, y = np.asarray(points, dtype=float).T
        x = x if self.centre is None else near_longitude(x, self.centre)
        (i, s), (j, t) = self.columns.bracket(x), self.rows.bracket(y)
        corners = [(dj, di) for dj in (0, 1) for di in (0, 1)]
        place = np.stack([(j + dj) * self.columns.values.size + i + di for dj, di in corners], axis=1)
        share = np.stack([(t if dj else 1.0 - t) * (s if di else 1.0 - s) for dj, di in corners], axis=1)
        starts = np.arange(0, place.size + 1, 4)
        matrix = sparse.csr_array((share.ravel(), place.ravel(), starts), shape=(len(x), self.shape[0] * self.shape[1]))
        matrix.eliminate_zeros()  # so that a missing value without weight does no harm
        return matrix


def window(place: str, x: np.ndarray, y: np.ndarray, surface: Surface, box: Box) -> Window:
    """Return the part of the grid with columns x and rows y that holds the box. Not collective.

    place   the file, for messages
    Raises InputError: axes of less than two values or not in order, box not covered.
    """
    west, south, east, north = box
    centre = (west + east) / 2 if surface.spherical else None
    columns = _line(place, surface.axes[0], x if centre is None else np.unwrap(x, period=360))
    columns = columns if centre is None else _near(columns, centre)
    rows = _line(place, surface.axes[1], y)
    reached = (*columns.reaches(west, east), *rows.reaches(south, north))
    if not all(reached):
        sides = [side for side, there in zip(("west", "east", "south", "north"), reached) if not there]
        extent = (columns.values[0], rows.values[0], columns.values[-1], rows.values[-1])
        raise InputError(
            f"{place}: does not cover the basin in the {' and '.join(sides)}: grid {box_text(extent, surface)}; "
            f"basin {box_text(box, surface)}; give a larger grid"
        )
    return Window(columns.between(west, east), rows.between(south, north), centre)


def _line(place: str, name: str, values: np.ndarray) -> Line:
    step = np.diff(values)
    if not (step.size and np.isfinite(values).all() and ((step > 0).all() or (step < 0).all())):
        raise InputError(
            f"{place}: its {name} has less than two values, or neither rises nor falls throughout; give a rectilinear grid"
        )
    order = np.argsort(values)
    return Line(values[order], order)


def _near(line: Line, centre: float) -> Line:
    """Return longitudes within half a turn of `centre`; a whole circle is carried on a turn to both sides."""
    step = np.diff(line.values)
    if line.values[-1] - line.values[0] + np.median(step) * (1 + ROUND) < 360.0:
        middle = (line.values[0] + line.values[-1]) / 2
        return Line(line.values + 360.0 * np.round((centre - middle) / 360.0), line.index)
    start = near_longitude(line.values[0], centre) - line.values[0]
    values = np.concatenate([line.values + start + turn for turn in (-360.0, 0.0, 360.0)])
    order = np.argsort(values, kind="stable")
    values, index = values[order], np.tile(line.index, 3)[order]
    fresh = np.append(True, np.diff(values) > ROUND * step.min())  # the seam may stand in the file twice
    return Line(values[fresh], index[fresh])
