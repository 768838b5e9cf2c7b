"""Case texts for the tests of the case room, and a way to read them in an empty folder that holds their input files."""

from __future__ import annotations

from pathlib import Path

import pytest

from swe.case import Case, parse_case
from swe.errors import CaseError

PLANE = {
    "title": '"Square"',
    "basin.surface": '"plane"',
    "basin.coastline": '"coast.geojson"',
    "depth.constant": '"40 m"',
    "depth.least": '"5 m"',
    "mesh.spacing": '"4 km"',
    "earth.rotation": '"none"',
    "time.begin": "2031-01-01T00:00:00Z",
    "time.duration": '"1 d"',
    "time.step": '"120 s"',
    "method.stepper": '"one-stage"',
    "method.action_tolerance": "1e-5",
    "subdomains.overlap": "6",
    "subdomains.mismatch_tolerance": '"0.1 mm"',
    "output.fields_every": '"1 h"',
}
"""A sound case; keys of one section follow each other."""

INPUTS = (
    "coast.geojson",
    "areas.geojson",
    "depth.nc",
    "soundings.csv",
    "mesh.nc",
    "fields.nc",
    "mouth.geojson",
    "mouth.csv",
    "wind.nc",
    "pressure.nc",
    "storm.csv",
)


def case_text(changes: dict[str, str | None] | None = None, tail: str = "") -> str:
    """Return the text of `PLANE` with keys changed, added, or left out (None), one section after the other."""
    settings = {**PLANE, **(changes or {})}
    blocks: dict[str, list[str]] = {"": []}
    for name, value in settings.items():
        section, _, key = name.rpartition(".")
        rows = blocks.setdefault(section, [])
        if value is not None:
            rows.append(f"{key} = {value}")
    parts = ["\n".join([f"[{section}]"] * bool(section) + rows) for section, rows in blocks.items() if rows]
    return "\n".join(parts) + "\n" + tail


def folder_with_inputs(folder: Path) -> Path:
    for name in INPUTS:
        (folder / name).write_text("")
    return folder


def read(folder: Path, text: str) -> Case:
    return parse_case(text, folder_with_inputs(folder) / "case.toml")


def mistakes(folder: Path, text: str) -> list[str]:
    """Return the mistakes of `text`, with the folder taken out of their file name."""
    with pytest.raises(CaseError) as caught:
        read(folder, text)
    return [mistake.replace(f"{folder}/", "") for mistake in caught.value.mistakes]


def without_line(mistake: str) -> str:
    """Return a mistake from its section on."""
    return mistake.split(": ", 1)[1]
