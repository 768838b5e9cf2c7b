"""A case file on its way to a case: values read so far, and all mistakes found, each with its line.

A path names a place: ("title",), ("mesh",), ("mesh", "spacing"), ("station", 0, "name"). A key with a mistake is broken:
its value is unknown, and nothing that depends on it is judged, so that one mistake makes one message.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from pathlib import Path

from swe.case.lines import line_of
from swe.case.words import place, toml


@dataclass
class Draft:
    """State of the reading.

    label       name of the file in messages
    folder      folder of the file, absolute
    lines       path -> line
    written     path -> value as TOML gave it
    values      path -> value for the program; absent where nothing is given or settled
    broken      paths of keys and sections with a mistake
    mistakes    (line, message); line 0 where the file has none
    """

    label: str
    folder: Path
    lines: dict[tuple, int]
    written: dict[tuple, object] = field(default_factory=dict)
    values: dict[tuple, object] = field(default_factory=dict)
    broken: set[tuple] = field(default_factory=set)
    mistakes: list[tuple[int, str]] = field(default_factory=list)

    def wrong(self, path: tuple, what: str, allowed: str = "", hint: str = "", header: str = "") -> None:
        """Note a mistake at `path`: what was found, what is allowed, what to do; `header` names a whole section."""
        line = line_of(self.lines, path)
        where = f"{self.label}:{line}" if line else self.label
        value = f" = {toml(self.written[path])}" if path in self.written else ""
        parts = [f"{where}: {header or place(path)}{value}: {what}"]
        parts += [f"allowed: {allowed}"] if allowed else []
        parts += [hint] if hint else []
        self.mistakes.append((line, "; ".join(parts)))
        self.broken.add(path)

    def is_broken(self, path: tuple) -> bool:
        """Return whether the key or a section around it has a mistake."""
        return any(path[:n] in self.broken for n in range(1, len(path) + 1))

    def value(self, name: str):
        """Return the value of "section.key", None when it has none."""
        return self.values.get(tuple(name.split(".")))

    def given(self, name: str) -> bool:
        """Return whether the file gives "section.key", with a mistake or not."""
        return tuple(name.split(".")) in self.written

    def sound(self, *names: str) -> bool:
        """Return whether none of the keys "section.key" is broken."""
        return not any(self.is_broken(tuple(name.split("."))) for name in names)

    def all_mistakes(self) -> list[str]:
        """Return the messages in the order of the file, those without a line last."""
        return [text for line, text in sorted(self.mistakes, key=lambda mistake: mistake[0] or 10**9)]
