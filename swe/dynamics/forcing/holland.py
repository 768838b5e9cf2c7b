"""Pressure and wind of a round storm at the distance r from its centre.

    p(r) = p_n - dp (1 - e^-x),     x = (R/r)^B
    V(r) = ( B dp x e^-x / rho_a + c^2 )^(1/2) - c,     c = r |f| / 2

p_n ambient pressure, dp the deficit of the centre (Pa), R radius of maximum wind (m), B shape, rho_a density of the air, f at
the centre. V is the gradient wind, in balance with the pressure: V^2/r + |f| V = (dp/dr)/rho_a. Without rotation it is greatest
at R, where V^2 = B dp/(rho_a e). Written as a fraction, V has no difference of large numbers far out, and no 0/0 in the centre,
where it is calm.
Source: Holland 1980, Mon. Wea. Rev. 108, 1212, with A = R^B.
"""

from __future__ import annotations

import numpy as np

CENTRE = 1e-3
"""Of R: nearer than that the centre itself is meant; e^-x is zero there."""


def exponent(r: np.ndarray, radius: float, shape: float) -> np.ndarray:
    """Return x, (n,). Not collective."""
    return (radius / np.maximum(r, CENTRE * radius)) ** shape


def pressure(r: np.ndarray, ambient: float, deficit: float, radius: float, shape: float) -> np.ndarray:
    """Return p, (n,), Pa. Not collective."""
    return ambient + deficit * np.expm1(-exponent(r, radius, shape))


def gradient_wind(r: np.ndarray, deficit: float, radius: float, shape: float, coriolis: float, air_density: float) -> np.ndarray:
    """Return V, (n,), m s-1. Not collective."""
    x = exponent(r, radius, shape)
    square = shape * deficit / air_density * x * np.exp(-x)
    c = 0.5 * np.abs(coriolis) * r
    return square / np.maximum(np.sqrt(square + c * c) + c, np.finfo(float).tiny)


def shape_for(strongest: np.ndarray, deficit: np.ndarray, air_density: float) -> np.ndarray:
    """Return B of the storm whose greatest gradient wind without rotation is `strongest`, m s-1. Not collective."""
    return strongest**2 * air_density * np.e / deficit
