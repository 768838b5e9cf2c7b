"""ledger.nc: what should stay the same, what was spent and how far things went, at every recorded time.

One series for each quantity of `catalogue.ledger_quantities`: mass and its relative drift, energies, potential enstrophy,
largest speed, highest and lowest level, mismatch of the subdomains, error indicator of the step, repeats, products.
"""

from __future__ import annotations

from collections.abc import Mapping
from datetime import datetime
from pathlib import Path

import numpy as np

from swe.output.catalogue import ledger_quantities
from swe.output.durable import file_trouble
from swe.output.records import TIME_CHUNK, Records, create, open_again


class LedgerFile:
    """An open ledger; use it as a context manager. Not collective: one rank writes."""

    def __init__(self, records: Records):
        self._records = records
        self._dataset = records.dataset
        self._series = [name for name in self._dataset.variables if name != "time"]

    @classmethod
    def create(cls, path: str | Path, start: datetime, attributes: dict[str, str]) -> LedgerFile:
        """Make a ledger; an old one is replaced. Not collective. Raises FileError.

        attributes   global attributes, from `records.file_attributes`
        """
        dataset = create(path, attributes, start)
        with file_trouble(path, "making the file"):
            for name, quantity in ledger_quantities().items():
                dataset.createVariable(name, "f8", ("time",), chunksizes=(TIME_CHUNK,)).setncatts(quantity.attributes())
            dataset.sync()
        return cls(Records(Path(path), dataset))

    @classmethod
    def open_for_append(cls, path: str | Path, keep_until: float) -> LedgerFile:
        """Open a ledger without its records later than `keep_until`, s since the start. Not collective.

        Raises FileError when it is missing or damaged.
        """
        return cls(open_again(path, keep_until))

    @property
    def count(self) -> int:
        """Return the number of times in the file."""
        return self._records.count

    @property
    def dropped(self) -> int:
        """Return how many times were cut off when the file was opened again."""
        return self._records.dropped

    def append(self, times: np.ndarray, columns: Mapping[str, np.ndarray]) -> None:
        """Write a block of times durably. Not collective.

        times     (nt,) s since the start, increasing and later than all in the file
        columns   (nt,) values by name, all of `catalogue.ledger_quantities`, in their units
        Raises FileError.
        """
        if set(columns) != set(self._series):
            raise ValueError(f"the ledger wants {', '.join(self._series)}; given are {', '.join(columns)}")
        for name, column in columns.items():
            if np.shape(column) != (len(times),):
                raise ValueError(f"{name} has shape {np.shape(column)} for {len(times)} times")
        with self._records.adding(times) as place:
            for name, column in columns.items():
                self._dataset[name][place] = column

    def close(self) -> None:
        """Close the file. Not collective. Raises FileError."""
        self._records.close()

    def __enter__(self) -> LedgerFile:
        return self

    def __exit__(self, kind, failure, trace) -> None:
        self._records.close_after(failure)
