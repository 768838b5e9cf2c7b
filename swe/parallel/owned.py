"""The same equations as one distributed system of owned unknowns, for integrators that know nothing of subdomains.

Vector of a rank: for each local subdomain in turn, eta of its owned faces, then u of its owned edges. Its rates are those
of the undivided mesh, because each evaluation first exchanges eta and u with a halo as wide as the stencil.
"""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from swe.parallel.halo import Halo
from swe.parallel.partition import block, rank_of
from swe.parallel.schwarz import Basin
from swe.steppers.contract import State


class OwnedSystem:
    """Packs, unpacks and evaluates owned unknowns of a basin. Made collectively.

    energy   (n,) energy weights (not roots) of the owned unknowns, so that errors can be controlled in the energy norm
    """

    def __init__(self, basin: Basin):
        self.basin, self.comm = basin, basin.comm
        local = {part.index: position for position, part in enumerate(basin.parts)}
        assert sorted(local) == list(block(self.comm.rank, basin.count, self.comm.size))

        def rank(index: int) -> int:
            return rank_of(index, basin.count, self.comm.size)

        parts = basin.parts
        self._faces = Halo(self.comm, local, [p.take_faces for p in parts], [p.give_faces for p in parts], rank, fields=1)
        self._edges = Halo(self.comm, local, [p.take for p in parts], [p.give for p in parts], rank, fields=1)
        self.evaluations = 0
        self.energy = self.pack_solve([patch.energy_weights**2 for patch in basin.patches])

    def pack(self, states: Sequence[State]) -> np.ndarray:
        """Return the owned unknowns of `states`, (n,). Not collective."""
        pieces = []
        for part, state in zip(self.basin.parts, states, strict=True):
            pieces += [state.eta[: part.n_owned], state.u[part.owned_edges]]
        return np.concatenate(pieces)

    def pack_solve(self, vectors: Sequence[np.ndarray]) -> np.ndarray:
        """Return the owned part of vectors (eta, u) of the solve parts, (n,). Not collective."""
        pieces = []
        for part, vector in zip(self.basin.parts, vectors, strict=True):
            pieces += [vector[: part.n_owned], vector[part.mf + part.owned_edges]]
        return np.concatenate(pieces)

    def unpack(self, vector: np.ndarray) -> list[State]:
        """Return full states with halos from owned unknowns. Collective."""
        states, begin = [], 0
        for part in self.basin.parts:
            state = State(np.zeros(part.mesh.n_faces), np.zeros(part.mesh.n_edges))
            middle = begin + part.n_owned
            end = middle + part.owned_edges.size
            state.eta[: part.n_owned] = vector[begin:middle]
            state.u[part.owned_edges] = vector[middle:end]
            states.append(state)
            begin = end
        self._faces.exchange([s.eta for s in states])
        self._edges.exchange([s.u for s in states])
        return states

    def rates(self, time: float, vector: np.ndarray) -> np.ndarray:
        """Return dU/dt of the owned unknowns, (n,). Collective."""
        self.evaluations += 1
        states = self.unpack(vector)
        return self.pack_solve([patch.rates(s, time) for patch, s in zip(self.basin.patches, states, strict=True)])
