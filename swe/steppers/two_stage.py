"""Two-stage exponential time differencing of second order, in flux form.

With the rates F(U) = L (U - U_ref) + R(U) and the transport of a small change, d(h u) = P(dU), so that the level rows of
L are -div P (Cox & Matthews 2002, J. Comput. Phys. 176, 430, scheme ETD2RK; flux form: method.md, section 7):

    stage 1   U*     = U^n + dt phi_1(dt L) F(U^n)
              Fbar*  = (h u)^n + dt P( phi_2(dt L) F(U^n) )
    stage 2   U^n+1  = U* + dt phi_2(dt L) dR,          dR = F(U*) - F(U^n) - L (U* - U^n)
              Fbar   = Fbar* + r / 2 + dt P( phi_3(dt L) dR ),    r = (h u)* - (h u)^n - P(U* - U^n)

Fbar is the time-mean transport: eta^n+1 = eta^n - dt div Fbar is U^n+1's level in exact arithmetic, and conserves
volume to round-off whatever the subdomains, the tolerance or the basis. Values beyond the solve part enter through F,
linear in time over the step.
"""

from __future__ import annotations

from dataclasses import dataclass

from swe.steppers.contract import Patch, StageResult, State, beyond
from swe.steppers.exponential_euler import first_stage, second_action


@dataclass(frozen=True)
class TwoStage:
    """Settings of the two-stage exponential step.

    operator    "wave" (reference state) or "jacobian" (current state)
    method      how phi_k(dt L) b is formed: "lanczos", "chebyshev" or "arnoldi"
    tolerance   allowed error of one action over the energy norm of dt F, relative
    largest     largest dimension of a basis, or degree
    """

    operator: str
    method: str
    tolerance: float
    largest: int
    stages: int = 2
    order: int = 2
    indicates: bool = True

    def stage(
        self, index: int, patch: Patch, work: dict, start: State, latest: State, time: float, step: float, scale: float
    ) -> StageResult:
        if index == 0:
            return self._predict(patch, work, start, time, step, scale)
        work["rates_of_prediction"] = patch.rates(latest, time + step)
        work["prediction"] = latest
        return self._correct(patch, work, start, latest, time, step)

    def repeat(
        self, patch: Patch, work: dict, start: State, latest: State, time: float, step: float, scale: float
    ) -> StageResult:
        mixed = beyond(patch, work["prediction"], latest)
        work["rates_of_prediction"] = patch.rates(mixed, time + step)
        return self._correct(patch, work, start, work["prediction"], time, step)

    def _predict(self, patch, work, start, time, step, scale) -> StageResult:
        operator = patch.linear_operator(self.operator, start, time)
        return first_stage(self, patch, work, start, patch.rates(start, time), operator, step, scale)

    def _correct(self, patch, work, start, prediction, time, step) -> StageResult:
        operator = work["operator"]
        change = patch.solve_part(prediction) - patch.solve_part(start)
        remainder = work["rates_of_prediction"] - work["rates"] - operator.apply(change)
        action = second_action(self, work, remainder, step)
        bend = patch.transport(prediction) - patch.transport(start) - operator.transport(change)
        u = work["u"] + step * action.values[0][patch.mf :]
        transport = work["transport"] + 0.5 * bend + step * operator.transport(action.values[1])
        return StageResult(u, transport, action.products + 1, action.error, 0.0, action.reason)
