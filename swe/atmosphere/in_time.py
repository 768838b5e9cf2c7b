"""Values of a record at points and model times: linear in time between the two times next to it.

    v(t) = (1 - s) W a_i + s W a_{i+1},     s = (t - t_i) / (t_{i+1} - t_i)

W the weights of the points, a_i the record at t_i. A record of one time holds for ever. Of W a the KEPT latest are held, so
that the calls of a step may go to and fro across a time of the record without reading anything twice.
"""

from __future__ import annotations

import numpy as np

from swe.atmosphere.record import Record
from swe.errors import InputError

KEPT = 3
"""Times held: the two in use, and the one before or behind them."""

SLACK = 1e-3
"""Seconds by which a model time may miss the record by round-off."""


class InTime:
    """A record at points (n, 2) in input coordinates; call it with a model time, s, for (k, n). Not collective.

    Raises InputError, from a call, where the record has no value or does not reach.
    """

    def __init__(self, record: Record, points: np.ndarray):
        self.record, self._weights = record, record.weights(points)
        self._held: dict[int, np.ndarray] = {}

    def __call__(self, time: float) -> np.ndarray:
        times = self.record.times
        if times.size == 1:
            return self._at(0)
        if not times[0] - SLACK <= time <= times[-1] + SLACK:
            span = f"{self.record.date(0)} to {self.record.date(times.size - 1)}"
            raise InputError(f"{self.record.name}: asked for model time {time:.6g} s, has {span}; give a longer record")
        index = min(max(int(np.searchsorted(times, time, side="right")) - 1, 0), times.size - 2)
        share = min(max((time - times[index]) / (times[index + 1] - times[index]), 0.0), 1.0)
        return (1.0 - share) * self._at(index) + share * self._at(index + 1)

    def _at(self, index: int) -> np.ndarray:
        if index not in self._held:
            values = np.stack([self._weights @ row for row in self.record.at(index)])
            refuse_missing(self.record, index, values)
            self._held[index] = values
            while len(self._held) > KEPT:
                del self._held[max(self._held, key=lambda other: abs(other - index))]
        return self._held[index]


def refuse_missing(record: Record, index: int, values: np.ndarray) -> None:
    """Raise InputError where values of one time, (k, n), at the points of the water are missing. Not collective."""
    missing = np.isnan(values).any(axis=0).sum()
    if missing:
        raise InputError(
            f"{record.name}: no value at {record.date(index)} for {missing} of {values.shape[1]} points of the water; "
            "fill the record in space and time before the run"
        )


def refuse_gaps(record: Record, points: np.ndarray) -> None:
    """Read all of a record once, and refuse it where any value at the points is missing. Not collective.

    Raises InputError with the number of such times, the first and the last.
    """
    weights = record.weights(points)
    bad = [index for index in range(record.times.size) if any(np.isnan(weights @ row).any() for row in record.at(index))]
    if bad:
        raise InputError(
            f"{record.name}: values missing in the water at {len(bad)} of {record.times.size} times, "
            f"first {record.date(bad[0])}, last {record.date(bad[-1])}; fill the record in space and time before the run"
        )
