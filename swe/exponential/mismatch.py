"""How far apart a localised action and the one on the whole domain are expected to be.

A subdomain sees values beyond its overlap of m layers that are exact at the start of the step and move as the rates say.
What they miss is their second change in time, which enters as phi_2 does, and only the part of phi_2(dt S) that reaches
further than 2 m products can carry it to the owned part. With a_j the Chebyshev coefficients of phi_2, z = rho dt:

    expected mismatch / size of the increment  ~  sum_{j > 2 m} |a_j(z)|

This is an argument of scale, not a proof. Against the prototype's table (method.md, section 6: a hump on a bowl, ten
subdomains, z from 2 to 16, overlap 2 to 14, mismatch 0.9 down to 4e-12) it is right within a factor 6, where
`bounds.overlap_for`, which is a bound, asks for one to three layers more.
"""

from __future__ import annotations

import numpy as np

from swe.exponential.chebyshev import coefficients


def expected_mismatch(z: float, layers: int) -> float:
    """Return the expected relative difference between a localised and a global step.

    z        spectral radius times length of the step, > 0
    layers   overlap in layers of faces, >= 0
    """
    return float(np.abs(coefficients(z, (2,))[0, 2 * layers + 1 :]).sum())
