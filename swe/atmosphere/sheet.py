"""Tables in CSV files: a header, then one line for each time; every mistake is told with its line.

    time,speed [kn],from          names of columns, each with its unit in brackets where it is not the usual one
    2031-03-01T00:00Z,12.5,225

Columns may stand in any order and others may stand beside them; lines that are empty or start with # are passed over. Dates
follow ISO 8601; those without an offset are UTC.
"""

from __future__ import annotations

import csv
import math
import re
from collections.abc import Iterator
from dataclasses import dataclass
from datetime import UTC, datetime
from pathlib import Path

from swe.errors import InputError

HEADING = re.compile(r"\s*([^\[\]]*?)\s*(?:\[([^\[\]]*)\])?\s*")
"""A name, then perhaps a unit in brackets."""


@dataclass(frozen=True)
class Heading:
    """Names and units of the columns, lower case; `line` where they stand."""

    path: Path
    line: int
    names: tuple[str, ...]
    units: tuple[str | None, ...]

    def find(self, names: tuple[str, ...]) -> int | None:
        """Return the number of the one column that has one of the names, or None. Not collective. Raises InputError."""
        found = [number for number, name in enumerate(self.names) if name in names]
        if len(found) > 1:
            both = " and ".join(self.names[number] for number in found)
            raise InputError(f"{self.path}, line {self.line}: columns {both} mean the same; leave one out")
        return found[0] if found else None

    def refuse(self, needed: str) -> InputError:
        """Return the error of a header that lacks columns. Not collective."""
        return InputError(f"{self.path}, line {self.line}: header {','.join(self.names)}; needed are the columns {needed}")


@dataclass(frozen=True)
class Row:
    """One line of a table."""

    heading: Heading
    line: int
    fields: tuple[str, ...]

    @property
    def place(self) -> str:
        return f"{self.heading.path}, line {self.line}"

    def number(self, column: int) -> float:
        """Return a finite number. Not collective. Raises InputError."""
        try:
            value = float(self.fields[column])
        except ValueError:
            value = math.nan
        if not math.isfinite(value):
            raise InputError(f"{self.place}: {self.heading.names[column]} is {self.fields[column]!r}; a finite number is needed")
        return value

    def date(self, column: int) -> datetime:
        """Return an aware date. Not collective. Raises InputError."""
        try:
            date = datetime.fromisoformat(self.fields[column])
        except ValueError:
            name, found = self.heading.names[column], self.fields[column]
            raise InputError(f"{self.place}: {name} is {found!r}; a date such as 2031-01-31T18:00Z is needed") from None
        return date.replace(tzinfo=UTC) if date.tzinfo is None else date.astimezone(UTC)


def rows(path: Path, what: str, example: str) -> Iterator[Heading | Row]:
    """Yield the heading of a table, then its rows. Not collective.

    what, example   what the file should hold and its header, for messages
    Raises InputError: missing, empty, no text, a line with too few or too many fields.
    """
    try:
        with open(path, newline="", encoding="utf-8-sig") as file:
            reader = csv.reader(file)
            lines = ((reader.line_num, row) for row in reader if any(row) and not row[0].lstrip().startswith("#"))
            line, header = next(lines, (0, None))
            if header is None:
                raise InputError(f"{path}: empty; give a header such as {example} and a line for each time")
            heading = _heading(path, line, header)
            yield heading
            for line, fields in lines:
                if len(fields) != len(header):
                    raise InputError(
                        f"{path}, line {line}: {len(fields)} fields where the header has {len(header)}; correct the line"
                    )
                yield Row(heading, line, tuple(field.strip() for field in fields))
    except FileNotFoundError:
        raise InputError(f"{path}: no such file; give a CSV file with {what}") from None
    except (OSError, UnicodeDecodeError, csv.Error) as failure:
        raise InputError(f"{path}: cannot be read as CSV text ({failure})") from None


def _heading(path: Path, line: int, header: list[str]) -> Heading:
    parts = [HEADING.fullmatch(cell) for cell in header]
    if None in parts:
        raise InputError(f"{path}, line {line}: {header[parts.index(None)]!r} is no name of a column; write name [unit]")
    return Heading(path, line, tuple(part[1].lower() for part in parts), tuple(part[2] for part in parts))
