"""Waters and states on the small meshes of the operators' tests."""

from dataclasses import dataclass

import numpy as np
from operators.operator_meshes import MESHES, rough

from swe.dynamics.equations import Water
from swe.dynamics.forcing.wind import ConstantWind
from swe.dynamics.physics import FPlane, Physics, Sphere, coriolis_at_nodes
from swe.mesh.topology import with_depth
from swe.operators import build

GRAVITY, DENSITY = 9.81, 1025.0


@dataclass(frozen=True, eq=False)
class Swing:
    """A head that swings about a pattern on the faces, (nf,), m2 s-2, with a period of 1000 s."""

    pattern: np.ndarray

    @classmethod
    def on(cls, mesh, size):
        """Rough, and the same at a place whatever the mesh."""
        return cls(size * np.cos(mesh.face_xyz @ [1.0, 2.0, 3.0]))

    def head(self, time):
        return np.cos(2 * np.pi * time / 1000.0) * self.pattern


def water_on(mesh, law=None, drag=0.0, viscosity=0.0, wind=None, head=0.0):
    """The water of a mesh; by default rotating as the mesh suggests, without friction. `head` size of a Swing, m2 s-2."""
    if law is None:
        law = Sphere(7.292e-5, 0.3) if mesh.spherical else FPlane(1e-4)
    physics = Physics(GRAVITY, DENSITY, drag, viscosity, law)
    forcing = (ConstantWind.on(mesh, *wind),) if wind else ()
    forcing += (Swing.on(mesh, head),) if head else ()
    return Water(mesh, build(mesh), physics, coriolis_at_nodes(mesh, law), forcing)


def everything_on(mesh):
    """All terms at once."""
    return water_on(mesh, drag=0.0025, viscosity=50.0, wind=(0.3, -0.1), head=2.0)


def rough_mesh(name):
    return rough(MESHES[name]())


def flat_mesh(name, depth=80.0):
    mesh = MESHES[name]()
    return with_depth(mesh, np.full(mesh.n_faces, depth))


def random_state(mesh, seed=0):
    rng = np.random.default_rng(seed)
    eta, u = rng.uniform(-1, 1, mesh.n_faces), rng.uniform(-1, 1, mesh.n_edges)
    u[mesh.n_inner :] = 0.0
    return eta, u


def close(a, b, tolerance):
    assert np.abs(a - b).max() <= tolerance * max(np.abs(a).max(), np.abs(b).max())
