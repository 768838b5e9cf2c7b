"""One subdomain's dynamics as a stepper sees it: rates, transports and linear operators of its solve part.

The solve part is the first `mf` faces and the first `ms` edges of a restricted mesh (swe.steppers.contract.Patch).
"""

from __future__ import annotations

import numpy as np

from swe.dynamics.equations import Water
from swe.dynamics.jacobian import JacobianFactory
from swe.dynamics.wave import wave_operator
from swe.operators.divergence import divergence_alike


class WaterPatch:
    """The dynamics of one subdomain. Not collective.

    water      rates and transports on the restricted mesh
    mf, ms     faces and edges of the solve part
    rotation   keep rotation in the wave operator (else it stays in the remainder)
    refresh    linearise the wave operator about the current depth at every step instead of the resting depth
    friction   take bottom friction into the wave operator, linearised about the current at every step, instead of leaving it in
               the remainder, where it limits the step (`friction`)
    """

    def __init__(self, water: Water, mf: int, ms: int, rotation: bool, refresh: bool, friction: bool = False):
        self.water, self.mf, self.ms, self.refresh = water, mf, ms, refresh
        self._rubs = friction and water.friction is not None
        self._wave = wave_operator(water, mf, ms, rotation, friction=self._rubs)
        self._jacobian: JacobianFactory | None = None
        # Levels that several subdomains hold are updated by each of them: alike, so that a resumed run, which begins
        # with the owners' levels everywhere, repeats the run that went on, bit for bit.
        self._divergence = divergence_alike(water.mesh)
        self.energy_weights = self._wave.weights.copy()

    @property
    def radius(self) -> float:
        """Upper bound of the spectral radius of the wave operator at rest, s-1."""
        return self._wave.radius

    def divergence(self, transport: np.ndarray) -> np.ndarray:
        return self._divergence @ transport

    def settled(self, eta: np.ndarray, time: float) -> np.ndarray:
        return self.water.opening.settled(eta, time) if self.water.opening else eta

    def rates(self, state, time: float) -> np.ndarray:
        level, velocity = self.water.rates(state.eta, state.u, time)
        return np.concatenate([level[: self.mf], velocity[: self.ms]])

    def transport(self, state) -> np.ndarray:
        return self.water.transport(state.eta, state.u)[: self.ms]

    def solve_part(self, state) -> np.ndarray:
        return np.concatenate([state.eta[: self.mf], state.u[: self.ms]])

    def linear_operator(self, kind: str, state, time: float):
        if kind == "jacobian":
            if self._jacobian is None:
                self._jacobian = JacobianFactory(self.water, self.mf, self.ms)
            return self._jacobian.at(state.eta, state.u, time)
        if self.refresh:
            self._wave.refresh(state.eta)
        if self._rubs:
            self._wave.damp(self.water.friction_damping(state.eta, state.u)[: self.ms])
        return self._wave
