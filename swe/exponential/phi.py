"""The phi functions of numbers and of small matrices.

    phi_0(z) = e^z,    phi_{k+1}(z) = (phi_k(z) - 1/k!) / z,    phi_k(0) = 1/k!,
    phi_k(z) = sum_{j >= 0} z^j / (j + k)!

The quotient loses all digits near z = 0 and the series loses them far from it, so each is used where it is good
(Cox & Matthews 2002, J. Comput. Phys. 176, 430; Kassam & Trefethen 2005, SIAM J. Sci. Comput. 26, 1214).

Matrices come from the exponential of an augmented matrix (Saad 1992, SIAM J. Numer. Anal. 29, 209; Sidje 1998, ACM
Trans. Math. Softw. 24, 130): with J the p x p matrix of ones above the diagonal,

    exp [[A, v, 0], [0, J]]   holds   phi_1(A) v, ..., phi_p(A) v   in its upper right corner.

A skew tridiagonal matrix needs one symmetric eigen-decomposition for all orders, see `phi_skew_tridiagonal`.
"""

from __future__ import annotations

import numpy as np
from scipy.linalg import eigh_tridiagonal, expm

TAYLOR_TERMS = 24
"""Terms of the series beyond those that the order itself asks for; at its largest argument the rest is below 1e-18."""


def phi_scalars(z, highest: int) -> np.ndarray:
    """Return phi_0(z), ..., phi_highest(z) of each number.

    z         real or complex, any shape
    highest   highest order, >= 0
    returns   (highest + 1, *z.shape), relative error a few 1e-15 where phi_k has no zero close by
    """
    z = np.asarray(z)
    z = z.astype(np.result_type(z, np.float64), copy=False)
    flat = z.ravel()
    size = np.abs(flat)
    values = _by_quotients(np.where(size > 1.0, flat, 1.0), highest)
    near = size <= highest + 1.0
    series = _by_series(flat[near], highest)
    # phi_k by its series where |z| <= k + 1 (the terms fall from the first on: no cancellation), else by quotients
    values[:, near] = np.where(size[near] <= np.arange(1.0, highest + 2.0)[:, None], series, values[:, near])
    return values.reshape((highest + 1, *z.shape))


def phi_matrices(matrix: np.ndarray, highest: int) -> np.ndarray:
    """Return phi_0, ..., phi_highest of a small square matrix, (highest + 1, m, m)."""
    matrix = np.asarray(matrix)
    return _augmented(matrix, np.eye(len(matrix)), highest)


def phi_columns(matrix: np.ndarray, vector: np.ndarray, highest: int) -> np.ndarray:
    """Return phi_0, ..., phi_highest of a small square matrix times one vector, (highest + 1, m)."""
    return _augmented(np.asarray(matrix), np.asarray(vector)[:, None], highest)[:, :, 0]


def phi_small(x, order: int) -> np.ndarray:
    """Return phi_order(x): of a square matrix when x has two dimensions, else of each number."""
    x = np.asarray(x)
    return (phi_matrices if x.ndim == 2 else phi_scalars)(x, order)[order]


def phi_skew_tridiagonal(below: np.ndarray, step: float, highest: int) -> np.ndarray:
    """Return phi_k(step T) e_1 for k = 0, ..., highest, T skew and tridiagonal.

    T has `below`, (m - 1,), under its diagonal and minus it above. With D = diag(1, -i, -1, i, ...) the matrix
    D^-1 T D = i A, where A is real, symmetric and has `below` beside its diagonal. So one decomposition A = Q Lambda Q^T
    serves all orders:

        [phi_k(step T) e_1]_j = D_j sum_l Q_jl phi_k(i step Lambda_l) Q_1l

    which is real: even j (from 0) see the real part of phi_k, odd j the imaginary part.

    returns   (highest + 1, m)
    """
    size = len(below) + 1
    values, vectors = eigh_tridiagonal(np.zeros(size), below)
    weighted = phi_scalars(1j * step * values, highest) * vectors[0]
    columns = np.empty((highest + 1, size))
    columns[:, 0::2] = weighted.real @ vectors[0::2].T
    columns[:, 1::2] = weighted.imag @ vectors[1::2].T
    columns[:, 2::4] *= -1.0
    columns[:, 3::4] *= -1.0
    return columns


def _inverse_factorials(count: int) -> np.ndarray:
    """Return 1/0!, ..., 1/(count - 1)!."""
    return 1.0 / np.cumprod(np.concatenate(([1.0], np.arange(1.0, count))))


def _by_series(z: np.ndarray, highest: int) -> np.ndarray:
    """Sum the series of the highest order, then go down by phi_k = 1/k! + z phi_{k+1}."""
    terms = TAYLOR_TERMS + 3 * highest
    inverse = _inverse_factorials(terms + highest)
    powers = np.ones((terms, z.size), dtype=z.dtype)
    np.multiply.accumulate(np.broadcast_to(z, (terms - 1, z.size)), axis=0, out=powers[1:])
    values = np.empty((highest + 1, z.size), dtype=z.dtype)
    values[highest] = inverse[highest:] @ powers
    for k in range(highest - 1, -1, -1):
        values[k] = inverse[k] + z * values[k + 1]
    return values


def _by_quotients(z: np.ndarray, highest: int) -> np.ndarray:
    """Go up by the definition; each division shrinks the error that it inherits."""
    inverse = _inverse_factorials(highest + 1)
    values = np.empty((highest + 1, z.size), dtype=z.dtype)
    values[0] = np.exp(z)
    for k in range(highest):
        values[k + 1] = (values[k] - inverse[k]) / z
    return values


def _augmented(matrix: np.ndarray, block: np.ndarray, highest: int) -> np.ndarray:
    """Return phi_k(matrix) block for k = 0, ..., highest, (highest + 1, m, columns)."""
    size, columns = block.shape
    whole = np.zeros((size + highest * columns,) * 2, dtype=np.result_type(matrix, block, np.float64))
    whole[:size, :size] = matrix
    whole[:size, size : size + columns] = block if highest else 0.0
    whole[size:, size:] += np.eye(highest * columns, k=columns)
    power = expm(whole)
    corner = power[:size, size:].reshape(size, highest, columns).transpose(1, 0, 2)
    return np.concatenate(((power[:size, :size] @ block)[None], corner))
