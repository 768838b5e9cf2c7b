"""Nodal modulation: the factor f and the angle u of a constituent, which change slowly with the moon's node and perigee.

    f e^{iu} = 1 + sum_j r_j exp( i (a_j p + b_j N' + c_j p') )

The sum runs over the constituent's satellites: lines of the tide-generating potential with the same multiples of tau, s and h,
which a record of a year cannot tell from it (`satellites`). Source of the method: Godin 1972, The Analysis of Tides. Without the
satellites in p the result is that of Schureman 1958 (US Coast and Geodetic Survey, SP 98) within 0.001 in f.

Constituents of the sun have f = 1, u = 0, as in all published harmonic constants. Compound ones take products:

    f = prod f_k^|n_k|,    u = sum n_k u_k       for parts k taken n_k times

Harmonic constants have f and u removed already: apply them in forcing and prediction, never in a comparison of constants.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from swe.constants import DEGREE
from swe.tide.constituents import Constituent
from swe.tide.satellites import SATELLITES


@dataclass(frozen=True, eq=False)
class Modulation:
    """The modulation of a choice of constituents.

    powers   (nc, nb) how often each of nb basic constituents is taken
    ratios   (nb, ns) size of the satellites over that of their basic constituent
    angles   (ns, 3) multiples of p, N', p'
    """

    powers: np.ndarray
    ratios: np.ndarray
    angles: np.ndarray

    @classmethod
    def of(cls, chosen: Sequence[Constituent]) -> "Modulation":
        """Return the modulation of the chosen constituents. Not collective."""
        parts = [constituent.parts or ((constituent.name, 1.0),) for constituent in chosen]
        basic = list(dict.fromkeys(name for row in parts for name, _ in row))
        powers = np.zeros((len(chosen), len(basic)))
        for i, row in enumerate(parts):
            for name, multiple in row:
                powers[i, basic.index(name)] = multiple
        lines = [(k, *line) for k, name in enumerate(basic) for line in SATELLITES.get(name, ())]
        ratios = np.zeros((len(basic), len(lines)))
        for j, line in enumerate(lines):
            ratios[line[0], j] = line[4]
        return cls(powers, ratios, np.array([line[1:4] for line in lines], dtype=float).reshape(-1, 3))

    def factors(self, longitudes: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
        """Return f and u (rad), each (nc,) or (nc, nt), at mean longitudes (6,) or (6, nt) in degrees. Not collective."""
        basic = 1.0 + self.ratios @ np.exp(1j * DEGREE * (self.angles @ longitudes[3:]))
        return np.exp(np.abs(self.powers) @ np.log(np.abs(basic))), self.powers @ np.angle(basic)
