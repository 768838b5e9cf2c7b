"""The tide from harmonic constants: what an analysis of records gave, at any other time.

    level(t) = ramp(t) sum_k f_k H_k cos( V_k(t) + u_k - g_k )

H amplitude in m; g phase lag in degrees on Greenwich, for times in UTC. Constants of currents serve as well; the answer then has
their unit. Mean levels are not in it.
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
from swe.tide.constituents import Constituent, constituents
from swe.tide.ramp import ramp


@dataclass(frozen=True, eq=False)
class Prediction:
    """The tide at n points.

    arguments   of nc constituents
    constants   (nc, n) H e^{-i g}, m
    start       model time 0, days of UTC since 2000-01-01 12:00
    duration    of the ramp, s
    """

    arguments: Arguments
    constants: np.ndarray
    start: float
    duration: float

    @classmethod
    def of(cls, names: Iterable[str], amplitude, lag, start: datetime, duration: float) -> "Prediction":
        """Return the tide with amplitude (nc, n), m, and lag (nc, n), degrees on Greenwich. Not collective.

        start: model time 0 (UTC); duration: of the ramp from there, s, 0 for none.
        Raises InputError for an unknown constituent, shapes that do not fit, a negative amplitude, values that are not finite.
        """
        chosen = constituents(names)
        amplitude, lag = np.asarray(amplitude, dtype=float), np.asarray(lag, dtype=float)
        _check(chosen, amplitude, lag)
        constants = amplitude * np.exp(-1j * DEGREE * lag)
        return cls(Arguments.of(chosen), constants, days_since_2000(start), float(duration))

    def level(self, time) -> np.ndarray:
        """Return the level, m, at model time `time` (s): (n,), or (nt, n) for (nt,) times. Not collective."""
        time = np.asarray(time, dtype=float)
        stand = ramp(time, self.duration) * self.arguments.at(self.start + time / 86400.0)
        return stand.real.T @ self.constants.real - stand.imag.T @ self.constants.imag


def _check(chosen: tuple[Constituent, ...], amplitude: np.ndarray, lag: np.ndarray) -> None:
    if amplitude.ndim != 2 or amplitude.shape != lag.shape or len(amplitude) != len(chosen):
        raise InputError(
            f"harmonic constants: amplitudes {amplitude.shape} and lags {lag.shape} for {len(chosen)} constituents; "
            "both must be (constituents, points)"
        )
    wrong = ~(np.isfinite(amplitude) & (amplitude >= 0.0) & np.isfinite(lag))
    if wrong.any():
        k, point = np.argwhere(wrong)[0]
        raise InputError(
            f"harmonic constants: {chosen[k].name} at point {point} has amplitude {amplitude[k, point]:g} m and lag "
            f"{lag[k, point]:g} degrees; give an amplitude from 0 up and a finite lag"
        )
