"""Where the constituents of a choice stand at a date:  F = f e^{i (V + u)}, and level = Re( F x complex constant )."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from swe.constants import DEGREE
from swe.tide.astronomy import mean_longitudes
from swe.tide.constituents import Constituent
from swe.tide.nodal import Modulation


@dataclass(frozen=True, eq=False)
class Arguments:
    """Arguments of nc constituents: doodson (nc, 6), offset (nc,) in degrees, and their modulation."""

    doodson: np.ndarray
    offset: np.ndarray
    modulation: Modulation

    @classmethod
    def of(cls, chosen: Sequence[Constituent]) -> "Arguments":
        """Return the arguments of the chosen constituents. Not collective."""
        doodson = np.array([constituent.doodson for constituent in chosen], dtype=float).reshape(-1, 6)
        return cls(doodson, np.array([constituent.offset for constituent in chosen]), Modulation.of(chosen))

    def at(self, days) -> np.ndarray:
        """Return F at days of UTC since 2000-01-01 12:00: (nc,), or (nc, nt) for (nt,) days. Not collective."""
        longitudes = mean_longitudes(days)
        f, u = self.modulation.factors(longitudes)
        return f * np.exp(1j * (DEGREE * self._astronomical(longitudes) + u))

    def astronomical(self, days) -> np.ndarray:
        """Return V, degrees, 0 to 360; shapes as `at`. Not collective."""
        return np.mod(self._astronomical(mean_longitudes(days)), 360.0)

    def nodal(self, days) -> tuple[np.ndarray, np.ndarray]:
        """Return f and u (rad); shapes as `at`. Not collective."""
        return self.modulation.factors(mean_longitudes(days))

    def _astronomical(self, longitudes: np.ndarray) -> np.ndarray:
        return ((self.doodson @ longitudes).T + self.offset).T
