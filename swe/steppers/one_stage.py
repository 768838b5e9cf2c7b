"""Exponential Rosenbrock-Euler: one exponential of the current-state Jacobian per step, second order, in flux form.

With J = dF/dU at U^n and the transport of a small change P(dU) = h_e du + u (dh)_e (Hochbruck & Ostermann 2010, Acta
Numerica 19, 209, section 2.4; flux form: method.md, section 7):

    U^n+1 = U^n + dt phi_1(dt J) F(U^n)
    Fbar  = (h u)^n + dt P( phi_2(dt J) F(U^n) )

One exchange a step. A repeat adds what the motion of the values beyond the solve part changes, G = F with the new values
beyond minus F with the old ones, linear in time:

    U^n+1 += dt phi_2(dt J) G,      Fbar += dt P( phi_3(dt J) G )

(inside the solve part G has no transport of its own: it only touches the rim). The scheme is of second order for
autonomous rates; a forcing that depends on time is taken at the middle of the step.
"""

from __future__ import annotations

from dataclasses import dataclass

from swe.steppers.contract import Patch, StageResult, State, beyond
from swe.steppers.exponential_euler import first_stage, second_action


@dataclass(frozen=True)
class OneStage:
    """Settings of the one-stage step; fields as in `TwoStage`."""

    method: str
    tolerance: float
    largest: int
    stages: int = 1
    order: int = 2
    indicates: bool = False

    def stage(
        self, index: int, patch: Patch, work: dict, start: State, latest: State, time: float, step: float, scale: float
    ) -> StageResult:
        middle = time + 0.5 * step
        operator = patch.linear_operator("jacobian", start, middle)
        return first_stage(self, patch, work, start, patch.rates(start, middle), operator, step, scale)

    def repeat(
        self, patch: Patch, work: dict, start: State, latest: State, time: float, step: float, scale: float
    ) -> StageResult:
        operator = work["operator"]
        rim = patch.rates(beyond(patch, start, latest), time + 0.5 * step) - work["rates"]
        action = second_action(self, work, rim, step)
        u = work["u"] + step * action.values[0][patch.mf :]
        transport = work["transport"] + step * operator.transport(action.values[1])
        return StageResult(u, transport, action.products, action.error, 0.0, action.reason)
