"""Conserved sums, each over the faces, edges or nodes named by a mask, so that the parts of subdomains add up to the whole.

    volume anomaly         sum_i A_i eta_i                       m3
    volume                 sum_i A_i h_i                         m3
    kinetic energy         rho sum_e l d h_e u_e^2 / 2           J    (l d of an edge, not l d/2: half of the energy sits in
                                                                      the component that the edge does not carry)
    potential energy       rho g sum_i A_i eta_i^2 / 2           J    available: above the level surface eta = 0
    potential enstrophy    sum_v A_v h_v q_v^2 / 2               m s-2,    q_v = (f + zeta)_v / h_v

Kinetic and potential energy add up to what the equations conserve without wind and friction (`equations`). Volume is summed
without round-off (math.fsum), for its drift is looked for in the last digits.
Source: Ringler et al. 2010, J. Comput. Phys. 229, 3065.
"""

from __future__ import annotations

import math

import numpy as np

from swe.dynamics.equations import Water

EVERYTHING = slice(None)
"""Mask of all faces, edges or nodes."""


def volume_anomaly(water: Water, eta: np.ndarray, faces=EVERYTHING) -> float:
    """Return the volume above the datum level, m3. `faces` boolean or index mask. Not collective."""
    return math.fsum((water.mesh.face_area * eta)[faces])


def volume(water: Water, eta: np.ndarray, faces=EVERYTHING) -> float:
    """Return the volume of water, m3. `faces` boolean or index mask. Not collective."""
    return math.fsum((water.mesh.face_area * (water.mesh.depth + eta))[faces])


def kinetic_energy(water: Water, eta: np.ndarray, u: np.ndarray, edges=EVERYTHING) -> float:
    """Return the kinetic energy, J. `edges` boolean or index mask. Not collective."""
    mesh = water.mesh
    density = 0.5 * mesh.edge_length * mesh.edge_distance * u * water.transport(eta, u)
    return water.physics.density * math.fsum(density[edges])


def potential_energy(water: Water, eta: np.ndarray, faces=EVERYTHING) -> float:
    """Return the available potential energy, J. `faces` boolean or index mask. Not collective."""
    physics = water.physics
    return physics.density * physics.gravity * math.fsum((0.5 * water.mesh.face_area * eta * eta)[faces])


def potential_enstrophy(water: Water, eta: np.ndarray, u: np.ndarray, nodes=EVERYTHING) -> float:
    """Return the potential enstrophy, m s-2. `nodes` boolean or index mask. Not collective."""
    h_node, _ = water.thickness(eta)
    absolute = water.coriolis_node + water.operators.curl @ u
    return math.fsum((0.5 * water.mesh.node_area * absolute * absolute / h_node)[nodes])
