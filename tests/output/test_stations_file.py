"""stations.nc: sampling at the nearest face, conventions, resuming."""

import dataclasses

import netCDF4
import numpy as np
import pytest
import xarray
from output.output_examples import START, attributes, compliance, plane, sphere, station_block, stations, write_stations

from swe.errors import FileError, InputError
from swe.output.stations import Station, StationsFile, sample

TIMES = np.arange(0.0, 3000.0, 60.0)


@pytest.fixture(scope="module", params=["plane", "sphere"])
def example(request, tmp_path_factory):
    mesh = {"plane": plane, "sphere": sphere}[request.param]()
    return mesh, write_stations(tmp_path_factory.mktemp(request.param) / "stations.nc", mesh, TIMES)


def test_cf_checker_finds_nothing(example):
    assert compliance(example[1]) == []


def test_cf_checker_finds_nothing_in_a_lake(tmp_path):
    assert compliance(write_stations(tmp_path / "stations.nc", plane(), TIMES, datum="lake")) == []


def test_series_and_places_come_back(example):
    mesh, path = example
    asked = stations(mesh)
    with xarray.open_dataset(path) as dataset:
        assert dataset.attrs["featureType"] == "timeSeries"
        assert list(dataset["station_name"].values) == [station.name for station in asked]
        axis = "lon" if mesh.spherical else "x"
        assert list(dataset[axis].values) == [station.first for station in asked]
        assert list(dataset["level"].sizes) == ["station", "time"]
        level, first, _ = station_block(TIMES, len(asked))
        assert np.array_equal(dataset["level"].values, level.T)
        assert np.array_equal(dataset["east_velocity" if mesh.spherical else "x_velocity"].values, first.T)
        face = dataset["face"].values
        assert np.array_equal(dataset["depth"].values, mesh.depth[face])


def test_the_nearest_face_by_trying_all():
    mesh = plane()
    asked = [Station(str(k), *point) for k, point in enumerate(np.random.default_rng(2).uniform(0, 30e3, (20, 2)))]
    found = sample(mesh, asked, 1e5)
    for station, face, distance in zip(asked, found.face, found.distance, strict=True):
        every = np.hypot(mesh.face_xyz[:, 0] - station.first, mesh.face_xyz[:, 1] - station.second)
        assert face == every.argmin() and distance == pytest.approx(every.min(), rel=1e-12)


def test_distance_on_the_sphere_is_along_the_great_circle():
    """Haversine formula as the independent way."""
    mesh = sphere()
    found = sample(mesh, [Station("Far skerry", 24.0, 61.5)], 1e6)
    x, y, z = mesh.face_xyz.T / mesh.radius
    lon, lat = np.arctan2(y, x), np.arcsin(z)
    lon0, lat0 = np.radians([24.0, 61.5])
    a = np.sin((lat - lat0) / 2) ** 2 + np.cos(lat) * np.cos(lat0) * np.sin((lon - lon0) / 2) ** 2
    every = 2 * mesh.radius * np.arcsin(np.sqrt(a))
    assert found.face[0] == every.argmin()
    assert found.distance[0] == pytest.approx(every.min(), rel=1e-10)


def test_a_station_far_from_the_water_is_refused_with_its_distance():
    said = r"station 'Inland' at \(500000, 0\): 4.6\d+e\+05 m from the nearest water; allowed is 1e\+04 m"
    with pytest.raises(InputError, match=said):
        sample(plane(), [Station("Quay", 1e3, 1e3), Station("Inland", 500e3, 0.0)], 1e4)


def test_two_stations_of_one_name_are_refused():
    with pytest.raises(InputError, match="'Quay' is given 2 times"):
        sample(plane(), [Station("Quay", 1e3, 1e3), Station("Quay", 2e3, 0.0)], 1e4)


def test_no_stations_are_no_file():
    mesh = plane()
    none = sample(mesh, [], 1.0)
    assert none.face.size == 0
    with pytest.raises(ValueError, match="at least one station"):
        StationsFile.create("unused.nc", mesh, none, START, {}, "geoid")


def test_blocks_one_after_the_other_and_resuming(example, tmp_path):
    mesh, whole = example
    sampling = sample(mesh, stations(mesh), 50e3)
    count = len(sampling.stations)
    path = tmp_path / "stations.nc"
    with StationsFile.create(path, mesh, sampling, START, attributes(mesh), "mean_sea_level") as file:
        file.append(TIMES[:7], *station_block(TIMES[:7], count))
        file.append(TIMES[7:7], *station_block(TIMES[7:7], count))  # an empty block is no record
        file.append(TIMES[7:31] + 1, *station_block(TIMES[7:31] + 1, count))
    with StationsFile.open_for_append(path, TIMES[6]) as file:
        assert (file.dropped, file.count) == (24, 7)
        file.append(TIMES[7:], *station_block(TIMES[7:], count))
    with netCDF4.Dataset(whole) as one, netCDF4.Dataset(path) as other:
        for name, variable in one.variables.items():
            assert np.array_equal(variable[...], other[name][...]), name
            assert variable.ncattrs() == other[name].ncattrs()


def test_times_that_do_not_increase_and_wrong_shapes(tmp_path):
    mesh = plane()
    sampling = sample(mesh, stations(mesh), 5e4)
    with StationsFile.create(tmp_path / "stations.nc", mesh, sampling, START, attributes(mesh), "geoid") as file:
        with pytest.raises(FileError, match="times must increase"):
            file.append([0.0, 60.0, 60.0], *station_block([0.0, 60.0, 60.0], 3))
        with pytest.raises(ValueError, match=r"\(times, stations\) is \(2, 3\)"):
            file.append([0.0, 60.0], *station_block([0.0, 60.0], 2))
        assert file.count == 0


def test_stations_are_frozen():
    with pytest.raises(dataclasses.FrozenInstanceError):
        Station("Quay", 0.0, 0.0).name = "Mole"
