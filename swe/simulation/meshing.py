"""The mesh of a case: read from a ready file, kept from an earlier call, or generated from coast, depth and spacing.

A generated mesh is kept in the result folder as mesh.nc, with a key of everything it was made from: the settings of
[basin], [depth] and [mesh] and the content of their files. As long as the key is the same the mesh is read, not made.
"""

from __future__ import annotations

import hashlib
from collections.abc import Callable
from pathlib import Path

import netCDF4

from swe.errors import MeshError, SweError
from swe.mesh.files import read_mesh, write_mesh
from swe.mesh.invariants import check_invariants
from swe.mesh.quality import quality
from swe.mesh.topology import Mesh
from swe.simulation.inputs import generated

FILE = "mesh.nc"

KEY = "inputs_key"
"""Attribute of a kept mesh: what it was made from."""


def mesh_for(case, folder: Path, say: Callable[[str], None], require: Callable[[Mesh], None] = lambda mesh: None) -> Mesh:
    """Return the whole mesh of a case, generating and keeping it in `folder` when needed. Not collective.

    require   raises when the mesh is not the one wanted; asked before a new mesh takes the place of a kept one
    Raises InputError or MeshError when an input is wrong or the mesh must not be used.
    """
    mesh = kept_mesh(case, folder, say)
    if mesh is None:
        return make_mesh(case, folder / FILE, say, require)
    require(mesh)
    return mesh


def kept_mesh(case, folder: Path, say: Callable[[str], None] = lambda text: None) -> Mesh | None:
    """Return the case's ready mesh, or the one kept in `folder` if it fits the case, else None. Not collective."""
    if case.mesh.file is not None:
        mesh = read_mesh(case.mesh.file)
        check_invariants(mesh)
        return _with_positive_depth(mesh, case)
    kept = folder / FILE
    if _key_of(kept) == inputs_key(case):
        try:
            return read_mesh(kept)
        except SweError:
            say(f"{kept}: damaged; the mesh is made again")
    return None


def make_mesh(case, path: Path, say: Callable[[str], None], require: Callable[[Mesh], None] = lambda mesh: None) -> Mesh:
    """Generate the mesh of a case, check it, write it to `path`, and say how it came out. Not collective."""
    mesh, lines = generated(case)
    check_invariants(mesh)
    require(mesh)
    write_mesh(path, mesh, case.title, {KEY: inputs_key(case)})
    for line in (*lines, *quality(mesh, case.earth.gravity).lines(), f"mesh written to {path}"):
        say(line)
    return mesh


def inputs_key(case) -> str:
    """Return the sha256 (hex) of all that a generated mesh depends on. Not collective."""
    digest = hashlib.sha256()
    for part in (case.basin, case.depth, case.mesh):
        for name, value in sorted(vars(part).items()):
            digest.update(f"{name}=".encode())
            digest.update(value.read_bytes() if isinstance(value, Path) else repr(value).encode())
    for item in case.openings:
        digest.update(item.line.read_bytes())
    return digest.hexdigest()


def _key_of(path: Path) -> str | None:
    try:
        with netCDF4.Dataset(path) as data:
            return getattr(data, KEY, None)
    except (OSError, RuntimeError):  # netCDF4 says either of a damaged file
        return None


def _with_positive_depth(mesh: Mesh, case) -> Mesh:
    if not mesh.depth.min() > 0.0:
        face = int(mesh.depth.argmin())
        raise MeshError(
            f"{case.where('mesh', 'file')} = {case.mesh.file.name}: face {face} has a resting depth of {mesh.depth[face]:g} m; "
            "allowed is above 0 m because cells never fall dry: give the mesh a least depth"
        )
    return mesh
