"""Taking up a run where a checkpoint left it: which one, and whether the case still fits it.

    must be as it was   the mesh, physics and forcing, the begin, what the result files record
    may differ          step (one that divides the time reached), duration, method, cadences, subdomains, ranks

Every refusal names the setting, because a checksum that differs helps nobody.
"""

from __future__ import annotations

import hashlib
import json
from collections.abc import Callable
from pathlib import Path

from swe.case.case import place_of
from swe.errors import InputError
from swe.mesh.topology import Mesh
from swe.output import checkpoint
from swe.output.checkpoint import Checkpoint
from swe.output.durable import file_trouble
from swe.simulation.recorder import fields_of

PHYSICS = ("earth", "drag", "wind", "pressure", "storm", "tide")
"""Sections of the case that a checkpoint must share with the case that resumes it."""

WHOLE = 1e-6
"""Deviation from a whole number of steps, in steps, that is still round-off of decimal units."""

REMEDY = "resume with the case as it was, or start anew with --overwrite"


def physics_key(case) -> str:
    """Return what a checkpoint must share with the case that resumes it, as JSON by "section.key". Not collective.

    Reads the files of the forcing, which may be large: ask once a run. Raises FileError.
    """
    settings = {f"{name}.{key}": value for name in PHYSICS for key, value in vars(getattr(case, name)).items()}
    for item in case.openings:
        settings |= {f"open.{item.name}.{key}": value for key, value in vars(item).items()}
    return json.dumps(settings | {"time.begin": case.time.begin.isoformat()}, default=_content, sort_keys=True)


def _content(value: Path) -> str:
    """Return the name of a file and what is in it: the same file may lie elsewhere, another one bear its name."""
    with file_trouble(value, "reading the file"), open(value, "rb") as file:
        return f"{value.name} (sha256 {hashlib.file_digest(file, 'sha256').hexdigest()[:12]})"


def recorded(case) -> dict[str, list]:
    """Return what the result files hold, which cannot change on the way: fields and stations. Not collective."""
    return {"fields": list(fields_of(case)), "stations": [[item.name, *place_of(item)] for item in case.stations]}


def newest(folder: Path, say: Callable[[str], None]) -> Checkpoint:
    """Return the newest sound checkpoint and say which newer ones were skipped. Not collective. Raises FileError."""
    saved, skipped = checkpoint.newest(folder)
    for line in skipped:
        say(line)
    return saved


def require(saved: Checkpoint, case, physics: str, mesh: Mesh) -> None:
    """Refuse a checkpoint that the case, of which `physics` is the key, cannot go on from. Not collective. Raises InputError."""
    _refuse_other_physics(saved, physics)
    checkpoint.require(saved, mesh.checksum(), physics)
    _refuse_other_records(saved, case)
    _refuse_other_steps(saved, case)


def _refuse_other_physics(saved: Checkpoint, physics: str) -> None:
    try:
        there = json.loads(saved.meta["physics_key"])
    except (KeyError, ValueError):
        return  # of another version: `checkpoint.require` refuses it
    here = json.loads(physics)
    names = [name for name in sorted(here | there) if there.get(name) != here.get(name)]
    if names:
        other = ", ".join(f"{name} was {there.get(name)}, is {here.get(name)}" for name in names)
        raise InputError(f"{saved.path}: belongs to other physics ({other}); {REMEDY}")


def _refuse_other_records(saved: Checkpoint, case) -> None:
    there, here = saved.meta.get("recorded", {}), recorded(case)
    for what, now in here.items():
        before = there.get(what, [])
        if before != now:
            raise InputError(
                f"{saved.path}: the files of this result hold the {what} {_listed(before)}, this case has {_listed(now)}; "
                f"{REMEDY}"
            )


def _listed(items: list) -> str:
    words = [item if isinstance(item, str) else f"{item[0]} ({item[1]:g}, {item[2]:g})" for item in items]
    return ", ".join(words) or "none"


def _refuse_other_steps(saved: Checkpoint, case) -> None:
    reached, step, end = saved.meta["time"], case.time.step, case.time.duration
    if abs(round(reached / step) * step - reached) > WHOLE * step:
        raise InputError(
            f"{case.where('time', 'step')} = {step:g} s: the run continues at {reached:g} s ({saved.path.name}), which is not a "
            "whole number of these steps; choose a step that divides it"
        )
    if reached > end + WHOLE * step:
        raise InputError(
            f"{case.where('time', 'duration')} = {end:g} s: the run continues at {reached:g} s ({saved.path.name}), beyond its "
            "end; choose a duration that is not shorter, or another folder with --results"
        )
