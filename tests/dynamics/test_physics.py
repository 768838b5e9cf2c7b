"""Laws of the Coriolis parameter."""

import numpy as np
import pytest
from operators.operator_meshes import MESHES

from swe.dynamics.physics import BetaPlane, FPlane, NoRotation, Sphere, coriolis_at_nodes
from swe.errors import InputError


def test_constant_laws():
    mesh = MESHES["lake"]()
    assert np.array_equal(coriolis_at_nodes(mesh, NoRotation()), np.zeros(mesh.n_nodes))
    assert np.array_equal(coriolis_at_nodes(mesh, FPlane(1e-4)), np.full(mesh.n_nodes, 1e-4))


def test_beta_plane():
    mesh = MESHES["lake"]()
    f = coriolis_at_nodes(mesh, BetaPlane(1e-4, 2e-11, 500.0))
    assert np.allclose(f, 1e-4 + 2e-11 * (mesh.node_xyz[:, 1] - 500.0), rtol=1e-14)


@pytest.mark.parametrize("tilt", [0.0, 0.05, np.pi / 2])
def test_sphere(tilt):
    """f = 2 Omega (-cos lon cos lat sin alpha + sin lat cos alpha), Williamson et al. 1992, test case 2."""
    mesh = MESHES["globe"]()
    x, y, z = mesh.node_xyz.T / mesh.radius
    lon, lat = np.arctan2(y, x), np.arcsin(z)
    expected = 2 * 7.292e-5 * (-np.cos(lon) * np.cos(lat) * np.sin(tilt) + np.sin(lat) * np.cos(tilt))
    assert np.abs(coriolis_at_nodes(mesh, Sphere(7.292e-5, tilt)) - expected).max() < 1e-18


def test_a_law_on_the_wrong_surface_is_refused():
    with pytest.raises(InputError, match="coriolis: the sphere law needs a spherical mesh"):
        Sphere(7e-5, 0.0).at_nodes(MESHES["lake"]())
    for name in ("globe", "regular"):
        with pytest.raises(InputError, match="coriolis: a beta-plane needs a plane mesh"):
            BetaPlane(0.0, 1e-11, 0.0).at_nodes(MESHES[name]())
