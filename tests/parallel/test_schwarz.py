"""Facts about the localised step. Figures to compare with: method.md, sections 6 and 7 (tried in a prototype)."""

import re

import numpy as np
import pytest
from basins import AGREE, Rig, bowl, comm, hump, physics
from mpi4py import MPI

from swe.errors import NumericalFailure
from swe.parallel.schwarz import Agreement
from swe.steppers.one_stage import OneStage
from swe.steppers.runge_kutta import RungeKutta4
from swe.steppers.two_stage import TwoStage

TIGHT = 1e-12
WAVE = TwoStage("wave", "lanczos", TIGHT, 200)
STEPPERS = {
    "two-stage wave lanczos": WAVE,
    "two-stage wave chebyshev": TwoStage("wave", "chebyshev", TIGHT, 300),
    "two-stage jacobian": TwoStage("jacobian", "arnoldi", TIGHT, 200),
    "one-stage jacobian": OneStage("arnoldi", TIGHT, 200),
    "runge-kutta-4": RungeKutta4(),
}


@pytest.fixture(scope="module")
def mesh():
    return bowl()


def step_for(mesh, z: float) -> float:
    rig = Rig(mesh, 1, 1, physics(), on=MPI.COMM_SELF)
    return z / rig.basin.patches[0].radius


def one_domain(mesh, stepper, step, steps, **options):
    return Rig(mesh, 1, 1, physics(drag=2.5e-3), on=MPI.COMM_SELF, **options).run(stepper, step, steps)


@pytest.mark.parametrize("name", STEPPERS)
def test_localised_equals_one_domain_at_overlap_6_and_z_near_4(mesh, name):
    """Difference over wave height below 1e-8 at z = 3.8, no repeat needed."""
    step = step_for(mesh, 3.8 if name != "runge-kutta-4" else 1.0)
    whole = one_domain(mesh, STEPPERS[name], step, 6)
    cut = Rig(mesh, 4, 6, physics(drag=2.5e-3), on=MPI.COMM_SELF).run(STEPPERS[name], step, 6)
    assert np.max(np.abs(whole.eta() - cut.eta())) < 1e-8
    assert np.max(np.abs(whole.u() - cut.u())) * np.sqrt(2500 / 9.81) < 1e-8
    assert max(report.mismatch for report in cut.reports) < 1e-7


def test_difference_falls_with_overlap_like_the_bessel_tail(mesh):
    """z near 4: method.md, section 6 found 3e-3, 8e-6, 5e-9 at overlap 2, 4, 6 (20 km faces, 10 subdomains)."""
    step = step_for(mesh, 4.0)
    whole = one_domain(mesh, WAVE, step, 4).eta()
    difference = {
        overlap: np.max(np.abs(whole - Rig(mesh, 5, overlap, physics(drag=2.5e-3), on=MPI.COMM_SELF).run(WAVE, step, 4).eta()))
        for overlap in (2, 4, 6)
    }
    assert difference[2] < 1e-2 and difference[4] < 1e-4 and difference[6] < 1e-7
    assert difference[4] < 0.02 * difference[2] and difference[6] < 0.02 * difference[4]


def test_mismatch_tells_the_size_of_the_difference(mesh):
    """The mismatch, measured without knowing the one-domain answer, is of the size of the localisation error of a step."""
    step = step_for(mesh, 6.0)
    whole = one_domain(mesh, WAVE, step, 1).eta()
    for overlap in (2, 3, 4, 5):
        cut = Rig(mesh, 5, overlap, physics(drag=2.5e-3), on=MPI.COMM_SELF).run(WAVE, step, 1)
        difference = np.max(np.abs(whole - cut.eta()))
        assert 0.1 * difference < cut.reports[0].mismatch < 30 * difference


@pytest.mark.parametrize("overlap", [2, 6])
@pytest.mark.parametrize("name", STEPPERS)
def test_water_is_conserved_to_round_off_at_any_overlap(mesh, name, overlap):
    step = step_for(mesh, 6.0 if name != "runge-kutta-4" else 1.0)
    rig = Rig(mesh, 5, overlap, physics(drag=2.5e-3), on=MPI.COMM_SELF)
    before = rig.volume_anomaly()
    rig.run(STEPPERS[name], step, 20)
    assert abs(rig.volume_anomaly() - before) < 1e-15 * rig.volume


def mismatch_after(mesh, name: str, overlap: int, repeats: int) -> float:
    """Mismatch of the first step, z near 6, after so many repeats."""
    rig = Rig(mesh, 5, overlap, physics(), on=MPI.COMM_SELF)
    try:
        rig.run(STEPPERS[name], step_for(mesh, 6.0), 1, Agreement(0.0, repeats))
    except NumericalFailure as failure:
        return float(re.search(r"disagree by (\S+) m", str(failure))[1])
    return rig.reports[0].mismatch


@pytest.mark.parametrize("overlap", [2, 3])
def test_a_repeat_of_the_one_stage_step_shrinks_the_mismatch(mesh, overlap):
    """Its stage holds the values beyond still; the repeat lets them move, which is worth a factor of 3 or more."""
    assert mismatch_after(mesh, "one-stage jacobian", overlap, 1) < mismatch_after(mesh, "one-stage jacobian", overlap, 0) / 3


@pytest.mark.parametrize("name", ["two-stage wave lanczos", "one-stage jacobian"])
def test_repeats_settle_and_both_steppers_settle_alike(mesh, name):
    """What remains is the straight line in time between old and new values beyond: only overlap or a shorter step help."""
    settled = [mismatch_after(mesh, name, 2, repeats) for repeats in (5, 6)]
    assert settled[0] == pytest.approx(settled[1], rel=1e-2)
    assert settled[1] == pytest.approx(mismatch_after(mesh, "two-stage wave lanczos", 2, 6), rel=1e-2)


def test_mismatch_that_stays_is_a_typed_failure_and_the_state_is_kept(mesh):
    step = step_for(mesh, 12.0)
    rig = Rig(mesh, 5, 1, physics(), on=MPI.COMM_SELF)
    before = rig.eta()
    with pytest.raises(NumericalFailure, match=r"disagree by .* m after 1 repeats: allowed is 1e-09 m; use a wider overlap"):
        rig.run(WAVE, step, 1, Agreement(1e-9, 1))
    assert np.array_equal(rig.eta(), before)


def test_a_basis_that_is_too_small_is_a_typed_failure(mesh):
    step = step_for(mesh, 30.0)
    with pytest.raises(NumericalFailure, match="shorter step|shorten the step"):
        Rig(mesh, 3, 4, physics(), on=MPI.COMM_SELF).run(TwoStage("wave", "lanczos", 1e-10, 8), step, 1)


def test_a_face_that_runs_dry_is_named(mesh):
    rig = Rig(mesh, 3, 3, physics(), height=-900.0, radius=20e3, on=MPI.COMM_SELF, at=(20e3, 20e3))
    with pytest.raises(NumericalFailure, match=r"ran dry \(face \d+ at x -?\d+ m, y -?\d+ m, resting depth"):
        rig.run(RungeKutta4(), 1.0, 1)


@pytest.mark.ranks(1, 2, 3)
@pytest.mark.parametrize("name", ["two-stage wave lanczos", "one-stage jacobian"])
def test_the_same_subdomains_on_any_ranks_give_the_same_numbers(mesh, name):
    """Spread over this job's ranks against all on one: round-off of the wave height, 1e-13."""
    step = step_for(mesh, 4.0)
    here = Rig(mesh, 6, 4, physics(drag=2.5e-3)).run(STEPPERS[name], step, 5)
    alone = Rig(mesh, 6, 4, physics(drag=2.5e-3), on=MPI.COMM_SELF).run(STEPPERS[name], step, 5)
    eta, u = here.eta(), here.u()
    if comm.rank == 0:
        assert np.max(np.abs(eta - alone.eta())) < 1e-13
        assert np.max(np.abs(u - alone.u())) < 1e-13
    assert abs(here.volume_anomaly() - alone.volume_anomaly()) < 1e-15 * here.volume


@pytest.mark.ranks(3)
def test_a_step_needs_two_messages_per_neighbour(mesh):
    """Exchanges a step: two for the two-stage step, one for the one-stage step; (u, transport) of the edges not owned."""
    for stepper, exchanges in ((WAVE, 2), (STEPPERS["one-stage jacobian"], 1)):
        rig = Rig(mesh, 3, 3, physics()).run(stepper, step_for(mesh, 3.0), 4, AGREE)
        (part,) = rig.basin.parts
        assert rig.basin.halo.messages == 4 * exchanges * len(part.give)
        assert rig.basin.halo.bytes_sent == 4 * exchanges * 16 * sum(where.size for _, where in part.give)


@pytest.mark.ranks(1, 3)
def test_reference_of_petsc_agrees_with_runge_kutta(mesh):
    """PETSc TS (Verner 8(7), tolerance 1e-11) against RK4 at a tenth of its stable step: fourth order leaves about 1e-7."""
    from swe.parallel.owned import OwnedSystem
    from swe.steppers.reference import integrate

    count = 3
    step = step_for(mesh, 0.1)
    rig = Rig(mesh, count, 2, physics(drag=2.5e-3))
    system = OwnedSystem(rig.basin)
    start = system.pack(rig.basin.states)
    end, report = integrate(system, start, 0.0, 100 * step, 1e-11, 1e-11 * np.ones(start.size), step)
    assert report.steps > 1
    rig.basin.states = system.unpack(end)
    reference = rig.eta()
    explicit = Rig(mesh, count, 2, physics(drag=2.5e-3)).run(RungeKutta4(), step, 100).eta()
    if comm.rank == 0:
        assert np.max(np.abs(reference - explicit)) < 2e-8
        assert np.max(np.abs(reference - hump(mesh))) > 1e-2
