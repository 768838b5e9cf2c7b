"""Dates and input files of a case file. Methods as in `kinds.Kind`."""

from __future__ import annotations

import os
from dataclasses import dataclass
from datetime import UTC, date, datetime
from pathlib import Path

from swe.case.words import Wrong, nearest, quoted, sort_of

NO_OFFSET = "no offset from UTC means UTC"
FIRST_YEAR, LAST_YEAR = 1583, 3000
"""Before October 1582 the mixed and the proleptic calendars of CF differ; after 3000 nobody asks."""


@dataclass(frozen=True)
class Moment:
    """A date with a time, in UTC for the program."""

    def read(self, value, folder: Path) -> datetime:
        if isinstance(value, str):
            value = _moment_of_text(value)
        if not isinstance(value, datetime):
            hint = f"write {value.isoformat()}T00:00:00Z" if isinstance(value, date) else ""
            raise Wrong(f"{sort_of(value)}, but a date with a time is needed", hint)
        if not FIRST_YEAR <= value.year <= LAST_YEAR:
            raise Wrong(f"the year {value.year} is out of range")
        return value.replace(tzinfo=value.tzinfo or UTC).astimezone(UTC)

    def allowed(self) -> str:
        return f"date with time such as 2031-01-01T00:00:00Z, years {FIRST_YEAR} to {LAST_YEAR}; {NO_OFFSET}"

    def show(self, value: datetime) -> str:
        return value.isoformat().replace("+00:00", "Z")

    write = show


@dataclass(frozen=True)
class InputFile:
    """A file that exists, relative to the folder of the case file."""

    what: str

    def read(self, value, folder: Path) -> Path:
        if not isinstance(value, str) or not value:
            raise Wrong(f"{sort_of(value)}, but a file name is needed" if value != "" else "the file name is empty")
        if not value.isprintable():
            raise Wrong("line ends or control characters in the file name", "write paths with / between folders")
        path = Path(os.path.realpath(folder / value))
        if os.path.isdir(path):
            raise Wrong("a folder, but a file is needed")
        if not os.path.exists(path):
            raise Wrong(f"no such file (looked for {path})", _near_file(path, value))
        if not os.access(path, os.R_OK):
            raise Wrong(f"the file {path} may not be read", "change its permissions")
        return path

    def allowed(self) -> str:
        return f"{self.what}, path from the folder of the case file"

    def show(self, value: Path) -> str:
        return str(value)

    def write(self, value: Path) -> str:
        return quoted(str(value))


def _moment_of_text(value: str) -> datetime:
    try:
        moment = datetime.fromisoformat(value)
    except ValueError:
        raise Wrong("not a date with a time after ISO 8601") from None
    if not any(mark in value[1:] for mark in "Tt :"):
        raise Wrong("a date without a time", f"write {moment.date().isoformat()}T00:00:00Z")
    return moment


def _near_file(path: Path, value: str) -> str:
    """Return a hint for a file that does not exist: its folder is missing, or a file there has nearly its name."""
    if not os.path.isdir(path.parent):
        return f"the folder {path.parent} does not exist either"
    names = [item.name for item in path.parent.iterdir() if item.is_file()]
    near = nearest(path.name, names)
    return f"did you mean {quoted(str(Path(value).with_name(near)))}?" if near else ""
