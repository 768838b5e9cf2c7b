"""A case written back: as a complete case file, and as a table for people."""

from __future__ import annotations

from pathlib import Path

from swe.case.case import SECTIONS, Case
from swe.case.keys import Key, Section

KEY_WIDTH = 32


def full_text(case: Case) -> str:
    """Return a case file with every setting of `case`; files by absolute path. Not collective."""
    blocks = []
    for section in SECTIONS.values():
        for _, item in _items(case, section):
            rows = [f"{name} = {key.kind.write(value)}" for name, key, value in _settings(item, section)]
            if rows:
                blocks.append("\n".join([section.header, *rows] if section.name else rows))
    return "\n\n".join(blocks) + "\n"


def summary_lines(case: Case) -> list[str]:
    """Return "section.key   value", one line a setting and one a station; "(default)" where the file does not give it."""
    lines = []
    for section in SECTIONS.values():
        for table, item in _items(case, section):
            shown = [(name, _shown(case, key, value)) for name, key, value in _settings(item, section)]
            if section.repeated:
                lines.append(_row(f"{section.name} {table[1] + 1}", ", ".join(f"{name} {text}" for name, text in shown)))
                continue
            for name, text in shown:
                mark = "" if case.given(*table, name) else "   (default)"
                lines.append(_row(".".join((*table, name)), text + mark))
    return lines


def _items(case: Case, section: Section):
    """Return (path, object) of each table of a section."""
    if not section.name:
        return [((), case)]
    item = getattr(case, section.attribute)
    return [((section.name, index), one) for index, one in enumerate(item)] if section.repeated else [((section.name,), item)]


def _settings(item, section: Section) -> list[tuple[str, Key, object]]:
    """Return (name, key, value) of the keys that have a value."""
    settings = [(name, key, getattr(item, name)) for name, key in section.keys.items()]
    return [setting for setting in settings if setting[2] is not None]


def _shown(case: Case, key: Key, value) -> str:
    """Return a value for people; a file within the folder of the case by its relative path."""
    if isinstance(value, Path) and value.is_relative_to(case.folder):
        value = value.relative_to(case.folder)
    return key.kind.show(value)


def _row(name: str, text: str) -> str:
    return f"{name:<{KEY_WIDTH}}{text}"
