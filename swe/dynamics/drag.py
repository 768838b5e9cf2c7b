"""Quadratic bottom drag, with a coefficient that may depend on the depth.

    du/dt = -C_d |u| u_n / h_e,     |u|^2 = u_n^2 + u_t^2,   u_t = T u,     C_d ~ h_e^-p  (`friction`)

Derivatives, for the Jacobian:

    d/du_n = -C_d (|u| + u_n^2/|u|) / h_e     d/du_t = -C_d (u_n u_t/|u|) / h_e     d/dh_e = (1 + p) C_d |u| u_n / h_e^2

|u| has a kink at rest, but |u| u_n has none: its derivative there is zero, and is returned as such.
Source: the quadratic law of turbulent friction, common practice; C_d near 0.0025 in shelf seas.
"""

from __future__ import annotations

import numpy as np


def drag(coefficient: float | np.ndarray, u: np.ndarray, u_t: np.ndarray, h_edge: np.ndarray) -> np.ndarray:
    """Return the acceleration by bottom drag on edges, (ne,), m s-2. Not collective."""
    speed = np.sqrt(u * u + u_t * u_t)
    return -coefficient * speed * u / h_edge


def drag_derivatives(coefficient: float | np.ndarray, power: float, u: np.ndarray, u_t: np.ndarray, h_edge: np.ndarray):
    """Return the derivatives of `drag` by u_n (s-1), by u_t (s-1) and by h_e (s-2), each (ne,). Not collective.

    power   p of the coefficient's dependence on depth
    """
    speed = np.sqrt(u * u + u_t * u_t)
    direction = u / np.maximum(speed, np.finfo(float).tiny)
    rate = coefficient / h_edge
    return -rate * (speed + direction * u), -rate * direction * u_t, (1.0 + power) * rate * speed * u / h_edge
