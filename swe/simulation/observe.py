"""What a run watches at every step: stations, and the extremes of every face. Each rank watches what it owns."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from mpi4py import MPI
from scipy import sparse

from swe.operators import reconstruction
from swe.parallel.subdomain import Subdomain
from swe.steppers.contract import State


class Currents:
    """Face-centred velocity of the owned faces, east and north (sphere) or x and y (plane), of every local subdomain."""

    def __init__(self, parts: Sequence[Subdomain]):
        self._rows = []
        for part in parts:
            first, second = reconstruction(part.mesh)
            self._rows.append(sparse.vstack([first[: part.n_owned], second[: part.n_owned]], format="csr"))

    def __call__(self, states: Sequence[State]) -> list[np.ndarray]:
        """Return (2, n_owned) for each subdomain, m s-1. Not collective."""
        return [(rows @ state.u).reshape(2, -1) for rows, state in zip(self._rows, states, strict=True)]


class Extremes:
    """Highest and lowest level and strongest current of every owned face, with the times, over all steps so far.

    `values` holds one (6, n_owned) array per subdomain, rows named by NAMES; times in s since the begin of the case.
    """

    NAMES = ("highest", "highest_time", "lowest", "lowest_time", "strongest", "strongest_time")

    def __init__(self, parts: Sequence[Subdomain]):
        start = np.array([-np.inf, 0.0, np.inf, 0.0, -np.inf, 0.0])
        self.values = [np.tile(start[:, None], (1, part.n_owned)) for part in parts]

    def see(self, time: float, states: Sequence[State], currents: Sequence[np.ndarray]) -> None:
        """Take note of the states at `time`. Not collective."""
        for kept, state, current in zip(self.values, states, currents, strict=True):
            eta = state.eta[: kept.shape[1]]
            speed = np.hypot(current[0], current[1])
            for row, value, better in ((0, eta, eta > kept[0]), (2, eta, eta < kept[2]), (4, speed, speed > kept[4])):
                np.copyto(kept[row], value, where=better)
                kept[row + 1][better] = time


class Stations:
    """Level and current at the faces of the stations, gathered on rank 0 when asked for.

    faces   (n,) whole-mesh number of each station's face
    """

    def __init__(self, comm: MPI.Comm, parts: Sequence[Subdomain], faces: np.ndarray):
        self.comm, self.n = comm, len(faces)
        self._here = []
        for position, part in enumerate(parts):
            owned = {int(face): local for local, face in enumerate(part.mesh.face_id[: part.n_owned])}
            self._here += [(number, position, owned[int(face)]) for number, face in enumerate(faces) if int(face) in owned]
        self._times: list[float] = []
        self._rows: list[list[tuple[float, float, float]]] = []

    @property
    def waiting(self) -> int:
        """Number of samples not yet collected; the same on every rank."""
        return len(self._times)

    def see(self, time: float, states: Sequence[State], currents: Sequence[np.ndarray]) -> None:
        """Keep one sample of the stations in this rank's faces. Not collective."""
        self._times.append(time)
        self._rows.append([(states[p].eta[f], currents[p][0, f], currents[p][1, f]) for _, p, f in self._here])

    def collect(self) -> tuple[np.ndarray, np.ndarray] | None:
        """Return times (k,) and samples (k, n, 3), level, east, north, since the last call on rank 0; else None. Collective."""
        mine = ([number for number, _, _ in self._here], np.array(self._rows).reshape(len(self._times), len(self._here), 3))
        times = np.array(self._times)
        self._times, self._rows = [], []
        everyone = self.comm.gather(mine, root=0)
        if self.comm.rank != 0:
            return None
        samples = np.full((times.size, self.n, 3), np.nan)
        for numbers, rows in everyone:
            samples[:, numbers] = rows
        return times, samples
