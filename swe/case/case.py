"""A case: all settings of one run, as frozen dataclasses, and where they came from."""

from __future__ import annotations

from dataclasses import dataclass, field
from pathlib import Path

from swe.case.keys import REQUIRED, key, section, sections_of
from swe.case.kinds import Text
from swe.case.lines import line_of
from swe.case.schema import (
    BasinSection,
    CheckpointSection,
    DepthSection,
    DragSection,
    EarthSection,
    MeshSection,
    MethodSection,
    OutputSection,
    StartSection,
    StationSection,
    SubdomainsSection,
    TimeSection,
)
from swe.case.schema_forcing import OpenSection, PressureSection, StormSection, TideSection, WindSection
from swe.case.words import place


@dataclass(frozen=True)
class Case:
    """All settings of one case.

    path, folder    the case file and the folder it lies in, absolute
    text            the file as it was read
    lines           place in the file -> line, as `lines.find_lines` returns it
    """

    title: str = key(Text(), "what the case is about", REQUIRED, '"Wind over a square basin"')
    basin: BasinSection = section(BasinSection, "where the water is")
    depth: DepthSection = section(DepthSection, "resting depth below the datum: `constant`, `grid` or `soundings`")
    mesh: MeshSection = section(MeshSection, "cells: one `spacing`, or `finest` to `coarsest`, or a ready `file`")
    earth: EarthSection = section(EarthSection, "rotation, gravity, density")
    drag: DragSection = section(DragSection, "friction")
    wind: WindSection = section(WindSection, "constant stress on the surface")
    pressure: PressureSection = section(PressureSection, "pressure of the air on the surface")
    storm: StormSection = section(StormSection, "a moving storm")
    tide: TideSection = section(TideSection, "tides: the equilibrium tide in the basin; those of open boundaries stand there")
    openings: tuple[OpenSection, ...] = section(OpenSection, "a part of the outline where the basin is open to the sea", "open")
    start: StartSection = section(StartSection, "water at the beginning")
    time: TimeSection = section(TimeSection, "begin, duration, step")
    method: MethodSection = section(MethodSection, "time stepping")
    subdomains: SubdomainsSection = section(SubdomainsSection, "overlapping parts of the mesh")
    output: OutputSection = section(OutputSection, "what is written, and how often")
    checkpoint: CheckpointSection = section(CheckpointSection, "saved states to continue from")
    stations: tuple[StationSection, ...] = section(StationSection, "a point with a series of level and current", "station")
    path: Path = field(compare=False)
    folder: Path = field(compare=False)
    text: str = field(compare=False, repr=False)
    lines: dict = field(compare=False, repr=False)

    @property
    def name(self) -> str:
        """Name of the case: that of its file without the ending."""
        return self.path.stem

    def given(self, *path: str | int) -> bool:
        """Return whether the file gives a key, such as ("mesh", "seed"), rather than leaving it out. Not collective."""
        return path in self.lines

    def where(self, *path: str | int) -> str:
        """Return "file:line: [section] key" to begin a message; a station's key is ("station", 0, "x"). Not collective."""
        line = line_of(self.lines, path)
        return f"{self.path}:{line}: {place(path)}" if line else f"{self.path}: {place(path)}"

    def to_text(self) -> str:
        """Return a case file with every setting written out, defaults too; it reads back as equal. Not collective."""
        from swe.case.writing import full_text

        return full_text(self)

    def summary_lines(self) -> list[str]:
        """Return the settings as a table for people, one line each, defaults marked. Not collective."""
        from swe.case.writing import summary_lines

        return summary_lines(self)


SECTIONS = {section.name: section for section in sections_of(Case)}
"""All sections by name, in the order of the reference document."""


def place_of(item: StationSection | StartSection) -> tuple[float, float]:
    """Return (x, y) in m or (longitude, latitude) in degrees of a station or of the middle of a hump. Not collective."""
    return (item.lon, item.lat) if item.x is None else (item.x, item.y)
