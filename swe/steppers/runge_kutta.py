"""The classical Runge-Kutta method of order 4 (Kutta 1901), in flux form, for comparison.

    k_1 = F(U^n), k_2 = F(U^n + dt/2 k_1), k_3 = F(U^n + dt/2 k_2), k_4 = F(U^n + dt k_3)
    U^n+1 = U^n + dt/6 (k_1 + 2 k_2 + 2 k_3 + k_4)

The transports are combined with the same weights, so the level follows from them. Stable for about dt <= 2 sqrt(2) / rho
with rho the spectral radius of the wave operator.
"""

from __future__ import annotations

from dataclasses import dataclass

from swe.steppers.contract import Patch, StageResult, State

FRACTION = (0.5, 0.5, 1.0)
"""Part of the step at the end of stages 1 to 3."""

WEIGHT = (1.0 / 6.0, 1.0 / 3.0, 1.0 / 3.0, 1.0 / 6.0)
NODE = (0.0, 0.5, 0.5, 1.0)


@dataclass(frozen=True)
class RungeKutta4:
    """Four evaluations of the rates and four exchanges a step."""

    stages: int = 4
    order: int = 4
    indicates: bool = False

    def stage(
        self, index: int, patch: Patch, work: dict, start: State, latest: State, time: float, step: float, scale: float
    ) -> StageResult:
        rates_u = patch.rates(latest, time + NODE[index] * step)[patch.mf :]
        transport = patch.transport(latest)
        sum_u = work["sum_u"] = work.get("sum_u", 0.0) + WEIGHT[index] * rates_u
        sum_transport = work["sum_transport"] = work.get("sum_transport", 0.0) + WEIGHT[index] * transport
        base = start.u[: patch.ms]
        if index == 3:
            return StageResult(base + step * sum_u, sum_transport)
        return StageResult(base + step * FRACTION[index] * rates_u, FRACTION[index] * transport)

    def repeat(
        self, patch: Patch, work: dict, start: State, latest: State, time: float, step: float, scale: float
    ) -> StageResult:
        """Return the last result: an explicit step depends on no value that a repeat could improve."""
        return StageResult(start.u[: patch.ms] + step * work["sum_u"], work["sum_transport"])
