"""Where a mesh wants the weather: its points in input coordinates, x and y in m or longitude and latitude in degrees."""

from __future__ import annotations

import numpy as np

from swe.mesh.coast import Box
from swe.mesh.surface import near_longitude
from swe.mesh.topology import Mesh


def face_points(mesh: Mesh) -> np.ndarray:
    """Return the centres of the faces, (nf, 2). Not collective."""
    return _points(mesh, mesh.face_xyz)


def edge_points(mesh: Mesh) -> np.ndarray:
    """Return the midpoints of the edges, (ne, 2). Not collective."""
    return _points(mesh, mesh.edge_xyz)


def _points(mesh: Mesh, xyz: np.ndarray) -> np.ndarray:
    if not mesh.spherical:
        return xyz[:, :2]
    x, y, z = xyz.T
    return np.degrees(np.column_stack([np.arctan2(y, x), np.arctan2(z, np.hypot(x, y))]))


def box_of(*meshes: Mesh) -> Box:
    """Return the box (west, south, east, north) of all faces and edges; its longitudes may pass 180. Not collective."""
    points = np.concatenate([points(mesh) for mesh in meshes for points in (face_points, edge_points)])
    if meshes[0].spherical:
        longitude = np.sort(np.mod(points[:, 0], 360.0))
        gap = np.diff(longitude, append=longitude[0] + 360.0)
        middle = longitude[gap.argmax()] + gap.max() / 2 + 180.0  # opposite the widest stretch without water
        points = np.column_stack([near_longitude(points[:, 0], np.mod(middle + 180.0, 360.0) - 180.0), points[:, 1]])
    return tuple(float(value) for value in (*points.min(axis=0), *points.max(axis=0)))
