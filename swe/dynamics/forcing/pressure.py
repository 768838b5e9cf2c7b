"""Air pressure as a head.

    du/dt = ... - grad Phi,     Phi = (p_a - p_r) / rho

p_a air pressure on the faces, Pa; p_r one reference, Pa, that drives nothing inside. Water whose level is the inverse barometer
of the pressure,

    eta = -(p_a - p_r) / (rho g)        about 1 cm for each hPa

is at rest: g eta + Phi = 0. That level belongs on open boundaries beside the tide, if the level there is known without weather;
p_r is then the pressure under which the sea beyond has the level 0, usually its mean over years. A closed basin takes no notice
of p_r.
"""

from __future__ import annotations

from collections.abc import Callable

import numpy as np

PressureAt = Callable[[float], np.ndarray]
"""The air pressure on the faces at a model time, s: one component, (1, nf), Pa."""


class AirPressure:
    """The head of an air pressure that changes.

    pressure   on the faces of one mesh; density of the water, kg m-3; reference p_r, Pa
    """

    def __init__(self, pressure: PressureAt, density: float, reference: float):
        self._pressure, self._density, self._reference = pressure, density, reference
        self._last: tuple[float, np.ndarray] | None = None  # the end of a step is the beginning of the next

    def head(self, time: float) -> np.ndarray:
        """Return Phi, (nf,), m2 s-2; callers leave it alone. Not collective."""
        if self._last is None or self._last[0] != time:
            self._last = time, (self._pressure(time)[0] - self._reference) / self._density
        return self._last[1]

    def inverse_barometer(self, time: float, gravity: float) -> np.ndarray:
        """Return the level, (nf,), m, that is at rest under the pressure. Not collective."""
        return -self.head(time) / gravity
