"""The line of every key of a TOML text, which `tomllib` does not tell.

The text is known to be valid (tomllib has read it), so this walk only has to find where keys and values begin and end:
tables, arrays of tables, dotted and quoted keys, inline tables, arrays over several lines, all four kinds of string.
A path names a place in the read data: ("mesh", "spacing"), ("station", 0, "name"). Source: TOML v1.0.0.
"""

from __future__ import annotations

import re
import tomllib
from bisect import bisect_right

BARE = r"[A-Za-z0-9_-]+"
BASIC = r'"(?:[^"\\\n]|\\.)*"'
LITERAL = r"'[^'\n]*'"
LONG_BASIC = r'"""(?:[^"\\]|\\.|"{1,2}(?!"))*"{3,5}'
LONG_LITERAL = r"'''(?:[^']|'{1,2}(?!'))*'{3,5}"
OTHER = r"[^,\]}\n#]+"
"""Numbers, dates and booleans run up to a separator, a comment or the end of the line."""

BLANK = re.compile(r"(?:[ \t\n]|#[^\n]*)*")
PART = re.compile(rf"[ \t]*({BARE}|{BASIC}|{LITERAL})[ \t]*")
SCALAR = re.compile(f"{LONG_BASIC}|{LONG_LITERAL}|{BASIC}|{LITERAL}|{OTHER}", re.DOTALL)

Path = tuple[str | int, ...]


def find_lines(text: str) -> dict[Path, int]:
    """Return path -> 1-based line where the key, table or array element is first named. Not collective."""
    return _Walk(text.replace("\r\n", "\n")).lines


def line_of(lines: dict[Path, int], path: Path) -> int:
    """Return the line of `path`, or of the nearest table around it that the file has; 0 when there is none. Not collective."""
    return next((lines[path[:n]] for n in range(len(path), 0, -1) if path[:n] in lines), 0)


class _Walk:
    """One pass over the text; `at` is the place reached."""

    def __init__(self, text: str):
        self.text = text
        self.at = 0
        self.starts = [0, *(found.end() for found in re.finditer("\n", text))]
        self.lines: dict[Path, int] = {}
        self.counts: dict[Path, int] = {}
        table: Path = ()
        while self.blank() < len(text):
            if text.startswith("[", self.at):
                table = self.header()
            else:
                self.pair(table)

    def blank(self) -> int:
        """Skip white space, line ends and comments; return the place."""
        self.at = BLANK.match(self.text, self.at).end()
        return self.at

    def key(self) -> Path:
        """Read a dotted key."""
        parts = []
        while True:
            found = PART.match(self.text, self.at)
            self.at = found.end()
            part = found[1]
            parts.append(tomllib.loads(f"k = {part}")["k"] if part[0] in "\"'" else part)
            if not self.text.startswith(".", self.at):
                return tuple(parts)
            self.at += 1

    def header(self) -> Path:
        """Read [table] or [[element of an array of tables]]; return its path."""
        begin, brackets = self.at, 2 if self.text.startswith("[[", self.at) else 1
        self.at += brackets
        parts = self.key()
        self.at += brackets
        path = self.resolved(parts[:-1]) + parts[-1:] if brackets == 2 else self.resolved(parts)
        if brackets == 2:
            self.note((), path, begin)
            self.counts[path] = self.counts.get(path, 0) + 1
            path += (self.counts[path] - 1,)
        self.note((), path, begin)
        return path

    def resolved(self, parts: Path) -> Path:
        """Return the path of a header: a name of an array of tables means its last element."""
        path: Path = ()
        for part in parts:
            path += (part,)
            if path in self.counts:
                path += (self.counts[path] - 1,)
        return path

    def pair(self, table: Path) -> None:
        """Read key = value."""
        begin = self.at
        path = table + self.key()
        self.note(table, path, begin)
        self.at += 1
        self.value(path)

    def value(self, path: Path) -> None:
        self.blank()
        if self.text.startswith("[", self.at):
            self.members(path, "]")
        elif self.text.startswith("{", self.at):
            self.members(path, "}")
        else:
            self.at = SCALAR.match(self.text, self.at).end()

    def members(self, path: Path, close: str) -> None:
        """Read what stands between [ and ], or between { and }."""
        self.at += 1
        index = 0
        while not self.text.startswith(close, self.blank()):
            if self.text.startswith(",", self.at):
                self.at += 1
            elif close == "}":
                self.pair(path)
            else:
                self.note(path, path + (index,), self.at)
                self.value(path + (index,))
                index += 1
        self.at += 1

    def note(self, known: Path, path: Path, place: int) -> None:
        """Record the line of `path` and of all that it lies in below `known`."""
        line = bisect_right(self.starts, place)
        for length in range(len(known) + 1, len(path) + 1):
            self.lines.setdefault(path[:length], line)
