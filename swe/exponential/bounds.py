"""What is known before the first product: polynomial degrees and overlaps from the tail of the Bessel functions.

For S skew with spectral radius rho and z = rho |t| the expansion of the exponential in Chebyshev polynomials of S is

    e^{tS} = J_0(z) + 2 sum_{k >= 1} J_k(z) U_k(S / rho),    ||U_k|| <= 1,    U_k a polynomial of degree k

so that a polynomial of degree m is off by at most `bessel_tail(z, m)` = 2 sum_{k > m} |J_k(z)|. The tail falls faster than
geometrically once m > z and not at all before (Hochbruck & Lubich 1997, SIAM J. Numer. Anal. 34, 1911; Tal-Ezer &
Kosloff 1984, J. Chem. Phys. 81, 3967). phi_k of t S is a mean of e^{sS}, 0 <= s <= t, divided by k!: the bound holds for it too.

An entry of e^{tS} that couples unknowns more than m products apart is below the same tail (Iserles 2000, New Zealand
J. Math. 29, 177; Benzi & Razouk 2007, ETNA 28, 16). One layer of faces is two products, which gives the overlap that a
localised action needs. The sources of this paragraph are cited from memory.
"""

from __future__ import annotations

import math

import numpy as np
from scipy.special import jv


def bessel_tail(z: float, degree: int) -> float:
    """Return 2 sum_{k > degree} |J_k(z)|, z >= 0, degree >= -1."""
    return float(2.0 * np.sum(_bessel(z, degree + 1)))


def chebyshev_degree(z: float, tolerance: float) -> int:
    """Return the smallest degree m >= 0 with bessel_tail(z, m) <= tolerance.

    z           spectral radius times length of time, >= 0
    tolerance   allowed error over the norm of the vector, > 0
    """
    tails = 2.0 * np.cumsum(_bessel(z, 1)[::-1])[::-1]  # tails[m]: everything beyond degree m
    return int(np.count_nonzero(tails > tolerance))


def overlap_for(z: float, tolerance: float) -> int:
    """Return the smallest number of layers m >= 0 with 2 sum_{k >= 2 m + 1} |J_k(z)| <= tolerance.

    It bounds what values beyond the overlap can do to the owned part when they are wrong by the size of the solution
    during the whole step. Interface data that are exact at the start of the step and move linearly do less harm:
    measured mismatches are one to two hundred times smaller, so this is the safe side by one or two layers.

    z           spectral radius times length of the step, >= 0
    tolerance   allowed difference over the norm of the vector, > 0
    """
    return (chebyshev_degree(z, tolerance) + 1) // 2


def _bessel(z: float, first: int) -> np.ndarray:
    """Return |J_k(z)| for k = first, ... until all that follows is below round-off of the smallest double."""
    last = max(first, math.ceil(z)) + 60 + math.ceil(20.0 * z ** (1.0 / 3.0))
    return np.abs(jv(np.arange(first, last + 1), z))
