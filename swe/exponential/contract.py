"""What the exponential room asks of an operator, and what it gives back.

The action of `phi_k(dt L)` is computed in scaled variables y = w x with w = M^(1/2), where M holds the energy weights:

    S = M^(1/2) L M^(-1/2),     |y|_2 = energy norm of x.

An operator that is skew in that scaling needs a three-term recurrence only. This room knows no mesh and no MPI.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Protocol

import numpy as np


class Operator(Protocol):
    """A linear operator L, seen through S.

    size      number of unknowns n
    weights   (n,) w = sqrt of the energy weights; all > 0
    skew      True when S^T = -S by construction
    radius    upper bound of the spectral radius of S, s-1
    """

    size: int
    weights: np.ndarray
    skew: bool
    radius: float

    def product(self, y: np.ndarray) -> np.ndarray:
        """Return S y, (n,). One product, counted by the caller. Not collective."""


@dataclass(frozen=True)
class Action:
    """phi_k(dt L) b for several k.

    values      one (n,) array for each requested order, in unscaled variables
    error       estimated energy norm of the error of the worst of them
    products    products of S spent
    converged   False when `error` is still above the tolerance
    reason      a sentence when not converged, else ""
    """

    values: tuple[np.ndarray, ...]
    error: float
    products: int
    converged: bool
    reason: str


def fitting(operator: Operator, method: str) -> str:
    """Return `method` where it fits the operator, "arnoldi" where it needs a skew one and this is not. Not collective.

    A subdomain whose boundary radiates is dissipative; its neighbours are still skew and keep the cheaper recurrence.
    """
    return method if operator.skew else "arnoldi"
