"""The water at the beginning from a file: as an earlier run left it, or a level on a grid at rest; and what is refused."""

import netCDF4
import numpy as np
import pytest
from cases import DEGREES, ON_THE_SPHERE, call, write_case, write_depth
from messages.refusals import in_order, refused
from run.results import summary

FILE = {
    "start.kind": '"file"',
    "start.file": '"start.nc"',
    **dict.fromkeys(("start.height", "start.radius", "start.x", "start.y")),
}
"""Changes for a start from a file."""

LEVEL = {"standard_name": "sea_surface_height_above_mean_sea_level", "units": "m"}
LAKE_STATIONS = {"West": ("7.05", "55.05")}


def write_level(
    path, values, attributes=LEVEL, x=(-1e3, 21e3, 23), y=(-1e3, 11e3, 13), times=None, names=("x", "y"), order="tyx"
):
    """Write values (times, y, x) on a grid; `values` may be a function of x and y."""
    marks = {
        "x": {"standard_name": "projection_x_coordinate", "units": "m"},
        "y": {"standard_name": "projection_y_coordinate", "units": "m"},
        "lon": {"units": "degrees_east"},
        "lat": {"units": "degrees_north"},
    }
    first, second = np.linspace(*x), np.linspace(*y)
    values = values(first[None, :], second[:, None]) if callable(values) else values
    values = np.ma.masked_invalid(values)
    with netCDF4.Dataset(path, "w") as data:
        dimensions = [
            {"t": "time", "y": names[1], "x": names[0]}[letter] for letter in order if letter != "t" or times is not None
        ]
        for name, line in zip(names, (first, second), strict=True):
            data.createDimension(name, line.size)
            axis = data.createVariable(name, "f8", (name,))
            axis.setncatts(marks[name])
            axis[:] = line
        if times is not None:
            data.createDimension("time", None)
            data.createVariable("time", "f8", ("time",)).units = "hours since 2031-01-01"
            data["time"][:] = times
            values = np.ma.stack([values * (k + 1.0) for k in range(len(times))]) if len(times) else values
        variable = data.createVariable("surface", "f4", dimensions, fill_value=-9999.0)
        variable.setncatts(attributes)
        if times is None or len(times):
            place = "".join(letter for letter in order if letter != "t" or times is not None)
            source = "tyx" if times is not None else "yx"
            variable[:] = np.ma.transpose(values, [source.index(letter) for letter in place])
    return path


def started(folder):
    """Run one step and return x, y and level of the faces at the beginning, and the normal velocities."""
    done = call(folder, "run", "lake.toml", "--quiet", "--overwrite")
    assert done.code == 0, done.err
    with netCDF4.Dataset(folder / "results" / "lake" / "fields.nc") as data:
        x, y = (data[name][:] for name in (("face_x", "face_y") if "face_x" in data.variables else ("face_lon", "face_lat")))
        return np.asarray(x), np.asarray(y), np.asarray(data["level"][0]), np.asarray(data["normal_velocity"][0])


def tilted(x, y):
    return 0.1 + 2e-5 * x - 1e-5 * y


@pytest.mark.parametrize(
    "words",
    [
        {},
        {"attributes": LEVEL | {"units": "cm"}},
        {"attributes": LEVEL | {"units": "mm"}},
        {"times": [0.0, 6.0]},
        {"times": [0.0, 6.0], "order": "xty"},
        {"order": "xy"},
        {"x": (21e3, -1e3, 23)},
    ],
    ids=["m", "cm", "mm", "two times", "x first", "transposed", "x falling"],
)
def test_a_level_on_a_grid_is_bilinear_at_the_faces_and_at_rest(words, tmp_path):
    write_case(tmp_path, FILE | {"time.duration": '"20 min"'})
    scale = {"cm": 100.0, "mm": 1000.0}.get(words.get("attributes", LEVEL)["units"], 1.0)
    write_level(tmp_path / "start.nc", lambda x, y: scale * tilted(x, y), **words)
    x, y, level, u = started(tmp_path)
    last = len(words["times"]) if "times" in words else 1  # the record of number k is k times the first
    assert level == pytest.approx(last * tilted(x, y), rel=1e-6)
    assert (u == 0.0).all()


def test_land_takes_the_nearest_level(tmp_path):
    """The grid has no level in the west; beyond the last columns and rows the end values hold for half a step."""
    write_case(tmp_path, FILE | {"time.duration": '"20 min"'})
    values = lambda x, y: np.where(x < 7.5e3, np.nan, 0.2) + 0 * y  # noqa: E731
    write_level(tmp_path / "start.nc", values, x=(0.4e3, 19.6e3, 17), y=(0.3e3, 9.7e3, 12))
    _, _, level, _ = started(tmp_path)
    assert level == pytest.approx(np.full(level.size, 0.2), rel=1e-6)


def test_longitudes_by_the_other_convention(tmp_path):
    changes = ON_THE_SPHERE | FILE | {"start.lon": None, "start.lat": None, "time.duration": '"20 min"'}
    write_case(tmp_path, changes, LAKE_STATIONS, DEGREES)
    write_level(
        tmp_path / "start.nc",
        lambda x, y: 0.1 * (x - 367.0) + (y - 55.0),
        x=(366.9, 367.4, 11),
        y=(54.9, 55.2, 7),
        names=("lon", "lat"),
    )
    lon, lat, level, _ = started(tmp_path)
    assert level == pytest.approx(0.1 * (lon - 7.0) + (lat - 55.0), abs=1e-6)


def test_fields_of_an_earlier_run_go_on_from_its_last_record(tmp_path):
    write_case(tmp_path)
    assert call(tmp_path, "run", "lake.toml", "--quiet", "--results", "first").code == 0
    (tmp_path / "first" / "fields.nc").rename(tmp_path / "start.nc")
    with netCDF4.Dataset(tmp_path / "start.nc") as data:
        last, flow = np.asarray(data["level"][-1]), np.asarray(data["normal_velocity"][-1])
    write_case(tmp_path, FILE | {"time.duration": '"20 min"'})
    _, _, level, u = started(tmp_path)
    assert np.array_equal(level, last) and np.array_equal(u, flow)
    assert summary(tmp_path / "results" / "lake")["finished"] is True


# ------------------------------------------------------------------------------------------ refused


@pytest.mark.parametrize(
    "words, parts",
    [
        ({"attributes": {"units": "m"}},
         ("no variable with the standard_name sea_surface_height_above_mean_sea_level", "found surface (no standard_name)",
          "give a grid of levels, or fields.nc of an earlier run")),
        ({"attributes": LEVEL | {"units": "fathom"}}, ("unit 'fathom' of surface; allowed are m, cm, mm",)),
        ({"attributes": {"standard_name": LEVEL["standard_name"]}}, ("unit '' of surface; allowed are m, cm, mm",)),
        ({"attributes": LEVEL | {"standard_name": "sea_surface_height_above_geoid"}},
         ("surface is a level above the geoid, but the case has [depth] datum = \"mean_sea_level\"", "the same datum")),
        ({"x": (-1e3, 15e3, 17)}, ("does not cover the basin in the east: grid x -1000 to 15000", "give a larger grid")),
        ({"times": []}, ("surface has no value in the basin at its last time",)),
        ({"x": (6.0, 8.0, 9), "y": (54.0, 56.0, 9), "names": ("lon", "lat")},
         ("no one-dimensional coordinates projection_x_coordinate (x)", "check whether the basin is on a plane or a sphere")),
    ],
)  # fmt: skip
def test_a_grid_that_cannot_be_used(words, parts, tmp_path):
    write_case(tmp_path, FILE)
    write_level(tmp_path / "start.nc", tilted, **words)
    refused_start(tmp_path, "[start] file = start.nc: ", *parts)


def refused_start(folder, *parts):
    """Refused by `check` before there is a mesh and with one, and by `run`; no result begins."""
    refused(folder, 2, *parts, verbs=["check"])
    assert call(folder, "mesh", "lake.toml").code == 0
    for verb in ("check", "run"):
        done = call(folder, verb, "lake.toml")
        assert done.code == 2, (verb, done)
        in_order(done.line, *parts)
    assert not (folder / "results" / "lake" / "fields.nc").exists()


def test_a_file_that_is_no_netcdf_or_cut_short(tmp_path):
    write_case(tmp_path, FILE)
    (tmp_path / "start.nc").write_text("level")
    refused_start(tmp_path, "[start] file = start.nc: not a netCDF file, or cut short (")
    write_depth(tmp_path / "start.nc")
    content = (tmp_path / "start.nc").read_bytes()
    (tmp_path / "start.nc").write_bytes(content[: len(content) // 2])
    done = call(tmp_path, "check", "lake.toml")
    assert done.code == 2
    in_order(done.line, "[start] file = start.nc: not a netCDF file, or cut short (")


def test_fields_of_another_mesh_or_without_currents(tmp_path):
    write_case(tmp_path, {"mesh.seed": "2"})
    assert call(tmp_path, "run", "lake.toml", "--quiet", "--results", "first").code == 0
    (tmp_path / "first" / "fields.nc").rename(tmp_path / "start.nc")
    write_case(tmp_path, FILE)
    assert call(tmp_path, "check", "lake.toml").code == 0  # only the mesh can tell
    done = call(tmp_path, "run", "lake.toml")
    assert done.code == 2
    in_order(done.line, "[start] file = start.nc: fields of another mesh (", "this one has 230)", "with [mesh] file")
    write_case(tmp_path, {"output.fields": '["level"]'})
    assert call(tmp_path, "run", "lake.toml", "--quiet", "--results", "second").code == 0
    (tmp_path / "second" / "fields.nc").rename(tmp_path / "start.nc")
    write_case(tmp_path, FILE)
    done = call(tmp_path, "check", "lake.toml")
    assert done.code == 2
    in_order(
        done.line, "[start] file = start.nc: no variable normal_velocity; needed are level and normal_velocity", "[output] fields"
    )


def test_a_level_below_the_bed(tmp_path):
    write_case(tmp_path, {"start.height": '"-30 m"'})
    done = call(tmp_path, "run", "lake.toml", "--quiet")
    assert done.code == 2
    in_order(
        done.line, "[start] kind = hump: level -29", "m where the resting water is 20 m deep (face ", " at x ", "raise the level"
    )  # fmt: skip
    done = call(tmp_path, "check", "lake.toml")  # the mesh is there now
    assert done.code == 2 and "[start] kind = hump: level -29" in done.line
