"""Wind and air pressure as forcings of the equations.

Sources: a uniform stress, and a level that balances the pressure, by substitution; 1 hPa raises water of 1025 kg m-3 by 0.9945 cm
(checked by hand). Records that are linear in time and bilinear in place are reproduced exactly.
"""

from dataclasses import replace

import netCDF4
import numpy as np
import pytest
from basins import hump
from dynamics.dynamics_examples import GRAVITY, close, flat_mesh, random_state, rough_mesh, water_on
from operators.operator_meshes import MESHES, part_of
from weather_files import BEGIN, PLANE, SPHERE

from swe.atmosphere.gridded import open_pressure, open_wind
from swe.atmosphere.in_time import InTime
from swe.atmosphere.period import Period
from swe.atmosphere.places import box_of, edge_points, face_points
from swe.atmosphere.record import Uniform
from swe.constants import AIR_DENSITY, STANDARD_PRESSURE
from swe.dynamics.equations import Water
from swe.dynamics.forcing import Head, Stress
from swe.dynamics.forcing.drag_laws import constant, drag_law
from swe.dynamics.forcing.pressure import AirPressure
from swe.dynamics.forcing.wind import ConstantWind, WindStress
from swe.mesh.restrict import restrict

NAMES = list(MESHES)
DENSITY = 1025.0
PERIOD = Period(BEGIN, 3600.0)


def driven(mesh, *forcing):
    """The water of a mesh under a forcing."""
    plain = water_on(mesh)
    return Water(mesh, plain.operators, plain.physics, plain.coriolis_node, forcing)


def steady(first, second):
    return InTime(Uniform.constant("steady", first, second), np.zeros((1, 2)))


@pytest.mark.parametrize("name", NAMES)
def test_a_steady_wind_is_a_steady_stress(name):
    """12 m/s with 0.0015: tau = 1.225 0.0015 12 (7.2, -9.6)."""
    mesh = rough_mesh(name)
    wind = InTime(Uniform.constant("steady", 7.2, -9.6), edge_points(mesh))
    stress = WindStress(mesh, wind, constant(1.5e-3), AIR_DENSITY).stress(5.0)
    close(stress, ConstantWind.on(mesh, 1.225 * 0.0015 * 12 * 7.2, -1.225 * 0.0015 * 12 * 9.6).stress(5.0), 1e-14)
    assert not stress[mesh.n_inner :].any()


def test_the_seams_know_them():
    mesh = rough_mesh("lake")
    wind = WindStress(mesh, steady(1.0, 0.0), constant(1e-3), 1.2)
    pressure = AirPressure(lambda time: np.zeros((1, mesh.n_faces)), DENSITY, 0.0)
    assert isinstance(wind, Stress) and not isinstance(wind, Head)
    assert isinstance(pressure, Head) and not isinstance(pressure, Stress)


def test_no_stress_between_faces_beyond_an_open_boundary():
    mesh = MESHES["rectangle"]()
    outer = mesh.face_xyz[:, 0] > 5500.0
    mesh = replace(mesh, face_outer=outer)
    stress = WindStress(mesh, steady(10.0, 3.0), constant(1e-3), 1.2).stress(0.0)
    both = outer[mesh.edge_faces[: mesh.n_inner]].sum(axis=1)
    assert not stress[: mesh.n_inner][both == 2].any() and np.count_nonzero(stress[: mesh.n_inner][both == 1])


def write_record(path, mesh, kind):
    """A file with a field over the mesh: linear in place along each axis, and in time over two hours about PERIOD."""
    west, south, east, north = box_of(mesh)
    x, y = np.linspace(west - 1, east + 1, 7), np.linspace(south - 1, north + 1, 6)
    names = ("eastward_wind", "northward_wind") if kind == "wind" else ("air_pressure_at_mean_sea_level",)
    axes = [("longitude", "degrees_east"), ("latitude", "degrees_north")]
    axes = axes if mesh.spherical else [("projection_x_coordinate", "m"), ("projection_y_coordinate", "m")]
    with netCDF4.Dataset(path, "w") as file:
        for name, values, (standard_name, units) in zip("xy", (x, y), axes, strict=True):
            file.createDimension(name, values.size)
            file.createVariable(name, "f8", (name,)).setncatts({"standard_name": standard_name, "units": units})
            file[name][:] = values
        file.createDimension("time", 3)
        file.createVariable("time", "f8", ("time",)).setncatts({"units": f"seconds since {BEGIN:%Y-%m-%d %H:%M}"})
        file["time"][:] = [-1800.0, 1800.0, 5400.0]
        for number, name in enumerate(names):
            variable = file.createVariable(f"v{number}", "f8", ("time", "y", "x"))
            variable.setncatts({"standard_name": name, "units": "m s-1" if kind == "wind" else "Pa"})
            time = file["time"][:][:, None, None]
            u, v = (x - west) / (east - west), ((y - south) / (north - south))[:, None]
            variable[:] = field(kind, number, time, u, v)
    return path


def field(kind, number, time, u, v):
    if kind == "pressure":
        return 101000.0 + 800.0 * u - 500.0 * v + time / 10.0
    return (8.0 * u + 3.0 * v + time / 1000.0, -4.0 * u + 6.0 * v - time / 2000.0)[number]


def wanted(mesh, kind, time, points):
    west, south, east, north = box_of(mesh)
    u, v = (points[:, 0] - west) / (east - west), (points[:, 1] - south) / (north - south)
    return np.stack([field(kind, number, time, u, v) for number in range(2 if kind == "wind" else 1)])


@pytest.mark.parametrize("name", ["lake", "sphere sea"])
@pytest.mark.parametrize("time", [0.0, 1800.0, 3000.0])
def test_wind_and_pressure_from_files_reach_the_water(tmp_path, name, time):
    mesh = rough_mesh(name)
    surface = SPHERE if mesh.spherical else PLANE
    wind = open_wind(write_record(tmp_path / "w.nc", mesh, "wind"), surface, box_of(mesh), PERIOD)
    pressure = open_pressure(write_record(tmp_path / "p.nc", mesh, "pressure"), surface, box_of(mesh), PERIOD)
    law = drag_law("large-pond-1981")
    stress = WindStress(mesh, InTime(wind, edge_points(mesh)), law, AIR_DENSITY)
    head = AirPressure(InTime(pressure, face_points(mesh)), DENSITY, STANDARD_PRESSURE)
    east, north = wanted(mesh, "wind", time, edge_points(mesh))
    speed = np.hypot(east, north)
    one, two = ConstantWind.on(mesh, 1.0, 0.0).stress_edge, ConstantWind.on(mesh, 0.0, 1.0).stress_edge
    close(stress.stress(time), AIR_DENSITY * law.coefficient(speed) * speed * (east * one + north * two), 1e-12)
    expected = (wanted(mesh, "pressure", time, face_points(mesh))[0] - 101325.0) / DENSITY
    close(head.head(time), expected, 1e-11)
    eta, u = random_state(mesh)
    plain, both = water_on(mesh), driven(mesh, stress, head)
    change = both.rates(eta, u, time)[1] - plain.rates(eta, u, time)[1]
    _, h_edge = plain.thickness(eta)
    close(change, stress.stress(time) / (DENSITY * h_edge) - plain.operators.grad @ expected, 1e-9)
    wind.close(), pressure.close()


def test_parts_of_a_mesh_feel_the_same_as_the_whole(tmp_path):
    """Each reads its own window of the file."""
    mesh = rough_mesh("sphere sea")
    path = write_record(tmp_path / "w.nc", mesh, "wind")
    part = restrict(mesh, part_of(mesh)[0])
    stresses = []
    for some in (mesh, part):
        wind = open_wind(path, SPHERE, box_of(some), PERIOD)
        stresses.append(WindStress(some, InTime(wind, edge_points(some)), drag_law("garratt-1977"), 1.2).stress(700.0))
        wind.close()
    inner = part.edge_id[: part.n_inner]
    close(stresses[1][: part.n_inner], stresses[0][inner], 1e-12)


def test_water_under_its_inverse_barometer_stays_at_rest_to_round_off():
    """On every rough bed and mesh, for a pressure of any shape."""
    for name in NAMES:
        mesh = rough_mesh(name)
        pattern = 100e3 + 2500.0 * np.cos(mesh.face_xyz @ [1.0, 2.0, 3.0])
        air = AirPressure(lambda time, pattern=pattern: pattern[None], DENSITY, STANDARD_PRESSURE)
        water = driven(mesh, air)
        level, velocity = water.rates(air.inverse_barometer(0.0, GRAVITY), np.zeros(mesh.n_edges), 0.0)
        push = np.abs(water.operators.grad @ air.head(0.0)).max()
        assert not level.any() and np.abs(velocity).max() < 4e-15 * push


def test_one_hectopascal_is_about_one_centimetre():
    air = AirPressure(lambda time: np.array([[STANDARD_PRESSURE - 100.0]]), DENSITY, STANDARD_PRESSURE)
    assert air.inverse_barometer(0.0, 9.81) == pytest.approx(0.009945, abs=5e-7)


def test_low_pressure_draws_the_water_in():
    """A low in the middle of a lake at rest: all edges accelerate towards it."""
    mesh = flat_mesh("lake", 20.0)
    middle = mesh.face_xyz[:, :2].mean(axis=0)
    low = 100e3 - hump(mesh, 3000.0, 3000.0, middle)
    _, velocity = driven(mesh, AirPressure(lambda time: low[None], DENSITY, 100e3)).rates(
        np.zeros(mesh.n_faces), np.zeros(mesh.n_edges), 0.0
    )
    first, second = mesh.edge_faces[: mesh.n_inner].T
    assert (np.sign(velocity[: mesh.n_inner]) == np.sign(low[first] - low[second])).all()


def test_the_same_time_is_computed_once_and_another_one_anew():
    asked = []

    def wind(time):
        asked.append(time)
        return np.full((2, mesh.n_edges), 1.0 + time)

    mesh = flat_mesh("lake")
    stress = WindStress(mesh, wind, constant(1e-3), 1.2)
    values = [stress.stress(time).copy() for time in (0.0, 60.0, 60.0, 120.0, 60.0)]
    assert asked == [0.0, 60.0, 120.0, 60.0]
    assert np.array_equal(values[1], values[2]) and np.array_equal(values[1], values[4])
    assert not np.array_equal(values[0], values[1])
