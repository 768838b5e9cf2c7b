"""Checkpoints: the whole state of a run at one step, from which it continues on any number of ranks.

File `step-<number>.checkpoint`:

    line 1    "swe checkpoint 1 " and the sha256 (hex) of everything after this line
    line 2    JSON: step, meta, size of the rest in bytes
    rest      numpy's npz container (uncompressed, no pickles) of the named arrays

So a flipped bit or a missing or additional byte anywhere is found. The last two checkpoints are kept: when a crash or a
bad disk spoils the newest, the one before is there. Steps are whole numbers since the start of the run.
"""

from __future__ import annotations

import hashlib
import io
import json
import re
from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path

import numpy as np

from swe.errors import FileError, InputError
from swe.output.durable import atomic_write, file_trouble, remove_if_there, remove_leftovers

MAGIC = b"swe checkpoint 1 "
KEPT = 2


@dataclass(frozen=True)
class Checkpoint:
    """What a checkpoint holds: arrays by name (whole mesh, in its order), and meta, which JSON can carry."""

    path: Path
    step: int
    arrays: dict[str, np.ndarray]
    meta: dict


def save(folder: str | Path, step: int, arrays: Mapping[str, np.ndarray], meta: Mapping) -> Path:
    """Write a checkpoint durably, then remove all but the last two; return its path. Not collective.

    arrays   numbers only; the state, the stepper's memory, extremes so far
    meta     JSON values, finite: at least mesh_checksum and physics_key, which `require` compares
    Files of later steps are removed too: a run that writes step n has left them behind.
    Raises FileError.
    """
    folder = Path(folder)
    with file_trouble(folder, "making the checkpoint folder"):
        folder.mkdir(exist_ok=True)
    remove_leftovers(folder)
    path = folder / f"step-{step:012d}.checkpoint"
    atomic_write(path, _pack(step, arrays, meta))
    earlier = [other for number, other in _listed(folder) if number < step]
    later = [other for number, other in _listed(folder) if number > step]
    for other in earlier[: max(0, len(earlier) - (KEPT - 1))] + later:
        remove_if_there(other)
    return path


def newest(folder: str | Path) -> tuple[Checkpoint, list[str]]:
    """Return the newest sound checkpoint and one line for each newer one that was skipped. Not collective.

    Raises FileError when there is none.
    """
    folder = Path(folder)
    skipped: list[str] = []
    for _, path in reversed(_listed(folder)):
        try:
            return read(path), skipped
        except FileError as failure:
            skipped.append(str(failure))
    found = f"{len(skipped)} damaged: " + "; ".join(skipped) if skipped else "none"
    raise FileError(f"{folder}: no sound checkpoint to resume from (found {found}); start the run anew with --overwrite")


def read(path: str | Path) -> Checkpoint:
    """Read one checkpoint. Not collective. Raises FileError when it is missing or damaged."""
    path = Path(path)
    with file_trouble(path, "reading the checkpoint"):
        content = path.read_bytes()
    first, _, sealed = content.partition(b"\n")
    if not re.fullmatch(re.escape(MAGIC) + b"[0-9a-f]{64}", first):
        raise FileError(f"{path}: not a checkpoint of this program, or its first line is damaged; skipped")
    if hashlib.sha256(sealed).hexdigest().encode() != first[len(MAGIC) :]:
        raise FileError(f"{path}: {_how_damaged(sealed)}; skipped")
    head, _, body = sealed.partition(b"\n")
    header = json.loads(head)
    with np.load(io.BytesIO(body), allow_pickle=False) as stored:
        arrays = {name: stored[name] for name in stored.files}
    return Checkpoint(path, header["step"], arrays, header["meta"])


def require(checkpoint: Checkpoint, mesh_checksum: str, physics_key: str) -> None:
    """Refuse a checkpoint of another mesh or other physics. Not collective. Raises InputError."""
    for key, here, what in (
        ("mesh_checksum", mesh_checksum, "another mesh"),
        ("physics_key", physics_key, "other physics (constants, friction, rotation or forcing)"),
    ):
        there = checkpoint.meta.get(key)
        if there != here:
            raise InputError(
                f"{checkpoint.path}: belongs to {what}: it has {key} {_short(there)}, this case {_short(here)}; "
                "resume with the case as it was, or start anew with --overwrite"
            )


def _short(text: object) -> str:
    return str(text) if len(str(text)) <= 40 else f"{str(text)[:12]}..."


def _pack(step: int, arrays: Mapping[str, np.ndarray], meta: Mapping) -> bytes:
    for name, array in arrays.items():
        if np.asarray(array).dtype.kind not in "biuf":
            raise ValueError(f"array {name} of a checkpoint holds {np.asarray(array).dtype}, only numbers are kept")
    body = io.BytesIO()
    np.savez(body, allow_pickle=False, **arrays)
    header = {"step": int(step), "meta": dict(meta), "bytes": body.getbuffer().nbytes}
    sealed = json.dumps(header, allow_nan=False, sort_keys=True).encode() + b"\n" + body.getvalue()
    return MAGIC + hashlib.sha256(sealed).hexdigest().encode() + b"\n" + sealed


def _how_damaged(sealed: bytes) -> str:
    """Say whether a checkpoint with a wrong checksum was cut short or altered."""
    head, _, body = sealed.partition(b"\n")
    try:
        wanted = int(json.loads(head)["bytes"])
    except (ValueError, KeyError, TypeError):
        return "cut short or altered in its header, so the checksum is wrong"
    if len(body) < wanted:
        return f"cut short: {len(body)} of {wanted} bytes are there"
    return "altered: the checksum is wrong"


def _listed(folder: Path) -> list[tuple[int, Path]]:
    """Return the checkpoints in a folder by step."""
    matches = [(re.fullmatch(r"step-(\d+)\.checkpoint", path.name), path) for path in folder.glob("step-*.checkpoint")]
    return sorted((int(match[1]), path) for match, path in matches if match)
