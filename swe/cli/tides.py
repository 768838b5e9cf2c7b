"""`swe tides [--date DATE] [NAME ...]`: the table of tidal constituents at a date."""

from __future__ import annotations

from datetime import UTC, datetime


def run(options) -> int:
    from swe.tide.constituents import TABLE
    from swe.tide.listing import listing

    for line in listing(options.names or list(TABLE), _moment(options.date)):
        print(line)
    return 0


def _moment(text: str | None) -> datetime:
    from swe.errors import InputError

    if text is None:
        return datetime.combine(datetime.now(UTC).date(), datetime.min.time())
    try:
        return datetime.fromisoformat(text)
    except ValueError:
        raise InputError(f"--date {text}: is no date; write 2031-03-01 or 2031-03-01T06:00 (UTC)") from None
