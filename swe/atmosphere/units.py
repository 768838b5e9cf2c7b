"""Units of wind and air pressure in files, and what values are believed.

Wind in m s-1, pressure in Pa inside. The knot is 1852 m an hour (SI brochure, 8th edition, 2006, table 8).
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from swe.errors import InputError


@dataclass(frozen=True, eq=False)
class Kind:
    """A kind of quantity.

    name      its word in messages
    unit      unit inside
    factors   spelling of a unit -> factor to the unit inside
    allowed   the units for people
    least, most   values beyond which the unit, or the file, must be wrong
    """

    name: str
    unit: str
    factors: dict[str, float]
    allowed: str
    least: float
    most: float

    def factor(self, place: str, unit: str) -> float:
        """Return the factor of a unit; `place` says where it stands. Not collective. Raises InputError."""
        factor = self.factors.get(" ".join(unit.split()))
        if factor is None:
            found = f"unit {unit!r}" if unit.strip() else "no unit"
            raise InputError(f"{place}: {found} of {self.name}; allowed are {self.allowed}")
        return factor

    def believe(self, place: str, values: np.ndarray) -> None:
        """Refuse finite values that cannot be of this kind. Not collective. Raises InputError."""
        strange = values[(values < self.least) | (values > self.most)]
        if strange.size:
            raise InputError(
                f"{place}: {self.name} of {strange[0]:.6g} {self.unit}; believed are {self.least:g} to {self.most:g}: "
                "check the unit"
            )


def _spelt(**spellings: tuple[float, str]) -> dict[str, float]:
    return {word.strip(): factor for factor, words in spellings.values() for word in words.split(",")}


WIND = Kind(
    "wind",
    "m s-1",
    _spelt(
        metres=(1.0, "m s-1, m/s, m s^-1, m s**-1, m.s-1, meter second-1, metre second-1, meters per second, metres per second"),
        kilometres=(1 / 3.6, "km h-1, km/h, km hr-1, km/hr, km h^-1, km h**-1, km hour-1"),
        knots=(1852 / 3600, "kn, knot, knots, kt, kts"),
    ),
    "m s-1, km/h, kn",
    -150.0,
    150.0,
)
PRESSURE = Kind(
    "air pressure",
    "Pa",
    _spelt(
        pascal=(1.0, "Pa, pascal, pascals, N m-2"),
        hecto=(100.0, "hPa, mbar, mb, millibar, millibars, hectopascal, hectopascals"),
        kilo=(1000.0, "kPa, kilopascal, kilopascals"),
    ),
    "Pa, hPa, mbar, kPa",
    80e3,
    110e3,
)
"""Lowest air pressure at sea level ever estimated 870 hPa, highest 1085 hPa; common knowledge."""
