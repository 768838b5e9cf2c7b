"""Stations and extremes against what they must be: looking at every step."""

import numpy as np
import pytest
from basins import AGREE, Rig, bowl, comm, physics
from mpi4py import MPI

from swe.operators import reconstruction
from swe.simulation.observe import Currents, Extremes, Stations
from swe.steppers.runge_kutta import RungeKutta4

STEP = 120.0


@pytest.fixture(scope="module")
def mesh():
    return bowl(200e3, 160e3, 20e3)


def watched(mesh, rig, faces, steps):
    """Extremes and station samples of a run, and the whole fields after every step (rank 0)."""
    currents, extremes = Currents(rig.basin.parts), Extremes(rig.basin.parts)
    stations = Stations(comm, rig.basin.parts, faces)
    fields = []
    for number in range(steps + 1):
        now = currents(rig.basin.states)
        extremes.see(number * STEP, rig.basin.states, now)
        stations.see(number * STEP, rig.basin.states, now)
        fields.append((rig.eta(), rig.u()))
        rig.basin.advance(RungeKutta4(), AGREE, number * STEP, STEP, 0.0)
    rows = [rig.faces.gather([values[k] for values in extremes.values]) for k in range(6)]
    return rows, stations, fields


@pytest.mark.ranks(1, 3)
def test_extremes_and_stations_see_every_step(mesh):
    faces = np.array([3, mesh.n_faces - 1, 17])
    rig = Rig(mesh, 3, 2, physics(), radius=30e3, at=(80e3, 90e3))
    rows, stations, fields = watched(mesh, rig, faces, 12)
    assert stations.waiting == 13
    collected = stations.collect()
    assert stations.waiting == 0
    if comm.rank != 0:
        assert collected is None
        return
    first, second = reconstruction(mesh)
    eta = np.array([level for level, _ in fields])
    east, north = (np.array([matrix @ u for _, u in fields]) for matrix in (first, second))
    speed = np.hypot(east, north)
    times = STEP * np.arange(13)
    for values, time, series, pick in (
        (rows[0], rows[1], eta, np.argmax),
        (rows[2], rows[3], eta, np.argmin),
        (rows[4], rows[5], speed, np.argmax),
    ):
        place = pick(series, axis=0)
        np.testing.assert_allclose(values, np.take_along_axis(series, place[None], axis=0)[0], rtol=1e-12, atol=1e-14)
        assert np.mean(time == times[place]) > 0.99  # round-off may move a tie
    when, samples = collected
    assert np.array_equal(when, times)
    assert np.array_equal(samples[:, :, 0], eta[:, faces])
    np.testing.assert_allclose(samples[:, :, 1], east[:, faces], rtol=1e-12, atol=1e-15)
    np.testing.assert_allclose(samples[:, :, 2], north[:, faces], rtol=1e-12, atol=1e-15)


def test_stations_without_any_station_collect_nothing(mesh):
    rig = Rig(mesh, 2, 2, physics(), on=MPI.COMM_SELF)
    times, samples = Stations(MPI.COMM_SELF, rig.basin.parts, np.zeros(0, dtype=int)).collect()
    assert times.size == 0 and samples.shape == (0, 0, 3)
