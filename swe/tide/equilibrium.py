"""The equilibrium tide: the level that the sea would take if it answered the tide-generating forces at once.

    eta_eq(t) = ramp(t) sum_k gamma_k A_k f_k shape_k(lat) cos( V_k(t) + u_k + species_k lon )

gamma Love factor, A amplitude in m (`constituents`), f and u `nodal`. Constituents of one species share shape and longitude,
so that with Z_s = sum over species s of gamma A f e^{i(V + u)}

    eta_eq = Re Z_0 (1/2 - 3/2 sin^2 lat)  +  sin 2 lat  Re( Z_1 e^{i lon} )  +  cos^2 lat  Re( Z_2 e^{2 i lon} )

and a call costs one product with five fixed fields, however many constituents there are. V, f and u are those of the very
date. The constant part of the potential is left out: mean levels contain it. Self-attraction of the water and loading of the
ocean floor are not in it.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from datetime import datetime

import numpy as np

from swe.constants import DEGREE
from swe.errors import InputError
from swe.tide.arguments import Arguments
from swe.tide.astronomy import days_since_2000
from swe.tide.constituents import constituents
from swe.tide.ramp import ramp


@dataclass(frozen=True, eq=False)
class EquilibriumTide:
    """The equilibrium tide at n points.

    arguments   of nc constituents
    weights     (3, nc) gamma A in the row of the constituent's species, m
    fields      (5, n) the fields that multiply Re Z_0, Re Z_1, Im Z_1, Re Z_2, Im Z_2
    start       model time 0, days of UTC since 2000-01-01 12:00
    duration    of the ramp, s
    """

    arguments: Arguments
    weights: np.ndarray
    fields: np.ndarray
    start: float
    duration: float

    @classmethod
    def at(cls, lon, lat, names: Iterable[str], start: datetime, duration: float) -> "EquilibriumTide":
        """Return the tide of the named constituents at lon, lat, (n,) each, degrees east and north. Not collective.

        start: model time 0 (UTC); duration: of the ramp from there, s, 0 for none.
        Raises InputError for a constituent that is unknown or has no equilibrium tide, and for a year out of range.
        """
        chosen = constituents(names)
        weights = np.zeros((3, len(chosen)))
        for k, constituent in enumerate(chosen):
            if constituent.amplitude == 0.0:
                raise InputError(f"equilibrium tide: {constituent.name} has none; leave it to the open boundaries")
            weights[constituent.species, k] = constituent.love_factor * constituent.amplitude
        return cls(Arguments.of(chosen), weights, fields(lon, lat), days_since_2000(start), float(duration))

    def level(self, time: float) -> np.ndarray:
        """Return eta_eq, (n,), m, at model time `time` (s). Not collective."""
        z = self.weights @ self.arguments.at(self.start + time / 86400.0)
        z *= ramp(time, self.duration)
        return np.array([z[0].real, z[1].real, z[1].imag, z[2].real, z[2].imag]) @ self.fields


def fields(lon, lat) -> np.ndarray:
    """Return the five fields of the species, (5, n), at lon, lat, (n,) each, degrees. Not collective."""
    lon, lat = DEGREE * np.asarray(lon, dtype=float), DEGREE * np.asarray(lat, dtype=float)
    diurnal, semidiurnal = np.sin(2.0 * lat), np.cos(lat) ** 2
    return np.array(
        [
            0.5 - 1.5 * np.sin(lat) ** 2,
            diurnal * np.cos(lon),
            -diurnal * np.sin(lon),
            semidiurnal * np.cos(2.0 * lon),
            -semidiurnal * np.sin(2.0 * lon),
        ]
    )
