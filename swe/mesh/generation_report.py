"""What a generated mesh owes to its inputs: how the spacing came out, what was left out and where.

spacing reached     distance of neighbouring centres over the wanted spacing; 1 where the wish is met
dropped waters      bodies of water that do not connect with the largest one at this spacing
dead ends           faces with fewer than two wet neighbours
islands lost        islands that hold no dry centre: water flows over them
across land         neighbouring faces whose centres have land between them, for LAND_SHARE of the way or more: land
                    narrower than the spacing does not hold water back there
"""

from __future__ import annotations

from dataclasses import asdict, dataclass

import numpy as np
import shapely

from swe.mesh.depth import DepthReport
from swe.mesh.layout import Basin
from swe.mesh.repair import RepairReport
from swe.mesh.spacing import SpacingField
from swe.mesh.surface import Chart, Surface

LAND_SHARE = 0.3
SAMPLES = 10
"""Places tried between two centres."""


@dataclass(frozen=True)
class Dropped:
    """A part of the water without faces: how many it would have had, its area (m2, by the spacing), and one place in it."""

    faces: int
    area: float
    place: str


@dataclass(frozen=True)
class GenerationReport:
    """How a mesh came about. Areas m2, lengths m, angles degrees; spacing_reached: 5 %, 50 % and 95 % of the edges are below."""

    faces: int
    edges: int
    nodes: int
    expected_faces: float
    area: float
    water_area: float
    wanted_finest: float
    wanted_coarsest: float
    spacing_reached: tuple[float, float, float]
    growth: float
    sweeps: int
    coarse_levels: int
    seed: int
    dropped_waters: tuple[Dropped, ...]
    dead_ends: Dropped
    waters: int
    waters_without_face: int
    islands: int
    islands_lost: int
    across_land: int
    across_land_place: str
    repair: RepairReport
    depth: DepthReport

    def as_dict(self) -> dict:
        """Return all numbers by name, nested as here. Not collective."""
        return asdict(self)

    def lines(self) -> list[str]:
        """Return sentences for people. Not collective."""
        return [*self._size_lines(), *self._loss_lines(), *self._repair_lines(), *self.depth.lines()]

    def _size_lines(self) -> list[str]:
        low, middle, high = self.spacing_reached
        return [
            f"{self.faces} faces, {self.edges} edges, {self.nodes} nodes; {self.expected_faces:.0f} faces by the spacing",
            f"area {_km2(self.area)} of {_km2(self.water_area)} of water ({100 * self.area / self.water_area:.2f} %)",
            f"spacing wanted {self.wanted_finest:.4g} to {self.wanted_coarsest:.4g} m, growth at most {self.growth:g}",
            f"spacing reached over wanted {middle:.3f} (5 % of the edges below {low:.3f}, 5 % above {high:.3f})",
            f"{self.sweeps} sweeps, {self.coarse_levels} coarser levels, seed {self.seed}",
        ]

    def _loss_lines(self) -> list[str]:
        said = [self._dropped_line()] if self.dropped_waters else []
        ends = self.dead_ends
        if ends.faces:
            said.append(f"dropped {ends.faces} faces at dead ends, about {_km2(ends.area)}, one at {ends.place}")
        if self.waters_without_face:
            said.append(f"{self.waters_without_face} of {self.waters} separate waters are too small for a face")
        if self.islands_lost:
            said.append(f"{self.islands_lost} of {self.islands} islands are too small for the spacing and are water in the mesh")
        if self.across_land:
            land = "have land narrower than the spacing between them, and water passes"
            said.append(f"{self.across_land} pairs of neighbouring faces {land}; one at {self.across_land_place}")
        return said

    def _dropped_line(self) -> str:
        bodies, largest = self.dropped_waters, self.dropped_waters[0]
        faces, area = sum(body.faces for body in bodies), sum(body.area for body in bodies)
        return (
            f"dropped {len(bodies)} waters that do not connect with the largest: {faces} faces, about {_km2(area)}; "
            f"the largest of them {largest.faces} faces, about {_km2(largest.area)}, at {largest.place}"
        )

    def _repair_lines(self) -> list[str]:
        fix = self.repair
        changed = f"; {fix.added} centres added, {fix.removed} taken out" if fix.added or fix.removed else ""
        return [f"largest angle between centres {fix.largest_angle:.1f} degrees, {fix.bad_first} triangles cured{changed}"]


def _km2(area: float) -> str:
    return f"{area / 1e6:.6g} km2"


def place_text(place: np.ndarray, chart: Chart, surface: Surface) -> str:
    """Return a chart position in words. Not collective."""
    first, second = chart.from_chart(place[None])[0]
    names = surface.axes
    return f"{names[0]} {first:.5f}, {names[1]} {second:.5f}" if surface.spherical else f"x {first:.6g} m, y {second:.6g} m"


def dropped(centres: np.ndarray, field: SpacingField, chart: Chart, surface: Surface) -> Dropped:
    """Return the report on wet centres (n, 2) that do not become faces. Not collective."""
    if not len(centres):
        return Dropped(0, 0.0, "")
    true = field.at(centres) / chart.stretch(centres)
    return Dropped(len(centres), float(np.sqrt(3) / 2 * (true**2).sum()), place_text(centres[0], chart, surface))


def true_area(water: shapely.Geometry, chart: Chart) -> float:
    """Return the area (m2) on the surface of water in the chart. Not collective.

    On the sphere through Lambert's equal-area projection, whose radius is the stereographic one over sqrt(1 + q).
    """
    return float(shapely.transform(water, lambda p: p / np.sqrt(chart.stretch(p))[:, None]).area)


def spacing_reached(first: np.ndarray, second: np.ndarray, field: SpacingField) -> tuple[float, float, float]:
    """Return the 5, 50 and 95 per cent points of distance over wanted spacing for pairs of centres. Not collective."""
    ratio = np.hypot(*(second - first).T) * 2 / (field.at(first) + field.at(second))
    return tuple(float(value) for value in np.quantile(ratio, [0.05, 0.5, 0.95]))


def across_land(first: np.ndarray, second: np.ndarray, basin: Basin) -> np.ndarray:
    """Return the indices of the pairs of centres (n, 2) that have land between them. Not collective."""
    length = np.hypot(*(second - first).T)
    near = np.flatnonzero(basin.coast.tree.query((first + second) / 2)[0] < length)
    part = (np.arange(SAMPLES) + 0.5)[None, :, None] / SAMPLES
    tried = first[near, None] + part * (second - first)[near, None]
    dry = ~basin.wet(tried.reshape(-1, 2)).reshape(-1, SAMPLES)
    return near[dry.mean(axis=1) >= LAND_SHARE]


def without_centre(areas: np.ndarray, centres: np.ndarray) -> int:
    """Return how many of the polygons hold none of the centres. Not collective."""
    if not len(areas):
        return 0
    _, held = shapely.STRtree(areas).query(shapely.points(centres), predicate="within")
    return len(areas) - len(np.unique(held))


def islands_of(water: shapely.Geometry) -> np.ndarray:
    """Return the islands of the water as polygons. Not collective."""
    parts = shapely.get_parts(water)
    rings = [shapely.polygons(shapely.get_rings(part)[1:]) for part in parts]
    return np.concatenate(rings) if rings else np.zeros(0, dtype=object)
