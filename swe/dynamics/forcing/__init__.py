"""What drives the water from outside. A forcing is data on the edges of one mesh, asked for at a model time."""

from __future__ import annotations

from typing import Protocol

import numpy as np


class Forcing(Protocol):
    def stress(self, time: float) -> np.ndarray:
        """Return the surface stress along the edge normals at model time `time` (s), (ne,), Pa; zero on border edges."""
