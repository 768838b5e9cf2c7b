"""How good a mesh is, in the numbers that accuracy and step depend on.

    spacing          d over inner edges
    angle            smallest angle of the Delaunay triangles (of the centres round a node with three faces); a regular
                     lattice has 60 degrees, 0 is a sliver; above 90 degrees elsewhere a node leaves its triangle
    l / d            smallest and largest over inner edges; regular hexagons 1/sqrt(3) = 0.577
    evenness         shortest over longest edge of one face; regular 1
    offset           distance from centre to centroid over sqrt(area); 0 on centroidal cells, where the divergence is most
                     accurate
    growth           larger over smaller area of two neighbours
    travel time      d / sqrt(g D), D the mean resting depth of the two faces: the shortest one limits an explicit step

Source of the choice of numbers: common practice, no source; Du, Faber & Gunzburger 1999, SIAM Rev. 41, 637 for centroids
(from memory).
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from scipy.sparse.csgraph import connected_components

from swe.mesh.invariants import check_invariants, face_polygon_areas, fans, pair_graph, place
from swe.mesh.sphere import dot
from swe.mesh.topology import Mesh, displacement

__all__ = ["Quality", "check_invariants", "quality"]


@dataclass(frozen=True)
class Quality:
    """The numbers of a mesh; lengths m, area m2, angle degrees, time s; `*_face` and `*_place` say where the worst is."""

    faces: int
    edges: int
    nodes: int
    waters: int
    area: float
    spacing_smallest: float
    spacing_median: float
    spacing_largest: float
    angle_smallest: float
    angle_face: int
    angle_place: str
    ratio_smallest: float
    ratio_largest: float
    evenness_smallest: float
    evenness_face: int
    evenness_place: str
    offset_median: float
    offset_largest: float
    offset_face: int
    offset_place: str
    growth_largest: float
    growth_face: int
    growth_place: str
    travel_smallest: float
    travel_face: int
    travel_place: str

    def lines(self) -> list[str]:
        """Return the table as text, one line a number. Not collective."""
        angle, even = f"{self.angle_smallest:.2f} degrees", f"{self.evenness_smallest:.4f}"
        offset, growth, travel = f"{self.offset_largest:.4f}", f"{self.growth_largest:.4f}", f"{self.travel_smallest:.5g} s"
        rows = [
            ("faces, edges, nodes", f"{self.faces} {self.edges} {self.nodes}", ""),
            ("separate waters", f"{self.waters}", ""),
            ("area", f"{self.area / 1e6:.6g} km2", ""),
            ("spacing smallest", f"{self.spacing_smallest:.5g} m", ""),
            ("spacing median", f"{self.spacing_median:.5g} m", ""),
            ("spacing largest", f"{self.spacing_largest:.5g} m", ""),
            ("smallest angle of a triangle of centres", angle, _at(self.angle_face, self.angle_place)),
            ("l/d smallest", f"{self.ratio_smallest:.4f}", ""),
            ("l/d largest", f"{self.ratio_largest:.4f}", ""),
            ("shortest over longest edge of a face", even, _at(self.evenness_face, self.evenness_place)),
            ("centre to centroid over sqrt(area), median", f"{self.offset_median:.4f}", ""),
            ("centre to centroid over sqrt(area), largest", offset, _at(self.offset_face, self.offset_place)),
            ("largest ratio of neighbouring areas", growth, _at(self.growth_face, self.growth_place)),
            ("shortest travel time d/sqrt(gD)", travel, _at(self.travel_face, self.travel_place)),
        ]
        return [f"{name:<45}{value:>22}  {where}".rstrip() for name, value, where in rows]


def quality(mesh: Mesh, gravity: float) -> Quality:
    """Measure a mesh. Not collective.

    gravity in m s-2. On a mesh without inner edges the numbers that need two faces are nan.
    """
    first, second = mesh.edge_faces[: mesh.n_inner].T
    distance, length = mesh.edge_distance[: mesh.n_inner], mesh.edge_length[: mesh.n_inner]
    area = mesh.face_area
    angle, angle_face = _angles(mesh)
    evenness, offset = _evenness(mesh), _offsets(mesh)
    growth = np.maximum(area[first], area[second]) / np.minimum(area[first], area[second])
    depth = np.maximum((mesh.depth[first] + mesh.depth[second]) / 2, 0.0)
    travel = np.divide(distance, np.sqrt(gravity * depth), out=np.full(distance.size, np.inf), where=depth > 0)
    deeper = np.where(mesh.depth[first] >= mesh.depth[second], first, second)
    every = np.arange(mesh.n_faces)
    return Quality(
        mesh.n_faces, mesh.n_edges, mesh.n_nodes,
        int(connected_components(pair_graph(mesh.edge_faces[: mesh.n_inner], mesh.n_faces), directed=False)[0]),
        float(area.sum()),
        *_spread(distance),
        *_worst(mesh, angle, angle_face, largest=False),
        *_spread(length / distance)[::2],
        *_worst(mesh, evenness, every, largest=False),
        float(np.median(offset)), *_worst(mesh, offset, every, largest=True),
        *_worst(mesh, growth, first, largest=True),
        *_worst(mesh, travel, deeper, largest=False),
    )  # fmt: skip


def _at(face: int, where: str) -> str:
    return f"face {face}, {where}" if face >= 0 else ""


def _spread(values: np.ndarray) -> tuple[float, float, float]:
    if not values.size:
        return (np.nan,) * 3
    return float(values.min()), float(np.median(values)), float(values.max())


def _worst(mesh: Mesh, values: np.ndarray, faces: np.ndarray, *, largest: bool) -> tuple[float, int, str]:
    if not values.size:
        return np.nan, -1, ""
    at = int(values.argmax() if largest else values.argmin())
    return float(values[at]), int(faces[at]), place(mesh, int(faces[at]))


def _angles(mesh: Mesh) -> tuple[np.ndarray, np.ndarray]:
    """Angles (degrees) of the triangles of centres round complete nodes, and the face at each."""
    faces = mesh.node_faces[(mesh.node_faces >= 0).all(axis=1)]
    corner = mesh.face_xyz[faces]
    ahead = displacement(mesh, corner, np.roll(corner, -1, axis=1))
    behind = displacement(mesh, corner, np.roll(corner, 1, axis=1))
    sine = np.linalg.norm(np.cross(ahead, behind), axis=-1)
    return np.degrees(np.arctan2(sine, dot(ahead, behind))).ravel(), faces.ravel()


def _evenness(mesh: Mesh) -> np.ndarray:
    """Shortest over longest edge of each face, border edges included."""
    held = mesh.face_edges >= 0
    length = mesh.edge_length[mesh.face_edges]
    return np.where(held, length, np.inf).min(axis=1) / np.where(held, length, 0.0).max(axis=1)


def _offsets(mesh: Mesh) -> np.ndarray:
    """Distance from centre to centroid over sqrt(area); on the sphere through the chord triangles, to second order."""
    centre, here, after, held = fans(mesh)
    weight = face_polygon_areas(mesh)[..., None] / 3
    moment = np.where(held[..., None], weight * ((here - centre) + (after - centre)), 0.0).sum(axis=1)
    step = moment / mesh.face_area[:, None]
    if mesh.spherical:
        up = mesh.face_xyz / mesh.radius
        step -= dot(step, up)[:, None] * up
    return np.linalg.norm(step, axis=1) / np.sqrt(mesh.face_area)
