"""Sweeps that space the centres evenly: Lloyd's method with a density, and rows of centres along the coast.

One sweep moves each free centre towards the centroid of its Voronoi cell under the density

    rho = h^-4,    since the spacing of a centroidal tessellation of the plane follows rho^(-1/4)

(Du, Faber & Gunzburger 1999, SIAM Rev. 41, 637; the exponent is Gersho's, 1979, IEEE Trans. Inf. Theory 25, 373; both from
memory), and a little beyond (OVERSHOOT), which shortens the way.

Guidance: a hexagonal pattern that runs along a straight coast has rows at distances

    (k + offset) ROW h,   k = ..., -1, 0, 1, ...,   ROW = sqrt(3)/2,   positive in the water

With offset 1/2 the coast is half-way between a dry row and a wet row, and follows the sides of whole cells instead of being a
staircase. Centres of the two rows next to the coast are drawn to their row, along the line to the nearest place on the coast.
A pattern at twice the spacing has half its rows: the offset t becomes t/2 or (t + 1)/2 there (`row_offset`).
"""

from __future__ import annotations

from collections.abc import Callable

import numpy as np

from swe.mesh.lloyd import lloyd_plane
from swe.mesh.shoreline import Shoreline

OVERSHOOT = 1.5
"""Step in units of the way to the centroid. 1 is Lloyd's own; linear analysis allows less than 2. Chosen by trial."""

LONGEST_STEP = 0.5
"""In spacings: an unusual cell, open or far too large, must not fling its centre away."""

ROW = np.sqrt(3) / 2
"""Distance between rows in spacings."""

PULL = 0.3
"""Part of the way to its row that one sweep draws a centre. Stronger, rows of neighbouring coasts meet in bad angles; weaker,
they do not form. Chosen by trial."""

REACH = 4.0
"""Centres farther from the coast than this many spacings at first are never drawn; sweeps move them by far less."""

Field = Callable[[np.ndarray], np.ndarray]


def relaxed(
    centres: np.ndarray, free: np.ndarray, spacing: Field, sweeps: int, shoreline: Shoreline | None, offset: float
) -> np.ndarray:
    """Return the centres (n, 2) after a number of sweeps; those that are not free, (n,) bool, stay. Not collective.

    spacing     chart spacing (m) at chart places
    shoreline   the coast that guides rows, or None; offset: of the rows, in rows
    """
    centres = centres.copy()
    near = _near_coast(centres, free, spacing, shoreline)
    for _ in range(sweeps):
        h = spacing(centres)
        step = OVERSHOOT * (lloyd_plane(centres, ~free, (h / h.mean()) ** -4.0) - centres)
        length = np.hypot(step[:, 0], step[:, 1])
        centres += step * np.minimum(1, LONGEST_STEP * h / np.maximum(length, 1e-300))[:, None]
        if near.size:
            centres[near] = drawn_to_rows(centres[near], spacing, shoreline, offset)
    return centres


def drawn_to_rows(centres: np.ndarray, spacing: Field, shoreline: Shoreline, offset: float) -> np.ndarray:
    """Return the centres (n, 2), those of the two rows next to the coast drawn to their row by PULL. Not collective."""
    distance, foot = shoreline.nearest(centres)
    row = ROW * spacing(centres)
    place = distance / row - offset
    # On the coast itself the way to it has no direction.
    drawn = (place > -1.5) & (place < 0.5) & (np.abs(distance) > 1e-3 * row)
    target = (np.where(place[drawn] > -0.5, 0, -1) + offset) * row[drawn]
    moved = centres.copy()
    moved[drawn] += (PULL * (target / distance[drawn] - 1))[:, None] * (centres[drawn] - foot[drawn])
    return moved


def row_offset(level: int) -> float:
    """Return the offset of the rows where the spacing is 2^level times the final one, between 1/4 and 3/4. Not collective."""
    offset = 0.5
    for _ in range(level):
        offset = offset / 2 if offset >= 0.5 else (offset + 1) / 2
    return offset


def _near_coast(centres: np.ndarray, free: np.ndarray, spacing: Field, shoreline: Shoreline | None) -> np.ndarray:
    if shoreline is None:
        return np.zeros(0, dtype=int)
    distance, _ = shoreline.nearest(centres)
    return np.flatnonzero(free & (np.abs(distance) < REACH * spacing(centres)))
