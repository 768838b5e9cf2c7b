"""Small operators and vectors that the tests of this room share."""

from __future__ import annotations

import numpy as np
import scipy.linalg
import scipy.sparse as sparse


class Matrix:
    """An operator of the contract made from a matrix L and weights; counts its products.

    S = diag(w) L diag(1/w). `radius` is the largest singular value of S: exact for the skew ones.
    """

    def __init__(self, unscaled, weights: np.ndarray, skew: bool):
        self.weights = np.asarray(weights, dtype=float)
        self.size = len(self.weights)
        self.skew = skew
        self.unscaled = sparse.csr_array(unscaled)
        self.scaled = sparse.csr_array(sparse.diags_array(self.weights) @ self.unscaled @ sparse.diags_array(1.0 / self.weights))
        self.radius = float(np.linalg.norm(self.scaled.toarray(), 2))
        self.count = 0

    def product(self, y: np.ndarray) -> np.ndarray:
        self.count += 1
        return self.scaled @ y

    def norm(self, x: np.ndarray) -> float:
        return float(np.linalg.norm(self.weights * x))


def random_skew(size: int, seed: int) -> Matrix:
    """Return a full random operator that is skew in the scaling of random weights."""
    rng = np.random.default_rng(seed)
    full = rng.standard_normal((size, size))
    weights = rng.uniform(0.5, 2.0, size)
    return Matrix((full - full.T) / weights[:, None] * weights[None, :], weights, skew=True)


def wave_1d(cells: int, drag: float = 0.0, flow: float = 0.0) -> Matrix:
    """Return gravity waves in a closed channel of uneven depth on a staggered grid: levels, then inner velocities.

        d eta/dt = - d(D u)/dx - flow d eta/dx       du/dt = - g d eta/dx - drag u - flow du/dx

    `flow` (centred differences, wrapped round) and `drag` make it a stand-in for a Jacobian: skew no longer.
    """
    gravity, spacing = 9.81, 1000.0
    x = (np.arange(cells) + 0.5) / cells
    depth = 20.0 + 15.0 * np.cos(3.0 * x)
    at_edges = 0.5 * (depth[1:] + depth[:-1])
    ones = np.ones(cells - 1)
    grad = sparse.diags_array([-ones, ones], offsets=[0, 1], shape=(cells - 1, cells)) / spacing
    waves = sparse.block_array([[None, grad.T @ sparse.diags_array(at_edges)], [-gravity * grad, None]])
    advection = [_advection(size, flow / spacing) for size in (cells, cells - 1)]
    losses = sparse.block_diag([advection[0], advection[1] - drag * sparse.eye_array(cells - 1)])
    weights = np.sqrt(np.concatenate((np.full(cells, gravity * spacing), spacing * at_edges)))
    return Matrix(waves + losses, weights, skew=drag == 0.0 and flow == 0.0)


def _advection(size: int, rate: float):
    ahead = sparse.diags_array(np.ones(size - 1), offsets=1, shape=(size, size)).tolil()
    ahead[size - 1, 0] = 1.0
    return -0.5 * rate * (ahead - ahead.T).tocsr()


def smooth_vector(cells: int) -> np.ndarray:
    """Return a hump of level, ten cells wide, and no current, for `wave_1d`."""
    x = np.arange(cells) + 0.5
    return np.concatenate((np.exp(-(((x - 0.4 * cells) / 10.0) ** 2)), np.zeros(cells - 1)))


def dense_increment(operator: Matrix, b: np.ndarray, step: float, order: int) -> np.ndarray:
    """Return step phi_order(step L) b from one dense exponential of an augmented matrix (Saad 1992)."""
    size = operator.size
    whole = np.zeros((size + order, size + order))
    whole[:size, :size] = step * operator.unscaled.toarray()
    whole[:size, size] = b / np.linalg.norm(b)
    whole[size:, size:] = np.eye(order, k=1)
    return step * np.linalg.norm(b) * scipy.linalg.expm(whole)[:size, size + order - 1]
