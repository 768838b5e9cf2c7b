"""The one seam of this room: step phi_k(step L) b to a tolerance, by the method that is asked for.

With W = diag of the square roots of the energy weights, S = W L W^-1 and phi_k(step L) b = W^-1 phi_k(step S) W b. The
methods see S, W b and the plain inner product; what a caller sees is unscaled. Tolerance and error are energy norms of the
increment step phi_k(step L) b, so they have the unit of the energy norm of a state.
"""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np

from swe.exponential.arnoldi import arnoldi
from swe.exponential.chebyshev import chebyshev
from swe.exponential.contract import Action, Operator
from swe.exponential.lanczos import lanczos

METHODS = {"lanczos": lanczos, "chebyshev": chebyshev, "arnoldi": arnoldi}
"""All have one signature: (operator, scaled b, step, orders, tolerance, largest) -> Action with scaled values."""

SKEW_ONLY = ("lanczos", "chebyshev")
"""Methods that rest on a spectrum on the imaginary axis."""


def phi_action(
    operator: Operator, b: np.ndarray, step: float, orders: tuple[int, ...], tolerance: float, method: str, largest: int
) -> Action:
    """Return phi_k(step L) b for each requested order. Not collective.

    operator    linear operator L, seen through S
    b           (n,) unscaled
    step        length of the step, s
    orders      requested orders k >= 0
    tolerance   allowed energy norm of the error of step phi_k(step L) b, >= 0
    method      "lanczos", "chebyshev" (both for a skew operator) or "arnoldi"
    largest     most products of S

    returns     Action; `converged` False and a `reason` when the tolerance was not met or b or a product is not finite
    raises      ValueError for a method that is unknown or not made for this operator, or settings out of range
    """
    _check(operator, orders, method, largest)
    scaled = operator.weights * b
    square = float(scaled @ scaled)
    if not math.isfinite(square):
        values = tuple(np.full(operator.size, np.nan) for _ in orders)
        return Action(values, math.inf, 0, False, "the vector that phi_k acts on is not finite; look at the state before it")
    if not tolerance >= 0.0:
        raise ValueError(f"tolerance is {tolerance}; it must be a number >= 0")
    if square == 0.0 or step == 0.0 or operator.radius == 0.0:  # phi_k(0) b = b / k!
        return Action(tuple(b / math.factorial(k) for k in orders), 0.0, 0, True, "")
    action = METHODS[method](operator, scaled, step, orders, tolerance, largest)
    return replace(action, values=tuple(value / operator.weights for value in action.values))


def _check(operator: Operator, orders: tuple[int, ...], method: str, largest: int) -> None:
    if method not in METHODS:
        raise ValueError(f"method is {method!r}; known are {', '.join(METHODS)}")
    if method in SKEW_ONLY and not operator.skew:
        raise ValueError(f"method is {method!r} and the operator is not skew; use 'arnoldi'")
    if not orders or min(orders) < 0 or largest < 1:
        raise ValueError(f"orders are {orders}, largest is {largest}; at least one order >= 0 and one product are needed")
