"""The run: from a case to a finished result, step by step; stop, failure and resume.

    claim the folder -> mesh -> hand out -> start or resume -> steps -> close the files -> summary

After every step the ranks know alike whether someone asked to stop (it rides in the step's own reduction). A stop and a
numerical failure both leave a checkpoint of the last good state behind.
"""

from __future__ import annotations

import contextlib
import time as clock
from collections.abc import Callable
from dataclasses import dataclass, field
from pathlib import Path

import numpy as np
from mpi4py import MPI

from swe.case.case import place_of
from swe.errors import NumericalFailure, Stopped
from swe.mesh.topology import Mesh
from swe.output.checkpoint import Checkpoint
from swe.output.folder import ResultFolder
from swe.output.stations import Sampling, Station, sample
from swe.output.summary import write_summary
from swe.parallel.ranks import StopRequest, on_root
from swe.simulation import progress as person
from swe.simulation.account import Counts, account
from swe.simulation.meshing import mesh_for
from swe.simulation.progress import Progress, Reading
from swe.simulation.progress import clock as model_clock
from swe.simulation.recorder import Recorder, fields_of
from swe.simulation.resume import newest, physics_key, recorded, require
from swe.simulation.setup import Setup, prepare
from swe.simulation.start import begin, put

STATION_REACH = 1.0
"""A station may lie this many largest spacings from the nearest face centre before it counts as on land."""


@dataclass
class Run:
    """One run on its ranks. Methods are collective. `physics` is what `resume.physics_key` says of the case (rank 0)."""

    comm: MPI.Comm
    case: object
    physics: str | None
    setup: Setup
    recorder: Recorder
    quiet: bool
    say: Callable[[str], None]
    number: int = 0
    scale: float = 0.0
    spent: Counts = field(default_factory=Counts)
    began: float = field(default_factory=clock.monotonic)

    @property
    def time(self) -> float:
        return self.number * self.setup.plan.step

    def start(self, mesh: Mesh | None) -> None:
        """Begin from the case's [start]."""
        begin(self.setup, self.case, mesh)
        self.recorder.open(None)
        self.scale = self.setup.basin.scale(0.0, self.setup.plan.step)
        self.recorder.begin()

    def resume(self, saved: Checkpoint | None) -> None:
        """Take up where a checkpoint (rank 0), which `resume.require` has accepted, left the run."""
        meta = self.comm.bcast(saved.meta if saved else None, root=0)
        self.number = round(meta["time"] / self.setup.plan.step)
        self.scale = meta["scale"]
        self.spent = Counts(**meta["spent"])
        arrays = saved.arrays if saved else None
        put(self.setup, arrays["eta"] if arrays else None, arrays["u"] if arrays else None)
        self.recorder.restore(arrays, meta)
        self.recorder.open(meta["time"])
        self.say(f"resumed at {model_clock(meta['time'])}, step {self.number}")

    def steps(self) -> None:
        """Step to the end. Raises Stopped or NumericalFailure with the state saved."""
        basin, plan = self.setup.basin, self.setup.plan
        progress = Progress(self.time, plan.steps * plan.step) if self.comm.rank == 0 and not self.quiet else None
        # A run that blows up overflows first. Every value is looked at in the step's own reduction, which says where it happened.
        with StopRequest() as request, np.errstate(all="ignore"):
            while self.number < plan.steps:
                try:
                    report = basin.advance(
                        self.setup.stepper, self.setup.agreement, self.time, plan.step, self.scale, request.asked
                    )
                except NumericalFailure as failure:
                    if not self.together(failure):
                        raise
                    raise self._failed(failure) from None
                self.number += 1
                self.scale = report.scale
                self.spent.repeats += report.repeats
                self.spent.largest_mismatch = max(self.spent.largest_mismatch, report.mismatch)
                self.spent.mismatch_sum += report.mismatch
                self.spent.largest_error = max(self.spent.largest_error, report.error)
                with basin.phases("output"):
                    counts = {"products": self.spent.products, "repeats": self.spent.repeats}
                    self.recorder.see(self.number, self.time, report, counts)
                    if self.recorder.checkpoint_due(self.number) and self.number < plan.steps:
                        self.save()
                if progress and (progress.due() or self.number == plan.steps):
                    progress.show(self._reading(report), last=self.number == plan.steps)
                if report.stop and self.number < plan.steps:
                    where = self.comm.bcast(self.save(), root=0)
                    raise Stopped(
                        f"stopped on request after step {self.number} at {model_clock(self.time)}; state saved in {where}; "
                        "continue with --resume"
                    ).on_all_ranks()

    def _reading(self, report) -> Reading:
        row = self.recorder.row
        energy = row.get("kinetic_energy", 0.0) + row.get("potential_energy", 0.0)
        level = max(report.highest, -report.lowest)
        return Reading(self.time, row.get("mass_drift", 0.0), energy, report.mismatch, self.spent.repeats, report.speed, level)

    def together(self, end: Stopped | NumericalFailure) -> bool:
        """Return whether all ranks are here with the same error, so that they can do something together."""
        return end.everywhere or self.comm.size == 1

    def _failed(self, failure: NumericalFailure) -> NumericalFailure:
        """Save the last good state and say when and where the run failed."""
        where = self.comm.bcast(self.save(), root=0)
        return NumericalFailure(
            f"step {self.number + 1} at {model_clock(self.time)} ({self.time:g} s): {failure}; "
            f"the last good state, step {self.number}, is saved in {where}; continue from there with --resume"
        ).on_all_ranks()

    def save(self) -> str:
        """Write a checkpoint of the present state; return its path on rank 0."""
        meta = {
            "mesh_checksum": self.setup.share.checksum,
            "physics_key": self.physics,
            "recorded": recorded(self.case),
            "scale": self.scale,
            "spent": self.totals().as_dict(),
        }
        return self.recorder.save(self.number, self.time, meta)

    def totals(self) -> Counts:
        """Return what was spent in all sessions so far, summed over the ranks."""
        return self.spent.with_session(self.comm, self.setup.basin, clock.monotonic() - self.began)


def run_case(comm: MPI.Comm, case, folder: Path, resume: bool, overwrite: bool, quiet: bool) -> dict:
    """Run a case into its result folder and return the summary. Collective.

    resume     continue from the newest sound checkpoint; overwrite   replace an earlier result
    Raises SweError kinds as the command line documents; all ranks raise alike.
    """
    began = clock.monotonic()

    def say(text: str) -> None:
        if comm.rank == 0 and not quiet:
            person.say(text)

    on_root(comm, "checking the case", fields_of, case)
    result = on_root(comm, "claiming the result folder", _claim, folder, resume, overwrite)
    with contextlib.ExitStack() as held:
        if result:
            held.enter_context(result)
        for note in result.notes if result else ():
            say(note)
        saved = on_root(comm, "reading the checkpoint", lambda: newest(result.checkpoints, say)) if resume else None
        physics = on_root(comm, "reading the files of the forcing", physics_key, case)
        fits = (lambda mesh: require(saved, case, physics, mesh)) if saved else (lambda mesh: None)
        mesh = on_root(comm, "making the mesh", lambda: mesh_for(case, result.path, say, fits))
        sampling = on_root(comm, "placing the stations", stations_on, case, mesh)
        setup = prepare(comm, case, mesh)
        say(_what_runs(setup, case, comm.size))
        recorder = held.enter_context(Recorder(setup, case, result, mesh, sampling))
        run = Run(comm, case, physics, setup, recorder, quiet, say, began=began)
        setup.basin.phases.seconds["set-up"] = clock.monotonic() - began
        run.resume(saved) if resume else run.start(mesh)
        del mesh
        return _to_the_end(run, result)


def _to_the_end(run: Run, result: ResultFolder | None) -> dict:
    try:
        run.steps()
        run.recorder.flush(run.time)
        run.save()
    except (Stopped, NumericalFailure) as end:
        if run.together(end):
            _conclude(run, result, finished=False)
        raise
    return _conclude(run, result, finished=True)


def _conclude(run: Run, result: ResultFolder | None, finished: bool) -> dict:
    """Close the files, so that the summary says "finished" of complete ones only, and write it."""
    summary = account(run.setup, run.case, run.number, run.totals(), run.recorder.mass_drift(), finished)
    on_root(run.comm, "closing the result files", run.recorder.close)
    on_root(run.comm, "writing the summary", lambda: write_summary(result.summary, summary))
    return summary


def _claim(folder: Path, resume: bool, overwrite: bool) -> ResultFolder:
    result = ResultFolder(folder)
    return result.resume() if resume else result.overwrite() if overwrite else result.begin()


def stations_on(case, mesh: Mesh) -> Sampling:
    """Return where the case's stations are sampled. Not collective. Raises InputError for a station on land."""
    return sample(mesh, [Station(item.name, *place_of(item)) for item in case.stations], STATION_REACH * mesh.edge_distance.max())


def _what_runs(setup: Setup, case, ranks: int) -> str:
    plan = setup.plan
    return (
        f"{case.title}: {setup.share.n_faces} faces, {plan.count} subdomains on {ranks} ranks, overlap {plan.overlap} layers, "
        f"{plan.steps} steps of {plan.step:g} s (z = {plan.z:.1f}), {case.method.stepper}"
        + (f" with the {case.method.operator} operator" if case.method.operator else "")
    )
