"""`swe mesh CASE`: build the mesh of a case and write it as CF/UGRID netCDF."""

from __future__ import annotations

from pathlib import Path


def run(options) -> int:
    from swe.case.reading import read_case
    from swe.errors import InputError
    from swe.output.durable import file_trouble
    from swe.simulation.meshing import FILE, make_mesh

    case = read_case(options.case)
    if case.mesh.file is not None:
        raise InputError(f"{case.where('mesh', 'file')}: the case names a ready mesh; there is nothing to build")
    path = Path(options.to) if options.to else Path("results") / case.name / FILE
    with file_trouble(path.parent, "making the folder"):
        path.parent.mkdir(parents=True, exist_ok=True)
    make_mesh(case, path, print)
    return 0
