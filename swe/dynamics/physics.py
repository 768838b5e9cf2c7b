"""Physical settings of the water, and the laws of the Coriolis parameter.

    none          f = 0
    f-plane       f = constant
    beta-plane    f = f0 + beta (y - y0)                           plane meshes
    sphere        f = 2 Omega (a . x)/|x|,  a = (-sin alpha, 0, cos alpha)

a is the axis of rotation in the frame of the mesh; alpha = 0 gives f = 2 Omega sin(latitude), other angles the rotated
frames of test case 2 of Williamson et al. 1992, J. Comput. Phys. 102, 211.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Protocol

import numpy as np

from swe.dynamics.friction import FrictionLaw
from swe.errors import InputError
from swe.mesh.topology import Mesh


class CoriolisLaw(Protocol):
    def at_nodes(self, mesh: Mesh) -> np.ndarray:
        """Return f at the nodes, (nn,), s-1. Not collective."""


@dataclass(frozen=True)
class NoRotation:
    """f = 0."""

    def at_nodes(self, mesh: Mesh) -> np.ndarray:
        return np.zeros(mesh.n_nodes)


@dataclass(frozen=True)
class FPlane:
    """Constant f, s-1; on any mesh."""

    f: float

    def at_nodes(self, mesh: Mesh) -> np.ndarray:
        return np.full(mesh.n_nodes, float(self.f))


@dataclass(frozen=True)
class BetaPlane:
    """f = f0 + beta (y - y0): f0 in s-1, beta in m-1 s-1, y0 in m; plane meshes that are not periodic."""

    f0: float
    beta: float
    y0: float

    def at_nodes(self, mesh: Mesh) -> np.ndarray:
        if mesh.spherical or mesh.period is not None:
            raise InputError("coriolis: a beta-plane needs a plane mesh that is not periodic; use the sphere law or a constant f")
        return self.f0 + self.beta * (mesh.node_xyz[:, 1] - self.y0)


@dataclass(frozen=True)
class Sphere:
    """f of a rotating sphere: rate Omega in rad s-1; tilt alpha of the axis in rad, towards -x."""

    rate: float
    tilt: float

    def at_nodes(self, mesh: Mesh) -> np.ndarray:
        if not mesh.spherical:
            raise InputError("coriolis: the sphere law needs a spherical mesh, found a plane; use a constant f or a beta-plane")
        axis = np.array([-math.sin(self.tilt), 0.0, math.cos(self.tilt)])
        return 2.0 * self.rate * (mesh.node_xyz @ axis) / np.linalg.norm(mesh.node_xyz, axis=1)


@dataclass(frozen=True)
class Physics:
    """Physical settings.

    gravity             g, m s-2, > 0
    density             rho of the water, kg m-3, > 0
    bottom_drag         C_d of the quadratic law, >= 0, or a law of bottom friction
    lateral_viscosity   nu, m2 s-1, >= 0
    coriolis            law of f
    """

    gravity: float
    density: float
    bottom_drag: float | FrictionLaw
    lateral_viscosity: float
    coriolis: CoriolisLaw


def coriolis_at_nodes(mesh: Mesh, law: CoriolisLaw) -> np.ndarray:
    """Return f at the nodes of `mesh`, (nn,), s-1. Not collective."""
    return law.at_nodes(mesh)
