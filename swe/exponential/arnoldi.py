"""Action of phi_k by the Arnoldi process, for any operator.

    1.  v_1 = b / |b|
    2.  w = S v_j
    3.  h = V^T w,  w := w - V h;     once more when little of w is left
    4.  H_{1..j,j} = h,  H_{j+1,j} = |w|,  v_{j+1} = w / |w|
    5.  step phi_k(step S) b  ~  step |b| V phi_k(step H) e_1

H is square of size j + 1, its last column zero since S v_{j+1} is not known yet: the corrected scheme of Saad (1992, SIAM
J. Numer. Anal. 29, 209, section 3.2), which makes use of the last vector. Step 3 is classical Gram-Schmidt, in BLAS-2; it is
repeated where cancellation would cost more than one digit (Daniel, Gragg, Kaufman & Stewart 1976, Math. Comput. 30, 772,
with a looser threshold): S is nearly skew here, and then w is nearly orthogonal to the basis but for one vector.
"""

from __future__ import annotations

import math

import numpy as np

from swe.exponential.basis import Basis
from swe.exponential.contract import Action, Operator
from swe.exponential.estimate import ROUND_OFF, Forecast, broken, expected_residual, outcome, two_terms
from swe.exponential.phi import phi_columns

CLOSED = 4.0 * np.finfo(float).eps
"""The basis is closed when what is left of w, over the radius, is below this: the round-off of a product."""

REPEAT = 0.1
"""Orthogonalise again when less than this part of w is left."""


def arnoldi(operator: Operator, b: np.ndarray, step: float, orders: tuple[int, ...], tolerance: float, largest: int) -> Action:
    """Return phi_k(step S) b for each requested order, in scaled variables. Not collective.

    Arguments and result as for `lanczos`; the operator need not be skew.
    """
    size = math.sqrt(b @ b)
    scale = abs(step) * size
    radius = operator.radius
    reach = radius * abs(step)
    forecast = Forecast(min(orders), max(tolerance / scale, ROUND_OFF))
    basis = Basis(len(b))
    np.multiply(b, 1.0 / size, out=basis.vector(0))  # 1.
    columns_of_h: list[np.ndarray] = []
    reaches: list[float] = []  # |step S v_j|
    for products in range(1, largest + 1):
        column = _next_column(operator, basis, products, radius)  # 2. to 4.
        if not math.isfinite(column[-1]):
            return broken("Arnoldi", orders, len(b), products)
        last = products == largest or column[-1] == 0.0
        residual = 0.0
        columns_of_h.append(column)
        if column[-1] > 0.0:
            reaches.append(abs(step) * math.sqrt(column @ column))
            forecast.grow(abs(step) * column[-1], step * column[-2], -abs(step) * column[-1])
            residual = expected_residual(max(reaches), reach)
        if last or forecast.worth_a_look(residual):
            projection = _projection(columns_of_h)
            columns = phi_columns(step * projection, np.eye(len(projection))[0], max(orders) + 2)  # 5.
            error = max(two_terms(columns, orders, residual), ROUND_OFF)
            if last or error <= forecast.allowed:
                break
    values = [basis.combine(size * columns[k]) for k in orders]
    return outcome("Arnoldi", values, scale * error, products, tolerance, reach, scale * ROUND_OFF)


def _next_column(operator: Operator, basis: Basis, j: int, radius: float) -> np.ndarray:
    """Write the next vector of the basis and return column j of H, (j + 1,); its last entry 0 when there is no new direction."""
    w = basis.vector(j)
    w[:] = operator.product(basis.vector(j - 1))
    before = math.sqrt(w @ w)
    column = np.zeros(j + 1)
    if not math.isfinite(before):
        column[j] = before
        return column
    after = _orthogonalise(w, basis, column[:j])
    if after < REPEAT * before:
        after = _orthogonalise(w, basis, column[:j])
    if after <= CLOSED * radius:
        return column
    w *= 1.0 / after
    column[j] = after
    return column


def _orthogonalise(w: np.ndarray, basis: Basis, coefficients: np.ndarray) -> float:
    """Take from w, in place, its part in the basis, add that to `coefficients` and return the norm of what is left."""
    part = basis.project(w, len(coefficients))
    basis.add(-part, w)
    coefficients += part
    return math.sqrt(w @ w)


def _projection(columns: list[np.ndarray]) -> np.ndarray:
    """Return H, square; with a last column of zeros unless the basis is closed."""
    size = len(columns) + (columns[-1][-1] > 0.0)
    projection = np.zeros((size, size))
    for j, column in enumerate(columns):
        rows = min(len(column), size)
        projection[:rows, j] = column[:rows]
    return projection
