"""Open boundaries of a generated mesh: which dry centres become outer faces.

A line drawn along the outline of the water says where the basin is open. A dry centre becomes an outer face when the link
to one of its wet neighbours crosses that line: the row of cells just beyond it.
"""

from __future__ import annotations

import json
from dataclasses import dataclass
from pathlib import Path

import numpy as np
import shapely

from swe.errors import InputError
from swe.mesh.coast import LONGEST_CHORD
from swe.mesh.surface import Chart, Surface


@dataclass(frozen=True, eq=False)
class OpenLine:
    """An open boundary: its name and its line in input coordinates."""

    name: str
    line: shapely.Geometry


def read_line(path: str | Path, name: str) -> OpenLine:
    """Read the line of an open boundary from GeoJSON: LineString or MultiLineString, bare, as Feature, or in a collection.

    Not collective. Raises InputError, one line, naming the file.
    """
    path = Path(path)
    try:
        document = json.loads(path.read_text(encoding="utf-8"))
        items = document["features"] if document.get("type") == "FeatureCollection" else [document]
        shapes = [shapely.from_geojson(json.dumps(item.get("geometry", item))) for item in items]
    except OSError as trouble:
        raise InputError(
            f"{path}: cannot be read ({trouble.strerror}); give the line of open boundary {name!r} as GeoJSON"
        ) from None
    except (ValueError, KeyError, AttributeError, shapely.errors.GEOSException) as trouble:
        reason = str(trouble).splitlines()[0]
        raise InputError(f"{path}: not GeoJSON ({reason}); give the line of open boundary {name!r} as a LineString") from None
    kinds = {shape.geom_type for shape in shapes if shape is not None}
    if not kinds or not kinds <= {"LineString", "MultiLineString"}:
        found = ", ".join(sorted(kinds)) or "nothing"
        raise InputError(f"{path}: holds {found}; an open boundary is a LineString along the outline of the water")
    return OpenLine(name, shapely.union_all(shapes))


def charted_line(line: shapely.Geometry, surface: Surface, chart: Chart) -> shapely.Geometry:
    """Return a line in the chart, m. Not collective."""
    if surface.spherical:
        line = shapely.segmentize(line, LONGEST_CHORD)
    return shapely.transform(line, chart.to_chart)


def outer_centres(
    centres: np.ndarray, kept: np.ndarray, triangles: np.ndarray, lines: tuple[OpenLine, ...], surface: Surface, chart: Chart
) -> np.ndarray:
    """Return (n,) bool: the dry centres that lie just beyond an open boundary. Not collective.

    centres (n, 2) in the chart; kept (n,) bool: the faces; triangles (nt, 3)
    Raises InputError when a line has no face of the water along it.
    """
    outer = np.zeros(len(centres), dtype=bool)
    if not lines:
        return outer
    pairs = np.vstack([triangles[:, [0, 1]], triangles[:, [1, 2]], triangles[:, [2, 0]]])
    pairs = pairs[kept[pairs].sum(axis=1) == 1]
    dry = np.where(kept[pairs[:, 0]], pairs[:, 1], pairs[:, 0])
    links = shapely.linestrings(centres[pairs])
    for item in lines:
        line = charted_line(item.line, surface, chart)
        shapely.prepare(line)
        crossing = shapely.intersects(line, links)
        if not crossing.any():
            raise InputError(
                f"open boundary {item.name!r}: no face of the water lies along its line; draw it along the outline of the water, "
                "from coast to coast"
            )
        outer[dry[crossing]] = True
    return outer
