"""Different numbers of subdomains agree within the localisation error that each run states: the sum of its mismatches.

A step's mismatch is the size of its localisation error (test_schwarz); without growth of errors the sum over the steps
bounds what they add up to.
"""

import numpy as np
import pytest
from basins import Rig, bowl, physics
from mpi4py import MPI

from swe.steppers.one_stage import OneStage
from swe.steppers.two_stage import TwoStage

STEPPERS = {"two-stage": TwoStage("wave", "lanczos", 1e-11, 200), "one-stage": OneStage("arnoldi", 1e-11, 200)}


@pytest.mark.parametrize("overlap", [2, 3, 4, 5])
@pytest.mark.parametrize("name", STEPPERS)
def test_subdomain_counts_agree_within_the_error_they_state(name, overlap):
    mesh = bowl()
    step = 5.0 / Rig(mesh, 1, 1, physics(), on=MPI.COMM_SELF).basin.patches[0].radius
    runs = [Rig(mesh, count, overlap, physics(), on=MPI.COMM_SELF).run(STEPPERS[name], step, 12) for count in (3, 7)]
    stated = sum(sum(report.mismatch for report in rig.reports) for rig in runs)
    difference = np.max(np.abs(runs[0].eta() - runs[1].eta()))
    assert difference < stated
    assert difference > 1e-3 * stated  # a statement that is always far too large says nothing
