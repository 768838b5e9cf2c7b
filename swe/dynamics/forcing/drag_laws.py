"""Stress of the wind on water, and laws of its drag coefficient.

    tau = rho_a C_d(U) U w,        w wind at 10 m height, m s-1;  U = |w|;  tau in Pa

    constant            C_d given by the user
    large-pond-1981     10^3 C_d = max(1.2, 0.49 + 0.065 U)     4 to 25 m s-1     Large & Pond, J. Phys. Oceanogr. 11, 324
    garratt-1977        10^3 C_d = 0.75 + 0.067 U               4 to 21 m s-1     Garratt, Mon. Wea. Rev. 105, 915
    wu-1982             10^3 C_d = 0.8 + 0.065 U                to 40 m s-1       Wu, J. Geophys. Res. 87, 9704 (from memory)
    smith-1980          10^3 C_d = 0.61 + 0.063 U               6 to 22 m s-1     Smith, J. Phys. Oceanogr. 10, 709 (from memory)
    smith-1988          C_d = ( kappa / ln(10 m / z) )^2        4 to 25 m s-1     Smith, J. Geophys. Res. 93, 15467 (constants
                        z = alpha s^2/g + 0.11 nu/s,  s = U C_d^(1/2)                  and range from memory); neutral air at 10 C

Large & Pond print 1.2 below and 0.49 + 0.065 U from 11 m s-1 on, with a step of 0.4 % there; the larger of the two has none
and differs from them by less than that, between 10.9 and 11 m s-1 only. Outside its range a law is carried on by its formula.
Laws differ by 20 % in stress at 10 m s-1, and none is made for hurricanes: observed coefficients level off near 2.5e-3 beyond
some 30 m s-1 (Powell, Vickery & Reinhold 2003, Nature 422, 279, from memory), which is what a cap is for.

w is the wind over the ground: the current, some per cent of it, is not subtracted.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property
from typing import Protocol

import numpy as np

from swe.constants import GRAVITY
from swe.errors import InputError

VON_KARMAN = 0.40
CHARNOCK = 0.011
"""alpha of Smith 1988 for the open sea (from memory)."""

AIR_VISCOSITY = 1.42e-5
"""nu of air at 10 C, m2 s-1; tables of air, common practice."""

SPEEDS = np.linspace(0.0, 100.0, 1001)
"""Wind speeds, m s-1, of the table of the implicit law; linear between them errs by less than 1e-4 of C_d above 2 m s-1."""


class DragLaw(Protocol):
    """lowest, highest: the wind speeds, m s-1, between which the law was measured. source: where it was published."""

    lowest: float
    highest: float
    source: str

    def coefficient(self, speed: np.ndarray) -> np.ndarray:
        """Return C_d, dimensionless, of wind speeds (n,), m s-1. Not collective."""


@dataclass(frozen=True)
class Linear:
    """C_d = max(least, at_rest + slope U), slope in s m-1."""

    least: float
    at_rest: float
    slope: float
    lowest: float
    highest: float
    source: str

    def coefficient(self, speed: np.ndarray) -> np.ndarray:
        return np.maximum(self.least, self.at_rest + self.slope * speed)


@dataclass(frozen=True)
class Roughness:
    """C_d of the roughness length of waves and of smooth flow, looked up in a table."""

    lowest: float
    highest: float
    source: str

    def coefficient(self, speed: np.ndarray) -> np.ndarray:
        return np.interp(speed, SPEEDS, self._table)

    @cached_property
    def _table(self) -> np.ndarray:
        speed = np.maximum(SPEEDS, SPEEDS[1])  # there is no roughness length without wind
        friction = 0.03 * speed
        for _ in range(100):  # contracts by a factor near 0.2
            length = CHARNOCK * friction**2 / GRAVITY + 0.11 * AIR_VISCOSITY / friction
            friction = VON_KARMAN * speed / np.log(10.0 / length)
        return (friction / speed) ** 2


@dataclass(frozen=True)
class Capped:
    """A law whose coefficient stays at `largest` where it would exceed it."""

    law: DragLaw
    largest: float

    @property
    def lowest(self) -> float:
        return self.law.lowest

    @property
    def highest(self) -> float:
        return self.law.highest

    @property
    def source(self) -> str:
        return f"{self.law.source}, at most {self.largest:g}"

    def coefficient(self, speed: np.ndarray) -> np.ndarray:
        return np.minimum(self.largest, self.law.coefficient(speed))


LAWS: dict[str, DragLaw] = {
    "large-pond-1981": Linear(1.2e-3, 0.49e-3, 0.065e-3, 4.0, 25.0, "Large & Pond 1981, J. Phys. Oceanogr. 11, 324"),
    "garratt-1977": Linear(0.0, 0.75e-3, 0.067e-3, 4.0, 21.0, "Garratt 1977, Mon. Wea. Rev. 105, 915"),
    "wu-1982": Linear(0.0, 0.8e-3, 0.065e-3, 0.0, 40.0, "Wu 1982, J. Geophys. Res. 87, 9704"),
    "smith-1980": Linear(0.0, 0.61e-3, 0.063e-3, 6.0, 22.0, "Smith 1980, J. Phys. Oceanogr. 10, 709"),
    "smith-1988": Roughness(4.0, 25.0, "Smith 1988, J. Geophys. Res. 93, 15467"),
}
"""Published laws by name."""


def constant(coefficient: float) -> DragLaw:
    """Return the law of one coefficient, >= 0, at all wind speeds. Not collective."""
    return Linear(coefficient, coefficient, 0.0, 0.0, np.inf, "one coefficient, given")


def drag_law(name: str, cap: float | None = None) -> DragLaw:
    """Return a published law by its name; `cap` the largest coefficient, > 0. Not collective. Raises InputError."""
    if name not in LAWS:
        raise InputError(f"wind drag law {name!r}: unknown; allowed are {', '.join(LAWS)}, or give a coefficient")
    return LAWS[name] if cap is None else Capped(LAWS[name], cap)


def surface_stress(law: DragLaw, air_density: float, wind: np.ndarray) -> np.ndarray:
    """Return the stress, (2, n), Pa, of a wind (2, n), m s-1, by components; air density in kg m-3. Not collective."""
    speed = np.hypot(wind[0], wind[1])
    return air_density * law.coefficient(speed) * speed * wind
