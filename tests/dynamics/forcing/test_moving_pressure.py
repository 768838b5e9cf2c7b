"""Water under an air pressure that moves or grows.

Sources: Proudman 1929 (Mon. Not. R. Astr. Soc., Geophys. Suppl. 2, 197; from a review, Williams et al. 2020, Nat. Hazards, doi
10.1007/s11069-020-03896-y). With P = p/(rho g), from rest, in one dimension

    eta = c^2/(U^2 - c^2) ( P(x - Ut) - (1 + U/c)/2 P(x - ct) - (1 - U/c)/2 P(x + ct) )        U travelling speed of the pressure
    eta = -(c t/2) P'(x - ct) - ( P(x - ct) - P(x + ct) )/4                                    U = c: it grows without end

(verified by substitution). A pressure that changes slowly is answered by the inverse barometer of its departure from its mean
over the basin, with an error of the order (L/(cT))^2.
"""

import numpy as np
import pytest
from basins import bowl, hump
from channels import straight_channel
from steps import STEPPERS, TWO_STAGE, rig

from swe.dynamics.forcing.pressure import AirPressure
from swe.dynamics.physics import NoRotation, Physics

GRAVITY, DENSITY, DEPTH, SPACING, WIDTH = 9.81, 1025.0, 40.0, 2000.0, 40e3
SPEED = np.sqrt(GRAVITY * DEPTH)
LIFT = 200.0 / (DENSITY * GRAVITY)
"""P of 2 hPa, m."""

LAW = Physics(GRAVITY, DENSITY, 0.0, 0.0, NoRotation())
START = 500e3


def gauss(x):
    return LIFT * np.exp(-((x / WIDTH) ** 2))


def slope(x):
    return -2 * x / WIDTH**2 * gauss(x)


def expected(x, time, travel):
    c = SPEED
    x = x - START
    if travel == c:
        return -c * time / 2 * slope(x - c * time) - (gauss(x - c * time) - gauss(x + c * time)) / 4
    free = (1 + travel / c) / 2 * gauss(x - c * time) + (1 - travel / c) / 2 * gauss(x + c * time)
    return c**2 / (travel**2 - c**2) * (gauss(x - travel * time) - free)


@pytest.mark.parametrize("name", STEPPERS)
@pytest.mark.parametrize("froude", [0.6, 1.0, 1.5])
def test_a_travelling_pressure(name, froude):
    """Ten widths of the pressure's journey at the speed of long waves; the growth is that of the formula within 3 %."""
    travel = froude * SPEED

    def air(part):
        x = part.face_xyz[:, 0]
        return (AirPressure(lambda time: DENSITY * GRAVITY * gauss(x - START - travel * time)[None], DENSITY, 0.0),)

    mesh = straight_channel(500, 2, SPACING, DEPTH)
    step = (0.4 if name == "runge-kutta-4" else 1.5) * SPACING / SPEED
    count = round(10 * WIDTH / SPEED / max(froude, 1.0) / step)
    eta = rig(mesh, law=LAW, forcing=air).run(STEPPERS[name], step, count).eta()
    truth = expected(mesh.face_xyz[:, 0], count * step, travel)
    error = np.abs(eta - truth).max() / np.abs(truth).max()
    print(
        f"{name}, U/c {froude}: highest {eta.max() / truth.max():.4f}, lowest {eta.min() / truth.min():.4f} of the formula, "
        f"{np.abs(truth).max() / LIFT:.2f} times the inverse barometer; error {error:.4f}"
    )
    assert eta.max() == pytest.approx(truth.max(), rel=0.03) and eta.min() == pytest.approx(truth.min(), rel=0.03)
    assert error < 0.03
    if froude == 1.0:
        assert np.abs(truth).max() > 4 * LIFT


def test_a_slow_pressure_is_answered_by_the_inverse_barometer():
    """20 hPa over the middle of a closed bowl, growing over two days; L/(cT) = 0.02; the mean is taken off by the volume."""
    duration, mesh = 172800.0, bowl()

    def pattern(part):
        return hump(part, 2000.0, 60e3)

    def air(part):
        low = pattern(part)
        return (AirPressure(lambda time: -low[None] * np.sin(np.pi * time / duration / 2) ** 2, DENSITY, 0.0),)

    run = rig(mesh, law=LAW, forcing=air).run(TWO_STAGE, 600.0, 288)
    barometer = pattern(mesh) / (DENSITY * GRAVITY)
    barometer -= np.sum(mesh.face_area * barometer) / np.sum(mesh.face_area)
    error = np.abs(run.eta() - barometer).max() / barometer.max()
    print(f"from the inverse barometer {error:.1e} of its {barometer.max():.3f} m")
    assert error < 2e-3
    assert abs(run.volume_anomaly()) < 1e-13 * run.volume
