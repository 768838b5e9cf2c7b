"""What a run writes, and when: rank 0 holds the files, all ranks bring their part.

Cadences are whole numbers of steps. Everything that is kept between two writes (station samples, ledger rows) reaches the
disk with the fields, with a checkpoint, or after FLUSH rows, whichever comes first; every write ends in a sync.
"""

from __future__ import annotations

import contextlib
from collections.abc import Sequence

import numpy as np

from swe.dynamics import diagnostics
from swe.errors import InputError
from swe.mesh.topology import Mesh
from swe.output import checkpoint
from swe.output.fields import CHOICES, FieldsFile
from swe.output.fields import Extremes as FileExtremes
from swe.output.folder import ResultFolder
from swe.output.ledger import LedgerFile
from swe.output.records import file_attributes
from swe.output.stations import Sampling, StationsFile
from swe.parallel.ranks import agreed, on_root
from swe.parallel.reductions import total
from swe.parallel.schwarz import StepReport
from swe.simulation.observe import Currents, Extremes, Stations
from swe.simulation.references import cite
from swe.simulation.setup import Setup

FLUSH = 256
"""Rows kept in memory at most; arbitrary, a few kB."""

USUAL_FIELDS = ("level", "velocity", "normal_velocity", "extremes")


def fields_of(case) -> tuple[str, ...]:
    """Return what the fields of a case hold. Not collective. Raises InputError for a name that is not written."""
    names = case.output.fields or USUAL_FIELDS
    unknown = [name for name in names if name not in CHOICES]
    if unknown:
        where = case.where("output", "fields")
        raise InputError(f"{where}: {', '.join(unknown)} is not written; allowed are {', '.join(CHOICES)}")
    return names


class Recorder:
    """Watches every step and writes what is due. A context manager; all methods but `close` are collective.

    folder    the claimed result folder (rank 0), else None; mesh   the whole mesh (rank 0), else None
    sampling  where the stations are (rank 0), else None
    """

    def __init__(self, setup: Setup, case, folder: ResultFolder | None, mesh: Mesh | None, sampling: Sampling | None):
        self.setup, self.case, self.folder = setup, case, folder
        self.comm, self.root = setup.comm, setup.comm.rank == 0
        step = setup.plan.step
        self.every = {
            "fields": round(case.output.fields_every / step),
            "stations": round(case.output.stations_every / step) if case.stations else 0,
            "ledger": round(case.output.ledger_every / step),
            "checkpoint": round(case.checkpoint.every / step) if case.checkpoint.every else 0,
        }
        self.names = fields_of(case)
        self._mesh, self._sampling = mesh, sampling
        faces = self.comm.bcast(sampling.face if self.root else None, root=0)
        self.currents = Currents(setup.basin.parts)
        self.extremes = Extremes(setup.basin.parts)
        self.stations = Stations(self.comm, setup.basin.parts, faces)
        self.volume_start = 0.0
        self.anomaly_start = 0.0
        self.outflow_before = 0.0
        self.row: dict[str, float] = {}
        self._rows: list[tuple[float, dict[str, float]]] = []
        self._files = contextlib.ExitStack()
        self._fields: FieldsFile | None = None
        self._series: StationsFile | None = None
        self._ledger: LedgerFile | None = None

    def open(self, keep_until: float | None) -> None:
        """Make the files, or open those of an earlier session without what is later than `keep_until` (s)."""
        on_root(self.comm, "opening the result files", self._open, keep_until)
        self._mesh = None  # the root needs the whole mesh no longer

    def _open(self, keep_until: float | None) -> None:
        case, begin = self.case, self.case.time.begin
        if keep_until is not None:
            self._fields = self._files.enter_context(FieldsFile.open_for_append(self.folder.fields, keep_until))
            self._ledger = self._files.enter_context(LedgerFile.open_for_append(self.folder.ledger, keep_until))
            if case.stations:
                self._series = self._files.enter_context(StationsFile.open_for_append(self.folder.stations, keep_until))
            return
        attributes = file_attributes(case.title, case.text, self.setup.share.checksum, "\n".join(cite(case)))
        datum = case.depth.datum
        mesh = self._mesh
        self._fields = self._files.enter_context(
            FieldsFile.create(self.folder.fields, mesh, self.names, begin, attributes, datum, "double")
        )
        self._ledger = self._files.enter_context(LedgerFile.create(self.folder.ledger, begin, attributes))
        if case.stations:
            self._series = self._files.enter_context(
                StationsFile.create(self.folder.stations, mesh, self._sampling, begin, attributes, datum)
            )

    def begin(self) -> None:
        """Record the state at the beginning of a new run."""
        self.volume_start, self.anomaly_start = self._volumes()
        self.see(0, 0.0, None, {"products": 0, "repeats": 0})

    def _volumes(self) -> tuple[float, float]:
        basin = self.setup.basin
        rows = [
            [sum_of(patch.water, state.eta, _inside(part)) for sum_of in (diagnostics.volume, diagnostics.volume_anomaly)]
            for part, patch, state in zip(basin.parts, basin.patches, basin.states, strict=True)
        ]
        volume, anomaly = total(self.comm, np.array(rows))
        return float(volume), float(anomaly)

    def see(self, number: int, time: float, report: StepReport | None, counts: dict) -> None:
        """Look at the state after step `number` at `time` (s) and write what is due."""
        states = self.setup.basin.states
        currents = self.currents(states)
        self.extremes.see(time, states, currents)
        due = {name: bool(every) and number % every == 0 for name, every in self.every.items()}
        if due["stations"]:
            self.stations.see(time, states, currents)
        if due["ledger"]:
            self._enter(time, report, counts, currents)
        if due["fields"]:
            self._write_fields(time, currents)
        if due["fields"] or len(self._rows) >= FLUSH or self.stations.waiting >= FLUSH:
            self.flush(time)

    def checkpoint_due(self, number: int) -> bool:
        """Return whether a checkpoint belongs after step `number`."""
        return bool(self.every["checkpoint"]) and number % self.every["checkpoint"] == 0

    def _enter(self, time: float, report: StepReport | None, counts: dict, currents: Sequence[np.ndarray]) -> None:
        """Add a row to the ledger."""
        basin, density = self.setup.basin, self.case.earth.density
        sums, largest = [], np.full(3, -np.inf)
        for part, patch, state, current in zip(basin.parts, basin.patches, basin.states, currents, strict=True):
            water, faces = patch.water, _inside(part)
            sums.append([
                diagnostics.volume_anomaly(water, state.eta, faces),
                diagnostics.kinetic_energy(water, state.eta, state.u, part.owned_edges),
                diagnostics.potential_energy(water, state.eta, faces),
                diagnostics.potential_enstrophy(water, state.eta, state.u, part.owned_nodes),
                0.0,
            ])  # fmt: skip
            found = (np.hypot(*current).max(), state.eta[faces].max(), -state.eta[faces].min())
            largest = np.maximum(largest, found)
        for row, products in zip(sums, basin.products, strict=True):
            row[-1] = float(products)
        anomaly, kinetic, potential, enstrophy, products = total(self.comm, np.array(sums))
        outflow = self._outflow()
        largest = self.setup.largest(largest)
        self.row = {
            "mass_anomaly": density * anomaly,
            "mass_outflow": density * outflow,
            "mass_drift": (anomaly + outflow - self.anomaly_start) / self.volume_start,
            "kinetic_energy": kinetic,
            "potential_energy": potential,
            "potential_enstrophy": enstrophy,
            "largest_speed": largest[0],
            "highest_level": largest[1],
            "lowest_level": -largest[2],
            "mismatch": report.mismatch if report else 0.0,
            "time_error": report.change if report else 0.0,
            "repeats": float(counts["repeats"]),
            "products": products + counts["products"],
        }
        self._rows.append((time, self.row))

    def _write_fields(self, time: float, currents: Sequence[np.ndarray]) -> None:
        states, faces, edges = self.setup.basin.states, self.setup.faces, self.setup.edges
        eta = faces.gather([state.eta for state in states])
        u = edges.gather([state.u for state in states]) if "normal_velocity" in self.names else None
        first = faces.gather([current[0] for current in currents])
        second = faces.gather([current[1] for current in currents])
        with agreed(self.comm, "writing the fields"):
            if self.root:
                self._fields.append(time, eta, u, first, second)

    def flush(self, time: float) -> None:
        """Bring station samples, ledger rows and extremes up to `time` (s) to the disk."""
        samples = self.stations.collect() if self.case.stations else None
        extremes = self._whole_extremes() if "extremes" in self.names else None
        with agreed(self.comm, "writing the results"):
            if self.root:
                if samples is not None and samples[0].size:
                    self._series.append(samples[0], *np.moveaxis(samples[1], 2, 0))
                if self._rows:
                    times = np.array([when for when, _ in self._rows])
                    self._ledger.append(times, {name: np.array([row[name] for _, row in self._rows]) for name in self.row})
                if extremes is not None:
                    self._fields.write_extremes(FileExtremes(*extremes, window=(0.0, time)))
        self._rows = []

    def _whole_extremes(self) -> list[np.ndarray | None] | None:
        rows = [self.setup.faces.gather([values[k] for values in self.extremes.values]) for k in range(6)]
        return rows if self.root else None

    def save(self, number: int, time: float, meta: dict) -> str:
        """Write a checkpoint after step `number` and return its path (rank 0; "" elsewhere)."""
        self.flush(time)
        states = self.setup.basin.states
        arrays = {
            "eta": self.setup.faces.gather([state.eta for state in states]),
            "u": self.setup.edges.gather([state.u for state in states]),
        }
        for name, row in zip(Extremes.NAMES, self._whole_extremes() or [None] * 6, strict=True):
            arrays[name] = row
        meta = meta | {
            "time": time,
            "volume_start": self.volume_start,
            "anomaly_start": self.anomaly_start,
            "outflow": self._outflow(),
        }
        path = on_root(
            self.comm, "writing the checkpoint", lambda: checkpoint.save(self.folder.checkpoints, number, arrays, meta)
        )
        return str(path or "")

    def restore(self, arrays: dict | None, meta: dict) -> None:
        """Take up extremes and sums where a checkpoint left them."""
        self.volume_start, self.anomaly_start = meta["volume_start"], meta["anomaly_start"]
        self.outflow_before = meta["outflow"]
        for row, name in enumerate(Extremes.NAMES):
            parts = self.setup.faces.scatter(arrays[name] if self.root else None)
            for values, part in zip(self.extremes.values, parts, strict=True):
                values[row] = part[: values.shape[1]]

    def mass_drift(self) -> float:
        """Return the change of mass that no outflow explains over the mass at the start, now."""
        return (self._volumes()[1] + self._outflow() - self.anomaly_start) / self.volume_start

    def _outflow(self) -> float:
        """Return the water that left through open boundaries since the start, m3."""
        return self.outflow_before + float(total(self.comm, self.setup.basin.outflow[:, None])[0])

    def close(self) -> None:
        """Close the files. Not collective. Raises FileError."""
        self._files.close()

    def __enter__(self) -> Recorder:
        return self

    def __exit__(self, kind, failure, trace) -> None:
        # With a failure on its way, trouble in closing is not reported over it.
        self._files.__exit__(kind, failure, trace)


def _inside(part) -> slice | np.ndarray:
    """Return the owned faces that are water of the basin, not beyond an open boundary."""
    outer = part.mesh.face_outer[: part.n_owned]
    return np.flatnonzero(~outer) if outer.any() else slice(part.n_owned)
