"""What all time series files share: global attributes, the time axis, records that survive a crash, cutting back.

Time is in seconds since the start of the run, in UTC. Every append ends in a sync, because a job that is aborted or killed
loses what was not synced (measured: 0 of 10 records left without it, 10 of 10 with it).

A netCDF-4 time axis cannot shrink. A resumed run drops the records after its checkpoint by copying the earlier ones to a
neighbour file that then replaces the old one durably.

Source: CF-1.11, sections 2.6.2 (global attributes) and 4.4 (time coordinate).
"""

from __future__ import annotations

import contextlib
from collections.abc import Iterator
from datetime import UTC, datetime
from pathlib import Path

import netCDF4
import numpy as np

from swe import __version__
from swe.constants import CAUTION
from swe.errors import FileError
from swe.mesh.files import CONVENTIONS
from swe.output.durable import file_trouble, part_of

CALENDAR = "proleptic_gregorian"
"""Of Python's datetime."""

LEAP_SECONDS = "leap_seconds: none"
"""Model days have 86,400 s."""

TIME_CHUNK = 512
"""Times in one chunk of the time axis, 4 kB; arbitrary."""

COPY_VALUES = 4_000_000
"""Values copied at once when records are dropped, 32 MB; arbitrary."""


def file_attributes(title: str, case_text: str, mesh_checksum: str, references: str) -> dict[str, str]:
    """Return the global attributes that all files of one run carry. Not collective.

    title        what the run is, one line
    case_text    the whole case file, so that the result can be made again
    references   of the methods used, one a line
    """
    return {
        "Conventions": CONVENTIONS,
        "title": title,
        "source": f"swe {__version__}: rotating shallow water on a staggered Voronoi mesh, exponential steps, subdomains",
        "history": f"{_now()} written by swe {__version__}",
        "references": references,
        "comment": CAUTION,
        "case_text": case_text,
        "mesh_checksum": mesh_checksum,
    }


class Records:
    """An open netCDF file with an unlimited time axis; times strictly increase.

    dataset   the open dataset, on which the owner of this object defines and fills variables
    dropped   records that were cut off when the file was opened again
    """

    def __init__(self, path: Path, dataset: netCDF4.Dataset, dropped: int = 0):
        self.path, self.dataset, self.dropped = path, dataset, dropped
        self._time = dataset["time"]
        self._last = float(self._time[-1]) if self._time.size else -np.inf

    @property
    def count(self) -> int:
        """Return the number of times in the file."""
        return self._time.size

    @contextlib.contextmanager
    def adding(self, times: np.ndarray) -> Iterator[slice]:
        """Give the places of new records to fill in the block, then write their times and sync. Not collective.

        times   (nt,) s since the start, strictly increasing and later than all in the file
        Raises FileError on disk trouble, or when the times do not follow.
        """
        times = np.asarray(times, dtype=float)
        if times.size and (np.diff(times, prepend=self._last) <= 0).any():
            raise FileError(
                f"{self.path}: records from {times[0]:g} s cannot follow the last one at {self._last:g} s; times must increase: "
                "resume from a checkpoint, which drops later records"
            )
        where = f"writing the records from {times[0]:g} s" if times.size else "writing no records"
        place = slice(self.count, self.count + times.size)
        with file_trouble(self.path, where):
            yield place
            # The time comes last, so that a record whose time is there is complete.
            self._time[place] = times
            self.dataset.sync()
        self._last = float(times[-1]) if times.size else self._last

    def close(self) -> None:
        """Close the file. Not collective. Raises FileError."""
        if self.dataset.isopen():
            with file_trouble(self.path, "closing the file"):
                self.dataset.close()

    def close_after(self, failure: BaseException | None) -> None:
        """Close the file; trouble in closing is not reported over an earlier failure. Not collective."""
        with contextlib.suppress(FileError) if failure is not None else contextlib.nullcontext():
            self.close()


def create(path: str | Path, attributes: dict[str, str], start: datetime) -> netCDF4.Dataset:
    """Make a file with global attributes and an empty time axis; an old one is replaced. Not collective.

    start   of the run; without a time zone it counts as UTC
    Raises FileError.
    """
    with file_trouble(path, "making the file"):
        dataset = netCDF4.Dataset(path, "w", format="NETCDF4")
        dataset.setncatts(attributes)
        dataset.createDimension("time", None)
        time = dataset.createVariable("time", "f8", ("time",), chunksizes=(TIME_CHUNK,))
        time.setncatts({"standard_name": "time", "long_name": "time", "axis": "T"} | time_attributes(start))
    return dataset


def time_attributes(start: datetime) -> dict[str, str]:
    """Return units and calendar of times counted from `start`. Not collective."""
    utc = start.replace(tzinfo=UTC) if start.tzinfo is None else start.astimezone(UTC)
    since = utc.replace(tzinfo=None).isoformat(sep=" ")
    return {"units": f"seconds since {since}", "calendar": CALENDAR, "units_metadata": LEAP_SECONDS}


def open_again(path: str | Path, keep_until: float) -> Records:
    """Open a file to append to it, without its records later than `keep_until` (s since the start). Not collective.

    Raises FileError when the file is missing, damaged, or not one of ours.
    """
    path = Path(path)
    if not path.is_file():
        raise FileError(f"{path}: not there, so no records can be added; put it back, or start the run anew with --overwrite")
    with _damage(path), netCDF4.Dataset(path) as dataset:
        times = np.asarray(dataset["time"][:], dtype=float)
        keep = int(np.count_nonzero(times <= keep_until))
        history = dataset.history
    dropped = times.size - keep
    if dropped:
        with part_of(path) as part:
            _copy_first(path, part, keep)
    with file_trouble(path, "opening the file to add records"):
        dataset = netCDF4.Dataset(path, "a")
        event = f"{_now()} resumed by swe {__version__} at {keep_until:g} s, {dropped} later records dropped"
        dataset.history = f"{history}\n{event}"
        dataset.sync()
    return Records(path, dataset, dropped)


@contextlib.contextmanager
def _damage(path: Path) -> Iterator[None]:
    """Turn what netCDF says about a file that is no netCDF or lacks our parts into a FileError."""
    try:
        yield
    except (OSError, RuntimeError, IndexError, KeyError, AttributeError) as failure:
        said = str(failure).strip("'\"") or type(failure).__name__
        raise FileError(
            f"{path}: cannot be read as a record file of this program ({said}); "
            "put a sound copy in its place, or start the run anew with --overwrite"
        ) from failure


def _copy_first(source_path: Path, target_path: Path, keep: int) -> None:
    """Copy a file with its first `keep` times only."""
    with netCDF4.Dataset(source_path) as source, netCDF4.Dataset(target_path, "w", format="NETCDF4") as target:
        source.set_auto_maskandscale(False)
        target.setncatts({name: source.getncattr(name) for name in source.ncattrs()})
        for name, dimension in source.dimensions.items():
            target.createDimension(name, None if dimension.isunlimited() else dimension.size)
        for variable in source.variables.values():
            _copy_variable(variable, _twin(variable, target), keep)


def _twin(variable: netCDF4.Variable, target: netCDF4.Dataset) -> netCDF4.Variable:
    attributes = {name: variable.getncattr(name) for name in variable.ncattrs()}
    chunks = variable.chunking()
    # Texts and numbers alone cannot be compressed, nor need they be.
    packed = variable.dtype is not str and variable.ndim > 0 and variable.filters().get("zlib")
    twin = target.createVariable(
        variable.name, variable.dtype, variable.dimensions,
        compression="zlib" if packed else None, complevel=1,
        fill_value=attributes.pop("_FillValue", None),
        chunksizes=None if chunks == "contiguous" or not variable.ndim else chunks,
    )  # fmt: skip
    twin.setncatts(attributes)
    twin.set_auto_maskandscale(False)
    return twin


def _copy_variable(variable: netCDF4.Variable, twin: netCDF4.Variable, keep: int) -> None:
    if "time" not in variable.dimensions:
        twin[...] = variable[...]
        return
    axis = variable.dimensions.index("time")
    each = max(1, variable.size // max(1, variable.shape[axis]))
    block = max(1, COPY_VALUES // each)
    for begin in range(0, keep, block):
        part = (slice(None),) * axis + (slice(begin, min(begin + block, keep)),)
        twin[part] = variable[part]


def _now() -> str:
    return datetime.now(UTC).strftime("%Y-%m-%dT%H:%M:%SZ")
