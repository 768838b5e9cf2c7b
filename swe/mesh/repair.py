"""Cure of triangles that are not sharp-angled.

The operators need every node inside its triangle: all kites and edge lengths above zero. For an edge of centre distance d
with the angles a and b opposite to it in its two triangles

    l = d (cot a + cot b) / 2,

so when no angle exceeds LIMIT, all kites are positive and l/d >= cot LIMIT: one criterion serves both.

    1.  in each triangle whose largest angle exceeds LIMIT push its corner p away from the middle m of the opposite side ij
        until |p - m| = cot(LIMIT/2) |i - j| / 2 (exact for equal legs), and i and j a little back and together
    2.  from round EVENING on, first sweep the neighbourhood evenly
    3.  from round CHANGING on, where an angle exceeds ACCEPTED, before that split the opposite side if it is long against
        the spacing, else take the corner out

Later rounds look only at the neighbourhood of what is left: the Delaunay triangles of a patch are those of the whole, save
near its rim.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from scipy.spatial import cKDTree

from swe.mesh.delaunay import plane_triangles
from swe.mesh.relax import relaxed

LIMIT = 80.0
"""Largest angle left, degrees; then l/d >= 0.17. Trials reach 75 as well, at the cost of evenness."""

ACCEPTED = 86.0
"""Largest angle that is good enough when patience ends, degrees; then l/d >= 0.07."""

OVERSHOOT = 1.2
"""Each push goes this far: neighbours push back."""

PUSHES = 6
"""Pushes in a round."""

EVENING, CHANGING, ROUNDS = 2, 4, 20
"""The rounds, from 0, where steps 2 and 3 begin, and their number. After 40 sweeps trials end in round 1, seldom 5; after a
single sweep not always in 20."""

SWEEPS = 10
"""Even sweeps of step 2."""

LONG = 1.35
"""A side longer than this many spacings is split rather than its corner taken out."""

CORE, PATCH = 4.0, 9.0
"""In spacings round a bad triangle: centres this near may move; centres this near are triangulated with it."""

Places = Callable[[np.ndarray], np.ndarray]


@dataclass(frozen=True)
class RepairReport:
    """Bad triangles at first and at last, the largest angle left (degrees), centres added and taken out."""

    bad_first: int
    bad_last: int
    largest_angle: float
    added: int
    removed: int


def repaired(centres: np.ndarray, free: np.ndarray, spacing: Places, wet: Places) -> tuple[np.ndarray, RepairReport]:
    """Return the centres with their triangles cured where one corner is wet, and what was done. Not collective.

    centres (n, 2) m; free (n,) bool; spacing (m) and wet (bool) at places. What cannot be cured stands in the report.
    """
    added = removed = 0
    bad, worst = bad_triangles(centres, wet)
    first = len(bad)
    for round_ in range(ROUNDS):
        if not len(bad) or (round_ > CHANGING and worst <= ACCEPTED):
            break
        if round_ >= CHANGING and worst > ACCEPTED:  # 3.
            centres, free, more, fewer = _changed(centres, free, spacing, bad)
            added, removed = added + more, removed + fewer
            bad, worst = bad_triangles(centres, wet)
        if round_ >= EVENING:  # 2.
            centres = _on_patch(centres, free, spacing, bad, lambda p, moving: relaxed(p, moving, spacing, SWEEPS, None, 0.5))
        centres = _on_patch(centres, free, spacing, bad, lambda p, moving: _pushed(p, moving, wet))  # 1.
        bad, worst = bad_triangles(centres, wet)
    return centres, RepairReport(first, len(bad), worst, added, removed)


def bad_triangles(centres: np.ndarray, wet: Places) -> tuple[np.ndarray, float]:
    """Return the triangles (n, 3) with a wet corner and an angle above LIMIT. Not collective.

    The corner of the largest angle comes first. Also returns the largest angle of all triangles with a wet corner, degrees.
    """
    corners = plane_triangles(centres).points
    corners = corners[wet(centres)[corners].any(axis=1)]
    if not len(corners):
        return corners, 0.0
    angles = corner_angles(centres[corners])
    largest = angles.argmax(axis=1)
    turned = np.take_along_axis(corners, (largest[:, None] + np.arange(3)) % 3, axis=1)
    return turned[angles.max(axis=1) > LIMIT], float(angles.max())


def corner_angles(triangles: np.ndarray) -> np.ndarray:
    """Return the angles (n, 3) in degrees at the corners of triangles (n, 3, 2). Not collective."""
    ahead = np.roll(triangles, -1, axis=1) - triangles
    behind = np.roll(triangles, 1, axis=1) - triangles
    cross = ahead[..., 0] * behind[..., 1] - ahead[..., 1] * behind[..., 0]
    return np.degrees(np.arctan2(np.abs(cross), (ahead * behind).sum(axis=2)))


def _pushed(points: np.ndarray, moving: np.ndarray, wet: Places) -> np.ndarray:
    """Step 1, PUSHES times, on triangles all of whose corners may move."""
    points = points.copy()
    for _ in range(PUSHES):
        bad, _ = bad_triangles(points, wet)
        bad = bad[moving[bad].all(axis=1)]
        if not len(bad):
            break
        p, i, j = bad.T
        side, away = points[j] - points[i], points[p] - (points[i] + points[j]) / 2
        length, height = np.hypot(*side.T)[:, None], np.hypot(*away.T)[:, None]
        lack = OVERSHOOT * np.maximum(length / (2 * np.tan(np.radians(LIMIT) / 2)) - height, 0.003 * length)
        away, side = lack * away / height, lack * side / length
        for corner, push in ((p, away / 2), (i, (side - away) / 4), (j, (-side - away) / 4)):
            np.add.at(points, corner, push)
    return points


def _on_patch(centres: np.ndarray, free: np.ndarray, spacing: Places, bad: np.ndarray, act) -> np.ndarray:
    """Let `act` move the free centres near the bad triangles, among the centres around them."""
    if not len(bad):
        return centres
    distance, nearest = cKDTree(centres[bad].mean(axis=1)).query(centres)
    distance /= spacing(centres[bad[:, 0]])[nearest]
    patch = np.flatnonzero(distance < PATCH)
    centres = centres.copy()
    centres[patch] = act(centres[patch], free[patch] & (distance[patch] < CORE))
    return centres


def _changed(centres: np.ndarray, free: np.ndarray, spacing: Places, bad: np.ndarray) -> tuple[np.ndarray, np.ndarray, int, int]:
    """Step 3; of triangles that share a corner only the first is treated."""
    sharp = corner_angles(centres[bad]).max(axis=1) > ACCEPTED
    bad = bad[sharp & free[bad].all(axis=1)]
    _, first = np.unique(bad[:, 0], return_index=True)
    p, i, j = bad[np.sort(first)].T
    long = np.hypot(*(centres[i] - centres[j]).T) > LONG * spacing(centres[p])
    middles = np.unique(((centres[i] + centres[j]) / 2)[long], axis=0)
    kept = np.ones(len(centres), dtype=bool)
    kept[p[~long]] = False
    centres = np.vstack([centres[kept], middles])
    return centres, np.concatenate([free[kept], np.ones(len(middles), dtype=bool)]), len(middles), int((~kept).sum())
