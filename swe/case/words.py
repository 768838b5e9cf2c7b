"""Words of the messages: a wrong value, what it is, what was probably meant, how TOML writes it."""

from __future__ import annotations

from datetime import date, datetime, time

from swe.case.units import exact


class Wrong(ValueError):
    """A value that is not allowed: the text says what was found; `hint` what to write instead."""

    def __init__(self, what: str, hint: str = ""):
        super().__init__(what)
        self.hint = hint


def sort_of(value) -> str:
    """Return what a TOML value is, in a reader's words. Not collective."""
    sorts = (
        (bool, "true or false"),
        (str, "text"),
        (int, "a whole number"),
        (float, "a number with a decimal point"),
        (datetime, "a date with a time"),
        (date, "a date without a time"),
        (time, "a time without a date"),
        (list, "a list"),
    )
    return next((name for sort, name in sorts if isinstance(value, sort)), "a table")


def nearest(word: str, options) -> str:
    """Return the option spelt most like `word`, "" when none is near. Not collective."""
    import difflib

    lower = {option.lower(): option for option in options if option}
    near = difflib.get_close_matches(word.lower(), lower, n=1)
    return lower[near[0]] if near else ""


def quoted(text: str) -> str:
    """Return `text` as a TOML basic string. Not collective."""
    marks = {'"': '\\"', "\\": "\\\\", "\n": "\\n", "\t": "\\t", "\r": "\\r"}
    plain = (marks.get(c) or (c if c.isprintable() else f"\\U{ord(c):08X}") for c in text)
    return '"' + "".join(plain) + '"'


def toml(value) -> str:
    """Return any read TOML value as it may have been written, cut to 60 characters; for messages. Not collective."""
    if isinstance(value, str):
        text = quoted(value)
    elif isinstance(value, bool):
        text = "true" if value else "false"
    elif isinstance(value, (datetime, date, time)):
        text = value.isoformat().replace("+00:00", "Z")
    elif isinstance(value, list):
        text = "[" + ", ".join(map(toml, value)) + "]"
    elif isinstance(value, dict):
        text = "{" + ", ".join(f"{key} = {toml(item)}" for key, item in value.items()) + "}"
    else:
        text = exact(value)
    return text if len(text) <= 60 else text[:57] + "..."


def place(path: tuple) -> str:
    """Return a path in the words of the file: "[mesh] spacing", "[station 3] x". Not collective."""
    path = tuple(part if isinstance(part, int) or part.isprintable() else quoted(part) for part in path)
    if len(path) == 1:
        return path[0]
    table = " ".join(str(part + 1) if isinstance(part, int) else part for part in path[:-1])
    return f"[{path[0]} {path[1] + 1}]" if isinstance(path[-1], int) else f"[{table}] {path[-1]}"


def name_of(name: str) -> str:
    """Return "section.key" in the words of the file. Not collective."""
    return place(tuple(name.split(".")))
