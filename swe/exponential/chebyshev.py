"""Action of phi_k by a Chebyshev series: no inner products, a degree that is known beforehand.

S is skew with spectral radius at most rho, so X = S / (i rho) is Hermitian with spectrum in [-1, 1] and, with z = rho step,

    phi_k(step S) = phi_k(i z X) = sum_j c_j T_j(X),    c_j = (2 - [j = 0]) / N sum_l phi_k(i z x_l) cos(j arccos x_l)

by interpolation at N Chebyshev nodes x_l (one cosine transform). i^j T_j(X) is real for a real S, and so is i^-j c_j (Tal-Ezer
& Kosloff 1984, J. Chem. Phys. 81, 3967; Trefethen 2013, Approximation Theory and Approximation Practice; from memory):

    1.  u_0 = b,  u_1 = S b / rho
    2.  u_{j+1} = 2 S u_j / rho + u_{j-1}
    3.  phi_k(step S) b  ~  sum_{j <= m} a_j u_j,     a_j = i^-j c_j,    |u_j| <= |b|

One recurrence serves all orders. The degree m is the smallest for which step |b| sum_{j > m} |a_j| is below the tolerance: the
exact tail of phi_k, sharper than the Bessel bound, which sets N. It is at least 1. Afterwards the tail is weighted by the
norms of the last two vectors, which say how much of b the even and the odd polynomials of high degree see: that is the
estimate. When `radius` is too small for S these norms grow without bound, and so does the estimate.
"""

from __future__ import annotations

import math

import numpy as np
from scipy.fft import dct
from scipy.linalg.blas import daxpy

from swe.exponential.bounds import chebyshev_degree
from swe.exponential.contract import Action, Operator
from swe.exponential.estimate import ROUND_OFF, broken, outcome
from swe.exponential.phi import phi_scalars

NEGLIGIBLE = 1e-17
"""Coefficients are computed until the Bessel bound of what follows is below this."""


def chebyshev(operator: Operator, b: np.ndarray, step: float, orders: tuple[int, ...], tolerance: float, largest: int) -> Action:
    """Return phi_k(step S) b for each requested order, in scaled variables. Not collective.

    Arguments and result as for `lanczos`; the operator is skew, and its `radius` must be an upper bound.
    """
    size = math.sqrt(b @ b)
    scale = abs(step) * size
    reach = operator.radius * abs(step)
    series = coefficients(operator.radius * step, orders)
    allowed = max(tolerance / scale, ROUND_OFF)
    degree = min(max(_degree(series, allowed), 1), largest)
    with np.errstate(over="ignore", invalid="ignore"):  # a product that is not finite is reported below
        values, norms = _sum(operator, b, series[:, : degree + 1])  # 1. to 3.
    if not np.all(np.isfinite(norms)):
        return broken("Chebyshev", orders, len(b), degree)
    error = max(_estimate(series, degree, norms / size), ROUND_OFF)
    return outcome("Chebyshev", values, scale * error, degree, tolerance, reach, scale * ROUND_OFF)


def coefficients(z: float, orders: tuple[int, ...]) -> np.ndarray:
    """Return the real a_j of phi_k(i z x) for each order, (len(orders), N); a few zeros follow the last that matters."""
    nodes = chebyshev_degree(abs(z), NEGLIGIBLE) + 8
    x = np.cos(np.pi * (np.arange(nodes) + 0.5) / nodes)
    samples = phi_scalars(1j * z * x, max(orders))[list(orders)]
    even, odd = (dct(part, axis=1) / nodes for part in (samples.real, samples.imag))
    series = even
    series[:, 1::2] = odd[:, 1::2]
    series[:, 0] *= 0.5
    series[:, 2::4] *= -1.0
    series[:, 3::4] *= -1.0
    return series


def _degree(series: np.ndarray, allowed: float) -> int:
    """Return the smallest degree whose tail is allowed for every order."""
    tails = np.cumsum(np.abs(series[:, ::-1]), axis=1)[:, ::-1].max(axis=0)  # tails[m + 1]: beyond degree m
    return int(np.count_nonzero(tails[1:] > allowed))


def _sum(operator: Operator, b: np.ndarray, series: np.ndarray) -> tuple[list[np.ndarray], np.ndarray]:
    """Return sum_j a_j u_j for each order, and the norms of the last two u."""
    values = [a[0] * b for a in series]
    before, current = b, operator.product(b) * (1.0 / operator.radius)
    for j in range(1, series.shape[1]):
        if j > 1:
            following = operator.product(current) * (2.0 / operator.radius)
            following += before
            before, current = current, following
        for value, a in zip(values, series):
            daxpy(current, value, a=a[j])
    return values, np.sqrt([before @ before, current @ current])


def _estimate(series: np.ndarray, degree: int, norms: np.ndarray) -> float:
    """Return the weighted tail of the worst order, over step |b|."""
    tail = np.abs(series[:, degree + 1 :])
    return float(np.max(norms[0] * tail[:, 0::2].sum(axis=1) + norms[1] * tail[:, 1::2].sum(axis=1)))
