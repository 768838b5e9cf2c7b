"""The inputs of a case that become a mesh: water, bed, spacing. Opened once, checked on opening."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
import shapely

from swe.case.case import place_of
from swe.constants import EARTH_RADIUS
from swe.errors import CaseError
from swe.mesh.bed import read_grid
from swe.mesh.coast import chart_of, charted, read_water
from swe.mesh.depth import Bed, ConstantBed
from swe.mesh.generate import generate
from swe.mesh.soundings import read_soundings
from swe.mesh.spacing import ByDepth, Constant, NearCoast, Smallest, Spacing, Within
from swe.mesh.surface import Plane, Sphere, Surface
from swe.mesh.topology import Mesh
from swe.simulation.boundary import lines_of

LOOK = 300
"""Points along each side of the basin's box where bed and spacing are looked at before there is a mesh; arbitrary."""

STRETCH_GROWTH = 0.15
"""Allowed growth where one spacing is wanted everywhere: the chart of a sphere stretches it, far more slowly than this."""


@dataclass(frozen=True, eq=False)
class Inputs:
    """Water in input coordinates (m, or degrees), its bed, and the rule for the spacing."""

    surface: Surface
    water: shapely.Geometry
    bed: Bed
    spacing: Spacing


@dataclass(frozen=True)
class Outlook:
    """What is known before there is a mesh.

    faces; shallowest and deepest water, m, least depth applied; shortest crossing time of a face, s
    """

    faces: float
    shallowest: float
    deepest: float
    crossing_time: float


def open_inputs(case) -> Inputs:
    """Open and check coast, depth and areas of a case. Not collective. Raises InputError naming the file."""
    surface = Sphere(EARTH_RADIUS) if case.basin.surface == "sphere" else Plane()
    water = read_water(case.basin.coastline, surface)
    bed = _bed(case, surface, water)
    inputs = Inputs(surface, water, bed, _spacing(case, surface, water, bed))
    _refuse_stations_on_land(case, inputs)
    return inputs


def generated(case) -> tuple[Mesh, list[str]]:
    """Return the mesh of a case and what there is to say about it, line by line. Not collective."""
    inputs = open_inputs(case)
    growth = STRETCH_GROWTH if case.mesh.growth is None else case.mesh.growth
    mesh, report = generate(
        inputs.water, inputs.surface, inputs.spacing, inputs.bed,
        growth=growth, least_depth=case.depth.least, sweeps=case.mesh.sweeps, seed=case.mesh.seed,
        openings=lines_of(case),
    )  # fmt: skip
    return mesh, report.lines()


def outlook(case, inputs: Inputs) -> Outlook:
    """Estimate the mesh of a case without making it. Not collective."""
    places, area, stretch = _look(inputs)
    chart = chart_of(inputs.water, inputs.surface)
    depth = np.maximum(inputs.bed.at(chart.from_chart(places))[0], case.depth.least)
    wanted = _wanted(inputs, places, depth, stretch)
    # a hexagon of spacing d covers sqrt(3)/2 d^2
    faces = float(np.sum(area / (0.5 * math.sqrt(3.0) * wanted**2)))
    crossing = float(np.min(wanted / np.sqrt(case.earth.gravity * depth)))
    return Outlook(faces, float(depth.min()), float(depth.max()), crossing)


def _look(inputs: Inputs) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Return points of the chart in the water (n, 2), the true area each stands for (n,), m2, and the stretch there (n,)."""
    chart = chart_of(inputs.water, inputs.surface)
    water = charted(inputs.water, inputs.surface, chart)
    shapely.prepare(water)
    west, south, east, north = water.bounds
    x, dx = np.linspace(west, east, LOOK, endpoint=False, retstep=True)
    y, dy = np.linspace(south, north, LOOK, endpoint=False, retstep=True)
    places = np.stack([axis.ravel() for axis in np.meshgrid(x + dx / 2, y + dy / 2)], axis=1)
    places = places[shapely.contains_xy(water, places)]
    if not len(places):
        places = np.array([water.representative_point().coords[0]])
    stretch = chart.stretch(places)
    return places, dx * dy / stretch**2, stretch


def _wanted(inputs: Inputs, places: np.ndarray, depth: np.ndarray, stretch: np.ndarray) -> np.ndarray:
    from swe.mesh.spacing import Site

    chart = chart_of(inputs.water, inputs.surface)
    coast = charted(inputs.water, inputs.surface, chart).boundary
    shapely.prepare(coast)

    def inside(area: shapely.Geometry) -> np.ndarray:
        return shapely.contains_xy(charted(area, inputs.surface, chart), places)

    site = Site(places, lambda: shapely.distance(shapely.points(places), coast) / stretch, lambda: depth, inside)
    return inputs.spacing.wanted(site)


def _bed(case, surface: Surface, water: shapely.Geometry) -> Bed:
    if case.depth.grid is not None:
        return read_grid(case.depth.grid, surface, water, case.depth.variable)
    if case.depth.soundings is not None:
        return read_soundings(case.depth.soundings, surface, water)
    return ConstantBed(case.depth.constant)


def _spacing(case, surface: Surface, water: shapely.Geometry, bed: Bed) -> Spacing:
    """Return the rule of [mesh]; where several grade the spacing, the finest wish counts."""
    mesh = case.mesh
    if mesh.spacing is not None:
        return Constant(mesh.spacing)
    rules: list[Spacing] = []
    if "coast" in mesh.grade_by:
        rules.append(NearCoast(mesh.finest, mesh.coarsest, mesh.growth))
    if "depth" in mesh.grade_by:
        rules.append(ByDepth(_crossing_time(case, surface, water, bed), mesh.finest, mesh.coarsest, case.earth.gravity))
    if "areas" in mesh.grade_by:
        rules += [Constant(mesh.coarsest), Within(read_water(mesh.areas, surface), mesh.area_spacing)]
    return Smallest(tuple(rules)) if len(rules) > 1 else rules[0]


def _crossing_time(case, surface: Surface, water: shapely.Geometry, bed: Bed) -> float:
    """Return the travel time across a face, s, with which the coarsest spacing is reached where the water is deepest."""
    places, _, _ = _look(Inputs(surface, water, bed, Constant(case.mesh.coarsest)))
    deepest = float(np.max(bed.at(chart_of(water, surface).from_chart(places))[0]))
    return case.mesh.coarsest / math.sqrt(case.earth.gravity * max(deepest, case.depth.least))


def _refuse_stations_on_land(case, inputs: Inputs) -> None:
    """Raise CaseError for every station that lies further on land than the spacing could explain."""
    mistakes = []
    reach = case.mesh.coarsest or case.mesh.spacing
    for number, station in enumerate(case.stations):
        place = place_of(station)
        distance = _from_water(inputs, place)
        if distance > reach:
            remedy = f"correct its coordinates ({' before '.join(inputs.surface.axes)}) or leave it out"
            if _from_water(inputs, place[::-1]) <= reach:
                remedy = f"{' and '.join(inputs.surface.axes)} look swapped"
            mistakes.append(
                f"{case.where('station', number, 'name')} = {station.name!r}: {distance:,.0f} m from the nearest water; allowed "
                f"is {reach:,.0f} m, one spacing: {remedy}"
            )
    if mistakes:
        raise CaseError(mistakes)


def _from_water(inputs: Inputs, place: tuple[float, float]) -> float:
    """Return the distance of a place from the water, m; infinite where it is no place at all."""
    if inputs.surface.spherical and abs(place[1]) > 90.0:
        return math.inf
    chart = chart_of(inputs.water, inputs.surface)
    at = chart.to_chart(np.array([place]))
    water = charted(inputs.water, inputs.surface, chart)
    return float(shapely.distance(water, shapely.points(at)[0]) / chart.stretch(at)[0])
