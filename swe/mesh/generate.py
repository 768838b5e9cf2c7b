"""From a coastline, a bed and a wish for spacing to a mesh.

    1.  chart the water (surface.py), tabulate the wanted spacing (spacing.py)
    2.  lay out the centres (layout.py)
    3.  choose the faces (culling.py), put them in order along a space-filling curve, build the Voronoi mesh
    4.  give it its depth (depth.py), check its invariants

The same inputs and seed give the same mesh, bit for bit.
"""

from __future__ import annotations

import numpy as np
import shapely

from swe.errors import InputError, MeshError
from swe.mesh.coast import chart_of, charted
from swe.mesh.culling import Culled, cull
from swe.mesh.delaunay import plane_triangles
from swe.mesh.depth import Bed, DepthReport, depth_at
from swe.mesh.generation_report import (
    GenerationReport,
    across_land,
    dropped,
    islands_of,
    place_text,
    spacing_reached,
    true_area,
    without_centre,
)
from swe.mesh.layout import BAND, Basin, Layout, coarse_levels, expected_faces, lay_out
from swe.mesh.opening_line import OpenLine, outer_centres
from swe.mesh.order import curve_order
from swe.mesh.quality import check_invariants
from swe.mesh.shoreline import true_shoreline
from swe.mesh.spacing import Raster, Site, Spacing, SpacingField, raster_over, spacing_field
from swe.mesh.surface import Chart, Surface
from swe.mesh.topology import Mesh, outer_depth, with_depth, with_outer
from swe.mesh.voronoi import plane_mesh, sphere_mesh

ROUGH_PIXELS = 40_000
"""Pixels of the first look at the spacing, which only decides how many coarser levels there are."""

MOST_SEGMENTS = 500_000
"""Segments of the coast at most, so that a spacing in the wrong unit is refused before it fills the memory."""


def generate(
    water: shapely.Geometry,
    surface: Surface,
    spacing: Spacing,
    bed: Bed,
    *,
    growth: float,
    least_depth: float,
    sweeps: int,
    seed: int,
    openings: tuple[OpenLine, ...] = (),
) -> tuple[Mesh, GenerationReport]:
    """Generate the mesh of a basin. Not collective.

    water        polygons in input coordinates (coast.py); surface: Plane() or Sphere(radius in m)
    spacing      rule for the distance of face centres (spacing.py); growth: its largest rate of change, m per m
    bed          depth of the water (depth.py); least_depth: m, nowhere shallower
    sweeps       evening sweeps on the final level, 1 or more; 30 to 60 give an even mesh
    seed         of the first positions, an integer from 0
    openings     lines along the outline where the basin is open; the cells just beyond become outer faces
    Returns the mesh and how it came about. Raises InputError or MeshError, one line.
    """
    if sweeps < 1 or seed < 0:
        raise InputError(f"mesh: sweeps {sweeps}, seed {seed}; allowed are integers, sweeps from 1 and seed from 0")
    chart = chart_of(water, surface)
    basin = _basin(charted(water, surface, chart), spacing.finest)
    field, distance, levels = _field(basin, chart, surface, spacing, bed, growth)
    layout = lay_out(basin, field, distance, levels, sweeps, seed)
    triangles = plane_triangles(layout.centres).points
    culled = cull(triangles, layout.wet)
    if not culled.kept.any():
        raise MeshError("the basin is nowhere two faces wide; choose a finer spacing")
    outer = outer_centres(layout.centres, culled.kept, triangles, openings, surface, chart)
    points, faces, outer = _ordered(layout.centres, culled.kept, outer, triangles)
    mesh = _built(points, faces, surface, chart)
    depth, depth_report = depth_at(bed, chart.from_chart(points[faces]), least_depth)
    _refuse_mostly_guessed(depth_report)
    mesh = with_outer(with_depth(mesh, depth), outer)
    mesh = with_depth(mesh, outer_depth(mesh))
    check_invariants(mesh)
    said = _losses(basin, layout, culled, field, chart, surface) | _outcome(mesh, points[faces], basin, field, chart, surface)
    report = GenerationReport(
        growth=growth, sweeps=sweeps, seed=seed, coarse_levels=levels, expected_faces=layout.expected,
        repair=layout.repair, depth=depth_report, **said,
    )  # fmt: skip
    return mesh, report


MOST_GUESSED = 0.6
"""Largest share of faces whose depth may be a guess. A grid whose sign is turned has water only where there is land."""


def _refuse_mostly_guessed(report: DepthReport) -> None:
    if report.guessed > MOST_GUESSED * report.faces:
        raise InputError(
            f"{report.source}: {report.guessed} of {report.faces} faces {report.guess}; allowed are {MOST_GUESSED:.0%}: "
            "check the direction of the depth (attribute positive), its unit, and that it covers the basin"
        )


def _basin(water: shapely.Geometry, finest: float) -> Basin:
    shapely.prepare(water)
    return Basin(water, true_shoreline(water, max(finest / 2, water.length / MOST_SEGMENTS)))


def _field(
    basin: Basin, chart: Chart, surface: Surface, spacing: Spacing, bed: Bed, growth: float
) -> tuple[SpacingField, np.ndarray, int]:
    """Return the field, the distance of its pixels to the coast, and the number of coarser levels."""

    def tabulate(raster: Raster) -> tuple[SpacingField, np.ndarray]:
        places = raster.places()
        wet = basin.wet(places)
        distance, foot = basin.coast.nearest(places)
        distance = np.where(wet, 1, -1) * np.abs(distance)
        at = np.where(wet[:, None], places, foot)  # on land the spacing is that of the nearest coast
        stretch = chart.stretch(at)
        site = Site(
            at,
            coast_distance=lambda: np.maximum(distance, 0) / stretch,
            depth=lambda: np.maximum(bed.at(chart.from_chart(at))[0], 0),
            inside=lambda area: _inside(charted(area, surface, chart), at),
        )
        return spacing_field(raster, spacing.wanted(site) * stretch, growth), distance

    rough, distance = tabulate(raster_over(basin.water.bounds, 0.0, spacing.finest, ROUGH_PIXELS))
    levels = coarse_levels(expected_faces(rough, distance > 0, basin.water.area), rough.steepness())
    margin = BAND * 2**levels * float(rough.at(basin.coast.start).max())
    return *tabulate(raster_over(basin.water.bounds, margin, spacing.finest)), levels


def _inside(area: shapely.Geometry, places: np.ndarray) -> np.ndarray:
    shapely.prepare(area)
    return shapely.contains_xy(area, places)


def _ordered(
    centres: np.ndarray, kept: np.ndarray, outer: np.ndarray, triangles: np.ndarray
) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Return the points of the mesh, which of them are faces, and which faces are outer ones.

    Faces come first, along the curve, outer ones among them; then the dry points whose cells touch theirs.
    """
    cells = kept | outer
    touching = np.zeros(len(centres), dtype=bool)
    touching[triangles[cells[triangles].any(axis=1)]] = True
    faces = np.flatnonzero(cells)
    faces = faces[curve_order(centres[faces])]
    points = np.vstack([centres[faces], centres[touching & ~cells]])
    return points, np.arange(len(points)) < len(faces), outer[faces]


def _built(points: np.ndarray, faces: np.ndarray, surface: Surface, chart: Chart) -> Mesh:
    if surface.spherical:
        return sphere_mesh(chart.to_sphere(points), faces, surface.radius)
    return plane_mesh(points, faces)


def _losses(basin: Basin, layout: Layout, culled: Culled, field: SpacingField, chart: Chart, surface: Surface) -> dict:
    """Return the fields of the report on what has no face."""
    parts, islands = shapely.get_parts(basin.water), islands_of(basin.water)
    return {
        "dropped_waters": tuple(dropped(layout.centres[body], field, chart, surface) for body in culled.bodies),
        "dead_ends": dropped(layout.centres[culled.dead_ends], field, chart, surface),
        "waters": len(parts),
        "waters_without_face": without_centre(parts, layout.centres[layout.wet]),
        "islands": len(islands),
        "islands_lost": without_centre(islands, layout.centres[~layout.wet]),
    }


def _outcome(mesh: Mesh, centres: np.ndarray, basin: Basin, field: SpacingField, chart: Chart, surface: Surface) -> dict:
    """Return the fields of the report on the mesh itself; centres (nf, 2) of its faces in the chart."""
    inside = ~mesh.face_outer
    pairs = mesh.edge_faces[: mesh.n_inner]
    first, second = centres[pairs[inside[pairs].all(axis=1)]].transpose(1, 0, 2)
    crossing = across_land(first, second, basin)
    wanted = field.at(centres) / chart.stretch(centres)
    return {
        "faces": mesh.n_faces,
        "edges": mesh.n_edges,
        "nodes": mesh.n_nodes,
        "area": float(mesh.face_area[inside].sum()),
        "water_area": true_area(basin.water, chart),
        "wanted_finest": float(wanted.min()),
        "wanted_coarsest": float(wanted.max()),
        "spacing_reached": spacing_reached(first, second, field),
        "across_land": len(crossing),
        "across_land_place": place_text((first + second)[crossing[0]] / 2, chart, surface) if len(crossing) else "",
    }
