"""Operators of a restricted mesh are those of the whole mesh wherever all neighbours are held."""

import numpy as np
import pytest
from operators.operator_meshes import MESHES, part_of

from swe.mesh.restrict import restrict
from swe.operators import build


@pytest.mark.parametrize("name", list(MESHES))
def test_rows_equal_those_of_the_whole_mesh(name):
    mesh = MESHES[name]()
    faces, mf = part_of(mesh)
    part = restrict(mesh, faces)
    ms = np.count_nonzero(part.edge_faces[: part.n_inner].max(axis=1) < mf)
    whole, local = build(mesh), build(part)
    rng = np.random.default_rng(1)
    p, u, c = rng.standard_normal(mesh.n_faces), rng.standard_normal(mesh.n_edges), rng.standard_normal(mesh.n_nodes)
    u[mesh.n_inner :] = 0.0
    nodes = np.unique(part.face_nodes[:mf])
    nodes = nodes[nodes >= 0]
    fields = {"faces": p[part.face_id], "edges": u[part.edge_id], "nodes": c[part.node_id]}
    for name, source, rows, ids, field in [
        ("div", "edges", np.arange(mf), part.face_id, u),
        ("kinetic", "edges", np.arange(mf), part.face_id, u),
        ("grad", "faces", np.arange(ms), part.edge_id, p),
        ("along", "nodes", np.arange(ms), part.edge_id, c),
        ("tangential", "edges", np.arange(ms), part.edge_id, u),
        ("face_to_edge", "faces", np.arange(ms), part.edge_id, p),
        ("node_to_edge", "nodes", np.arange(ms), part.edge_id, c),
        ("curl", "edges", nodes, part.node_id, u),
        ("face_to_node", "faces", nodes, part.node_id, p),
    ]:
        matrix = getattr(whole, name)
        found = (getattr(local, name) @ fields[source])[rows]
        expected = (matrix @ field)[ids[rows]]
        assert np.abs(found - expected).max() <= 1e-15 * (abs(matrix) @ np.abs(field)).max(), name
