"""What drives the water from outside. A forcing is data on one mesh, asked for at a model time.

It offers a stress, a head, or both; an object counts as what it has the method of.

    stress   tau . n on edges, Pa              du/dt += tau_n / (rho h_e)        wind
    head     Phi on faces, m2 s-2              du/dt -= grad Phi                 equilibrium tide -g eta_eq, air pressure p_a/rho

A head depends on time and place, not on the state of the water; it has no part in the Jacobian.
"""

from __future__ import annotations

from typing import Protocol, runtime_checkable

import numpy as np


@runtime_checkable
class Stress(Protocol):
    def stress(self, time: float) -> np.ndarray:
        """Return the surface stress along the edge normals at model time `time` (s), (ne,), Pa; zero on border edges."""


@runtime_checkable
class Head(Protocol):
    def head(self, time: float) -> np.ndarray:
        """Return the potential that joins K + g eta at model time `time` (s), (nf,), m2 s-2. Callers leave it alone."""


Forcing = Stress | Head
