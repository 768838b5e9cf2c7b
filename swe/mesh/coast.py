"""The water of a basin, read from GeoJSON: polygons whose holes are islands.

Positions are (x, y) in m on a plane, (longitude, latitude) in degrees on a sphere, in this order (RFC 7946, section 3.1.1).
A basin may be given as Polygon, MultiPolygon, GeometryCollection of these, Feature or FeatureCollection; parts that touch
are joined.
"""

from __future__ import annotations

import json
from pathlib import Path

import numpy as np
import shapely

from swe.errors import InputError
from swe.mesh.surface import Chart, Surface, near_longitude

Box = tuple[float, float, float, float]

POLYGONS = ("Polygon", "MultiPolygon")
LONGEST_CHORD = 0.05
"""Degrees. Sides of a polygon are straight in longitude and latitude; cut to this length, they leave their image in the
chart by less than 2 m up to latitude 60, far below any cell."""

SEAM_DIGITS = 10
"""Decimals of a degree (10 micrometres) to which longitudes are rounded, so that both sides of the date line meet."""


def read_water(path: str | Path, surface: Surface) -> shapely.Geometry:
    """Read the water of a basin as one valid Polygon or MultiPolygon, in input coordinates. Not collective.

    Raises InputError, one line, naming the file: missing, not JSON, not polygons, empty, a coastline that crosses itself,
    positions out of range or swapped.
    """
    path = Path(path)
    geometries = _polygons(path, _document(path))
    _refuse_out_of_range(path, geometries, surface)
    _refuse_crossing(path, geometries)
    water = shapely.union_all(geometries)
    if water.is_empty or water.area == 0:
        raise InputError(f"{path}: the polygons hold no area; draw the water as polygons with at least three corners")
    return shapely.orient_polygons(shapely.normalize(water))


def charted(water: shapely.Geometry, surface: Surface, chart: Chart) -> shapely.Geometry:
    """Return the water in the chart (m), outer rings counter-clockwise: water lies to the left of every ring. Not collective."""
    if surface.spherical:
        water = shapely.segmentize(_joined_at_date_line(water, chart), LONGEST_CHORD)
    flat = shapely.make_valid(shapely.transform(water, chart.to_chart), method="structure", keep_collapsed=False)
    return shapely.orient_polygons(flat)


def _joined_at_date_line(water: shapely.Geometry, chart: Chart) -> shapely.Geometry:
    """Return the water with longitudes near those of the chart, parts that were split at the date line joined again."""
    middle = chart.from_chart(np.zeros((1, 2)))[0, 0]

    def near(points: np.ndarray) -> np.ndarray:
        return np.column_stack([np.round(near_longitude(points[:, 0], middle), SEAM_DIGITS), points[:, 1]])

    return shapely.union_all(shapely.get_parts(shapely.transform(water, near)))


def chart_of(water: shapely.Geometry, surface: Surface) -> Chart:
    """Return the chart about the middle of the water. Not collective."""
    return surface.chart_about(shapely.get_coordinates(water))


def box_of(water: shapely.Geometry, surface: Surface) -> Box:
    """Return the box (west, south, east, north) that holds the water; its longitudes may pass 180. Not collective."""
    points = shapely.get_coordinates(water)
    if surface.spherical:
        middle = chart_of(water, surface).from_chart(np.zeros((1, 2)))[0, 0]
        points = np.column_stack([near_longitude(points[:, 0], middle), points[:, 1]])
    return tuple(float(value) for value in (*points.min(axis=0), *points.max(axis=0)))


def box_text(box: Box, surface: Surface) -> str:
    """Return a box (west, south, east, north) in words. Not collective."""
    west, south, east, north = box
    first, second = surface.axes
    return f"{first} {west:.6g} to {east:.6g}, {second} {south:.6g} to {north:.6g} {surface.unit}"


def _document(path: Path):
    try:
        text = path.read_text(encoding="utf-8-sig")  # some programs put a byte order mark before the text
    except FileNotFoundError:
        raise InputError(f"{path}: no such file; give a GeoJSON file with the water of the basin") from None
    except (OSError, UnicodeDecodeError) as failure:
        raise InputError(f"{path}: cannot be read as text ({failure}); give a GeoJSON file") from None
    try:
        return json.loads(text)
    except json.JSONDecodeError as failure:
        raise InputError(f"{path}, line {failure.lineno}: not JSON ({failure.msg}); give a GeoJSON file") from None


def _polygons(path: Path, document) -> list[shapely.Geometry]:
    found = list(_geometries(path, document, "the file"))
    others = sorted({kind for _, kind, _ in found if kind not in POLYGONS})
    if others:
        raise InputError(f"{path}: holds {', '.join(others)}; allowed are {' and '.join(POLYGONS)}: draw the water as polygons")
    if not found:
        raise InputError(f"{path}: holds no polygon; draw the water as polygons whose holes are islands")
    return [_shape(path, where, item) for where, _, item in found]


def _geometries(path: Path, item, where: str):
    """Yield (place in the file, type, geometry) of every geometry of a GeoJSON object."""
    kind = item.get("type") if isinstance(item, dict) else None
    if kind == "FeatureCollection":
        for number, feature in enumerate(_members(path, item, "features", where), start=1):
            yield from _geometries(path, feature, f"feature {number}")
    elif kind == "GeometryCollection":
        for number, part in enumerate(_members(path, item, "geometries", where), start=1):
            yield from _geometries(path, part, f"{where}, geometry {number}")
    elif kind == "Feature":
        if item.get("geometry") is not None:
            yield from _geometries(path, item["geometry"], where)
    elif isinstance(kind, str) and "coordinates" in item:
        yield where, kind, item
    else:
        raise InputError(
            f"{path}: {where} is not a GeoJSON object with a type and coordinates; give a GeoJSON file with polygons"
        )


def _members(path: Path, item: dict, name: str, where: str) -> list:
    members = item.get(name)
    if not isinstance(members, list):
        raise InputError(f"{path}: {where} of type {item['type']} has no list of {name}; give a GeoJSON file with polygons")
    return members


def _shape(path: Path, where: str, item: dict) -> shapely.Geometry:
    try:
        with np.errstate(invalid="ignore"):  # numbers that are not finite are refused below
            geometry = shapely.force_2d(shapely.geometry.shape(item))
    except (ValueError, TypeError, AttributeError, IndexError, shapely.errors.ShapelyError) as failure:
        reason = str(failure).splitlines()[0] if str(failure) else type(failure).__name__
        raise InputError(
            f"{path}: {where} has a ring that cannot be read ({reason}); a ring is a list of at least four [number, number], "
            "the last equal to the first"
        ) from None
    if not np.isfinite(shapely.get_coordinates(geometry)).all():
        raise InputError(f"{path}: {where} has a position that is not finite; give finite numbers")
    return geometry


def _refuse_out_of_range(path: Path, geometries: list[shapely.Geometry], surface: Surface) -> None:
    if not surface.spherical:
        return
    points = shapely.get_coordinates(geometries)
    if points.size == 0:
        return
    bad = np.flatnonzero((np.abs(points[:, 0]) > 360) | (np.abs(points[:, 1]) > 90))
    if not bad.size:
        return
    first, second = points[bad[0]]
    found = f"{path}: position [{first:.10g}, {second:.10g}] is no [longitude, latitude] (allowed -360 to 360, -90 to 90)"
    if (np.abs(points[:, 0]) <= 90).all() and (np.abs(points[:, 1]) <= 360).all():
        raise InputError(f"{found}: longitude and latitude look swapped; write the longitude first")
    raise InputError(f"{found}; give degrees, or choose the plane for positions in m")


def _refuse_crossing(path: Path, geometries: list[shapely.Geometry]) -> None:
    for geometry in geometries:
        if not geometry.is_valid:
            reason = shapely.is_valid_reason(geometry)
            crossing = "a coastline crosses itself or another" if "ntersection" in reason else "a polygon is not valid"
            raise InputError(f"{path}: {crossing}: {reason}; correct the rings there")
