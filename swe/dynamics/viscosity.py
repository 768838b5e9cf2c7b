"""Lateral viscosity: the vector Laplacian by its divergent and rotational parts.

    du/dt = nu ( grad(div u) + k x grad(zeta) ) . n  =  nu ( grad(delta)_e - along(zeta)_e ),     k x a . n = -a . t

Coast, free slip: zeta = 0 at coast nodes, so that land exerts no tangential stress. With constant nu the work is

    sum_e l d u du/dt = -nu ( sum_i A_i delta_i^2 + sum_v A_v zeta_v^2 ) <= 0

without a boundary term; a plug flow along a straight coast is not damped at all, a shear flow only inside.

Edge by edge the two parts are not consistent: on regular hexagons the vorticities of the two kinds of node have opposite
errors of first order, whose difference over l does not vanish (a third of the Laplacian, root mean square, measured). The
error averages out over the edges of a face: vectors at face centres converge with second order, and so does the damping.
Source: Ringler & Randall 2002, Mon. Wea. Rev. 130, 1397 (vector Laplacian on a C-grid of hexagons, from memory).
"""

from __future__ import annotations

import numpy as np
from scipy import sparse

from swe.operators import Operators


def viscosity(operators: Operators, nu: float, u: np.ndarray, zeta: np.ndarray) -> np.ndarray:
    """Return the viscous acceleration on edges, (ne,), m s-2. `zeta` (nn,) = curl u. Not collective."""
    return nu * (operators.grad @ (operators.div @ u) - operators.along @ zeta)


def viscosity_matrix(operators: Operators, nu: float) -> sparse.csr_array:
    """Return the matrix of `viscosity`, (ne, ne), s-1. Not collective."""
    matrix = (nu * (operators.grad @ operators.div - operators.along @ operators.curl)).tocsr()
    matrix.sort_indices()
    return matrix
