"""A long wave meets a step of depth h1 -> h2: reflected R = (h1^(1/2) - h2^(1/2))/(h1^(1/2) + h2^(1/2)), transmitted T = 1 + R.

Source: Lamb 1932, Hydrodynamics, section 176 (from memory; continuity of level and transport). f = 0, amplitude 1e-6 h.
A Gaussian pulse travels along a channel with straight coasts; widths are 20 spacings and more in the shallow part.
"""

import numpy as np
import pytest
from basins import along_normals
from channels import straight_channel
from steps import EXPONENTIAL, rig

from swe.mesh.topology import with_depth

GRAVITY, SPACING = 9.81, 2000.0


@pytest.mark.parametrize("name", EXPONENTIAL)
@pytest.mark.parametrize("h1, h2, reflected", [(4000.0, 1000.0, 1 / 3), (1000.0, 4000.0, -1 / 3)])
def test_reflection_and_transmission(name, h1, h2, reflected):
    """4000 -> 1000 m: R = 1/3, T = 4/3; and back. Peaks within 0.3 %."""
    nx, width = 400, 20 * SPACING * np.sqrt(h1 / 1000.0)
    mesh = straight_channel(nx, 2, SPACING, h1)
    length = nx * SPACING
    mesh = with_depth(mesh, np.where(mesh.face_xyz[:, 0] < length / 2, h1, h2))
    c1, c2 = np.sqrt(GRAVITY * h1), np.sqrt(GRAVITY * h2)
    start = 0.3 * length

    def pulse(xyz):
        return 1e-3 * np.exp(-(((xyz[:, 0] - start) / width) ** 2))

    def current(part):
        return c1 / h1 * pulse(part.edge_xyz) * along_normals(part, [1.0, 0.0])

    span = 0.2 * length / c1 + 0.17 * length / max(c1, c2)
    step = 2 * SPACING / max(c1, c2)
    run = rig(mesh, count=4, overlap=8).fill(lambda part: pulse(part.face_xyz), current)
    run.run(EXPONENTIAL[name], span / round(span / step), round(span / step))
    x, eta = mesh.face_xyz[:, 0], run.eta() / 1e-3
    back, on = x < length / 2, x > length / 2
    found = eta[back][np.argmax(np.abs(eta[back]))], eta[on].max()
    print(f"{name}: reflected {found[0]:.4f} of {reflected:.4f}, transmitted {found[1]:.4f} of {1 + reflected:.4f}")
    assert found == pytest.approx((reflected, 1 + reflected), rel=0.003)
