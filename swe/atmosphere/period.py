"""The period of a run in dates, and how a record must cover it.

Model time is in seconds since the beginning, which is a date in UTC of the (proleptic) Gregorian calendar; leap seconds do not
exist. A record covers the period when it has a time at or before its beginning, one at or after its end, and no gap between:
no interval longer than GAP times the interval that is usual in the record.
"""

from __future__ import annotations

from dataclasses import dataclass
from datetime import datetime, timedelta

import numpy as np

from swe.errors import InputError

GAP = 1.5
"""An interval longer than this many usual ones (their median) is a gap; arbitrary, below two."""


@dataclass(frozen=True)
class Period:
    """begin: date (UTC, aware) of model time 0; length: s."""

    begin: datetime
    length: float

    def seconds(self, date: datetime) -> float:
        """Return the model time, s, of an aware date. Not collective."""
        return (date - self.begin) / timedelta(seconds=1)

    def date(self, seconds: float) -> str:
        """Return the date of a model time for people. Not collective."""
        try:
            return _text(self.begin + timedelta(seconds=float(seconds)))
        except OverflowError:
            return f"{seconds:.6g} s after the beginning"

    @property
    def text(self) -> str:
        return f"{self.date(0)} to {self.date(self.length)}"


def _text(date: datetime) -> str:
    return date.replace(tzinfo=None).isoformat(timespec="auto" if date.microsecond else "seconds") + "Z"


def covering(place: str, times: np.ndarray, period: Period, date) -> slice:
    """Return the part of a record's times that the period needs. Not collective.

    place   where the record stands, for messages
    times   (n,) model times, s, of all of the record, rising
    date    function of an index: the date of that time for people, as the record has it
    Raises InputError naming the dates: too short at either end, or with a gap.
    """
    if not (times.size and times[0] <= 0.0 and times[-1] >= period.length):
        has = f"from {date(0)} to {date(times.size - 1)}" if times.size else "no times"
        raise InputError(f"{place}: has {has}; the run needs {period.text}: give a longer record or another period")
    first = int(np.searchsorted(times, 0.0, side="right")) - 1
    last = int(np.searchsorted(times, period.length, side="left"))
    needed = slice(first, max(last, first) + 1)
    steps = np.diff(times[needed])
    usual = float(np.median(np.diff(times))) if times.size > 1 else 0.0
    if steps.size and steps.max() > GAP * usual:
        at = first + int(steps.argmax())
        raise InputError(
            f"{place}: nothing between {date(at)} and {date(at + 1)}, where {usual:g} s is the usual interval; "
            f"the run needs {period.text}: fill the gap"
        )
    return needed
