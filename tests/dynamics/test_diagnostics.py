"""Conserved sums: values known in closed form, and parts that add up to the whole."""

import numpy as np
import pytest
from dynamics.dynamics_examples import DENSITY, GRAVITY, everything_on, flat_mesh, random_state, rough_mesh, water_on
from operators.operator_meshes import MESHES

from swe.dynamics.diagnostics import kinetic_energy, potential_energy, potential_enstrophy, volume, volume_anomaly
from swe.dynamics.physics import FPlane
from swe.mesh.restrict import restrict


def test_values_of_uniform_flow_on_regular_hexagons():
    """Speed U, level e, depth H on area A: K = rho A (H + e) U^2/2, P = rho g A e^2/2, Z = A f^2/(2 (H + e))."""
    mesh = flat_mesh("regular", 80.0)
    water, area = water_on(mesh, FPlane(1e-4)), 36 * np.sqrt(3) / 2 * 1e6
    eta, u = np.full(mesh.n_faces, 0.5), mesh.edge_normal @ [0.6, 0.8, 0.0]
    assert volume(water, eta) == pytest.approx(area * 80.5, rel=1e-13)
    assert volume_anomaly(water, eta) == pytest.approx(area * 0.5, rel=1e-13)
    assert kinetic_energy(water, eta, u) == pytest.approx(DENSITY * area * 80.5 / 2, rel=1e-13)
    assert potential_energy(water, eta) == pytest.approx(DENSITY * GRAVITY * area * 0.125, rel=1e-13)
    assert potential_enstrophy(water, eta, u) == pytest.approx(area * 1e-8 / 161.0, rel=1e-10)


@pytest.mark.parametrize("name", list(MESHES))
def test_sums_of_parts_add_up_to_the_whole(name):
    """Each face, edge and node is owned by one of two parts, each of which sees only its restricted mesh."""
    mesh = rough_mesh(name)
    whole = everything_on(mesh)
    eta, u = random_state(mesh)
    first = np.arange(mesh.n_faces) < mesh.n_faces // 2
    edge_first = first[mesh.edge_faces[:, 0]]
    node_first = first[np.where(mesh.node_faces >= 0, mesh.node_faces, mesh.n_faces).min(axis=1)]
    sums = np.zeros(5)
    for mine, my_edges, my_nodes in ((first, edge_first, node_first), (~first, ~edge_first, ~node_first)):
        held = mine.copy()
        for _ in range(2):  # two rings beyond
            pairs = mesh.edge_faces[: mesh.n_inner]
            touch = held[pairs].any(axis=1)
            held[pairs[touch].ravel()] = True
        part = restrict(mesh, np.flatnonzero(held))
        water, level, velocity = everything_on(part), eta[part.face_id], u[part.edge_id]
        faces, edges, nodes = mine[part.face_id], my_edges[part.edge_id], np.flatnonzero(my_nodes[part.node_id])
        sums += [
            volume_anomaly(water, level, faces),
            volume(water, level, faces),
            kinetic_energy(water, level, velocity, edges),
            potential_energy(water, level, faces),
            potential_enstrophy(water, level, velocity, nodes),
        ]
    expected = [
        volume_anomaly(whole, eta),
        volume(whole, eta),
        kinetic_energy(whole, eta, u),
        potential_energy(whole, eta),
        potential_enstrophy(whole, eta, u),
    ]
    assert sums == pytest.approx(expected, rel=1e-13)


def test_volume_is_summed_without_round_off():
    mesh = flat_mesh("regular", 0.0)
    eta = np.zeros(mesh.n_faces)
    eta[:3] = 1e17, 1.0, -1e17
    assert volume_anomaly(water_on(mesh), eta) == pytest.approx(mesh.face_area[0], rel=1e-6)
