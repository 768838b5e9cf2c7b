"""Facts that hold exactly: conserved sums at any basis size, one Fourier mode on the f-plane."""

import math

import numpy as np
import pytest
from exponential.exponential_examples import Matrix, dense_increment, smooth_vector, wave_1d

from swe.exponential.action import METHODS, phi_action

CELLS = 60


def volume(x: np.ndarray) -> float:
    return float(np.sum(x[:CELLS]))


@pytest.mark.parametrize(
    "method, drag, flow", [("lanczos", 0.0, 0.0), ("chebyshev", 0.0, 0.0), ("arnoldi", 0.0, 0.0), ("arnoldi", 1e-3, 3.0)]
)
@pytest.mark.parametrize("products", [1, 2, 3, 6, 12])
def test_volume_is_conserved_however_coarse_the_basis(method, drag, flow, products):
    # u + h phi_1(hJ) F keeps every linear invariant of F, because each vector of the basis does.
    operator = wave_1d(CELLS, drag, flow)
    rates = operator.unscaled @ smooth_vector(CELLS)
    step = 20.0 / operator.radius
    action = phi_action(operator, rates, step, (1,), 0.0, method, products)
    increment = step * action.values[0]
    error = operator.norm(increment - dense_increment(operator, rates, step, 1)) / operator.norm(increment)
    assert action.products == products and not action.converged
    assert error > 1e-3
    assert abs(volume(increment)) <= 1e-14 * np.sum(np.abs(increment[:CELLS]))


@pytest.mark.parametrize("method", METHODS)
@pytest.mark.parametrize("hours", [0.05, 0.5, 3.0])
def test_one_fourier_mode_on_the_f_plane(method, hours):
    # eta = a cos kx, u = b sin kx, v = c sin kx:  (b, c, a)' = A (b, c, a) with A^3 = -w^2 A, so that with x = w t
    # phi_1(tA) = I + tA (1 - cos x)/x^2 + (tA)^2 (x - sin x)/x^3
    # phi_2(tA) = I/2 + tA (x - sin x)/x^3 + (tA)^2 (x^2/2 - 1 + cos x)/x^4
    # Source: derived and verified at 40 digits; Poincare waves: Gill 1982, Atmosphere-Ocean Dynamics, chapter 7.
    f, gravity, depth, k = 1e-4, 9.81, 100.0, 2.0 * math.pi / 1e5
    matrix = np.array([[0.0, f, gravity * k], [-f, 0.0, 0.0], [-depth * k, 0.0, 0.0]])
    frequency = math.sqrt(f * f + gravity * depth * k * k)
    assert frequency == pytest.approx(0.0019704904889360578, rel=1e-15, abs=0.0)
    operator = Matrix(matrix, np.sqrt([depth, depth, gravity]), skew=True)
    assert operator.radius == pytest.approx(frequency, rel=1e-14, abs=0.0)
    t = 3600.0 * hours
    x, a = frequency * t, t * matrix
    b = np.array([0.3, -0.2, 1.0])
    expected = (
        b + a @ b * (1.0 - math.cos(x)) / x**2 + a @ a @ b * (x - math.sin(x)) / x**3,
        b / 2.0 + a @ b * (x - math.sin(x)) / x**3 + a @ a @ b * (x**2 / 2.0 - 1.0 + math.cos(x)) / x**4,
    )
    scale = t * operator.norm(b)
    action = phi_action(operator, b, t, (1, 2), 1e-13 * scale, method, 100)
    assert action.converged
    assert action.products <= 3 or method == "chebyshev"
    for value, wanted in zip(action.values, expected):
        assert operator.norm(value - wanted) <= 1e-13 * operator.norm(b)
