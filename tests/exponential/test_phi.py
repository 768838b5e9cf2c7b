"""phi functions: published values, mpmath, identities."""

import math

import mpmath
import numpy as np
import pytest

from swe.exponential.phi import phi_columns, phi_matrices, phi_scalars, phi_skew_tridiagonal, phi_small

# Values of phi_1 ... phi_4. Source: series and closed form at 60 digits (Hochbruck & Ostermann 2010, Acta Numerica 19, 209, for
# the definition).
PUBLISHED = {
    1e-8: (1.000000005, 0.50000000166666667, 0.16666666708333333, 0.04166666675),
    -1e-4: (0.999950001666625, 0.49998333374999167, 0.16666250008333194, 0.041665833347222024),
    1.0: (1.7182818284590452, 0.71828182845904524, 0.21828182845904524, 0.051615161792378569),
    -1.0: (0.63212055882855768, 0.36787944117144232, 0.13212055882855768, 0.034546107838108988),
    -10.0: (0.099995460007023752, 0.090000453999297625, 0.040999954600070238, 0.012566671206659643),
    -1000.0: (0.001, 0.000999, 0.000499001, 0.00016616766566666667),
    1j: (
        0.84147098480789651 + 0.45969769413186028j,
        0.45969769413186028 + 0.15852901519210349j,
        0.15852901519210349 + 0.040302305868139717j,
        0.040302305868139717 + 0.0081376514745631733j,
    ),
    10j: (
        -0.054402111088936981 + 0.18390715290764525j,
        0.018390715290764525 + 0.1054402111088937j,
        0.01054402111088937 + 0.048160928470923548j,
        0.0048160928470923548 + 0.01561226455557773j,
    ),
    100j: (
        -0.0050636564110975879 + 0.0013768112771231607j,
        1.3768112771231607e-5 + 0.010050636564110976j,
        1.0050636564110976e-4 + 0.0049998623188722877j,
        4.9998623188722877e-5 + 0.0016656616030102556j,
    ),
}

MATRIX = np.array([[-2.0, 1.0, 0.0], [1.0, -3.0, 1.0], [0.0, 1.0, -1.0]])
VECTOR = np.array([1.0, 2.0, 3.0])
MATRIX_VALUES = (
    (0.69365726821640098, 1.0582329439668128, 1.9589681644588296),
    (0.86516145171385187, 1.4239801716441047, 2.4650120071852751),
    (0.46022830591430547, 0.78561806354246282, 1.3206060563571877),
    (0.15777308942391285, 0.27577448476213117, 0.45516842840494347),
)


def reference(z: complex, k: int) -> complex:
    """phi_k by its quotients at 160 digits."""
    with mpmath.workdps(160):
        z = mpmath.mpmathify(z)
        if z == 0:
            return 1.0 / math.factorial(k)
        value = mpmath.exp(z)
        for j in range(k):
            value = (value - 1 / mpmath.factorial(j)) / z
        return complex(value)


def matrix_reference(matrix: np.ndarray, k: int) -> np.ndarray:
    """phi_k of a matrix by its series at 80 digits."""
    with mpmath.workdps(80):
        a = mpmath.matrix(matrix.tolist())
        term = mpmath.eye(len(matrix)) / mpmath.factorial(k)
        total = term.copy()
        for j in range(1, 60 + int(6.0 * np.linalg.norm(matrix, 2))):
            term = term * a * (mpmath.factorial(j + k - 1) / mpmath.factorial(j + k))
            total += term
        return np.array(total.tolist(), dtype=complex)


@pytest.mark.parametrize("z", PUBLISHED)
def test_published_scalars(z):
    values = phi_scalars(z, 4)
    assert values[0] == pytest.approx(np.exp(z), rel=1e-15, abs=0.0)
    for k, expected in enumerate(PUBLISHED[z], start=1):
        assert abs(values[k] - expected) <= 5e-15 * abs(expected)


def test_scalars_against_many_digits_over_the_complex_plane():
    radii = np.concatenate((10.0 ** np.arange(-9, 0), np.linspace(0.3, 8.0, 23), [12.5, 30.2, 99.0, 600.3]))
    angles = np.linspace(0.0, 2.0 * np.pi, 12, endpoint=False)
    z = np.array([r * np.exp(1j * a) for r in radii for a in angles if r * np.cos(a) < 100.0])
    for highest in (1, 4, 7):
        values = phi_scalars(z, highest)
        for k in range(highest + 1):
            expected = np.array([reference(x, k) for x in z])
            assert np.max(np.abs(values[k] - expected) / np.abs(expected)) < 5e-15


def test_scalars_keep_shape_and_kind():
    assert phi_scalars(np.zeros((2, 3)), 3).shape == (4, 2, 3)
    assert phi_scalars(np.float64(0.0), 3).tolist() == [1.0, 1.0, 0.5, 1.0 / 6.0]
    assert phi_scalars([1, 2], 2).dtype == np.float64
    assert phi_small(0.0, 4) == 1.0 / 24.0


def test_recurrence_holds_across_the_seam_of_series_and_quotients():
    z = 1j * np.linspace(0.5, 9.0, 400)
    values = phi_scalars(z, 6)
    for k in range(6):
        assert np.max(np.abs(z * values[k + 1] + 1.0 / math.factorial(k) - values[k])) < 4e-15


@pytest.mark.parametrize("k", range(4))
def test_published_matrix(k):
    # Source: values at 60 digits.
    assert phi_matrices(MATRIX, 3)[k] @ VECTOR == pytest.approx(np.array(MATRIX_VALUES[k]), rel=1e-14, abs=0.0)
    assert phi_columns(MATRIX, VECTOR, 3)[k] == pytest.approx(np.array(MATRIX_VALUES[k]), rel=1e-14, abs=0.0)
    assert phi_small(MATRIX, k) @ VECTOR == pytest.approx(np.array(MATRIX_VALUES[k]), rel=1e-14, abs=0.0)


def test_published_sum_of_actions():
    # sum_k phi_k(A) (k + 1) v, the augmented-matrix identity (Saad 1992, SIAM J. Numer. Anal. 29, 209); values at 60 digits.
    columns = phi_columns(MATRIX, VECTOR, 3)
    total = sum((k + 1) * columns[k] for k in range(4))
    assert total == pytest.approx(np.array([4.4357574470826725, 7.3661454169309354, 12.671484061520717]), rel=1e-14, abs=0.0)


@pytest.mark.parametrize("size, norm", [(1, 0.3), (4, 1.0), (5, 6.0), (8, 20.0)])
@pytest.mark.parametrize("kind", ["skew", "full", "complex"])
def test_matrices_against_many_digits(size, norm, kind):
    rng = np.random.default_rng(size)
    a = rng.standard_normal((size, size))
    a = {"skew": a - a.T, "full": a - 2.0 * np.eye(size), "complex": a + 1j * rng.standard_normal((size, size))}[kind]
    if kind == "skew" and size == 1:
        a = np.zeros((1, 1))
    else:
        a = a * (norm / np.linalg.norm(a, 2))
    values = phi_matrices(a, 4)
    for k in range(5):
        expected = matrix_reference(a, k)
        assert np.linalg.norm(values[k] - expected) <= 1e-13 * np.linalg.norm(expected)


@pytest.mark.parametrize("size, step", [(1, 1.0), (2, 0.4), (3, 2.0), (6, -1.5), (12, 7.0)])
def test_skew_tridiagonal_against_many_digits(size, step):
    below = np.random.default_rng(size).uniform(0.3, 1.2, size - 1)
    values = phi_skew_tridiagonal(below, step, 5)
    full = step * (np.diag(below, -1) - np.diag(below, 1))
    for k in range(6):
        expected = matrix_reference(full, k)[:, 0]
        assert np.linalg.norm(values[k] - expected) <= 1e-13 * np.linalg.norm(expected)


def test_skew_tridiagonal_keeps_the_length_of_its_vector():
    values = phi_skew_tridiagonal(np.random.default_rng(0).uniform(0.1, 2.0, 39), 11.0, 0)
    assert np.linalg.norm(values[0]) == pytest.approx(1.0, rel=1e-14, abs=0.0)
