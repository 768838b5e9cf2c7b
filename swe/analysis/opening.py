"""Reading a file that a running job may still be writing.

HDF5 locks the files it opens, and reads the setting that turns this off once, when it is loaded. So locking is turned off before
netCDF4 is imported; where another part of a program loaded it earlier, a copy of the file is read instead. Between two
syncs of the writer a file may look torn, so that a failed look is repeated.
"""

from __future__ import annotations

import os
import shutil
import tempfile
import time
from collections.abc import Callable
from pathlib import Path
from typing import TypeVar

os.environ.setdefault("HDF5_USE_FILE_LOCKING", "FALSE")

import netCDF4

from swe.errors import FileError

LOOKS = 4
"""Looks at a file before it counts as unreadable; arbitrary."""

PAUSE = 0.4
"""Seconds between two looks: a writer's sync takes far less."""

TROUBLE = (OSError, RuntimeError, IndexError)
"""What netCDF4 raises on a file that is locked, torn or no netCDF at all."""

Found = TypeVar("Found")


def look(path: str | Path, reader: Callable[[netCDF4.Dataset], Found]) -> Found:
    """Return what `reader` finds in a netCDF file that may be written at the same time. Not collective.

    Raises FileError when the file is missing or stays unreadable.
    """
    path = Path(path)
    if not path.is_file():
        raise FileError(f"{path}: no such file; give the folder of a result, or wait until the run has written it")
    for remaining in reversed(range(LOOKS)):
        try:
            return _look_once(path, reader)
        except TROUBLE as failure:
            if not remaining:
                raise FileError(f"{path}: cannot be read as netCDF ({failure}); restore the file or run the case again") from None
            time.sleep(PAUSE)


def _look_once(path: Path, reader: Callable[[netCDF4.Dataset], Found]) -> Found:
    try:
        dataset = netCDF4.Dataset(path)
    except OSError:
        return _look_at_copy(path, reader)
    with dataset:
        return reader(dataset)


def _look_at_copy(path: Path, reader: Callable[[netCDF4.Dataset], Found]) -> Found:
    with tempfile.TemporaryDirectory() as folder:
        copy = shutil.copyfile(path, Path(folder) / path.name)
        with netCDF4.Dataset(copy) as dataset:
            return reader(dataset)
