"""The time axis of a CF file in model time.

    t = (value - value of the period's beginning) * seconds of the unit

In the calendars of real dates (standard, proleptic_gregorian, julian) the beginning is the same day, by whatever name. The
calendars of climate models (noleap, all_leap, 360_day and their other names) have days that no real year has, or lack some:
their dates are taken as the real dates of the same name, as long as the stretch that the run needs has the same days in both;
else the record is refused, with the date named where they part.
Source: CF Metadata Conventions 1.11, section 4.4.
"""

from __future__ import annotations

from datetime import UTC, datetime

import cftime
import netCDF4
import numpy as np

from swe.atmosphere.period import Period, covering
from swe.errors import InputError

REAL = ("standard", "gregorian", "proleptic_gregorian", "julian")
MODEL = ("noleap", "365_day", "all_leap", "366_day", "360_day")

DIGITS = 3
"""Model times are rounded to milliseconds: units such as days do not hold seconds exactly."""


def record_times(place: str, variable: netCDF4.Variable, period: Period) -> tuple[int, np.ndarray]:
    """Return (index in the file of the first time that the period needs, needed model times (n,), s). Not collective.

    Raises InputError, one line, naming dates: unit or calendar unknown, times missing or not rising, period not covered, a gap,
    a calendar that has other days than the period.
    """
    units, calendar = str(getattr(variable, "units", "")), str(getattr(variable, "calendar", "standard")).lower()
    values = np.ma.filled(np.ma.asarray(variable[:], dtype=float), np.nan)
    if calendar not in REAL + MODEL:
        raise InputError(f"{place}: calendar {calendar!r}; allowed are {', '.join(REAL + MODEL)}")
    try:
        start, second = cftime.date2num(_beginning(place, period, calendar), units, calendar), _unit_seconds(units, calendar)
    except ValueError as failure:
        raise InputError(
            f"{place}: times in {units!r}, calendar {calendar} ({failure}); allowed is <unit> since <date>, such as "
            "hours since 2031-01-01 00:00"
        ) from None

    def date(index: int) -> str:
        return cftime.num2date(values[index], units, calendar).isoformat(timespec="seconds") + "Z"

    times = np.round((values - start) * second, DIGITS)
    if np.isnan(times).any():
        raise InputError(f"{place}: time {np.isnan(times).argmax() + 1} of {times.size} is missing; correct the file")
    if (np.diff(times) <= 0).any():
        at = int((np.diff(times) <= 0).argmax())
        raise InputError(
            f"{place}: {date(at + 1)} follows {date(at)}; times must rise: sort the record and leave out repeated times"
        )
    needed = covering(place, times, period, date)
    if calendar in MODEL:
        _same_days(place, cftime.num2date(values[needed], units, calendar), times[needed], period, calendar)
    return needed.start, times[needed]


def _beginning(place: str, period: Period, calendar: str) -> cftime.datetime:
    """Return the beginning in a calendar: the same day, or for calendars of models the same name."""
    begin = period.begin.astimezone(UTC)
    fields = begin.year, begin.month, begin.day, begin.hour, begin.minute, begin.second, begin.microsecond
    if calendar in REAL:
        return cftime.datetime(*fields, calendar="proleptic_gregorian").change_calendar(calendar)
    try:
        return cftime.datetime(*fields, calendar=calendar)
    except ValueError:
        raise InputError(f"{place}: {period.date(0)}, the beginning of the run, is no date of its calendar {calendar}") from None


def _unit_seconds(units: str, calendar: str) -> float:
    one, none = cftime.num2date(1, units, calendar), cftime.num2date(0, units, calendar)
    return (one - none).total_seconds()


def _same_days(place: str, dates, times: np.ndarray, period: Period, calendar: str) -> None:
    """Refuse dates that are not real ones, or that lie otherwise among real ones than among those of their calendar."""
    for date, time in zip(dates, times, strict=True):
        fields = date.year, date.month, date.day, date.hour, date.minute, date.second, date.microsecond
        try:
            real = period.seconds(datetime(*fields, tzinfo=UTC))
        except ValueError:
            real = np.nan
        if not abs(real - time) < 1.0:
            raise InputError(
                f"{place}: its calendar {calendar} and the real one part by {date.isoformat(timespec='seconds')}; the run is of "
                f"{period.text}: give a record in the standard calendar, or a period in which both have the same days"
            )
