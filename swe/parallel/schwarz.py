"""One step of the localised method: every subdomain does its stage, the owners' values go round, levels follow.

    for each stage:   each subdomain: stage -> (u, Fbar) on its solve edges
                      exchange u and Fbar, the owners' values replace all others
                      eta = eta^n - dt div Fbar on every face held
    mismatch:         largest difference at the rim between a subdomain's own u and its owner's, as a level: |du| sqrt(D/g)
    repeat:           the last stage again with the exchanged values beyond, until the mismatch is below tolerance

The exchange is one message per neighbouring rank and stage; one reduction closes the step. It carries the mismatch, the
failure flag, the stop request and the extremes, so that all ranks decide alike. An overlapping Schwarz method in the sense
of Schwarz (1870) and of waveform relaxation (Gander 2008, Electron. Trans. Numer. Anal. 31, 228) with restricted
transmission: only owners' values are ever used by others.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from mpi4py import MPI

from swe.errors import NumericalFailure
from swe.mesh.topology import open_edges
from swe.parallel.halo import Halo
from swe.parallel.partition import block, rank_of
from swe.parallel.phases import Phases
from swe.parallel.subdomain import Subdomain
from swe.steppers.contract import Patch, StageResult, State, Stepper


@dataclass(frozen=True)
class Agreement:
    """When subdomains agree well enough.

    tolerance   allowed mismatch, m (level-equivalent)
    repeats     repeats allowed before the step is given up
    """

    tolerance: float
    repeats: int


@dataclass(frozen=True)
class StepReport:
    """What one step found; the same on every rank.

    mismatch    of the accepted values, m; repeats spent
    scale       largest energy norm of dt F over the subdomains
    change      largest |eta^{n+1} - eta of the stage before|, m: the free time error indicator; NaN when the stepper has none
    error       largest estimated error of an action, energy norm
    speed, highest, lowest, thinnest   largest |u|, m s-1; largest and smallest level, m; smallest total depth, m
    stop        some rank was asked to stop
    """

    mismatch: float
    repeats: int
    scale: float
    change: float
    error: float
    speed: float
    highest: float
    lowest: float
    thinnest: float
    stop: bool


class Basin:
    """The local subdomains of a rank, their states, and the step that ties them together. Made collectively.

    parts     subdomains of this rank; patches   their dynamics, in the same order; count   subdomains in all
    outflow   (local subdomains,) water that left through open boundaries so far, m3, summed by the owners of the edges
    """

    def __init__(self, comm: MPI.Comm, parts: Sequence[Subdomain], patches: Sequence[Patch], count: int, gravity: float):
        self.comm, self.parts, self.patches, self.count = comm, list(parts), list(patches), count
        local = {part.index: position for position, part in enumerate(self.parts)}
        if sorted(local) != list(block(comm.rank, count, comm.size)):
            raise ValueError(f"rank {comm.rank} holds subdomains {sorted(local)}, not its block")
        where = dict(rank_of=lambda index: rank_of(index, count, comm.size))
        self.halo = Halo(comm, local, [p.take for p in self.parts], [p.give for p in self.parts], fields=2, **where)
        self.states = [State(np.zeros(p.mesh.n_faces), np.zeros(p.mesh.n_edges)) for p in self.parts]
        self.phases = Phases()
        self.products = np.zeros(len(self.parts), dtype=np.int64)
        self.outflow = np.zeros(len(self.parts))
        self._open = [_owned_open_edges(part) for part in self.parts]
        self._rim_weight = [_level_per_speed(part, gravity) for part in self.parts]

    def settle(self, time: float) -> None:
        """Put what is given from outside at `time` (s) into the states. Not collective."""
        for patch, state in zip(self.patches, self.states, strict=True):
            state.eta = patch.settled(state.eta, time)

    def scale(self, time: float, step: float) -> float:
        """Return the largest energy norm of dt F over all subdomains, for the first step. Collective."""
        norms = [
            step * float(np.linalg.norm(patch.energy_weights * patch.rates(state, time)))
            for patch, state in zip(self.patches, self.states, strict=True)
        ]
        return self.comm.allreduce(max(norms, default=0.0), op=MPI.MAX)

    def advance(
        self, stepper: Stepper, agreement: Agreement, time: float, step: float, scale: float, stop: bool = False
    ) -> StepReport:
        """Take one step and replace the states. Collective.

        Raises NumericalFailure, on all ranks alike and with the states unchanged, when an action does not converge, a
        value is not finite, a face runs dry, or the mismatch stays above tolerance. The message says which; the caller
        adds the model time.
        """
        start = self.states
        latest, before = start, start
        work = [{} for _ in self.parts]
        first_scale = 0.0
        worst = 0.0
        reasons = []
        for index in range(stepper.stages):
            with self.phases("stages"):
                results = [
                    stepper.stage(index, patch, own, begun, now, time, step, scale)
                    for patch, own, begun, now in zip(self.patches, work, start, latest, strict=True)
                ]
            before, latest = latest, self._publish(start, results, time, step)
            first_scale = max([first_scale] + [result.scale for result in results])
            worst = max([worst] + [result.error for result in results])
            reasons += [result.reason for result in results if result.reason]
        report = self._close(stepper, results, before, latest, first_scale, worst, reasons, stop, 0)
        while report.mismatch > agreement.tolerance and report.repeats < agreement.repeats:
            with self.phases("stages"):
                results = [
                    stepper.repeat(patch, own, begun, now, time, step, scale)
                    for patch, own, begun, now in zip(self.patches, work, start, latest, strict=True)
                ]
            latest = self._publish(start, results, time, step)
            reasons += [result.reason for result in results if result.reason]
            report = self._close(stepper, results, before, latest, first_scale, worst, reasons, stop, report.repeats + 1)
        if report.mismatch > agreement.tolerance:
            raise NumericalFailure(
                f"the subdomains disagree by {report.mismatch:.3g} m after {report.repeats} repeats: allowed is "
                f"{agreement.tolerance:.3g} m; use a wider overlap, a shorter step, or allow more repeats"
            ).on_all_ranks()
        self.states = latest
        for number, (part, transport) in enumerate(zip(self.parts, self.transports, strict=True)):
            edges, _, _, sign = self._open[number]
            self.outflow[number] += step * math.fsum(sign * part.mesh.edge_length[edges] * transport[edges])
        return report

    def _publish(self, start: list[State], results: list[StageResult], time: float, step: float) -> list[State]:
        """Make the owners' u and transports known everywhere and update every level held."""
        us, transports = [], []
        for part, result in zip(self.parts, results, strict=True):
            u, transport = np.zeros(part.mesh.n_edges), np.zeros(part.mesh.n_edges)
            u[: part.ms], transport[: part.ms] = result.u, result.transport
            us.append(u)
            transports.append(transport)
        with self.phases("exchange"):
            self.halo.exchange(us, transports)
        self.products += [result.products for result in results]
        self.transports = transports
        return [
            State(patch.settled(begun.eta - step * patch.divergence(transport), time + step), u)
            for begun, patch, u, transport in zip(start, self.patches, us, transports, strict=True)
        ]

    def _close(self, stepper, results, before, latest, scale, worst, reasons, stop, repeats) -> StepReport:
        """One reduction: everything that the ranks must know alike at the end of a step."""
        local = np.full(10, -np.inf)
        local[0] = bool(reasons)
        local[1] = stop
        local[2] = max(
            [0.0]
            + [
                float(np.max(weight * np.abs(result.u[part.rim] - now.u[part.rim]), initial=0.0))
                for part, weight, result, now in zip(self.parts, self._rim_weight, results, latest, strict=True)
            ]
        )
        local[3], local[4] = scale, worst
        for part, then, now in zip(self.parts, before, latest, strict=True):
            eta, u = now.eta[: part.n_owned], now.u[: part.ms]
            thin = part.mesh.depth[: part.n_owned] + eta
            found = (
                np.max(np.abs(eta - then.eta[: part.n_owned])),
                np.max(np.abs(u), initial=0.0),
                eta.max(),
                -eta.min(),
                -thin.min(),
            )
            # NaN must win: fmax would hide it, and MPI.MAX may
            local[5:] = np.maximum(local[5:], np.where(np.isfinite(found), found, np.inf))
        values = np.empty_like(local)
        with self.phases("agreement"):
            self.comm.Allreduce(local, values, op=MPI.MAX)
        failed, stopped, mismatch, scale, worst, change, speed, highest, deepest, dry = (float(v) for v in values)
        if failed:
            raise NumericalFailure(self._first_reason(reasons)).on_all_ranks()
        if not np.all(np.isfinite(values[5:])):
            raise NumericalFailure(
                f"level or current is no longer a finite number ({self._place_of_bad(latest)}); use a shorter step"
            ).on_all_ranks()
        if -dry <= 0.0:
            raise NumericalFailure(
                f"a face ran dry ({self._place_of_dry(latest)}): total depth must stay above 0 m, because wetting and drying "
                "is not computed; raise the least depth, shorten the step, or reduce the forcing"
            ).on_all_ranks()
        change = change if stepper.indicates else np.nan
        return StepReport(mismatch, repeats, scale, change, worst, speed, highest, -deepest, -dry, bool(stopped))

    def _first_reason(self, reasons: list[str]) -> str:
        everything = self.comm.allgather(reasons[0] if reasons else "")
        return next(text for text in everything if text)

    def _place_of_bad(self, states: list[State]) -> str:
        return self._place(
            [np.where(np.isfinite(s.eta[: p.n_owned]), 1.0, -1.0) for p, s in zip(self.parts, states, strict=True)], states
        )

    def _place_of_dry(self, states: list[State]) -> str:
        return self._place(
            [p.mesh.depth[: p.n_owned] + s.eta[: p.n_owned] for p, s in zip(self.parts, states, strict=True)], states
        )

    def _place(self, values: list[np.ndarray], states: list[State]) -> str:
        """Name the face where `values` is smallest over all ranks. Collective."""
        best = (np.inf, "")
        for part, value, state in zip(self.parts, values, states, strict=True):
            face = int(np.argmin(value))
            best = min(best, (float(value[face]), _where(part, face, state)))
        return min(self.comm.allgather(best))[1]


def _where(part: Subdomain, face: int, state: State) -> str:
    x, y, z = part.mesh.face_xyz[face]
    if part.mesh.spherical:
        lon, lat = np.degrees(np.arctan2(y, x)), np.degrees(np.arctan2(z, np.hypot(x, y)))
        place = f"longitude {lon:.4f}, latitude {lat:.4f}"
    else:
        place = f"x {x:.0f} m, y {y:.0f} m"
    return (
        f"face {part.mesh.face_id[face]} at {place}, resting depth {part.mesh.depth[face]:.4g} m, level {state.eta[face]:.4g} m"
    )


def _owned_open_edges(part: Subdomain):
    edges, inner, outer, sign = open_edges(part.mesh)
    owned = np.isin(edges, part.owned_edges)
    return edges[owned], inner[owned], outer[owned], sign[owned]


def _level_per_speed(part: Subdomain, gravity: float) -> np.ndarray:
    depth = part.mesh.depth[part.mesh.edge_faces[part.rim]].mean(axis=1)
    return np.sqrt(np.maximum(depth, 0.0) / gravity)
