"""The vortex of Holland 1980 (Mon. Wea. Rev. 108, 1212) and its journey.

Sources: gradient balance and the greatest wind by substitution; directions by definition.
"""

from dataclasses import replace
from types import SimpleNamespace

import numpy as np
import pytest
from dynamics.dynamics_examples import flat_mesh
from operators.operator_meshes import MESHES

from swe.constants import EARTH_RADIUS, EARTH_ROTATION
from swe.dynamics.forcing.drag_laws import drag_law
from swe.dynamics.forcing.holland import gradient_wind, pressure, shape_for
from swe.dynamics.forcing.pressure import AirPressure
from swe.dynamics.forcing.storm import Storm, StormPressure, StormWind, Surroundings
from swe.dynamics.forcing.wind import WindStress
from swe.errors import InputError
from swe.mesh.lattice import hexagons_in
from swe.mesh.surface import unit_vectors
from swe.mesh.voronoi import sphere_mesh

DEFICIT, AMBIENT, RADIUS, SHAPE, DENSITY = 5000.0, 101000.0, 40e3, 1.7, 1.15


@pytest.mark.parametrize("coriolis", [0.0, 1e-4, -6e-5])
def test_gradient_balance(coriolis):
    """V^2/r + |f| V = (dp/dr)/rho_a, dp/dr by differences."""
    r = np.geomspace(0.3 * RADIUS, 50 * RADIUS, 300)
    step = 1e-4 * r
    slope = (pressure(r + step, AMBIENT, DEFICIT, RADIUS, SHAPE) - pressure(r - step, AMBIENT, DEFICIT, RADIUS, SHAPE)) / (
        2 * step
    )
    wind = gradient_wind(r, DEFICIT, RADIUS, SHAPE, coriolis, DENSITY)
    balance = wind**2 / r + abs(coriolis) * wind
    assert balance == pytest.approx(slope / DENSITY, rel=1e-6, abs=1e-12)
    assert (wind > 0).all()


def test_the_greatest_wind_blows_at_the_radius_of_maximum_wind():
    r = RADIUS * np.linspace(0.3, 3.0, 2701)
    wind = gradient_wind(r, DEFICIT, RADIUS, SHAPE, 0.0, DENSITY)
    assert r[wind.argmax()] == pytest.approx(RADIUS, rel=1e-3)
    assert wind.max() ** 2 == pytest.approx(SHAPE * DEFICIT / (DENSITY * np.e), rel=1e-12)
    assert shape_for(wind.max(), DEFICIT, DENSITY) == pytest.approx(SHAPE)


def test_the_centre_is_calm_and_has_its_pressure():
    r = np.array([0.0, 1e-300, 1e-9, 1.0, 10.0])
    assert pressure(r, AMBIENT, DEFICIT, RADIUS, SHAPE) == pytest.approx(AMBIENT - DEFICIT, rel=1e-15)
    for coriolis in (0.0, 1e-4):
        assert np.abs(gradient_wind(r, DEFICIT, RADIUS, SHAPE, coriolis, DENSITY)).max() < 1e-100
    far = np.array([1e9])
    assert pressure(far, AMBIENT, DEFICIT, RADIUS, SHAPE) == pytest.approx(AMBIENT, rel=1e-8)
    assert 0.0 < gradient_wind(far, DEFICIT, RADIUS, SHAPE, 1e-4, DENSITY)[0] < 1e-6


def track(**changes):
    """A straight track of three points, by default along x at 10 m/s through (150, 150) km after 3 h."""
    points = {
        "where": ("line 2", "line 3", "line 4"),
        "times": np.array([0.0, 10800.0, 21600.0]),
        "places": np.array([[42e3, 150e3], [150e3, 150e3], [258e3, 150e3]]),
        "central": np.full(3, AMBIENT - DEFICIT),
        "ambient": np.full(3, AMBIENT),
        "radius": np.full(3, RADIUS),
        "shape": np.full(3, SHAPE),
        "strongest": None,
    }
    return SimpleNamespace(**points | changes)


STILL = Surroundings(1.0, 0.0, 0.0, DENSITY, 0.0)


def plane():
    return hexagons_in(300e3, 300e3, 10e3)


def polar(mesh, wind, centre):
    """Return (r, outward, counter-clockwise) components of a wind (2, ne) at the edges of a plane."""
    arm = mesh.edge_xyz[:, :2] - centre
    r = np.hypot(*arm.T)
    e = arm.T / r
    return r, (wind * e).sum(axis=0), e[0] * wind[1] - e[1] * wind[0]


@pytest.mark.parametrize("coriolis, sense", [(1e-4, 1), (0.0, 1), (-1e-4, -1)])
def test_wind_turns_with_the_hemisphere_and_flows_in(coriolis, sense):
    mesh = plane()
    around = replace(STILL, reduction=0.85, inflow=20.0, coriolis=coriolis)
    r, outward, turning = polar(mesh, StormWind(Storm(track(), around, None), mesh)(10800.0), [150e3, 150e3])
    speed = 0.85 * gradient_wind(r, DEFICIT, RADIUS, SHAPE, coriolis, DENSITY)
    assert turning == pytest.approx(sense * speed * np.cos(np.radians(20.0)), abs=1e-10)
    assert outward == pytest.approx(-speed * np.sin(np.radians(20.0)), abs=1e-10)


def test_motion_adds_to_the_wind_on_the_right_of_the_track():
    """At the radius of maximum wind 0.6 of 10 m/s on either side, nothing where the vortex has no wind; northern hemisphere."""
    around = replace(STILL, translation_share=0.6, coriolis=1e-4)
    mesh = plane()
    moving = StormWind(Storm(track(), around, None), mesh)(10800.0)
    still = StormWind(Storm(track(), replace(around, translation_share=0.0), None), mesh)(10800.0)
    r = np.hypot(*(mesh.edge_xyz[:, :2] - 150e3).T)
    share = gradient_wind(r, DEFICIT, RADIUS, SHAPE, 1e-4, DENSITY)
    share /= gradient_wind(np.array([RADIUS]), DEFICIT, RADIUS, SHAPE, 1e-4, DENSITY)
    assert (moving - still)[0] == pytest.approx(6.0 * share, abs=1e-10) and np.abs((moving - still)[1]).max() < 1e-12
    right, left = (mesh.edge_xyz[:, 1] < 130e3), (mesh.edge_xyz[:, 1] > 170e3)
    speed = np.hypot(*moving)
    assert speed[right].max() > speed[left].max() + 8.0


def test_all_is_linear_in_time_between_the_points():
    bent = track(
        central=np.array([98e3, 96e3, 99e3]),
        ambient=np.array([101e3, 100.5e3, 101e3]),
        radius=np.array([40e3, 60e3, 50e3]),
        shape=np.array([1.5, 1.7, 1.3]),
    )
    vortex = Storm(bent, STILL, None).at(13500.0)
    assert vortex.centre == pytest.approx([177e3, 150e3, 0.0]) and vortex.velocity == pytest.approx([10.0, 0.0, 0.0])
    assert (vortex.ambient, vortex.deficit) == pytest.approx((100625.0, 3875.0))
    assert (vortex.radius, vortex.shape) == pytest.approx((57.5e3, 1.6))


def test_the_wind_has_no_jumps_where_the_track_bends():
    bent = track(places=np.array([[42e3, 150e3], [150e3, 150e3], [150e3, 258e3]]))
    wind = StormWind(Storm(bent, replace(STILL, translation_share=0.5), None), plane())
    assert np.abs(wind(10800.0 + 1e-3) - wind(10800.0 - 1e-3)).max() < 1e-3


def test_there_is_no_storm_before_and_behind_its_track():
    mesh = flat_mesh("lake")
    storm = Storm(track(), STILL, None)
    for time in (-1.0, 21601.0):
        assert not StormWind(storm, mesh)(time).any()
        assert (StormPressure(storm, mesh)(time) == AMBIENT).all()
    assert StormWind(storm, mesh)(0.0).any()


def test_a_maximum_wind_stands_for_the_shape():
    """The reduced wind of the storm at rest is the maximum of the track; where there is no deficit the next point tells."""
    bent = track(
        shape=None, strongest=np.array([0.0, 30.0, 25.0]), central=np.array([AMBIENT, AMBIENT - 5000.0, AMBIENT - 4000.0])
    )
    storm = Storm(bent, replace(STILL, reduction=0.8), None)
    speed = np.hypot(*StormWind(storm, hexagons_in(300e3, 300e3, 2e3))(10800.0))
    assert speed.max() == pytest.approx(30.0, rel=2e-3)
    assert storm.at(0.0).shape == storm.at(10800.0).shape == pytest.approx((30 / 0.8) ** 2 * DENSITY * np.e / 5000.0)
    with pytest.raises(InputError, match="line 3: a maximum wind of 90 m s-1 and a deficit of 50 hPa make the shape 7.9"):
        Storm(SimpleNamespace(**vars(bent) | {"strongest": np.array([0.0, 90.0, 25.0])}), replace(STILL, reduction=0.8), None)


def sea(middle):
    """A patch of some 900 km about a longitude and latitude."""
    i, j = np.meshgrid(np.arange(24), np.arange(24))
    points = np.column_stack([(i + j % 2 / 2).ravel() * 0.5, j.ravel() * 0.35]) + np.random.default_rng(0).uniform(
        -0.05, 0.05, (576, 2)
    )
    points = middle + points - points.mean(axis=0)
    return sphere_mesh(unit_vectors(points), (np.abs(points - middle) < [5.0, 3.6]).all(axis=1), EARTH_RADIUS)


@pytest.mark.parametrize("middle, sense", [((179.0, 40.0), 1), ((-30.0, -35.0), -1)])
def test_a_storm_on_the_sphere(middle, sense):
    """It passes the date line; wind along the circles about the centre, f of the centre, pressure lowest there."""
    lon, lat = middle
    places = np.array([[lon - 1.0, lat], [lon + 1.0, lat], [lon + 3.0 - 360.0, lat]])
    storm = Storm(track(places=places), replace(STILL, coriolis=None), EARTH_RADIUS)
    mesh, vortex = sea(middle), storm.at(5400.0)
    assert vortex.centre / EARTH_RADIUS == pytest.approx(unit_vectors([middle])[0], abs=1e-4)
    assert np.linalg.norm(vortex.centre) == pytest.approx(EARTH_RADIUS)
    assert vortex.coriolis == pytest.approx(2 * EARTH_ROTATION * np.sin(np.radians(lat)), rel=1e-3)
    wind = StormWind(storm, mesh)(5400.0)
    angle = np.arccos(np.clip(mesh.edge_xyz @ vortex.centre / EARTH_RADIUS**2, -1, 1))
    expected = gradient_wind(EARTH_RADIUS * angle, DEFICIT, RADIUS, SHAPE, vortex.coriolis, DENSITY)
    assert np.hypot(*wind) == pytest.approx(expected, rel=1e-6)
    up = mesh.edge_xyz / EARTH_RADIUS
    east = np.cross([0.0, 0.0, 1.0], up)
    east /= np.linalg.norm(east, axis=1, keepdims=True)
    vector = wind[0, :, None] * east + wind[1, :, None] * np.cross(up, east)
    around = np.cross(vortex.centre / EARTH_RADIUS, up)
    assert (sense * (vector * around).sum(axis=1) >= 0).all()
    assert np.abs((vector * vortex.centre).sum(axis=1)).max() < 1e-6 * EARTH_RADIUS  # no flow in or out
    air = StormPressure(storm, mesh)(5400.0)[0]
    nearest = np.linalg.norm(mesh.face_xyz - vortex.centre, axis=1).argmin()
    assert air.argmin() == nearest and AMBIENT - DEFICIT <= air.min() < AMBIENT - 0.5 * DEFICIT and air.max() < AMBIENT


@pytest.mark.parametrize("name", ["lake", "globe"])
def test_wind_and_pressure_of_a_storm_drive_the_water(name):
    mesh = MESHES[name]()
    places = np.array([[0.0, 0.0], [5e3, 4e3], [10e3, 4e3]]) if mesh.radius is None else np.array([[0.0, 20], [9, 21], [18, 22]])
    around = Surroundings(0.85, 20.0, 0.5, DENSITY, 1e-4 if mesh.radius is None else None)
    radius = np.full(3, 3e3 if mesh.radius is None else 800e3)
    storm = Storm(track(places=places, radius=radius), around, mesh.radius)
    stress = WindStress(mesh, StormWind(storm, mesh), drag_law("garratt-1977", 2.5e-3), DENSITY).stress(9000.0)
    head = AirPressure(StormPressure(storm, mesh), 1025.0, AMBIENT).head(9000.0)
    assert stress.shape == (mesh.n_edges,) and np.isfinite(stress).all() and np.abs(stress[: mesh.n_inner]).max() > 0.1
    assert head.shape == (mesh.n_faces,) and -DEFICIT / 1025.0 <= head.min() < head.max() <= 0.0
