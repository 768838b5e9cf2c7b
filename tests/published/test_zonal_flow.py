"""Global steady zonal flow: test case 2 of Williamson, Drake, Hack, Jakob & Swarztrauber 1992, J. Comput. Phys. 102, 211.

    velocity = u0 axis x r/|r|,   f = 2 Omega q,   g h = g h0 - (a Omega u0 + u0^2/2) q^2,   q = axis . r/|r|,
    axis = (-sin alpha, 0, cos alpha)

u0 = 2 pi a/12 days, g h0 = 2.94e4 m2 s-2, five days (numbers from memory; that the state is steady is verified by substitution).
Norms of h as in that paper. On quasi-uniform Voronoi meshes the error is published to fall between first and second order
(Ringler et al. 2010, J. Comput. Phys. 229, 3065); its maximum more slowly (Peixoto 2016, J. Comput. Phys. 310, 127).
"""

from functools import cache

import numpy as np
import pytest
from basins import along_normals
from steps import rig

from swe.analysis.norms import norms
from swe.constants import EARTH_RADIUS, EARTH_ROTATION
from swe.dynamics.physics import Physics, Sphere
from swe.mesh.lattice import icosahedral
from swe.mesh.topology import with_depth
from swe.steppers.one_stage import OneStage
from swe.steppers.two_stage import TwoStage

GRAVITY, DAY = 9.80616, 86400.0
U0 = 2 * np.pi * EARTH_RADIUS / (12 * DAY)
REFERENCE = 2363.02131
"""Mean depth, m; levels are counted from there."""

TWO_STAGE = TwoStage("wave", "lanczos", 1e-6, 200)
ONE_STAGE = OneStage("arnoldi", 1e-6, 200)


@cache
def globe(level):
    mesh = icosahedral(level, EARTH_RADIUS, 10)
    return with_depth(mesh, np.full(mesh.n_faces, REFERENCE))


def axis(tilt):
    return np.array([-np.sin(tilt), 0.0, np.cos(tilt)])


def depth(xyz, tilt):
    return (2.94e4 - (EARTH_RADIUS * EARTH_ROTATION * U0 + U0**2 / 2) * (xyz @ axis(tilt) / EARTH_RADIUS) ** 2) / GRAVITY


class FiveDays:
    """Errors after five days, four subdomains, ten layers of overlap; relative change of the global mean depth."""

    def __init__(self, level, tilt, step, stepper=TWO_STAGE):
        mesh = globe(level)
        law = Physics(GRAVITY, 1000.0, 0.0, 0.0, Sphere(EARTH_ROTATION, tilt))
        basin = rig(mesh, law=law, overlap=10, refresh=True).fill(
            lambda part: depth(part.face_xyz, tilt) - REFERENCE,
            lambda part: along_normals(part, np.cross(axis(tilt), part.edge_xyz)) * U0 / EARTH_RADIUS,
        )
        before, u = basin.volume_anomaly(), basin.u()
        basin.run(stepper, step, round(5 * DAY / step))
        exact = depth(mesh.face_xyz, tilt)
        self.h = norms(basin.eta() + REFERENCE, exact, mesh.face_area)
        self.u = norms(basin.u(), u, mesh.edge_length * mesh.edge_distance)
        self.drift = abs(basin.volume_anomaly() - before) / basin.volume
        self.courant = step * np.sqrt(GRAVITY * exact.max()) / mesh.edge_distance.min()
        print(
            f"level {level}, tilt {tilt:.2f}, step {step:.0f} s (Courant {self.courant:.1f}): h l2 {self.h.l2:.2e}, "
            f"linf {self.h.linf:.2e}, u l2 {self.u.l2:.2e}, drift {self.drift:.1e}"
        )


@cache
def five_days(level, tilt, step):
    return FiveDays(level, tilt, step)


def hold(coarse, fine):
    """Errors of h and u between two meshes, one of half the spacing."""
    assert 1.0 < np.log2(coarse.h.l2 / fine.h.l2) < 2.0
    assert 1.0 < np.log2(coarse.u.l2 / fine.u.l2) < 2.2
    assert fine.h.linf < coarse.h.linf / 1.4
    assert max(coarse.drift, fine.drift) < 1e-15


@pytest.mark.parametrize("tilt", [0.0, np.pi / 4])
def test_errors_fall_between_first_and_second_order(tilt):
    """Levels 3 and 4 (960 and 480 km), steps of two hours: Courant numbers of 1.5 and 3."""
    coarse, fine = (five_days(level, tilt, 7200.0) for level in (3, 4))
    hold(coarse, fine)
    assert fine.h.l2 < 1e-3 and fine.h.linf < 2.5e-3


@pytest.mark.slow
@pytest.mark.parametrize("tilt", [0.0, np.pi / 4])
def test_errors_fall_on_at_level_5(tilt):
    """240 km, steps of half an hour: an hour advects too much for the two-stage step (tests/steppers/test_stability.py)."""
    coarse, fine = five_days(4, tilt, 7200.0), five_days(5, tilt, 1800.0)
    hold(coarse, fine)
    assert fine.h.l2 < 3e-4 and fine.h.linf < 8e-4


def test_the_one_stage_step_does_as_well():
    """What is left is the error in space: the two steps agree within 15 %."""
    one, two = FiveDays(4, 0.0, 7200.0, ONE_STAGE), five_days(4, 0.0, 7200.0)
    assert one.h.l2 == pytest.approx(two.h.l2, rel=0.15)
