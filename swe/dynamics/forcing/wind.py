"""Wind stress, constant in time and space.

    du/dt = tau_n / (rho h_e),     tau_n = tau . n

tau in Pa with components along x and y on a plane, east and north on a sphere. Border edges feel none: their velocity is
given.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from swe.mesh.topology import Mesh
from swe.operators import axes


@dataclass(frozen=True, eq=False)
class ConstantWind:
    """Stress along the edge normals, (ne,), Pa, the same at all times."""

    stress_edge: np.ndarray

    @classmethod
    def on(cls, mesh: Mesh, first: float, second: float) -> "ConstantWind":
        """Return the wind with stress (first, second) Pa: x, y on a plane; east, north on a sphere. Not collective."""
        one, two = axes(mesh, mesh.edge_xyz)
        normal = first * (one * mesh.edge_normal).sum(axis=1) + second * (two * mesh.edge_normal).sum(axis=1)
        normal[mesh.n_inner :] = 0.0
        return cls(normal)

    def stress(self, time: float) -> np.ndarray:
        return self.stress_edge


def wind_acceleration(stress: np.ndarray, density: float, h_edge: np.ndarray) -> np.ndarray:
    """Return tau_n / (rho h_e) on edges, (ne,), m s-2. Not collective."""
    return stress / (density * h_edge)
