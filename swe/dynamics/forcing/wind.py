"""Stress of the wind on the water.

    du/dt = tau_n / (rho h_e),     tau_n = tau . n

tau in Pa with components along x and y on a plane, east and north on a sphere: given, or by a drag law from the wind at 10 m
height (`drag_laws`). What is linear in time and place is the wind; the stress follows from it at every time asked for. Edges
without a current of their own feel none.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from swe.dynamics.forcing.drag_laws import DragLaw, surface_stress
from swe.mesh.topology import Mesh, still_edges
from swe.operators import axes

WindAt = Callable[[float], np.ndarray]
"""The 10 m wind at the edges at a model time, s: two components, (2, ne), m s-1, as those of tau."""


@dataclass(frozen=True, eq=False)
class ConstantWind:
    """Stress along the edge normals, (ne,), Pa, the same at all times."""

    stress_edge: np.ndarray

    @classmethod
    def on(cls, mesh: Mesh, first: float, second: float) -> "ConstantWind":
        """Return the wind with stress (first, second) Pa: x, y on a plane; east, north on a sphere. Not collective."""
        one, two = along_normals(mesh)
        return cls(first * one + second * two)

    def stress(self, time: float) -> np.ndarray:
        return self.stress_edge


class WindStress:
    """Stress of a wind that changes, by a drag law.

    wind          the wind at the edges of `mesh`; the current, some per cent of it, is not subtracted
    air_density   kg m-3
    """

    def __init__(self, mesh: Mesh, wind: WindAt, law: DragLaw, air_density: float):
        self._normals = along_normals(mesh)
        self._wind, self._law, self._air_density = wind, law, air_density
        self._last: tuple[float, np.ndarray] | None = None  # the end of a step is the beginning of the next

    def stress(self, time: float) -> np.ndarray:
        """Return tau . n, (ne,), Pa. Not collective."""
        if self._last is None or self._last[0] != time:
            stress = surface_stress(self._law, self._air_density, self._wind(time))
            self._last = time, (self._normals * stress).sum(axis=0)
        return self._last[1]


def along_normals(mesh: Mesh) -> np.ndarray:
    """Return the components of the edge normals, (2, ne), as those of tau; 0 on edges without a current. Not collective."""
    components = np.stack([(axis * mesh.edge_normal).sum(axis=1) for axis in axes(mesh, mesh.edge_xyz)])
    components[:, still_edges(mesh)] = 0.0
    return components


def wind_acceleration(stress: np.ndarray, density: float, h_edge: np.ndarray) -> np.ndarray:
    """Return tau_n / (rho h_e) on edges, (ne,), m s-2. Not collective."""
    return stress / (density * h_edge)
