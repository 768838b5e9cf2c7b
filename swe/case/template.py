"""A case file to start from: the shortest one, and one with every key and its meaning."""

from __future__ import annotations

import tomllib

from swe.case.case import SECTIONS
from swe.case.keys import Key, Section
from swe.case.kinds import Choice
from swe.case.words import quoted, toml

SHORTEST_CASE = """\
title = "Wind over a square basin"
basin = { surface = "plane", coastline = "coast.geojson" }
depth = { constant = "20 m", least = "5 m" }
mesh = { spacing = "2 km" }
earth = { rotation = "f-plane", latitude = "54 deg" }
wind = { east = "0.2 Pa" }
time = { begin = 2031-01-01T00:00:00Z, duration = "2 d", step = "120 s" }
method = { stepper = "one-stage", action_tolerance = 1e-5 }
subdomains = { overlap_tolerance = 1e-6, mismatch_tolerance = "0.1 mm" }
output = { fields_every = "1 h" }
"""
"""Ten lines. The water starts at rest; drag, gravity, density and the rest stand at their defaults."""

SQUARE_COAST = """\
{"type": "Polygon", "coordinates": [[[0, 0], [60000, 0], [60000, 60000], [0, 60000], [0, 0]]]}
"""
"""A coast for it: a square of 60 km."""

HEADING = """\
# A case file (TOML). Lines that begin with ## explain, lines that begin with # are keys not in use: remove the # to use
# one. Quantities are text with a unit, or plain numbers in SI units and degrees. Files are named from this file's folder.
# swe check says what is wrong; docs/case-file.md has ranges and defaults. What is here runs once its coast exists, such as
# {0}
"""


def new_case_template() -> str:
    """Return a commented case file: the keys of the shortest case in use, all others as comments. Not collective."""
    used = tomllib.loads(SHORTEST_CASE)
    blocks = [HEADING.format(SQUARE_COAST.strip())]
    for section in SECTIONS.values():
        blocks.append(_block(section, used.get(section.name, {}) if section.name else used))
    return "\n".join(blocks)


def _block(section: Section, used: dict) -> str:
    """Return one section. Its header is a comment too when none of its keys is in use."""
    rows = []
    if section.name:
        rows.append(f"## {section.meaning}")
        rows.append(section.header if used else f"# {section.header}")
    for name, key in section.keys.items():
        rows.append(f"## {key.meaning}{_choices(key)}")
        rows.append(f"{name} = {toml(used[name])}" if name in used else f"# {name} = {key.example}")
    return "\n".join(rows) + "\n"


def _choices(key: Key) -> str:
    """Return the choices where the meaning does not name them all."""
    options = key.kind.options if isinstance(key.kind, Choice) else ()
    return "" if all(quoted(option) in key.meaning for option in options) else f": {key.kind.allowed()}"
