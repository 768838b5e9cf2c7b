"""Kinds of value in a case file: how each is read without coercion, what it allows, and how it is written back.

A kind has four methods:

    read(value, folder)     the value for the program, or raises Wrong; `folder` is the case file's
    allowed()               full range or choices with units, for messages and the reference document
    show(value)             text for people
    write(value)            TOML that reads back as exactly `value`
"""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path
from typing import Protocol

from swe.case.words import Wrong, nearest, quoted, sort_of, toml


class Kind(Protocol):
    def read(self, value, folder: Path): ...

    def allowed(self) -> str: ...

    def show(self, value) -> str: ...

    def write(self, value) -> str: ...


@dataclass(frozen=True)
class Switch:
    """true or false."""

    def read(self, value, folder: Path) -> bool:
        if not isinstance(value, bool):
            raise Wrong(f"{sort_of(value)}, but true or false is needed (without quotes)")
        return value

    def allowed(self) -> str:
        return "true, false"

    def show(self, value: bool) -> str:
        return "true" if value else "false"

    write = show


@dataclass(frozen=True)
class Text:
    """Text that is not blank, on one line."""

    def read(self, value, folder: Path) -> str:
        if not isinstance(value, str):
            raise Wrong(f"{sort_of(value)}, but text in quotes is needed")
        if not value.strip():
            raise Wrong("the text is blank")
        if not value.isprintable():
            raise Wrong("line ends or control characters in the text")
        return value

    def allowed(self) -> str:
        return "text on one line"

    def show(self, value: str) -> str:
        return value

    def write(self, value: str) -> str:
        return quoted(value)


@dataclass(frozen=True)
class Choice:
    """One of a few words."""

    options: tuple[str, ...]

    def read(self, value, folder: Path) -> str:
        if not isinstance(value, str):
            raise Wrong(f"{sort_of(value)}, but one of the choices is needed")
        if value not in self.options:
            near = nearest(value, self.options)
            raise Wrong("not one of the choices", f"did you mean {quoted(near)}?" if near else "")
        return value

    def allowed(self) -> str:
        return ", ".join(map(quoted, self.options))

    def show(self, value: str) -> str:
        return value

    def write(self, value: str) -> str:
        return quoted(value)


@dataclass(frozen=True)
class Listing:
    """A list of different entries of one kind, one at least."""

    entry: Text | Choice

    def read(self, value, folder: Path) -> tuple[str, ...]:
        if not isinstance(value, list):
            raise Wrong(f"{sort_of(value)}, but a list is needed", f"[{toml(value)}]" if isinstance(value, str) else "")
        if not value:
            raise Wrong("the list is empty", "leave the key out to keep what holds without it")
        for item in value:
            try:
                self.entry.read(item, folder)
            except Wrong as wrong:
                raise Wrong(f"entry {toml(item)}: {wrong}", wrong.hint) from None
        twice = next((item for place, item in enumerate(value) if item in value[:place]), None)
        if twice is not None:
            raise Wrong(f"entry {toml(twice)} stands there twice", "keep one")
        return tuple(value)

    def allowed(self) -> str:
        return f"list of different entries, each {self.entry.allowed()}"

    def show(self, value: tuple[str, ...]) -> str:
        return ", ".join(value)

    def write(self, value: tuple[str, ...]) -> str:
        return "[" + ", ".join(map(quoted, value)) + "]"
