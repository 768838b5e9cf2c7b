"""Invented waters for tests of mesh generation, as shapely polygons in m; `degrees` puts one on the sphere."""

import json

import numpy as np
import shapely


def ring(middle, radius, waves=0, height=0.0, corners=90):
    """A closed wavy curve."""
    angle = np.linspace(0, 2 * np.pi, corners, endpoint=False)
    reach = radius * (1 + height * np.cos(waves * angle + 0.4))
    return np.column_stack([middle[0] + reach * np.cos(angle), middle[1] + reach * np.sin(angle)])


def lake(size=20e3):
    """A wavy lake with two islands, the smaller one a tenth of the larger."""
    return shapely.Polygon(
        ring((0, 0), size, 5, 0.12, 200),
        [ring((0.3 * size, 0.2 * size), 0.25 * size, 3, 0.2), ring((-0.5 * size, 0.1 * size), 0.08 * size)],
    )


def degrees(water, middle=(7.0, 55.0)):
    """The same shape round a longitude and latitude, one degree of latitude for 111.2 km."""
    squeeze = 111.2e3 * np.array([np.cos(np.radians(middle[1])), 1.0])
    return shapely.transform(water, lambda p: middle + p / squeeze)


def write_geojson(path, *geometries):
    """Write geometries as a FeatureCollection and return the path."""
    features = [{"type": "Feature", "properties": {}, "geometry": shapely.geometry.mapping(g)} for g in geometries]
    path.write_text(json.dumps({"type": "FeatureCollection", "features": features}))
    return path
