"""The equilibrium tide as a head.

    du/dt = ... - grad Phi,     Phi = -g eta_eq(t)          so that the water is driven by g (eta - eta_eq)

eta_eq in m on the faces of a mesh on the sphere (`swe.tide.equilibrium`).
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from datetime import datetime

import numpy as np

from swe.constants import DEGREE
from swe.errors import InputError
from swe.mesh.topology import Mesh
from swe.tide.equilibrium import EquilibriumTide


@dataclass(frozen=True, eq=False)
class EquilibriumHead:
    """The head of an equilibrium tide; gravity g, m s-2."""

    tide: EquilibriumTide
    gravity: float

    @classmethod
    def on(cls, mesh: Mesh, gravity: float, names: Iterable[str], start: datetime, duration: float) -> "EquilibriumHead":
        """Return the head of the named constituents on the faces of `mesh`. Not collective.

        start: model time 0 (UTC); duration: of the ramp from there, s, 0 for none.
        Raises InputError on a plane mesh, for an unknown constituent, or for one without equilibrium tide.
        """
        if not mesh.spherical:
            raise InputError("equilibrium tide: needs a basin on the sphere, found a plane; drive it from open boundaries")
        x, y, z = mesh.face_xyz.T
        lon, lat = np.arctan2(y, x) / DEGREE, np.arctan2(z, np.hypot(x, y)) / DEGREE
        return cls(EquilibriumTide.at(lon, lat, names, start, duration), gravity)

    def head(self, time: float) -> np.ndarray:
        return -self.gravity * self.tide.level(time)
