"""A run that was broken off and resumed is the run that went on.

Bit for bit, on the same ranks and on others with the same subdomains. Common practice, no source.
"""

import netCDF4
import numpy as np
import pytest
from cases import EXPLICIT, MOUTH, ONE_STAGE, call, write_case, write_mouth
from lakes import lake
from mpi4py import MPI
from run.results import broken_off, checkpoints, different, largest_difference, spent, summary

from swe.case.reading import read_case
from swe.mesh.restrict import restrict
from swe.operators.divergence import divergence, divergence_alike
from swe.simulation.run import run_case

HEIGHT = 0.5
"""Of the hump, m."""

STEPPERS = {
    "two-stage": {},
    "two-stage-chebyshev": {"method.action": '"chebyshev"'},
    "two-stage-jacobian": {"method.operator": '"jacobian"'},
    "one-stage": ONE_STAGE,
    "runge-kutta-4": EXPLICIT,
}
comm = MPI.COMM_WORLD


def run(folder, *words):
    done = call(folder, "run", "lake.toml", "--quiet", *words)
    assert done.code == 0, done.err
    return done


@pytest.mark.parametrize("stepper", STEPPERS)
def test_resumed_equals_uninterrupted_bit_for_bit(stepper, tmp_path):
    """The checkpoint lies between two records of the fields, and the files hold records behind it."""
    write_case(tmp_path, STEPPERS[stepper])
    run(tmp_path)
    whole = tmp_path / "results" / "lake"
    after, last = checkpoints(whole)
    assert 0 < after < last and after % (last // 3) != 0
    again = broken_off(whole, tmp_path / "again", after)
    run(tmp_path, "--resume", "--results", "again")
    assert different(whole, again) == []
    assert spent(whole, "messages", "bytes_sent") == spent(again, "messages", "bytes_sent")
    assert summary(again)["finished"] is True and summary(again)["wall_seconds"] > 0
    with netCDF4.Dataset(again / "fields.nc") as data:
        assert f"resumed by swe 0.1.0 at {after * 3600 / last:g} s, 2 later records dropped" not in data.history
        assert ", 1 later records dropped" in data.history


def test_resumed_at_a_record_of_the_fields(tmp_path):
    write_case(tmp_path, {"checkpoint.every": '"20 min"'})
    run(tmp_path)
    whole = tmp_path / "results" / "lake"
    again = broken_off(whole, tmp_path / "again", 20)
    run(tmp_path, "--resume", "--results", "again")
    assert different(whole, again) == []


def test_resumed_twice_and_once_more_at_the_end(tmp_path):
    write_case(tmp_path)
    run(tmp_path)
    whole = tmp_path / "results" / "lake"
    write_case(tmp_path, {"time.duration": '"32 min"', "output.fields_every": '"32 min"'}, name="short")
    again = tmp_path / "again"
    done = call(tmp_path, "run", "short.toml", "--quiet", "--results", "again")
    assert done.code == 0 and checkpoints(again)[-1] == 16
    for minutes in (44, 60, 60):
        write_case(tmp_path, {"time.duration": f'"{minutes} min"'})
        run(tmp_path, "--resume", "--results", "again")
    assert spent(whole) == spent(again)
    assert largest_difference(whole, again, ("highest_level", "strongest_current_time")) == 0.0
    with netCDF4.Dataset(whole / "fields.nc") as one, netCDF4.Dataset(again / "fields.nc") as other:
        assert np.array_equal(one["level"][-1], other["level"][-1]) and one["time"][-1] == other["time"][-1]


@pytest.mark.parametrize("stepper", ["two-stage", "one-stage", "runge-kutta-4"])
def test_resumed_with_an_open_boundary(stepper, tmp_path):
    """The sum of what flowed out is rounded otherwise when it is taken in two parts; all else is the same bit for bit."""
    path = write_case(tmp_path, STEPPERS[stepper])
    path.write_text(path.read_text() + MOUTH)
    write_mouth(tmp_path)
    run(tmp_path)
    whole = tmp_path / "results" / "lake"
    again = broken_off(whole, tmp_path / "again", checkpoints(whole)[0])
    run(tmp_path, "--resume", "--results", "again")
    assert set(different(whole, again)) <= {"ledger.nc:mass_outflow", "ledger.nc:mass_drift"}
    with netCDF4.Dataset(whole / "ledger.nc") as one, netCDF4.Dataset(again / "ledger.nc") as other:
        assert np.abs(one["mass_outflow"][:]).max() > 1e6  # kg: the sea comes in
        assert np.allclose(one["mass_outflow"][:], other["mass_outflow"][:], rtol=1e-14)
        assert np.abs(other["mass_drift"][:]).max() < 1e-15


def test_a_shorter_step_goes_on_from_the_same_time(tmp_path):
    write_case(tmp_path)
    run(tmp_path)
    whole = tmp_path / "results" / "lake"
    again = broken_off(whole, tmp_path / "again", 24)
    write_case(tmp_path, {"time.step": '"60 s"'})
    run(tmp_path, "--resume", "--results", "again")
    assert summary(again)["steps"] == 60 and checkpoints(again)[-1] == 60
    with netCDF4.Dataset(whole / "fields.nc") as one, netCDF4.Dataset(again / "fields.nc") as other:
        assert np.array_equal(one["time"][:], other["time"][:])
        assert np.array_equal(one["level"][:3], other["level"][:3])  # 0, 20 and 40 min lie before the checkpoint
        assert 0 < np.abs(one["level"][3] - other["level"][3]).max() < 5e-3 * HEIGHT  # the error in time of the longer step


@pytest.mark.ranks(2, 3)
def test_neither_ranks_nor_resuming_on_others_change_the_result(tmp_path):
    """Three subdomains: on one rank, on all ranks, and taken over from either by the other."""
    if comm.rank == 0:
        write_case(tmp_path)
    comm.Barrier()
    case = read_case(tmp_path / "lake.toml")

    def on(these, name, resume):
        if these is not None:
            run_case(these, case, tmp_path / name, resume, False, True)
        comm.Barrier()

    alone = MPI.COMM_SELF if comm.rank == 0 else None
    on(alone, "alone", False)
    on(comm, "together", False)
    if comm.rank == 0:
        broken_off(tmp_path / "alone", tmp_path / "alone-together", 24)
        broken_off(tmp_path / "together", tmp_path / "together-alone", 24)
    comm.Barrier()
    on(comm, "alone-together", True)
    on(alone, "together-alone", True)
    if comm.rank == 0:
        for name in ("together", "alone-together", "together-alone"):
            # Bit for bit, which is more than was promised: 1e-13 of the height of the waves.
            assert different(tmp_path / "alone", tmp_path / name) == []
            assert spent(tmp_path / "alone") == spent(tmp_path / name)


def test_subdomains_sum_the_divergence_of_a_face_alike():
    """Why resuming is bit for bit: the levels that two subdomains hold are the same, not nearly the same."""
    mesh = lake()
    transport = np.random.default_rng(7).normal(size=mesh.n_edges)
    part = restrict(mesh, np.random.default_rng(8).permutation(mesh.n_faces)[: mesh.n_faces // 2])
    here = divergence_alike(part) @ transport[part.edge_id]
    there = (divergence_alike(mesh) @ transport)[part.face_id]
    assert np.array_equal(here, there)
    assert np.allclose(here, divergence(part) @ transport[part.edge_id], rtol=1e-12)
    assert not np.array_equal(here, divergence(part) @ transport[part.edge_id])  # the other order does round differently
