"""Degrees and overlaps from the tail of the Bessel functions."""

import math

import mpmath
import numpy as np
import pytest
from exponential.exponential_examples import wave_1d

from swe.exponential.bounds import bessel_tail, chebyshev_degree, overlap_for
from swe.exponential.mismatch import expected_mismatch

# Polynomial degree of the exponential for a Courant number c dt / d, regular hexagons, rho = sqrt(6) c / d; computed and
# verified on a closed one-dimensional C-grid (theory: Hochbruck & Lubich 1997, SIAM J. Numer. Anal. 34, 1911).
DEGREES = {0.5: (8, 12), 1.0: (10, 16), 2.0: (14, 21), 5.0: (25, 34), 10.0: (40, 51), 20.0: (69, 82), 50.0: (149, 167)}

# Difference between localised and global step over wave height, two-stage step on a bowl, ten subdomains: z -> {overlap: value}.
# Source: prototype, method of the localised step; hump on a bowl 500 to 2,500 m deep.
MISMATCH = {
    2.0: {2: 1e-4, 4: 1e-8, 6: 4e-12},
    4.0: {2: 3e-3, 4: 8e-6, 6: 5e-9, 8: 4e-12},
    7.9: {2: 0.15, 4: 7e-3, 6: 6e-5, 8: 2e-7, 10: 3e-10},
    15.9: {2: 0.9, 4: 0.4, 6: 0.1, 8: 7e-3, 10: 2e-4, 14: 8e-9},
}


@pytest.mark.parametrize("courant", DEGREES)
def test_published_degrees(courant):
    z = math.sqrt(6.0) * courant
    assert (chebyshev_degree(z, 1e-6), chebyshev_degree(z, 1e-12)) == DEGREES[courant]


@pytest.mark.parametrize("z, degree", [(0.0, 0), (0.5, 3), (4.0, 12), (30.0, 20), (30.0, 45), (200.0, 230)])
def test_tail_against_many_digits(z, degree):
    with mpmath.workdps(30):
        expected = 2 * mpmath.fsum(abs(mpmath.besselj(k, z)) for k in range(degree + 1, degree + 120 + int(z)))
    assert bessel_tail(z, degree) == pytest.approx(float(expected), rel=1e-10, abs=1e-300)


def test_degree_is_the_smallest_one():
    for z in (0.3, 3.0, 17.0, 80.0):
        for tolerance in (1e-2, 1e-7, 1e-14):
            degree = chebyshev_degree(z, tolerance)
            assert bessel_tail(z, degree) <= tolerance < bessel_tail(z, degree - 1)


def test_nothing_to_do_for_no_step():
    assert chebyshev_degree(0.0, 1e-12) == 0
    assert overlap_for(0.0, 1e-12) == 0


def test_overlap_is_the_smallest_one():
    for z in (0.5, 2.0, 6.0, 12.0, 40.0):
        for tolerance in (1e-2, 1e-5, 1e-9):
            layers = overlap_for(z, tolerance)
            assert bessel_tail(z, 2 * layers) <= tolerance < bessel_tail(z, 2 * layers - 2)


@pytest.mark.parametrize("z", MISMATCH)
def test_overlap_bounds_the_measured_mismatch(z):
    for layers, measured in MISMATCH[z].items():
        assert measured <= bessel_tail(z, 2 * layers)
        assert layers <= overlap_for(z, measured) <= layers + 6


@pytest.mark.parametrize("z", MISMATCH)
def test_expected_mismatch_has_the_size_of_the_measured_one(z):
    for layers, measured in MISMATCH[z].items():
        assert measured / 6.0 <= expected_mismatch(z, layers) <= 6.0 * measured


def test_far_entries_of_the_exponential_are_below_the_tail():
    # Iserles 2000, New Zealand J. Math. 29, 177: entries more than m products apart are below 2 sum_{k > m} |J_k(z)|.
    cells, z = 40, 9.0
    operator = wave_1d(cells)
    values, vectors = np.linalg.eigh(1j * operator.scaled.toarray())
    power = (vectors * np.exp(-1j * z / operator.radius * values)) @ vectors.conj().T
    places = np.concatenate((2 * np.arange(cells), 2 * np.arange(cells - 1) + 1))
    distance = np.abs(places[:, None] - places[None, :])
    for products in range(6, 30):
        largest = np.max(np.abs(power[distance > products]))
        assert largest <= bessel_tail(z, products) + 1e-15
        # Not idle: once it falls the bound is met within two decades.
        assert products < 10 or largest < 1e-13 or largest >= 0.01 * bessel_tail(z, products)
