"""What a stepper is, and what it sees.

A step is a sequence of stages. A stage works on one subdomain (a `Patch`) and returns, on the solve part of the patch,
the normal velocity at the end of the step and the transport through each edge, averaged over the step. Between stages the
caller makes the owners' values known everywhere and updates the level from them,

    eta = eta^n - dt div(transport),

so that what leaves one face enters another whatever the subdomains disagree about. A stepper knows no neighbour, no rank,
no file and no clock. One domain is one patch that has no neighbours.

Guidelines for a new stepper:
1. it is a frozen dataclass of its settings; it holds no state of a run;
2. `stages` exchanges a step; `order` is the claimed order, tested by the contract test;
3. what a later stage needs from an earlier one goes into `work`, a dict per patch, emptied before each step;
4. `repeat` redoes the last stage with new values beyond the solve part (a Schwarz sweep); it must leave `work` reusable;
5. failures of an action are values: `StageResult.reason` is the sentence that will be shown.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Protocol

import numpy as np


@dataclass
class State:
    """Level and current on all faces and edges of a (restricted) mesh.

    eta   (nf,) level above the datum, m; total depth h = mesh.depth + eta
    u     (ne,) velocity along the edge normal, m s-1; zero on coast edges
    """

    eta: np.ndarray
    u: np.ndarray

    def copy(self) -> "State":
        return State(self.eta.copy(), self.u.copy())


@dataclass
class StageResult:
    """Outcome of one stage on the solve part of a patch.

    u           (ms,) velocity at the end of the step
    transport   (ms,) time-mean transport per unit length of edge over the step, m2 s-1
    products    products of L spent
    error       estimated energy norm of the error of the action
    scale       energy norm of dt F(U^n): what a relative tolerance refers to
    reason      "" or why the stage failed
    """

    u: np.ndarray
    transport: np.ndarray
    products: int = 0
    error: float = 0.0
    scale: float = 0.0
    reason: str = ""


class Patch(Protocol):
    """One subdomain as a stepper sees it.

    Its mesh holds the solve faces first, its solve edges (both faces are solve faces) first, then what the rates need
    beyond. Vectors of the solve part are (eta of solve faces, u of solve edges), length mf + ms. `energy_weights` are the
    square roots of the energy weights at rest, (mf + ms,).
    """

    mf: int
    ms: int
    energy_weights: np.ndarray

    def divergence(self, transport: np.ndarray) -> np.ndarray:
        """Return the divergence (nf,), m s-1, of a transport on all edges held (ne,), m2 s-1."""

    def settled(self, eta: np.ndarray, time: float) -> np.ndarray:
        """Return the level (nf,), m, with what is given from outside at `time` (s) put in its place."""

    def rates(self, state: State, time: float) -> np.ndarray:
        """Return dU/dt on the solve part, (mf + ms,)."""

    def transport(self, state: State) -> np.ndarray:
        """Return h_e u on the solve edges, (ms,), m2 s-1."""

    def solve_part(self, state: State) -> np.ndarray:
        """Return (eta, u) of the solve part, (mf + ms,)."""

    def linear_operator(self, kind: str, state: State, time: float):
        """Return the operator of the solve part, "wave" or "jacobian", about `state`.

        It satisfies exponential.contract.Operator and adds `apply(x)` = L x and `transport(x)`, (ms,): the change of
        h_e u that goes with the change x, so that the level rows of L x are -div transport(x).
        """


def beyond(patch: Patch, inside: State, outside: State) -> State:
    """Return `inside` on the solve part and `outside` beyond it. Not collective."""
    mixed = outside.copy()
    mixed.eta[: patch.mf] = inside.eta[: patch.mf]
    mixed.u[: patch.ms] = inside.u[: patch.ms]
    return mixed


class Stepper(Protocol):
    """Guidelines above. `indicates`: the change by the last stage is of the size of the step's error in time."""

    stages: int
    order: int
    indicates: bool

    def stage(
        self, index: int, patch: Patch, work: dict, start: State, latest: State, time: float, step: float, scale: float
    ) -> StageResult:
        """Do stage `index` (0-based). `start` is U^n, `latest` the exchanged result of the stage before."""

    def repeat(
        self, patch: Patch, work: dict, start: State, latest: State, time: float, step: float, scale: float
    ) -> StageResult:
        """Redo the last stage with the values of `latest` beyond the solve part."""
