"""Mesh files: netCDF after the CF-1.11 and UGRID-1.0 conventions, holding every number of a mesh bit for bit.

The file has two layers:

    the public one    the UGRID topology variable `mesh`, its connectivity, longitude and latitude (degrees) or plane
                      coordinates (m) of faces, edges and nodes, the face areas: what any reader of UGRID understands
    the exact one     each remaining array of `Mesh`, one variable of the same name, and a checksum of them all

so that `read_mesh(write_mesh(m))` has the same checksum as m, and a damaged file is refused. Degrees are derived from the
earth-centred coordinates on writing and are not read back.

Sources: CF Metadata Conventions 1.11; UGRID Conventions 1.0.
"""

from __future__ import annotations

import os
from dataclasses import dataclass, fields
from pathlib import Path

import netCDF4
import numpy as np

from swe.errors import FileError, InputError
from swe.mesh.topology import Mesh

CONVENTIONS = "CF-1.11, UGRID-1.0"
FILL = -1

CONNECTIVITY = {
    "face_nodes": ("face_node_connectivity", "nodes of a face, counter-clockwise"),
    "edge_nodes": ("edge_node_connectivity", "nodes at the two ends of an edge"),
    "face_edges": ("face_edge_connectivity", "edges of a face, counter-clockwise"),
    "edge_faces": ("edge_face_connectivity", "faces on the two sides of an edge; the normal points from first to second"),
}
"""The arrays of `Mesh` that UGRID knows: role, long name."""

DESCRIPTION = {
    "face_xyz": ("Cartesian coordinates of the face centre", "m"),
    "node_xyz": ("Cartesian coordinates of the node", "m"),
    "edge_xyz": ("Cartesian coordinates of the midpoint of the edge", "m"),
    "edge_normal": ("unit normal of the edge, from its first face to its second", "1"),
    "edge_tangent": ("unit tangent of the edge, from its first node to its second", "1"),
    "edge_length": ("length of the edge between its two nodes", "m"),
    "edge_distance": ("distance between the two face centres of the edge", "m"),
    "face_area": ("area of the face", "m2"),
    "node_area": ("area of the wet part of the dual cell of the node", "m2"),
    "kite_area": ("area of the part of each face of the node that is nearest the node", "m2"),
    "node_faces": ("faces round the node, counter-clockwise; -1 where there is none", None),
    "node_coast": ("1 where the node touches fewer than three wet faces", None),
    "border_kind": ("what lies beyond a border edge: 0 coast, 1 water held elsewhere, 2 open sea", None),
    "depth": ("resting depth below the datum, positive down", "m"),
    "face_outer": ("1 where the level is given from outside, beyond an open boundary", None),
    "face_id": ("number of the face in the whole mesh", None),
    "edge_id": ("number of the edge in the whole mesh", None),
    "node_id": ("number of the node in the whole mesh", None),
}
"""Long name and unit (None: a number without one) of the arrays of `Mesh`."""


@dataclass(frozen=True)
class Places:
    """What a data variable on the mesh must name: `attributes("face")` gives them for data on faces."""

    topology: str
    coordinates: dict[str, str]

    def attributes(self, location: str) -> dict[str, str]:
        """Return the attributes that tie a variable to "face", "edge" or "node". Not collective."""
        return {"mesh": self.topology, "location": location, "coordinates": self.coordinates[location]}


def define_mesh(dataset: netCDF4.Dataset, mesh: Mesh) -> Places:
    """Write the UGRID topology, the coordinates and the face areas of a mesh into an open dataset.

    Makes the dimensions face, edge, node, corner (most corners of a face) and two. The caller sets the global
    attribute Conventions (`CONVENTIONS`). Returns what data variables on the mesh must name. Not collective.
    """
    _define_dimensions(dataset, mesh)
    _define_topology(dataset, mesh)
    for name in CONNECTIVITY:
        _store(dataset, name, getattr(mesh, name))
    names = {place: _define_coordinates(dataset, mesh, place) for place in ("face", "edge", "node")}
    places = Places("mesh", names)
    area = _store(dataset, "face_area", mesh.face_area)
    area.setncatts({"standard_name": "cell_area"} | places.attributes("face"))
    return places


def write_mesh(path: str | Path, mesh: Mesh, title: str, attributes: dict[str, str] | None = None) -> None:
    """Write a mesh file; an old file of that name is replaced in one stroke or stays as it was. Not collective.

    attributes   further global attributes, such as institution, source, history, references, comment
    Raises FileError when the folder cannot be written.
    """
    path = Path(path)
    part = path.with_name(f".{path.name}.{os.getpid()}.part")
    try:
        with netCDF4.Dataset(part, "w", format="NETCDF4") as dataset:
            dataset.setncatts({"Conventions": CONVENTIONS, "title": title} | (attributes or {}))
            _write_exact_layer(dataset, mesh, define_mesh(dataset, mesh))
        _replace(part, path)
    except (OSError, RuntimeError) as failure:
        raise FileError(f"{path}: the mesh cannot be written ({_reason(failure)}); check the folder and its free space") from None
    finally:
        part.unlink(missing_ok=True)


def read_mesh(path: str | Path) -> Mesh:
    """Read a mesh file that `write_mesh` wrote; every number comes back unchanged. Not collective.

    Raises FileError when the file is missing, cut short or altered, InputError when it is no mesh file of this program.
    """
    path = Path(path)
    if not path.is_file():
        raise FileError(f"{path}: no such mesh file; make it with the mesh command or correct the path")
    try:
        with netCDF4.Dataset(path) as dataset:
            dataset.set_auto_maskandscale(False)
            _refuse_foreign(path, dataset)
            mesh = Mesh(**{item.name: _read_field(dataset, item.name) for item in fields(Mesh)})
            stored = str(dataset.variables["mesh"].checksum)
    except (OSError, RuntimeError) as failure:
        raise FileError(f"{path}: not a readable netCDF file, or cut short ({_reason(failure)}); write the mesh again") from None
    if mesh.checksum() != stored:
        raise FileError(
            f"{path}: the arrays differ from the checksum stored with them, so the file was altered; write the mesh again"
        )
    return mesh


def _write_exact_layer(dataset: netCDF4.Dataset, mesh: Mesh, places: Places) -> None:
    for item in fields(mesh):
        value = getattr(mesh, item.name)
        if isinstance(value, np.ndarray) and item.name not in dataset.variables:
            _store(dataset, item.name, value)
    # The generic geoid or datum of the case is not known here; a geopotential datum holds for seas and lakes alike.
    depth = {"standard_name": "sea_floor_depth_below_geopotential_datum", "positive": "down", "cell_measures": "area: face_area"}
    dataset.variables["depth"].setncatts(depth | places.attributes("face"))
    topology = dataset.variables["mesh"]
    topology.n_inner_edges = np.int32(mesh.n_inner)
    topology.checksum = mesh.checksum()
    if mesh.radius is not None:
        topology.sphere_radius = float(mesh.radius)
    if mesh.period is not None:
        topology.period = np.array(mesh.period, dtype=float)


def _define_dimensions(dataset: netCDF4.Dataset, mesh: Mesh) -> None:
    sizes = {"face": mesh.n_faces, "edge": mesh.n_edges, "node": mesh.n_nodes, "corner": mesh.face_nodes.shape[1], "two": 2}
    for name, size in sizes.items():
        dataset.createDimension(name, size)


def _define_topology(dataset: netCDF4.Dataset, mesh: Mesh) -> None:
    axes = ("lon", "lat") if mesh.spherical else ("x", "y")
    topology = dataset.createVariable("mesh", "i4")
    topology.setncatts(
        {
            "cf_role": "mesh_topology",
            "long_name": "topology of the mesh of the water",
            "topology_dimension": np.int32(2),
            "face_dimension": "face",
            "edge_dimension": "edge",
        }
        | {role: name for name, (role, _) in CONNECTIVITY.items()}
        | {f"{place}_coordinates": " ".join(f"{place}_{axis}" for axis in axes) for place in ("face", "edge", "node")}
    )
    topology.assignValue(0)


def _define_coordinates(dataset: netCDF4.Dataset, mesh: Mesh, place: str) -> str:
    xyz = getattr(mesh, f"{place}_xyz")
    if mesh.spherical:
        columns = {"lon": ("longitude", "degrees_east"), "lat": ("latitude", "degrees_north")}
        values = np.degrees([np.arctan2(xyz[:, 1], xyz[:, 0]), np.arctan2(xyz[:, 2], np.hypot(xyz[:, 0], xyz[:, 1]))])
    else:
        columns = {"x": ("projection_x_coordinate", "m"), "y": ("projection_y_coordinate", "m")}
        values = xyz[:, :2].T
    of = {"face": "face centre", "edge": "midpoint of the edge", "node": "node"}[place]
    for (axis, (standard_name, unit)), column in zip(columns.items(), values, strict=True):
        variable = dataset.createVariable(f"{place}_{axis}", "f8", (place,))
        variable.setncatts({"standard_name": standard_name, "units": unit, "long_name": f"{axis} of the {of}"})
        variable[:] = column
    return " ".join(f"{place}_{axis}" for axis in columns)


def _store(dataset: netCDF4.Dataset, name: str, value: np.ndarray) -> netCDF4.Variable:
    """Write one array of `Mesh` as it is; a bool array as bytes, since netCDF has no such type."""
    stored = value.astype("i1") if value.dtype == bool else value
    table = stored.ndim == 2 and stored.dtype.kind == "i"
    holes = table and name != "edge_nodes"  # an edge always has its two nodes
    variable = dataset.createVariable(
        name, stored.dtype, _dimensions_of(dataset, name, stored.shape), compression="zlib", complevel=1,
        fill_value=FILL if holes else None,
    )  # fmt: skip
    role, long_name = CONNECTIVITY.get(name, (None, DESCRIPTION.get(name, (name.replace("_", " "), None))[0]))
    variable.long_name = long_name
    if role:
        variable.cf_role = role
    if table:
        variable.start_index = np.int32(0)
    if unit := DESCRIPTION.get(name, (None, None))[1]:
        variable.units = unit
    if value.dtype == bool:
        variable.setncatts({"flag_values": np.array([0, 1], "i1"), "flag_meanings": "no yes"})
    variable[...] = stored
    return variable


def _dimensions_of(dataset: netCDF4.Dataset, name: str, shape: tuple[int, ...]) -> tuple[str, ...]:
    """Name the dimensions of an array by its name and shape, making those that are not there yet."""
    first = {"depth": "face", "kite_area": "node"}.get(name, name.split("_")[0])
    second = {2: "two", 3: "three"}
    if name in ("face_nodes", "face_edges"):
        second = {shape[1]: "corner"}
    names = (first, *(second.get(size, f"size_{size}") for size in shape[1:]))
    for dimension, size in zip(names, shape, strict=True):
        if dimension not in dataset.dimensions:
            dataset.createDimension(dimension, size)
    return names


def _refuse_foreign(path: Path, dataset: netCDF4.Dataset) -> None:
    topology = dataset.variables.get("mesh")
    wanted = [] if topology is not None else ["mesh"]
    wanted += [
        item.name
        for item in fields(Mesh)
        if item.name not in ("radius", "period", "n_inner") and item.name not in dataset.variables
    ]
    if topology is not None:
        wanted += [f"mesh:{name}" for name in ("n_inner_edges", "checksum") if name not in topology.ncattrs()]
    if wanted:
        listed = ", ".join(wanted[:4]) + (f" and {len(wanted) - 4} more" if len(wanted) > 4 else "")
        raise InputError(f"{path}: not a mesh file of this program: {listed} missing; a mesh file is made by the mesh command")


def _read_field(dataset: netCDF4.Dataset, name: str):
    topology = dataset.variables["mesh"]
    if name == "n_inner":
        return int(topology.n_inner_edges)
    if name == "radius":
        return float(topology.sphere_radius) if "sphere_radius" in topology.ncattrs() else None
    if name == "period":
        return tuple(float(side) for side in topology.period) if "period" in topology.ncattrs() else None
    variable = dataset.variables[name]
    value = np.ascontiguousarray(variable[...])
    return value.astype(bool) if "flag_meanings" in variable.ncattrs() else value


def _replace(part: Path, path: Path) -> None:
    """Put the finished file in its place so that a crash leaves the old file or the new one."""
    with open(part, "rb") as file:
        os.fsync(file.fileno())
    os.replace(part, path)
    folder = os.open(path.parent, os.O_RDONLY)
    try:
        os.fsync(folder)
    finally:
        os.close(folder)


def _reason(failure: Exception) -> str:
    return (getattr(failure, "strerror", None) or str(failure)).strip() or type(failure).__name__
