"""What a record of weather is, and the simplest one: the same at all places.

Guidelines for a new record:
1. `times` are model times, s, rising, and hold only what the period of the run needs;
2. `at(index)` has SI units, wind by its components towards east and north on a sphere, along x and y on a plane, and NaN where
   the record has no value;
3. what it holds in memory does not grow with the number of times, but for `times` itself;
4. it may be asked for any index at any time.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Protocol

import numpy as np
from scipy import sparse


class Record(Protocol):
    """times (n,) s; name: where it comes from, for messages."""

    name: str
    times: np.ndarray

    def at(self, index: int) -> np.ndarray:
        """Return the values of one time, (k, m): k quantities at the m places of the record. Not collective."""

    def weights(self, points: np.ndarray) -> sparse.csr_array:
        """Return the weights, (n, m), that carry values to points (n, 2) in input coordinates. Not collective."""

    def date(self, index: int) -> str:
        """Return the date of one time for people. Not collective."""


@dataclass(frozen=True, eq=False)
class Uniform:
    """A record that is the same at all places: of one station, or one value for ever.

    times (n,) s; values (n, k); dates (n,) for people
    """

    name: str
    times: np.ndarray
    values: np.ndarray
    dates: tuple[str, ...]

    @classmethod
    def constant(cls, name: str, *values: float) -> "Uniform":
        """Return a record of one time, which holds for ever. Not collective."""
        return cls(name, np.zeros(1), np.array([values], dtype=float), ("all times",))

    def at(self, index: int) -> np.ndarray:
        return self.values[index][:, None]

    def weights(self, points: np.ndarray) -> sparse.csr_array:
        return sparse.csr_array(np.ones((len(points), 1)))

    def date(self, index: int) -> str:
        return self.dates[index]
