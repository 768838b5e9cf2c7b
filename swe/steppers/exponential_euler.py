"""The stage that exponential steppers begin with: one phi_1 from the present state, in flux form.

    U*    = U + dt phi_1(dt L) F(U)
    Fbar* = h u + dt P( phi_2(dt L) F(U) )

P(dU) is the transport of a small change, so that the level rows of L are -div P (method.md, section 7). It is a step of first
order by itself, of second order when L is the Jacobian (Hochbruck & Ostermann 2010, Acta Numerica 19, 209, section 2.4).
"""

from __future__ import annotations

from typing import Protocol

import numpy as np

from swe.exponential.action import phi_action
from swe.exponential.contract import fitting
from swe.steppers.contract import Patch, StageResult, State


class Settings(Protocol):
    """method: of phi_action; tolerance: of one action over the energy norm of dt F, relative; largest: basis or degree."""

    method: str
    tolerance: float
    largest: int


def first_stage(
    settings: Settings, patch: Patch, work: dict, start: State, rates: np.ndarray, operator, step: float, scale: float
) -> StageResult:
    """Do the stage and leave operator, rates, allowed, u and transport in `work`. Not collective."""
    own = step * float(np.linalg.norm(operator.weights * rates))
    allowed = settings.tolerance * max(scale, own)
    action = phi_action(operator, rates, step, (1, 2), allowed, fitting(operator, settings.method), settings.largest)
    u = start.u[: patch.ms] + step * action.values[0][patch.mf :]
    transport = patch.transport(start) + step * operator.transport(action.values[1])
    work.update(operator=operator, rates=rates, allowed=allowed, u=u, transport=transport)
    return StageResult(u, transport, action.products, action.error, own, action.reason)


def second_action(settings: Settings, work: dict, vector: np.ndarray, step: float):
    """Return the action of phi_2 and phi_3 on a later vector, to the tolerance of the first stage. Not collective.

    From water at rest whose forcing begins within the step there is no dt F yet that a tolerance could refer to; then it
    refers to the vector itself.
    """
    operator = work["operator"]
    allowed = max(work["allowed"], settings.tolerance * step * float(np.linalg.norm(operator.weights * vector)))
    return phi_action(operator, vector, step, (2, 3), allowed, fitting(operator, settings.method), settings.largest)
